//! Dimensions: what kind of quantity a number is.

use std::borrow::Cow;
use std::fmt;

/// Symbols of the bases, in the order in which [`Dimension`] keeps their exponents.
///
/// Beside the SI bases in use here, the normal and the standard cubic metre and the var are bases of their own: they
/// have the dimension of a volume and of a power, but adding the one to the other is a mistake.
const BASES: [&str; 9] = ["kg", "m", "s", "K", "mol", "A", "Nm3", "Sm3", "var"];

/// Exponents by base, doubled, so that a square root stays exact.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Dimension([i16; BASES.len()]);

impl Dimension {
    /// A pure number: a share, an efficiency, a heat rate (heat over energy).
    pub const RATIO: Self = Self([0; BASES.len()]);
    /// kg.
    pub const MASS: Self = Self::base(0);
    /// m.
    pub const LENGTH: Self = Self::base(1);
    /// s.
    pub const TIME: Self = Self::base(2);
    /// K.
    pub const TEMPERATURE: Self = Self::base(3);
    /// mol.
    pub const AMOUNT_OF_SUBSTANCE: Self = Self::base(4);
    /// A.
    pub const ELECTRIC_CURRENT: Self = Self::base(5);
    /// Cubic metres at 0 degC and 1.01325 bar.
    pub const NORMAL_VOLUME: Self = Self::base(6);
    /// Cubic metres at 15 degC and 1.01325 bar.
    pub const STANDARD_VOLUME: Self = Self::base(7);
    /// var.
    pub const REACTIVE_POWER: Self = Self::base(8);
    /// m2.
    pub const AREA: Self = Self::LENGTH.times(Self::LENGTH);
    /// m3.
    pub const VOLUME: Self = Self::AREA.times(Self::LENGTH);
    /// m/s.
    pub const VELOCITY: Self = Self::LENGTH.over(Self::TIME);
    /// Revolutions or cycles in a second.
    pub const FREQUENCY: Self = Self::RATIO.over(Self::TIME);
    /// J/kg.
    pub const SPECIFIC_ENERGY: Self = Self::VELOCITY.times(Self::VELOCITY);
    /// J/(kg K).
    pub const SPECIFIC_ENTROPY: Self = Self::SPECIFIC_ENERGY.over(Self::TEMPERATURE);
    /// J.
    pub const ENERGY: Self = Self::SPECIFIC_ENERGY.times(Self::MASS);
    /// W.
    pub const POWER: Self = Self::ENERGY.over(Self::TIME);
    /// Pa.
    pub const PRESSURE: Self = Self::ENERGY.over(Self::VOLUME);
    /// kg/m3.
    pub const DENSITY: Self = Self::MASS.over(Self::VOLUME);
    /// m3/kg.
    pub const SPECIFIC_VOLUME: Self = Self::VOLUME.over(Self::MASS);
    /// kg/s.
    pub const MASS_FLOW: Self = Self::MASS.over(Self::TIME);
    /// m3/s.
    pub const VOLUME_FLOW: Self = Self::VOLUME.over(Self::TIME);
    /// Normal cubic metres in a second.
    pub const NORMAL_VOLUME_FLOW: Self = Self::NORMAL_VOLUME.over(Self::TIME);
    /// Standard cubic metres in a second.
    pub const STANDARD_VOLUME_FLOW: Self = Self::STANDARD_VOLUME.over(Self::TIME);
    /// mol/s.
    pub const MOLAR_FLOW: Self = Self::AMOUNT_OF_SUBSTANCE.over(Self::TIME);
    /// kg/mol.
    pub const MOLAR_MASS: Self = Self::MASS.over(Self::AMOUNT_OF_SUBSTANCE);
    /// W/K.
    pub const THERMAL_CONDUCTANCE: Self = Self::POWER.over(Self::TEMPERATURE);
    /// W/(m2 K).
    pub const HEAT_TRANSFER_COEFFICIENT: Self = Self::THERMAL_CONDUCTANCE.over(Self::AREA);
    /// Pressure loss times density over the square of a mass flow, 1/m4.
    pub const LOSS_COEFFICIENT: Self = Self::RATIO.over(Self::AREA.times(Self::AREA));
    /// Mass for an energy, kg/J.
    pub const SPECIFIC_CONSUMPTION: Self = Self::MASS.over(Self::ENERGY);
    /// V.
    pub const VOLTAGE: Self = Self::POWER.over(Self::ELECTRIC_CURRENT);
    /// S/m, of a water sample.
    pub const ELECTRIC_CONDUCTIVITY: Self = Self::ELECTRIC_CURRENT.over(Self::VOLTAGE).over(Self::LENGTH);

    const fn base(index: usize) -> Self {
        let mut doubled = [0; BASES.len()];
        doubled[index] = 2;
        Self(doubled)
    }

