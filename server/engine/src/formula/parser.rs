//! Text to steps, by operator precedence (V. R. Pratt, "Top down operator precedence", POPL 1973).

use super::function::{self, Function};
use super::{Formula, FormulaError, Operation, Step};
use crate::fault::suggestion;
use crate::quantity::{Amount, Dimension, Reference, number_length};

const LONGEST: usize = 4096;
const DEEPEST: usize = 64;
/// Bytes of the longest name that is asked for: a long chain of hyphens must not be asked for at every one of them.
const LONGEST_NAME: usize = 400;

/// How tightly operators bind.
const SUM: u8 = 1;
const PRODUCT: u8 = 2;
const SIGN: u8 = 3;
const POWER: u8 = 4;

pub(super) fn parse(text: &str, is_known: &dyn Fn(&str) -> bool) -> Result<Formula, FormulaError> {
    if text.len() > LONGEST {
        let message = format!("a formula has at most {LONGEST} characters");
        return Err(FormulaError { start: 0, end: text.len(), message });
    }
    let mut parser =
        Parser { text, is_known, at: 0, end: 0, depth: 0, steps: Vec::new(), references: Vec::new() };
    parser.expression(SUM)?;
    match parser.peek() {
        None => Ok(Formula { steps: parser.steps, references: parser.references }),
        Some(')') => Err(parser.unexpected("there is no `(` for this `)`")),
        Some(',') => Err(parser.unexpected("unexpected `,`: write numbers with a decimal point")),
        Some(_) => Err(parser.unexpected("an operator such as `+` is missing here")),
    }
}

struct Parser<'a> {
    text: &'a str,
    is_known: &'a dyn Fn(&str) -> bool,
    /// Where the next token is looked for.
    at: usize,
    /// Where the last token ended.
    end: usize,
    depth: usize,
    steps: Vec<Step>,
    references: Vec<String>,
}

