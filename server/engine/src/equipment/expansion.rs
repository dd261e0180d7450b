//! The laws of one section of an expansion, between two places where steam enters or leaves a turbine.
//!
//! A section starts in the state of a stream (what passes an extraction has the state of what is extracted) or, after
//! an admission, in the adiabatic mix of what comes from the section before and what is admitted, at the admission's
//! pressure.

use meterwright_thermo::Scalar;

use crate::equation::{Equation, EquationError, Held, StreamFluid};

/// Where a section starts.
pub(super) enum Start {
    /// In the state of a stream: local variables p, T, h.
    Stream,
    /// In a mix: local variables p, h of what comes from the section before, h of what is admitted.
    Mix,
}

/// A section. Its local variables are the three of its start, and then the mass flows whose signed sum passes through
/// it, the last one being what is admitted at its start.
pub(super) struct Section {
    /// Fluid of the stream at its start.
    pub(super) fluid: StreamFluid,
    /// Where it starts.
    pub(super) start: Start,
    /// Signs of the mass flows: + for what enters the turbine.
    pub(super) signs: Vec<f64>,
}

impl Section {
    fn mass_flow<S: Scalar>(&self, x: &[S]) -> S {
        let flows = x[3..].iter().zip(&self.signs);
        flows.fold(S::constant(0.0), |sum, (flow, sign)| sum + *flow * *sign)
    }

    /// Enthalpy of the mix at its start, from the first law: `m h = (m - admitted) h_before + admitted h_admitted`.
    fn mixed_enthalpy<S: Scalar>(&self, x: &[S]) -> Result<S, EquationError> {
        let through = self.mass_flow(x);
        let admitted = x[x.len() - 1];
        if through.value() == 0.0 {
            return Err(EquationError::Undefined("nothing flows through the section after the admission"));
        }
        Ok(x[1] + (x[2] - x[1]) * (admitted / through))
    }

    /// Enthalpy and entropy at its start.
    fn enthalpy_and_entropy<S: Scalar>(&self, x: &[S], held: Held<'_>) -> Result<(S, S), EquationError> {
        match self.start {
            Start::Stream => Ok((x[2], self.fluid.entropy(held, x[0], x[1], x[2])?)),
            Start::Mix => {
                let enthalpy = self.mixed_enthalpy(x)?;
                Ok((enthalpy, self.fluid.entropy_at_enthalpy(x[0], enthalpy)?))
            }
        }
    }

    fn volume<S: Scalar>(&self, x: &[S], held: Held<'_>) -> Result<S, EquationError> {
        match self.start {
            Start::Stream => self.fluid.volume(held, x[0], x[1], x[2]),
            Start::Mix => self.fluid.volume_at_enthalpy(x[0], self.mixed_enthalpy(x)?),
        }
    }
}

/// Isentropic efficiency of an expansion: the enthalpy drop over that at constant entropy,
/// `efficiency (h1 - h(p2, s1)) = h1 - h2` over (efficiency, p2, h2, section), static states
/// (Moran and Shapiro, Fundamentals of Engineering Thermodynamics, chapter 6; from memory).
pub(super) struct ExpansionEfficiency(pub(super) Section);

impl Equation for ExpansionEfficiency {
    fn residual<S: Scalar>(&self, x: &[S], held: Held<'_>) -> Result<S, EquationError> {
        let (enthalpy, entropy) = self.0.enthalpy_and_entropy(&x[3..], held)?;
        let isentropic = self.0.fluid.enthalpy_at_entropy(x[1], entropy)?;
        Ok(x[0] * (enthalpy - isentropic) - (enthalpy - x[2]))
    }
}

/// Stodola's cone law: `m = K sqrt(p1 / v1 (1 - (p2 / p1)^2))` over (K, p2, section), K in m2 being the flow
/// coefficient (A. Stodola, Steam and Gas Turbines, 1927; in this form Cooke, Journal of Engineering for Gas Turbines
/// and Power 107, 1985; from memory).
pub(super) struct ConeLaw(pub(super) Section);

impl Equation for ConeLaw {
    fn residual<S: Scalar>(&self, x: &[S], held: Held<'_>) -> Result<S, EquationError> {
        let section = &x[2..];
        let (start, end) = (section[0], x[1]);
        if end.value() >= start.value() {
            return Err(EquationError::Undefined("the pressure doesn't fall along the turbine section"));
        }
        let ratio = end / start;
        let flux = (start / self.0.volume(section, held)? * (ratio * ratio * -1.0 + 1.0)).sqrt();
        Ok(x[0] * flux - self.0.mass_flow(section))
    }
}
