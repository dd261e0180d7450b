//! Quantities with their first derivatives, in the pairs of variables that the balances use.

/// One quantity at pressure and temperature with its first derivatives.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Partial {
    /// The value.
    pub value: f64,
    /// Derivative by pressure at constant temperature, per Pa.
    pub by_pressure: f64,
    /// Derivative by temperature at constant pressure, per K.
    pub by_temperature: f64,
}

/// A quantity of pressure and enthalpy with its first derivatives.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PartialByEnthalpy {
    /// The value.
    pub value: f64,
    /// Derivative by pressure at constant enthalpy, per Pa.
    pub by_pressure: f64,
    /// Derivative by enthalpy at constant pressure, per J/kg.
    pub by_enthalpy: f64,
}

/// A quantity of pressure and entropy with its first derivatives.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PartialByEntropy {
    /// The value.
    pub value: f64,
    /// Derivative by pressure at constant entropy, per Pa.
    pub by_pressure: f64,
    /// Derivative by entropy at constant pressure, per J/(kg K).
    pub by_entropy: f64,
}

/// Everything about a single phase at pressure and temperature.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Properties {
    /// Specific volume, m3/kg.
    pub volume: Partial,
    /// Specific enthalpy, J/kg. Its derivative by temperature is the isobaric heat capacity.
    pub enthalpy: Partial,
    /// Specific entropy, J/(kg K).
    pub entropy: Partial,
}