impl Parser<'_> {
    /// Reads operands joined by operators that bind at least as tightly as `weakest`.
    fn expression(&mut self, weakest: u8) -> Result<(), FormulaError> {
        self.depth += 1;
        if self.depth > DEEPEST {
            return Err(self.unexpected(format!("the formula is nested more than {DEEPEST} deep")));
        }
        self.peek();
        let start = self.at;
        self.operand()?;
        while let Some(operator) = self.peek() {
            let (binds, operation) = match operator {
                '+' => (SUM, Operation::Add),
                '-' => (SUM, Operation::Subtract),
                '*' => (PRODUCT, Operation::Multiply),
                '/' => (PRODUCT, Operation::Divide),
                '^' => (POWER, Operation::Power(1.0)),
                _ => break,
            };
            if binds < weakest {
                break;
            }
            self.advance(1);
            if binds == POWER {
                let exponent = self.exponent()?;
                self.push(Operation::Power(exponent), start);
            } else {
                self.expression(binds + 1)?;
                self.push(operation, start);
            }
        }
        self.depth -= 1;
        Ok(())
    }

    /// An exponent is a plain number, though it may be written as a calculation.
    fn exponent(&mut self) -> Result<f64, FormulaError> {
        let first = self.steps.len();
        self.peek();
        let start = self.at;
        self.expression(POWER)?;
        let steps = self.steps.split_off(first);
        let error = |message: &str| FormulaError { start, end: self.end, message: message.to_owned() };
        if steps.iter().any(|step| matches!(step.operation, Operation::Input(_))) {
            return Err(error("an exponent must be a number, without quantities"));
        }
        let exponent = Formula { steps, references: Vec::new() };
        if !exponent.dimension(&[])?.is_dimensionless() {
            return Err(error("an exponent must be a number without a unit"));
        }
        exponent.evaluate::<f64>(&[])
    }

    fn operand(&mut self) -> Result<(), FormulaError> {
        let start = self.at;
        match self.peek() {
            Some('-') => {
                self.advance(1);
                self.expression(SIGN)?;
                self.push(Operation::Negate, start);
                Ok(())
            }
            Some('(') => {
                self.advance(1);
                self.expression(SUM)?;
                self.close(start)
            }
            Some('\'') => self.amount(),
            Some(c) if c.is_alphanumeric() || c == '_' || c == '.' => self.name_or_number(),
            Some(c) => Err(self.unexpected(format!("expected a quantity, a number or `(`, not `{c}`"))),
            None => Err(self.unexpected("the formula ends where a quantity, a number or `(` belongs")),
        }
    }

    /// `'25 degC'`.
    fn amount(&mut self) -> Result<(), FormulaError> {
        let start = self.at;
        let inside = &self.text[start + 1..];
        let Some(length) = inside.find('\'') else {
            return Err(self.unexpected("the closing `'` of this amount is missing"));
        };
        self.advance(length + 2);
        let error = |message| FormulaError { start, end: start + length + 2, message };
        let amount = Amount::parse(&inside[..length]).map_err(|fault| error(fault.to_string()))?;
        if amount.unit.reference() != Reference::Absolute {
            return Err(error(format!(
                "`{}` counts from the surroundings: write an absolute pressure",
                amount.unit
            )));
        }
        self.push(Operation::Constant { value: amount.si(), dimension: amount.unit.dimension() }, start);
        Ok(())
    }

    /// Tag names may begin with a digit, so a name that is known comes before a number.
    fn name_or_number(&mut self) -> Result<(), FormulaError> {
        let start = self.at;
        let rest = &self.text[start..];
        let run = &rest[..length_of(rest, |c| is_word_character(c) || c == '-')];
        match self.longest_known(run) {
            Some(owner) => self.reference(owner),
            None if rest.starts_with(|c: char| c.is_ascii_digit() || c == '.') => self.number(),
            None => {
                let word = &run[..length_of(run, is_word_character)];
                if rest[word.len()..].trim_start().starts_with('(') {
                    return self.call(word);
                }
                self.reference(run.trim_end_matches('-').len())
            }
        }
    }

    /// Length of the longest known name at the start of a run of words joined by hyphens. A word before a parenthesis
    /// is a function, whatever else has its name.
    fn longest_known(&self, run: &str) -> Option<usize> {
        let followed = self.text[self.at + run.len()..].trim_start().starts_with('(');
        let hyphens = run.match_indices('-').map(|(at, _)| at);
        let ends = hyphens.chain((!followed).then_some(run.len())).take_while(|end| *end <= LONGEST_NAME);
        let ends: Vec<usize> = ends.collect();
        ends.into_iter().rev().find(|end| (self.is_known)(&run[..*end]))
    }

    /// A name whose first part, of `owner` bytes, may hold hyphens; those after a dot can't.
    fn reference(&mut self, owner: usize) -> Result<(), FormulaError> {
        let start = self.at;
        let mut length = owner;
        loop {
            let rest = &self.text[start + length..];
            let Some(part) = rest.strip_prefix('.') else { break };
            match length_of(part, is_word_character) {
                0 => {
                    self.at = start + length;
                    return Err(self.unexpected("the name of a quantity is missing after this dot"));
                }
                part => length += 1 + part,
            }
        }
        let name = &self.text[start..start + length];
        self.advance(length);
        let index = self.references.iter().position(|known| known == name).unwrap_or_else(|| {
            self.references.push(name.to_owned());
            self.references.len() - 1
        });
        self.push(Operation::Input(index), start);
        Ok(())
    }

    fn number(&mut self) -> Result<(), FormulaError> {
        let start = self.at;
        let rest = &self.text[start..];
        let length = number_length(rest);
        let whole = length + length_of(&rest[length..], |c| is_word_character(c) || c == '.');
        let error = |message: String| FormulaError { start, end: start + whole.max(1), message };
        if whole > length || length == 0 {
            return Err(error(format!("`{}` is neither a number nor a known name", &rest[..whole.max(1)])));
        }
        match rest[..length].parse::<f64>() {
            Ok(value) if value.is_finite() => {
                self.advance(length);
                self.push(Operation::Constant { value, dimension: Dimension::RATIO }, start);
                Ok(())
            }
            _ => Err(error("the number is too large".to_owned())),
        }
    }

    fn call(&mut self, name: &str) -> Result<(), FormulaError> {
        let start = self.at;
        let Some(function) = function::find(name) else {
            let near = suggestion(name, function::names());
            let message = format!("unknown function `{name}`{near}");
            return Err(FormulaError { start, end: start + name.len(), message });
        };
        self.advance(name.len());
        self.peek();
        self.advance(1);
        let mut given = 0;
        if self.peek() != Some(')') {
            self.expression(SUM)?;
            given = 1;
            while self.peek() == Some(',') {
                self.advance(1);
                self.expression(SUM)?;
                given += 1;
            }
        }
        self.close(start)?;
        if given != function.arguments() {
            return Err(wrong_count(function, given, start, self.end));
        }
        self.push(Operation::Call(function), start);
        Ok(())
    }

    /// The `)` of what began at `start`.
    fn close(&mut self, start: usize) -> Result<(), FormulaError> {
        if self.peek() == Some(')') {
            self.advance(1);
            return Ok(());
        }
        let message = "a `)` is missing".to_owned();
        Err(FormulaError { start, end: self.end.max(start + 1), message })
    }

    fn push(&mut self, operation: Operation, start: usize) {
        self.steps.push(Step { operation, start, end: self.end });
    }

    /// The next character that is not space.
    fn peek(&mut self) -> Option<char> {
        let rest = &self.text[self.at..];
        let trimmed = rest.trim_start();
        self.at += rest.len() - trimmed.len();
        trimmed.chars().next()
    }

    fn advance(&mut self, bytes: usize) {
        self.at += bytes;
        self.end = self.at;
    }

    /// An error at the next character.
    fn unexpected(&mut self, message: impl Into<String>) -> FormulaError {
        let length = self.peek().map_or(0, char::len_utf8);
        FormulaError { start: self.at, end: self.at + length, message: message.into() }
    }
}

fn wrong_count(function: &Function, given: usize, start: usize, end: usize) -> FormulaError {
    let wanted = function.arguments();
    let plural = if wanted == 1 { "" } else { "s" };
    let message = format!("`{}` takes {wanted} argument{plural}, not {given}", function.name);
    FormulaError { start, end, message }
}

fn is_word_character(c: char) -> bool {
    c.is_alphanumeric() || c == '_'
}

/// Bytes at the start of a text whose characters all fit.
fn length_of(text: &str, fits: impl Fn(char) -> bool) -> usize {
    text.find(|c: char| !fits(c)).unwrap_or(text.len())
}
