//! Mass and energy balances.

use meterwright_thermo::Scalar;

use super::{Equation, EquationError, Held, Shape};

/// Standard acceleration of gravity, m/s2 (ISO 80000-3).
pub const GRAVITY: f64 = 9.80665;

/// A linear equation: the sum of `coefficient * x` plus a constant is zero. Mass balances, equal pressures, shafts.
#[derive(Clone, Debug, PartialEq)]
pub struct Linear {
    /// One coefficient for each local variable.
    pub coefficients: Vec<f64>,
    /// The constant term.
    pub constant: f64,
}

impl Linear {
    /// A sum with the given coefficients and no constant.
    pub fn new(coefficients: Vec<f64>) -> Self {
        Self { coefficients, constant: 0.0 }
    }
}

impl Equation for Linear {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        let mut sum = S::constant(self.constant);
        for (value, coefficient) in x.iter().zip(&self.coefficients) {
            sum += *value * *coefficient;
        }
        Ok(sum)
    }

    fn shape(&self) -> Shape {
        Shape::Linear(self.clone())
    }
}

/// A sum of products of two and of single variables: `sum of sign * a (b + offset) + sum of coefficient * c = 0`, the local
/// variables being all `a` and `b` in turn, then all `c`. Energy balances, mostly.
#[derive(Clone, Debug, PartialEq)]
pub struct Paired {
    /// Sign and offset of each product.
    pub pairs: Vec<[f64; 2]>,
    /// Coefficient of each single variable.
    pub coefficients: Vec<f64>,
}

/// What one stream brings into an energy balance.
#[derive(Clone, Copy, Debug)]
pub struct StreamTerm {
    /// +1 where it enters, -1 where it leaves.
    pub sign: f64,
    /// Whether its velocity is a local variable, so that kinetic energy counts.
    pub kinetic: bool,
    /// Specific potential energy, J/kg; zero where no elevation is stated.
    pub potential: f64,
}

/// The steady-flow first law round a control volume:
/// `sum of sign * m (h + w^2/2 + g z) + sum of sign * heat or power = 0`
/// (for instance ISO 5389 or any textbook of engineering thermodynamics; signs as in the caller's terms).
///
/// Local variables: for each stream m, h and, where kinetic, w; then for each of `flows` its heat or power. Lost mass is a
/// stream like any other.
pub struct EnergyBalance {
    /// The streams.
    pub streams: Vec<StreamTerm>,
    /// Signs of the heats and powers, + where it enters.
    pub flows: Vec<f64>,
}

impl Equation for EnergyBalance {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        let mut sum = S::constant(0.0);
        let mut at = 0;
        for stream in &self.streams {
            let (mass_flow, mut energy) = (x[at], x[at + 1] + stream.potential);
            at += 2;
            if stream.kinetic {
                energy += x[at] * x[at] * 0.5;
                at += 1;
            }
            sum += mass_flow * energy * stream.sign;
        }
        for (flow, sign) in x[at..].iter().zip(&self.flows) {
            sum += *flow * *sign;
        }
        Ok(sum)
    }

    fn shape(&self) -> Shape {
        if self.streams.iter().any(|stream| stream.kinetic) {
            return Shape::General;
        }
        Shape::Paired(Paired {
            pairs: self.streams.iter().map(|stream| [stream.sign, stream.potential]).collect(),
            coefficients: self.flows.clone(),
        })
    }
}
