//! Region 5, hot steam: equations (32) to (34) of IAPWS R7-97(2012), the Gibbs free energy over (p,T).

use super::gibbs::{Gibbs, GibbsByTau};
use super::polynomial::{Powers, Terms};
use super::region5_table::{Equation33, Equation34};
use super::{Partial, Properties};

const REDUCING_PRESSURE: f64 = 1e6;
const REDUCING_TEMPERATURE: f64 = 1000.0;

/// Exponents of tau reach from -3 in the ideal-gas part to 9 in the residual part, those of pi from 0 to 3.
const I_COUNT: usize = 4;
const J_COUNT: usize = 13;
const J_ZERO: usize = 3;

#[inline]
pub(super) fn properties(pressure: f64, temperature: f64) -> Properties {
    let pi = pressure / REDUCING_PRESSURE;
    let powers_of_tau = Powers::<J_COUNT, J_ZERO>::new(REDUCING_TEMPERATURE / temperature);
    let ideal = Equation33::sums(&Powers::<1, 0>::new(1.0), &powers_of_tau);
    let residual = Equation34::sums(&Powers::<I_COUNT, 0>::new(pi), &powers_of_tau);
    Gibbs {
        value: pi.ln() + ideal.value + residual.value,
        pi: 1.0 + residual.a,
        tau: ideal.b + residual.b,
        pi_pi: -1.0 + residual.aa,
        pi_tau: residual.ab,
        tau_tau: ideal.bb + residual.bb,
    }
    .properties(pressure, temperature)
}

#[inline]
pub(super) fn enthalpy(pressure: f64, temperature: f64) -> Partial {
    let pi = pressure / REDUCING_PRESSURE;
    let powers_of_tau = Powers::<J_COUNT, J_ZERO>::new(REDUCING_TEMPERATURE / temperature);
    let ideal = Equation33::sums(&Powers::<1, 0>::new(1.0), &powers_of_tau);
    let residual = Equation34::sums(&Powers::<I_COUNT, 0>::new(pi), &powers_of_tau);
    GibbsByTau { tau: ideal.b + residual.b, pi_tau: residual.ab, tau_tau: ideal.bb + residual.bb }
        .enthalpy(pressure, temperature)
}
