//! How a change of state compares with one at constant entropy: what pumps, nozzles and diffusers share.

use meterwright_thermo::Scalar;

use super::System;
use crate::equation::{Equation, EquationError, Held, StreamFluid};

/// Isentropic efficiency of a compression: the least enthalpy rise to the reached pressure over the actual rise,
/// `efficiency (h2 - h1) = h(p2, s1) - h1` over (efficiency, p1, T1, h1, p2, h2), static states
/// (Moran and Shapiro, Fundamentals of Engineering Thermodynamics, chapter 6; from memory).
pub(super) struct Compression(pub(super) StreamFluid);

impl Equation for Compression {
    fn residual<S: Scalar>(&self, x: &[S], held: Held<'_>) -> Result<S, EquationError> {
        Ok(x[0] * (x[5] - x[3]) - (isentropic_enthalpy(self.0, &x[1..4], x[4], held)? - x[3]))
    }
}

impl Compression {
    /// The law from inlet to outlet, and the variables behind the efficiency.
    pub(super) fn between(inlet: usize, outlet: usize, system: &mut System) -> (Self, [u32; 5]) {
        let [p1, t1, h1] = system.state(inlet);
        let of = [p1, t1, h1, system.pressure(outlet), system.enthalpy(outlet)];
        (Self(system.streams[inlet].fluid), of)
    }
}

/// Enthalpy at a pressure and the entropy of the state (p, T, h).
pub(super) fn isentropic_enthalpy<S: Scalar>(
    fluid: StreamFluid,
    start: &[S],
    pressure: S,
    held: Held<'_>,
) -> Result<S, EquationError> {
    let entropy = fluid.entropy(held, start[0], start[1], start[2])?;
    fluid.enthalpy_at_entropy(pressure, entropy)
}