    /// Dimension of a product. Exponents saturate, far beyond anything that has a meaning.
    #[must_use]
    pub const fn times(self, other: Self) -> Self {
        let mut doubled = self.0;
        let mut i = 0;
        while i < BASES.len() {
            doubled[i] = doubled[i].saturating_add(other.0[i]);
            i += 1;
        }
        Self(doubled)
    }

    /// Dimension of a quotient.
    #[must_use]
    pub const fn over(self, other: Self) -> Self {
        let mut doubled = self.0;
        let mut i = 0;
        while i < BASES.len() {
            doubled[i] = doubled[i].saturating_sub(other.0[i]);
            i += 1;
        }
        Self(doubled)
    }

    /// Dimension of a power; `None` if an exponent would be no multiple of one half or beyond 100.
    pub fn power(self, exponent: f64) -> Option<Self> {
        let mut doubled = self.0;
        for slot in &mut doubled {
            let raised = f64::from(*slot) * exponent;
            if raised.fract() != 0.0 || raised.abs() > 200.0 {
                return None;
            }
            *slot = raised as i16;
        }
        Some(Self(doubled))
    }

    /// Dimension of a square root; `None` if an exponent would be no multiple of one half.
    pub fn sqrt(self) -> Option<Self> {
        self.power(0.5)
    }

    /// Whether it is a pure number.
    pub fn is_dimensionless(self) -> bool {
        self == Self::RATIO
    }

    /// The dimension that `[plant.units]` calls by this word.
    pub fn from_word(word: &str) -> Option<Self> {
        KINDS.iter().find(|kind| kind.word == word).map(|kind| kind.dimension)
    }

    /// The words of `[plant.units]`.
    pub fn words() -> impl Iterator<Item = &'static str> {
        KINDS.iter().map(|kind| kind.word)
    }

    /// What it is, for a message: `a mass flow`, or `a quantity in kg2/m` if it has no name.
    pub fn name(self) -> Cow<'static, str> {
        match self.kind() {
            Some(kind) => kind.name.into(),
            None => format!("a quantity in {self}").into(),
        }
    }

    pub(super) fn display_unit(self) -> Option<&'static str> {
        self.kind().map(|kind| kind.display_unit)
    }

    fn kind(self) -> Option<&'static Kind> {
        KINDS.iter().find(|kind| kind.dimension == self)
    }
}

/// The dimension as coherent SI units, such as `kg.m2/s3`; `1` for a pure number.
impl fmt::Display for Dimension {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let factors = |sign: i16| {
            let written = self.0.iter().zip(BASES).filter(move |(doubled, _)| **doubled * sign > 0);
            let mut factors = Vec::new();
            for (doubled, base) in written {
                let exponent = f64::from(doubled.saturating_abs()) / 2.0;
                factors.push(match (exponent == 1.0, base.ends_with('3')) {
                    (true, _) => base.to_owned(),
                    (false, true) => format!("({base}){exponent}"),
                    (false, false) => format!("{base}{exponent}"),
                });
            }
            factors
        };
        let (above, below) = (factors(1), factors(-1));
        f.write_str(if above.is_empty() { "1" } else { "" })?;
        f.write_str(&above.join("."))?;
        match below.as_slice() {
            [] => Ok(()),
            [one] => write!(f, "/{one}"),
            many => write!(f, "/({})", many.join(".")),
        }
    }
}

/// A dimension with a name.
struct Kind {
    dimension: Dimension,
    word: &'static str,
    name: &'static str,
    display_unit: &'static str,
}

const fn kind(
    dimension: Dimension,
    word: &'static str,
    name: &'static str,
    display_unit: &'static str,
) -> Kind {
    Kind { dimension, word, name, display_unit }
}

