//! What can be wrong with a state that was asked for.

use super::Phase;

/// A state that water's equations don't cover. Every variant carries the value and the limit that it crossed.
#[derive(Clone, Copy, Debug, PartialEq, thiserror::Error)]
pub enum WaterError {
    /// Pressure outside the equation's range.
    #[error("the pressure of water, {value} Pa, is outside {minimum} Pa to {maximum} Pa")]
    Pressure {
        /// Pa
        value: f64,
        /// Pa
        minimum: f64,
        /// Pa
        maximum: f64,
    },
    /// Temperature outside the equation's range.
    #[error("the temperature of water, {value} K, is outside {minimum} K to {maximum} K")]
    Temperature {
        /// K
        value: f64,
        /// K
        minimum: f64,
        /// K
        maximum: f64,
    },
    /// Enthalpy that water can't have at this pressure.
    #[error(
        "the enthalpy of water, {value} J/kg, is outside {minimum} J/kg to {maximum} J/kg at {pressure} Pa"
    )]
    Enthalpy {
        /// J/kg
        value: f64,
        /// J/kg
        minimum: f64,
        /// J/kg
        maximum: f64,
        /// Pa
        pressure: f64,
    },
    /// Entropy that water can't have at this pressure.
    #[error(
        "the entropy of water, {value} J/(kg K), is outside {minimum} J/(kg K) to {maximum} J/(kg K) at {pressure} Pa"
    )]
    Entropy {
        /// J/(kg K)
        value: f64,
        /// J/(kg K)
        minimum: f64,
        /// J/(kg K)
        maximum: f64,
        /// Pa
        pressure: f64,
    },
    /// Quality that isn't a mass fraction.
    #[error("the quality of wet steam, {value}, is outside 0 to 1")]
    Quality {
        /// Mass fraction of vapour
        value: f64,
    },
    /// The phase can't exist here even as a metastable one: it would boil or condense of itself.
    #[error(
        "water has no {phase} at {pressure} Pa and {temperature} K: this is beyond its limit of stability"
    )]
    Unstable {
        /// The phase that was asked for
        phase: Phase,
        /// Pa
        pressure: f64,
        /// K
        temperature: f64,
    },
}

/// Refuses what is outside, NaN included.
pub(super) fn check_pressure(value: f64, minimum: f64, maximum: f64) -> Result<(), WaterError> {
    if (minimum..=maximum).contains(&value) {
        Ok(())
    } else {
        Err(WaterError::Pressure { value, minimum, maximum })
    }
}

/// Refuses what is outside, NaN included.
pub(super) fn check_temperature(value: f64, minimum: f64, maximum: f64) -> Result<(), WaterError> {
    if (minimum..=maximum).contains(&value) {
        Ok(())
    } else {
        Err(WaterError::Temperature { value, minimum, maximum })
    }
}
