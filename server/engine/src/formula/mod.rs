//! Users' formulas over quantities: read, checked for their dimensions, evaluated with exact derivatives.
//!
//! A formula is arithmetic (`+ - * / ^`, parentheses, numbers) over quantities by their names, amounts with their unit
//! in single quotes (`'25 degC'`), and the functions of one table ([`function`]). Everything is in SI, temperatures in
//! K. `^` binds tighter than a minus before it, and to the right: `-2^2` is -4 and `2^3^2` is 512.

mod dimension;
mod evaluate;
mod function;
mod parser;
#[cfg(test)]
mod tests;

use self::function::Function;
use crate::quantity::Dimension;

/// A formula that was read, as the steps of a calculator with a stack.
#[derive(Clone, Debug)]
pub struct Formula {
    steps: Vec<Step>,
    references: Vec<String>,
}

/// What is wrong with a formula, and where.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("{message}")]
pub struct FormulaError {
    /// First byte at fault.
    pub start: usize,
    /// One past the last byte at fault.
    pub end: usize,
    /// What is wrong.
    pub message: String,
}

/// One step, with the stretch of the text that it is the value of.
#[derive(Clone, Debug)]
struct Step {
    operation: Operation,
    start: usize,
    end: usize,
}

#[derive(Clone, Copy, Debug)]
enum Operation {
    /// Puts a value in SI on the stack.
    Constant {
        value: f64,
        dimension: Dimension,
    },
    /// Puts the input of this number on the stack.
    Input(usize),
    /// These replace the values on top of the stack by one.
    Negate,
    Add,
    Subtract,
    Multiply,
    Divide,
    Power(f64),
    Call(&'static Function),
}

impl Formula {
    /// Reads a formula. `is_known` says whether something has this name, without what follows a dot: in `a-b` it
    /// decides between the name and the difference. What nothing has the name of is kept among the references.
    ///
    /// # Errors
    /// [`FormulaError`] at the first thing that can't be read.
    pub fn parse(text: &str, is_known: &dyn Fn(&str) -> bool) -> Result<Self, FormulaError> {
        parser::parse(text, is_known)
    }

    /// Names of the quantities that it speaks of, each once, in the order of the text: the order of the inputs.
    pub fn references(&self) -> &[String] {
        &self.references
    }
}

impl Step {
    fn error(&self, message: impl Into<String>) -> FormulaError {
        FormulaError { start: self.start, end: self.end, message: message.into() }
    }
}
