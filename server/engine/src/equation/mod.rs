//! What a row of the problem is: a residual over a few local variables, written once over a [`Scalar`] and
//! differentiated exactly by local dual numbers.

mod balance;
mod fluid;
mod law;

pub use balance::{EnergyBalance, GRAVITY, Linear, Paired, StreamTerm};
pub use fluid::{
    AtSaturation, EntropyOf, Form, Held, Makes, PropertyRow, QualityOf, SaturationOf, StagnationPressure,
    StagnationTemperature, StreamFluid, VolumeOf, saturation_temperature,
};
pub use law::{Difference, Product, Quotient};

use meterwright_thermo::liquid::LiquidError;
use meterwright_thermo::water::WaterError;
use meterwright_thermo::{Dual, Scalar};

/// Why a residual has no value at a state.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum EquationError {
    /// A property formula was asked outside its range.
    #[error(transparent)]
    Property(#[from] WaterError),
    /// A liquid's formula was asked outside its range.
    #[error(transparent)]
    Liquid(#[from] LiquidError),
    /// The law has no value here, for instance a logarithmic mean of differences of opposite sign.
    #[error("{0}")]
    Undefined(&'static str),
    /// A user's formula has no value here.
    #[error("{0}")]
    Formula(String),
}

/// An equation `residual = 0` over a few variables. Implement this; the rest of the engine sees [`Row`].
pub trait Equation: Send + Sync {
    /// The residual at the local variables `x`, with the fluid formulas that are `held` during a solve.
    ///
    /// # Errors
    /// [`EquationError`] where the equation has no value.
    fn residual<S: Scalar>(&self, x: &[S], held: Held<'_>) -> Result<S, EquationError>;

    /// What it takes to evaluate the equation, where that is less than this trait offers.
    fn shape(&self) -> Shape {
        Shape::General
    }
}

/// The shapes that make up most of a plant's rows. A solve evaluates them from plain arrays.
#[derive(Clone, Debug, PartialEq)]
pub enum Shape {
    /// A sum: differentiated once and for all.
    Linear(Linear),
    /// A sum of products of two.
    Paired(Paired),
    /// The property row of a stream.
    Property(StreamFluid),
    /// Anything else.
    General,
}

/// The object-safe face of an [`Equation`].
trait Differentiable: Send + Sync {
    fn value(&self, x: &[f64], held: Held<'_>) -> Result<f64, EquationError>;
    fn linearise(&self, x: &[f64], held: Held<'_>, gradient: &mut [f64]) -> Result<f64, EquationError>;
}

impl<E: Equation> Differentiable for E {
    fn value(&self, x: &[f64], held: Held<'_>) -> Result<f64, EquationError> {
        self.residual(x, held)
    }

    fn linearise(&self, x: &[f64], held: Held<'_>, gradient: &mut [f64]) -> Result<f64, EquationError> {
        match x.len() {
            0..=4 => whole::<E, 4>(self, x, held, gradient),
            5..=6 => whole::<E, 6>(self, x, held, gradient),
            7..=8 => whole::<E, 8>(self, x, held, gradient),
            9..=12 => whole::<E, 12>(self, x, held, gradient),
            13..=16 => whole::<E, 16>(self, x, held, gradient),
            _ => in_strides(self, x, held, gradient),
        }
    }
}

/// Derivatives by all of at most `N` local variables at once.
fn whole<E: Equation, const N: usize>(
    equation: &E,
    x: &[f64],
    held: Held<'_>,
    gradient: &mut [f64],
) -> Result<f64, EquationError> {
    let seeded: [Dual<N>; N] =
        std::array::from_fn(|index| Dual::variable(x.get(index).copied().unwrap_or(0.0), index));
    let residual = equation.residual(&seeded[..x.len()], held)?;
    gradient.copy_from_slice(&residual.gradient[..x.len()]);
    Ok(residual.re)
}

/// Derivatives by many local variables, eight at a time.
fn in_strides<E: Equation>(
    equation: &E,
    x: &[f64],
    held: Held<'_>,
    gradient: &mut [f64],
) -> Result<f64, EquationError> {
    const STRIDE: usize = 8;
    let mut value = 0.0;
    let mut seeded: Vec<Dual<STRIDE>> = x.iter().map(|value| Dual::constant(*value)).collect();
    for (number, slopes) in gradient.chunks_mut(STRIDE).enumerate() {
        let start = number * STRIDE;
        for (index, (slot, value)) in seeded.iter_mut().zip(x).enumerate() {
            *slot = Dual::variable(*value, index.wrapping_sub(start));
        }
        let residual = equation.residual(&seeded, held)?;
        value = residual.re;
        slopes.copy_from_slice(&residual.gradient[..slopes.len()]);
    }
    Ok(value)
}

/// What part a row has in the problem.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum RowRole {
    /// A balance, property or law that constrains the state.
    Law,
    /// It only defines the value of its first variable, which nothing reads or gives. Where it has no value, that
    /// variable can't be known and nothing else is touched.
    Definition,
}

/// One row of the problem.
pub struct Row {
    name: String,
    role: RowRole,
    variables: Vec<u32>,
    shape: Shape,
    equation: Box<dyn Differentiable>,
}

impl Row {
    /// A row from its equation and the problem's variables that stand for the equation's local ones.
    pub fn new(name: String, role: RowRole, variables: Vec<u32>, equation: impl Equation + 'static) -> Self {
        let shape = equation.shape();
        Self { name, role, variables, shape, equation: Box::new(equation) }
    }

    /// What it is called in messages, such as `hp_turbine: energy balance`.
    pub fn name(&self) -> &str {
        &self.name
    }

    /// Its part in the problem.
    pub fn role(&self) -> RowRole {
        self.role
    }

    /// Makes a definition a law, or a law a definition.
    pub(crate) fn set_role(&mut self, role: RowRole) {
        self.role = role;
    }

    /// The problem's variables that stand for the equation's local ones, in their order.
    pub fn variables(&self) -> &[u32] {
        &self.variables
    }

    /// What it takes to evaluate the row.
    pub fn shape(&self) -> &Shape {
        &self.shape
    }

    /// Residual at the local variables `x`.
    ///
    /// # Errors
    /// [`EquationError`] where the equation has no value.
    pub fn value(&self, x: &[f64], held: Held<'_>) -> Result<f64, EquationError> {
        self.equation.value(x, held)
    }

    /// Residual at the local variables `x`, and its derivatives by them.
    ///
    /// # Errors
    /// [`EquationError`] where the equation has no value.
    pub fn linearise(&self, x: &[f64], held: Held<'_>, gradient: &mut [f64]) -> Result<f64, EquationError> {
        self.equation.linearise(x, held, gradient)
    }
}
