//! Region 2, steam: equations (15) to (17) of IAPWS R7-97(2012), the Gibbs free energy over (p,T).

use super::gibbs::{Gibbs, GibbsByTau};
use super::polynomial::{Powers, Terms};
use super::region2_table::{Equation16, Equation17};
use super::{Partial, Properties};

const REDUCING_PRESSURE: f64 = 1e6;
const REDUCING_TEMPERATURE: f64 = 540.0;

/// Exponents of the ideal-gas part reach from -5 to 3.
const IDEAL_COUNT: usize = 9;
const IDEAL_ZERO: usize = 5;

/// Exponents I of the residual part reach from 0 to 24, J from 0 to 58.
const I_COUNT: usize = 25;
const J_COUNT: usize = 59;

/// The residual part is a polynomial in `b = tau - 0.5`, zero at 1080 K. Held off zero by a millionth of a rounding
/// error of tau's own, so that the logarithmic derivatives can be divided by it.
#[inline]
fn residual_argument(tau: f64) -> f64 {
    let b = tau - 0.5;
    if b == 0.0 { 1e-22 } else { b }
}

#[inline]
pub(super) fn properties(pressure: f64, temperature: f64) -> Properties {
    let pi = pressure / REDUCING_PRESSURE;
    let tau = REDUCING_TEMPERATURE / temperature;
    let b = residual_argument(tau);
    let tau_per_b = tau / b;
    let ideal = Equation16::sums(&Powers::<1, 0>::new(1.0), &Powers::<IDEAL_COUNT, IDEAL_ZERO>::new(tau));
    let residual = Equation17::sums(&Powers::<I_COUNT, 0>::new(pi), &Powers::<J_COUNT, 0>::new(b));
    Gibbs {
        value: pi.ln() + ideal.value + residual.value,
        pi: 1.0 + residual.a,
        tau: ideal.b + tau_per_b * residual.b,
        pi_pi: -1.0 + residual.aa,
        pi_tau: tau_per_b * residual.ab,
        tau_tau: ideal.bb + tau_per_b * tau_per_b * residual.bb,
    }
    .properties(pressure, temperature)
}

#[inline]
pub(super) fn enthalpy(pressure: f64, temperature: f64) -> Partial {
    let pi = pressure / REDUCING_PRESSURE;
    let tau = REDUCING_TEMPERATURE / temperature;
    let b = residual_argument(tau);
    let tau_per_b = tau / b;
    let ideal = Equation16::sums(&Powers::<1, 0>::new(1.0), &Powers::<IDEAL_COUNT, IDEAL_ZERO>::new(tau));
    let residual = Equation17::sums(&Powers::<I_COUNT, 0>::new(pi), &Powers::<J_COUNT, 0>::new(b));
    GibbsByTau {
        tau: ideal.b + tau_per_b * residual.b,
        pi_tau: tau_per_b * residual.ab,
        tau_tau: ideal.bb + tau_per_b * tau_per_b * residual.bb,
    }
    .enthalpy(pressure, temperature)
}