/// The dimensions that have a name: the word in `[plant.units]`, the name in messages, the unit shown by default.
const KINDS: &[Kind] = &[
    kind(Dimension::MASS_FLOW, "mass_flow", "a mass flow", "t/h"),
    kind(Dimension::PRESSURE, "pressure", "a pressure", "bar"),
    kind(Dimension::TEMPERATURE, "temperature", "a temperature", "degC"),
    kind(Dimension::SPECIFIC_ENERGY, "enthalpy", "a specific energy", "kJ/kg"),
    kind(Dimension::SPECIFIC_ENTROPY, "entropy", "a specific entropy", "kJ/(kg.K)"),
    kind(Dimension::POWER, "power", "a power", "MW"),
    kind(Dimension::REACTIVE_POWER, "reactive_power", "a reactive power", "Mvar"),
    kind(Dimension::ENERGY, "energy", "an energy", "MWh"),
    kind(Dimension::DENSITY, "density", "a density", "kg/m3"),
    kind(Dimension::SPECIFIC_VOLUME, "specific_volume", "a specific volume", "m3/kg"),
    kind(Dimension::VOLUME_FLOW, "volume_flow", "a volume flow", "m3/h"),
    kind(Dimension::NORMAL_VOLUME_FLOW, "normal_volume_flow", "a normal volume flow", "Nm3/h"),
    kind(Dimension::STANDARD_VOLUME_FLOW, "standard_volume_flow", "a standard volume flow", "Sm3/h"),
    kind(Dimension::MOLAR_FLOW, "molar_flow", "a molar flow", "kmol/h"),
    kind(Dimension::MOLAR_MASS, "molar_mass", "a molar mass", "kg/kmol"),
    kind(Dimension::VELOCITY, "velocity", "a velocity", "m/s"),
    kind(Dimension::LENGTH, "length", "a length", "m"),
    kind(Dimension::AREA, "area", "an area", "m2"),
    kind(Dimension::VOLUME, "volume", "a volume", "m3"),
    kind(Dimension::NORMAL_VOLUME, "normal_volume", "a normal volume", "Nm3"),
    kind(Dimension::STANDARD_VOLUME, "standard_volume", "a standard volume", "Sm3"),
    kind(Dimension::MASS, "mass", "a mass", "t"),
    kind(Dimension::TIME, "time", "a time", "h"),
    kind(Dimension::RATIO, "ratio", "a ratio", "%"),
    kind(Dimension::FREQUENCY, "frequency", "a frequency or rotational speed", "rpm"),
    kind(Dimension::THERMAL_CONDUCTANCE, "thermal_conductance", "a thermal conductance", "kW/K"),
    kind(
        Dimension::HEAT_TRANSFER_COEFFICIENT,
        "heat_transfer_coefficient",
        "a heat transfer coefficient",
        "W/(m2.K)",
    ),
    kind(Dimension::LOSS_COEFFICIENT, "loss_coefficient", "a loss coefficient", "1/m4"),
    kind(Dimension::SPECIFIC_CONSUMPTION, "specific_consumption", "a specific consumption", "kg/kWh"),
    kind(Dimension::ELECTRIC_CURRENT, "electric_current", "an electric current", "A"),
    kind(Dimension::VOLTAGE, "voltage", "a voltage", "kV"),
    kind(Dimension::ELECTRIC_CONDUCTIVITY, "electric_conductivity", "an electric conductivity", "uS/cm"),
];

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn products_quotients_and_roots_keep_the_books() {
        let power = Dimension::MASS_FLOW.times(Dimension::SPECIFIC_ENERGY);
        assert_eq!(power, Dimension::POWER);
        assert_eq!(power.over(Dimension::POWER), Dimension::RATIO);
        assert!(power.over(Dimension::POWER).is_dimensionless());
        assert_eq!(Dimension::SPECIFIC_ENERGY.sqrt(), Some(Dimension::VELOCITY));
        assert_eq!(Dimension::VELOCITY.power(2.0), Some(Dimension::SPECIFIC_ENERGY));
        let root = Dimension::MASS.sqrt().unwrap();
        assert_eq!(root.times(root), Dimension::MASS);
        assert_eq!(root.sqrt(), None);
        assert_eq!(Dimension::MASS.power(1000.0), None);
        assert_eq!(Dimension::MASS.power(f64::NAN), None);
        assert_eq!(Dimension::RATIO.power(1.3), Some(Dimension::RATIO));
        assert_ne!(Dimension::VOLUME_FLOW, Dimension::NORMAL_VOLUME_FLOW);
        assert_ne!(Dimension::REACTIVE_POWER, Dimension::POWER);
    }

    #[test]
    fn every_dimension_can_be_named() {
        assert_eq!(Dimension::MASS_FLOW.name(), "a mass flow");
        let odd = Dimension::MASS_FLOW.times(Dimension::PRESSURE.sqrt().unwrap());
        assert_eq!(odd.name(), "a quantity in kg1.5/(m0.5.s2)");
        assert_eq!(Dimension::NORMAL_VOLUME.times(Dimension::NORMAL_VOLUME).to_string(), "(Nm3)2");
        assert_eq!(Dimension::RATIO.to_string(), "1");
        assert_eq!(Dimension::LOSS_COEFFICIENT.to_string(), "1/m4");
    }

    #[test]
    fn words_and_dimensions_are_listed_once() {
        for (i, kind) in KINDS.iter().enumerate() {
            assert_eq!(Dimension::from_word(kind.word), Some(kind.dimension), "{}", kind.word);
            assert!(KINDS[i + 1..].iter().all(|other| other.dimension != kind.dimension), "{}", kind.word);
        }
    }
}
