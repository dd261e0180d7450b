//! An incompressible liquid of constant specific heat: oils, glycols, brines.
//!
//! With density rho and specific heat c: v = 1/rho, h = c (T - T0) + (p - p0)/rho, s = c ln(T/T0). This is the
//! thermodynamics of a substance whose volume depends on nothing; dh = T ds + v dp holds exactly. Enthalpy and
//! entropy are zero at T0 = 273.15 K and p0 = 101325 Pa, near where those of liquid water are.

use crate::property::{Partial, PartialByEnthalpy, PartialByEntropy, Properties};

/// Temperature at which enthalpy and entropy are zero, K.
pub const REFERENCE_TEMPERATURE: f64 = 273.15;
/// Pressure at which the enthalpy is zero at the reference temperature, Pa.
pub const REFERENCE_PRESSURE: f64 = 101325.0;

/// What is wrong with a liquid or its state.
#[derive(Clone, Copy, Debug, PartialEq, thiserror::Error)]
pub enum LiquidError {
    /// A density that no substance has.
    #[error("the density of a liquid, {0} kg/m3, is not a positive number")]
    Density(f64),
    /// A specific heat that no substance has.
    #[error("the specific heat of a liquid, {0} J/(kg K), is not a positive number")]
    SpecificHeat(f64),
    /// A pressure that isn't a number.
    #[error("the pressure of a liquid, {0} Pa, is not a finite number")]
    Pressure(f64),
    /// A temperature at or below absolute zero, given or found.
    #[error("the temperature of a liquid, {0} K, is not a positive number")]
    Temperature(f64),
}

/// A liquid of constant density and specific heat.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Liquid {
    volume: f64,
    specific_heat: f64,
}

impl Liquid {
    /// A liquid with this density (kg/m3) and specific heat (J/(kg K)).
    ///
    /// # Errors
    /// Either that isn't a positive number.
    pub fn new(density: f64, specific_heat: f64) -> Result<Self, LiquidError> {
        if !is_positive(density) {
            Err(LiquidError::Density(density))
        } else if !is_positive(specific_heat) {
            Err(LiquidError::SpecificHeat(specific_heat))
        } else {
            Ok(Self { volume: 1.0 / density, specific_heat })
        }
    }

    /// Properties at a pressure (Pa) and temperature (K).
    ///
    /// # Errors
    /// A temperature that isn't positive, or a pressure that isn't a number.
    pub fn properties(&self, pressure: f64, temperature: f64) -> Result<Properties, LiquidError> {
        check(pressure, temperature)?;
        let c = self.specific_heat;
        Ok(Properties {
            volume: Partial { value: self.volume, by_pressure: 0.0, by_temperature: 0.0 },
            enthalpy: self.enthalpy(pressure, temperature),
            entropy: Partial {
                value: c * (temperature / REFERENCE_TEMPERATURE).ln(),
                by_pressure: 0.0,
                by_temperature: c / temperature,
            },
        })
    }

    /// Temperature (K) of a pressure (Pa) and enthalpy (J/kg).
    ///
    /// # Errors
    /// An enthalpy below that of absolute zero, or inputs that aren't numbers.
    pub fn temperature_ph(&self, pressure: f64, enthalpy: f64) -> Result<PartialByEnthalpy, LiquidError> {
        let heat = enthalpy - (pressure - REFERENCE_PRESSURE) * self.volume;
        let value = REFERENCE_TEMPERATURE + heat / self.specific_heat;
        check(pressure, value)?;
        Ok(PartialByEnthalpy {
            value,
            by_pressure: -self.volume / self.specific_heat,
            by_enthalpy: 1.0 / self.specific_heat,
        })
    }

    /// Enthalpy (J/kg) of a pressure (Pa) and entropy (J/(kg K)): dh = T ds + v dp.
    ///
    /// # Errors
    /// Inputs that aren't numbers, or an entropy beyond those of finite temperatures.
    pub fn enthalpy_ps(&self, pressure: f64, entropy: f64) -> Result<PartialByEntropy, LiquidError> {
        let temperature = REFERENCE_TEMPERATURE * (entropy / self.specific_heat).exp();
        check(pressure, temperature)?;
        Ok(PartialByEntropy {
            value: self.enthalpy(pressure, temperature).value,
            by_pressure: self.volume,
            by_entropy: temperature,
        })
    }

