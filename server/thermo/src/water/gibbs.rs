//! From the dimensionless Gibbs free energy of regions 1, 2 and 5 to the properties and their derivatives.

use super::{GAS_CONSTANT, Partial, Properties};

/// `gamma(pi, tau)` and its derivatives in logarithmic form: `pi` stands for `pi dgamma/dpi`, `pi_tau` for
/// `pi tau d2gamma/(dpi dtau)`, `tau_tau` for `tau^2 d2gamma/dtau2` and so on.
#[derive(Clone, Copy)]
pub(super) struct Gibbs {
    pub(super) value: f64,
    pub(super) pi: f64,
    pub(super) tau: f64,
    pub(super) pi_pi: f64,
    pub(super) pi_tau: f64,
    pub(super) tau_tau: f64,
}

/// The derivatives of `gamma` that an enthalpy needs, as in [`Gibbs`].
#[derive(Clone, Copy)]
pub(super) struct GibbsByTau {
    pub(super) tau: f64,
    pub(super) pi_tau: f64,
    pub(super) tau_tau: f64,
}

impl Gibbs {
    /// Tables 3 and 12 of IAPWS R7-97(2012): `v = R T/p (pi gamma_pi)`, `h = R T (tau gamma_tau)`,
    /// `s = R (tau gamma_tau - gamma)`, each differentiated once more.
    #[inline]
    pub(super) fn properties(self, pressure: f64, temperature: f64) -> Properties {
        let r = GAS_CONSTANT;
        let rt_per_p = r * temperature / pressure;
        let volume_by_temperature = r / pressure * (self.pi - self.pi_tau);
        let enthalpy = GibbsByTau { tau: self.tau, pi_tau: self.pi_tau, tau_tau: self.tau_tau }
            .enthalpy(pressure, temperature);
        Properties {
            volume: Partial {
                value: rt_per_p * self.pi,
                by_pressure: rt_per_p / pressure * self.pi_pi,
                by_temperature: volume_by_temperature,
            },
            enthalpy,
            entropy: Partial {
                value: r * (self.tau - self.value),
                by_pressure: -volume_by_temperature,
                by_temperature: enthalpy.by_temperature / temperature,
            },
        }
    }
}

impl GibbsByTau {
    #[inline]
    pub(super) fn enthalpy(self, pressure: f64, temperature: f64) -> Partial {
        let r = GAS_CONSTANT;
        Partial {
            value: r * temperature * self.tau,
            by_pressure: r * temperature / pressure * self.pi_tau,
            by_temperature: -r * self.tau_tau,
        }
    }
}
