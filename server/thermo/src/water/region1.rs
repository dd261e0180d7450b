//! Region 1, liquid water: equation (7) of IAPWS R7-97(2012), the Gibbs free energy over (p,T).

use super::gibbs::{Gibbs, GibbsByTau};
use super::polynomial::{Powers, Terms};
use super::region1_table::Equation7;
use super::{Partial, Properties};

const REDUCING_PRESSURE: f64 = 16.53e6;
const REDUCING_TEMPERATURE: f64 = 1386.0;

/// Exponents I reach from 0 to 32, J from -41 to 17.
const I_COUNT: usize = 33;
const J_COUNT: usize = 59;
const J_ZERO: usize = 41;

/// The arguments `a = 7.1 - pi` and `b = tau - 1.222` with what turns derivatives by them into logarithmic ones by
/// pi and tau.
struct Arguments {
    a: f64,
    b: f64,
    pi_per_a: f64,
    tau_per_b: f64,
}

impl Arguments {
    #[inline]
    fn new(pressure: f64, temperature: f64) -> Self {
        let pi = pressure / REDUCING_PRESSURE;
        let tau = REDUCING_TEMPERATURE / temperature;
        let (a, b) = (7.1 - pi, tau - 1.222);
        Self { a, b, pi_per_a: -pi / a, tau_per_b: tau / b }
    }
}

#[inline]
pub(super) fn properties(pressure: f64, temperature: f64) -> Properties {
    let Arguments { a, b, pi_per_a, tau_per_b } = Arguments::new(pressure, temperature);
    let sums = Equation7::sums(&Powers::<I_COUNT, 0>::new(a), &Powers::<J_COUNT, J_ZERO>::new(b));
    Gibbs {
        value: sums.value,
        pi: pi_per_a * sums.a,
        tau: tau_per_b * sums.b,
        pi_pi: pi_per_a * pi_per_a * sums.aa,
        pi_tau: pi_per_a * tau_per_b * sums.ab,
        tau_tau: tau_per_b * tau_per_b * sums.bb,
    }
    .properties(pressure, temperature)
}

#[inline]
pub(super) fn enthalpy(pressure: f64, temperature: f64) -> Partial {
    let Arguments { a, b, pi_per_a, tau_per_b } = Arguments::new(pressure, temperature);
    let sums = Equation7::sums(&Powers::<I_COUNT, 0>::new(a), &Powers::<J_COUNT, J_ZERO>::new(b));
    GibbsByTau {
        tau: tau_per_b * sums.b,
        pi_tau: pi_per_a * tau_per_b * sums.ab,
        tau_tau: tau_per_b * tau_per_b * sums.bb,
    }
    .enthalpy(pressure, temperature)
}