    fn enthalpy(&self, pressure: f64, temperature: f64) -> Partial {
        let c = self.specific_heat;
        Partial {
            value: c * (temperature - REFERENCE_TEMPERATURE) + (pressure - REFERENCE_PRESSURE) * self.volume,
            by_pressure: self.volume,
            by_temperature: c,
        }
    }
}

fn is_positive(value: f64) -> bool {
    value > 0.0 && value.is_finite()
}

fn check(pressure: f64, temperature: f64) -> Result<(), LiquidError> {
    if !pressure.is_finite() {
        Err(LiquidError::Pressure(pressure))
    } else if !is_positive(temperature) {
        Err(LiquidError::Temperature(temperature))
    } else {
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn oil() -> Liquid {
        Liquid::new(870.0, 1900.0).unwrap()
    }

    #[test]
    fn enthalpy_and_entropy_are_zero_at_the_reference() {
        let properties = oil().properties(REFERENCE_PRESSURE, REFERENCE_TEMPERATURE).unwrap();
        assert_eq!((properties.enthalpy.value, properties.entropy.value), (0.0, 0.0));
    }

    #[test]
    fn warming_and_pressing_take_what_first_year_physics_says() {
        let oil = oil();
        let cold = oil.properties(1e5, 300.0).unwrap();
        let warm = oil.properties(1e5, 310.0).unwrap();
        let pressed = oil.properties(11e5, 300.0).unwrap();
        assert!((warm.enthalpy.value - cold.enthalpy.value - 19e3).abs() < 1e-8);
        assert!((pressed.enthalpy.value - cold.enthalpy.value - 1e6 / 870.0).abs() < 1e-8);
        assert_eq!(pressed.entropy.value, cold.entropy.value);
    }

    #[test]
    fn derivatives_are_those_of_dh_equals_t_ds_plus_v_dp() {
        let (pressure, temperature) = (7e5, 345.0);
        let Properties { volume, enthalpy, entropy } = oil().properties(pressure, temperature).unwrap();
        assert_eq!(enthalpy.by_pressure, temperature * entropy.by_pressure + volume.value);
        assert!((enthalpy.by_temperature - temperature * entropy.by_temperature).abs() < 1e-9);
    }

    #[test]
    fn inverses_return() {
        let oil = oil();
        for (pressure, temperature) in [(1e5, 263.0), (5e5, 300.0), (40e5, 500.0)] {
            let properties = oil.properties(pressure, temperature).unwrap();
            let found = oil.temperature_ph(pressure, properties.enthalpy.value).unwrap();
            assert!((found.value / temperature - 1.0).abs() < 1e-14);
            let step = 1.0;
            let warmer = oil.temperature_ph(pressure, properties.enthalpy.value + step).unwrap().value;
            assert!((found.by_enthalpy - (warmer - found.value) / step).abs() < 1e-9);
            let denser = oil.temperature_ph(pressure + 1e5, properties.enthalpy.value).unwrap().value;
            assert!((found.by_pressure - (denser - found.value) / 1e5).abs() < 1e-15);
            let isentropic = oil.enthalpy_ps(pressure, properties.entropy.value).unwrap();
            assert!((isentropic.value - properties.enthalpy.value).abs() < 1e-8);
            assert!((isentropic.by_entropy / temperature - 1.0).abs() < 1e-14);
            assert_eq!(isentropic.by_pressure, properties.volume.value);
        }
    }

    #[test]
    fn nonsense_is_refused() {
        assert_eq!(Liquid::new(0.0, 1900.0), Err(LiquidError::Density(0.0)));
        assert_eq!(Liquid::new(870.0, -1.0), Err(LiquidError::SpecificHeat(-1.0)));
        assert!(Liquid::new(f64::NAN, 1900.0).is_err());
        let oil = oil();
        assert_eq!(oil.properties(1e5, -3.0), Err(LiquidError::Temperature(-3.0)));
        assert!(oil.properties(f64::INFINITY, 300.0).is_err());
        assert!(oil.temperature_ph(1e5, -1e9).is_err());
        assert!(oil.temperature_ph(1e5, f64::NAN).is_err());
        assert!(oil.enthalpy_ps(1e5, 1e9).is_err());
    }
}
