//! The table of unit strings.
//!
//! Factors are exact by definition unless a comment says otherwise: the international yard and pound (1 ft = 0.3048 m,
//! 1 lb = 0.45359237 kg), standard gravity 9.80665 m/s2, the US gallon of 231 cubic inches, the calorie and the Btu of
//! the International Table (4.1868 J and 1055.05585262 J). Columns of mercury and water are conventional: mercury of
//! 13595.1 kg/m3 and water of 1000 kg/m3 at standard gravity (NIST SP 811, appendix B). Beside each unit stands its
//! code in the Unified Code for Units of Measure, where that has one with the same meaning.

use super::dimension::Dimension as D;
use super::unit::Reference;

/// One unit of the table: a number in it is `number * factor + offset` in SI.
#[derive(Debug)]
pub(super) struct Definition {
    pub(super) name: &'static str,
    pub(super) aliases: &'static [&'static str],
    pub(super) factor: f64,
    pub(super) offset: f64,
    pub(super) dimension: D,
    pub(super) reference: Reference,
    #[cfg_attr(
        not(test),
        expect(dead_code, reason = "documents the unit; the tests prove the factors with it")
    )]
    pub(super) ucum: Option<&'static str>,
}

/// Every unit.
pub(super) fn definitions() -> impl Iterator<Item = &'static Definition> {
    std::iter::once(&ONE).chain(UNITS).chain(PRESSURES.iter().flatten())
}

/// What people write for a unit that is called otherwise here, or that would be ambiguous.
pub(super) const HINTS: &[(&str, &str)] = &[
    ("C", "degC"),
    ("F", "degF"),
    ("degK", "K"),
    ("mmWC", "mmH2O"),
    ("mmWG", "mmH2O"),
    ("mmWS", "mmH2O"),
    ("inWC", "inH2O"),
    ("inWG", "inH2O"),
    ("pph", "lb/h"),
    ("kpph", "klb/h"),
    ("tph", "t/h"),
    ("cmh", "m3/h"),
    ("MVA", "Mvar"),
    ("ata", "kgf/cm2"),
    ("atm", "bar"),
];

const fn unit(name: &'static str, factor: f64, dimension: D, ucum: &'static str) -> Definition {
    spelled(name, &[], factor, dimension, ucum)
}

const fn spelled(
    name: &'static str,
    aliases: &'static [&'static str],
    factor: f64,
    dimension: D,
    ucum: &'static str,
) -> Definition {
    let reference = Reference::Absolute;
    Definition { name, aliases, factor, offset: 0.0, dimension, reference, ucum: Some(ucum) }
}

/// A unit that the Unified Code does not know.
const fn uncoded(
    name: &'static str,
    aliases: &'static [&'static str],
    factor: f64,
    dimension: D,
) -> Definition {
    let reference = Reference::Absolute;
    Definition { name, aliases, factor, offset: 0.0, dimension, reference, ucum: None }
}

const fn thermometer(name: &'static str, factor: f64, offset: f64, ucum: &'static str) -> Definition {
    let reference = Reference::Absolute;
    Definition { name, aliases: &[], factor, offset, dimension: D::TEMPERATURE, reference, ucum: Some(ucum) }
}

/// A pressure unit three times: absolute, gauge and vacuum.
macro_rules! pressures {
    ($($name:literal $factor:expr, $ucum:expr;)*) => {
        [$([
            pressure($name, &[concat!($name, "a"), concat!($name, "(a)")], $factor, Reference::Absolute, $ucum),
            pressure(concat!($name, "g"), &[concat!($name, "(g)")], $factor, Reference::Gauge, None),
            pressure(concat!($name, " vac"), &[], $factor, Reference::Vacuum, None),
        ]),*]
    };
}

const fn pressure(
    name: &'static str,
    aliases: &'static [&'static str],
    factor: f64,
    reference: Reference,
    ucum: Option<&'static str>,
) -> Definition {
    Definition { name, aliases, factor, offset: 0.0, dimension: D::PRESSURE, reference, ucum }
}

const MINUTE: f64 = 60.0;
const HOUR: f64 = 3600.0;
const DAY: f64 = 24.0 * HOUR;
const INCH: f64 = 0.0254;
const FOOT: f64 = 12.0 * INCH;
const GALLON: f64 = 231.0 * INCH * INCH * INCH;
const POUND: f64 = 0.45359237;
const GRAVITY: f64 = 9.80665;
const PSI: f64 = POUND * GRAVITY / (INCH * INCH);
const WATER_COLUMN: f64 = 1000.0 * GRAVITY;
const MERCURY_COLUMN: f64 = 13595.1 * GRAVITY;
const CALORIE: f64 = 4.1868;
const BTU: f64 = 1055.05585262;
const KWH: f64 = 3.6e6;

/// The unit of a bare number.
pub(super) static ONE: Definition = unit("1", 1.0, D::RATIO, "1");

static PRESSURES: [[Definition; 3]; 13] = pressures! {
    "Pa" 1.0, Some("Pa");
    "hPa" 100.0, Some("hPa");
    "kPa" 1e3, Some("kPa");
    "MPa" 1e6, Some("MPa");
    "mbar" 100.0, Some("mbar");
    "bar" 1e5, Some("bar");
    "psi" PSI, Some("[psi]");
    "kgf/cm2" GRAVITY * 1e4, Some("kgf/cm2");
    "mmH2O" WATER_COLUMN * 1e-3, Some("mm[H2O]");
    "inH2O" WATER_COLUMN * INCH, Some("[in_i'H2O]");
    "ftH2O" WATER_COLUMN * FOOT, None;
    // The Unified Code takes 133.3220 kPa for a metre of mercury, 3 ppm less than the conventional column.
    "mmHg" MERCURY_COLUMN * 1e-3, None;
    "inHg" MERCURY_COLUMN * INCH, None;
};

static UNITS: &[Definition] = &[
    unit("%", 0.01, D::RATIO, "%"),
    uncoded("pp", &[], 0.01, D::RATIO),
    unit("ppm", 1e-6, D::RATIO, "[ppm]"),
    unit("ppb", 1e-9, D::RATIO, "[ppb]"),
    unit("kJ/kWh", 1e3 / KWH, D::RATIO, "kJ/(kW.h)"),
    unit("MJ/MWh", 1e3 / KWH, D::RATIO, "MJ/(MW.h)"),
    unit("GJ/MWh", 1e6 / KWH, D::RATIO, "GJ/(MW.h)"),
    unit("kcal/kWh", 1e3 * CALORIE / KWH, D::RATIO, "kcal_IT/(kW.h)"),
    unit("Btu/kWh", BTU / KWH, D::RATIO, "[Btu_IT]/(kW.h)"),
    // Mass and mass flow.
    unit("kg", 1.0, D::MASS, "kg"),
    unit("g", 1e-3, D::MASS, "g"),
    unit("t", 1e3, D::MASS, "t"),
    unit("lb", POUND, D::MASS, "[lb_av]"),
    unit("kg/s", 1.0, D::MASS_FLOW, "kg/s"),
    unit("kg/min", 1.0 / MINUTE, D::MASS_FLOW, "kg/min"),
    unit("kg/h", 1.0 / HOUR, D::MASS_FLOW, "kg/h"),
    unit("g/s", 1e-3, D::MASS_FLOW, "g/s"),
    unit("t/h", 1e3 / HOUR, D::MASS_FLOW, "t/h"),
    unit("t/d", 1e3 / DAY, D::MASS_FLOW, "t/d"),
    unit("lb/s", POUND, D::MASS_FLOW, "[lb_av]/s"),
    unit("lb/h", POUND / HOUR, D::MASS_FLOW, "[lb_av]/h"),
    unit("klb/h", 1e3 * POUND / HOUR, D::MASS_FLOW, "10*3.[lb_av]/h"),
    // Temperature.
    unit("K", 1.0, D::TEMPERATURE, "K"),
    thermometer("degC", 1.0, 273.15, "Cel"),
    thermometer("degF", 5.0 / 9.0, 459.67 * 5.0 / 9.0, "[degF]"),
    // Energy and power.
    unit("J", 1.0, D::ENERGY, "J"),
    unit("kJ", 1e3, D::ENERGY, "kJ"),
    unit("MJ", 1e6, D::ENERGY, "MJ"),
    unit("GJ", 1e9, D::ENERGY, "GJ"),
    unit("TJ", 1e12, D::ENERGY, "TJ"),
    unit("kWh", KWH, D::ENERGY, "kW.h"),
    unit("MWh", 1e3 * KWH, D::ENERGY, "MW.h"),
    unit("GWh", 1e6 * KWH, D::ENERGY, "GW.h"),
    unit("kcal", 1e3 * CALORIE, D::ENERGY, "kcal_IT"),
    unit("Gcal", 1e9 * CALORIE, D::ENERGY, "Gcal_IT"),
    unit("Btu", BTU, D::ENERGY, "[Btu_IT]"),
    unit("MMBtu", 1e6 * BTU, D::ENERGY, "10*6.[Btu_IT]"),
    unit("W", 1.0, D::POWER, "W"),
    unit("kW", 1e3, D::POWER, "kW"),
    unit("MW", 1e6, D::POWER, "MW"),
    unit("GW", 1e9, D::POWER, "GW"),
    unit("kJ/s", 1e3, D::POWER, "kJ/s"),
    unit("MJ/s", 1e6, D::POWER, "MJ/s"),
    unit("kJ/h", 1e3 / HOUR, D::POWER, "kJ/h"),
    unit("MJ/h", 1e6 / HOUR, D::POWER, "MJ/h"),
    unit("GJ/h", 1e9 / HOUR, D::POWER, "GJ/h"),
    unit("kcal/h", 1e3 * CALORIE / HOUR, D::POWER, "kcal_IT/h"),
    unit("Gcal/h", 1e9 * CALORIE / HOUR, D::POWER, "Gcal_IT/h"),
    unit("Btu/h", BTU / HOUR, D::POWER, "[Btu_IT]/h"),
    unit("MMBtu/h", 1e6 * BTU / HOUR, D::POWER, "10*6.[Btu_IT]/h"),
    uncoded("var", &[], 1.0, D::REACTIVE_POWER),
    uncoded("kvar", &["kVAr", "kVar"], 1e3, D::REACTIVE_POWER),
    uncoded("Mvar", &["MVAr", "MVar"], 1e6, D::REACTIVE_POWER),
    // Energy for a mass.
    unit("J/kg", 1.0, D::SPECIFIC_ENERGY, "J/kg"),
    unit("kJ/kg", 1e3, D::SPECIFIC_ENERGY, "kJ/kg"),
    unit("MJ/kg", 1e6, D::SPECIFIC_ENERGY, "MJ/kg"),
    unit("GJ/t", 1e6, D::SPECIFIC_ENERGY, "GJ/t"),
    unit("kWh/kg", KWH, D::SPECIFIC_ENERGY, "kW.h/kg"),
    unit("kWh/t", 1e-3 * KWH, D::SPECIFIC_ENERGY, "kW.h/t"),
    unit("MWh/t", KWH, D::SPECIFIC_ENERGY, "MW.h/t"),
    unit("kcal/kg", 1e3 * CALORIE, D::SPECIFIC_ENERGY, "kcal_IT/kg"),
    unit("Btu/lb", BTU / POUND, D::SPECIFIC_ENERGY, "[Btu_IT]/[lb_av]"),
    spelled("J/(kg.K)", &["J/(kg K)", "J/kg/K", "J/kg.K", "J/kgK"], 1.0, D::SPECIFIC_ENTROPY, "J/(kg.K)"),
    spelled(
        "kJ/(kg.K)",
        &["kJ/(kg K)", "kJ/kg/K", "kJ/kg.K", "kJ/kgK"],
        1e3,
        D::SPECIFIC_ENTROPY,
        "kJ/(kg.K)",
    ),
    spelled(
        "kcal/(kg.K)",
        &["kcal/(kg K)", "kcal/kg/K", "kcal/kg.K"],
        1e3 * CALORIE,
        D::SPECIFIC_ENTROPY,
        "kcal_IT/(kg.K)",
    ),
    // A degree Fahrenheit is 5/9 K here, because heat capacities rest on differences.
    spelled(
        "Btu/(lb.degF)",
        &["Btu/(lb degF)", "Btu/lb/degF", "Btu/lb.degF"],
        BTU / POUND * 9.0 / 5.0,
        D::SPECIFIC_ENTROPY,
        "[Btu_IT]/([lb_av].[degR])",
    ),
    unit("g/kWh", 1e-3 / KWH, D::SPECIFIC_CONSUMPTION, "g/(kW.h)"),
    unit("kg/kWh", 1.0 / KWH, D::SPECIFIC_CONSUMPTION, "kg/(kW.h)"),
    unit("t/MWh", 1.0 / KWH, D::SPECIFIC_CONSUMPTION, "t/(MW.h)"),
    unit("lb/kWh", POUND / KWH, D::SPECIFIC_CONSUMPTION, "[lb_av]/(kW.h)"),
    unit("kg/GJ", 1e-9, D::SPECIFIC_CONSUMPTION, "kg/GJ"),
    // Heat transfer.
    unit("W/K", 1.0, D::THERMAL_CONDUCTANCE, "W/K"),
    unit("kW/K", 1e3, D::THERMAL_CONDUCTANCE, "kW/K"),
    unit("MW/K", 1e6, D::THERMAL_CONDUCTANCE, "MW/K"),
    unit("W/(m2.K)", 1.0, D::HEAT_TRANSFER_COEFFICIENT, "W/(m2.K)"),
    unit("kW/(m2.K)", 1e3, D::HEAT_TRANSFER_COEFFICIENT, "kW/(m2.K)"),
    // Volume, volume flow and density.
    unit("m3", 1.0, D::VOLUME, "m3"),
    unit("l", 1e-3, D::VOLUME, "l"),
    unit("gal", GALLON, D::VOLUME, "[gal_us]"),
    uncoded("Nm3", &[], 1.0, D::NORMAL_VOLUME),
    uncoded("Sm3", &[], 1.0, D::STANDARD_VOLUME),
    unit("m3/s", 1.0, D::VOLUME_FLOW, "m3/s"),
    unit("m3/min", 1.0 / MINUTE, D::VOLUME_FLOW, "m3/min"),
    unit("m3/h", 1.0 / HOUR, D::VOLUME_FLOW, "m3/h"),
    unit("l/s", 1e-3, D::VOLUME_FLOW, "l/s"),
    unit("l/min", 1e-3 / MINUTE, D::VOLUME_FLOW, "l/min"),
    unit("l/h", 1e-3 / HOUR, D::VOLUME_FLOW, "l/h"),
    unit("gpm", GALLON / MINUTE, D::VOLUME_FLOW, "[gal_us]/min"),
    unit("ft3/s", FOOT * FOOT * FOOT, D::VOLUME_FLOW, "[cft_i]/s"),
    unit("ft3/min", FOOT * FOOT * FOOT / MINUTE, D::VOLUME_FLOW, "[cft_i]/min"),
    uncoded("Nm3/s", &[], 1.0, D::NORMAL_VOLUME_FLOW),
    uncoded("Nm3/h", &[], 1.0 / HOUR, D::NORMAL_VOLUME_FLOW),
    uncoded("Sm3/s", &[], 1.0, D::STANDARD_VOLUME_FLOW),
    uncoded("Sm3/h", &[], 1.0 / HOUR, D::STANDARD_VOLUME_FLOW),
    unit("kg/m3", 1.0, D::DENSITY, "kg/m3"),
    unit("kg/l", 1e3, D::DENSITY, "kg/l"),
    unit("g/cm3", 1e3, D::DENSITY, "g/cm3"),
    unit("mg/l", 1e-3, D::DENSITY, "mg/l"),
    unit("ug/l", 1e-6, D::DENSITY, "ug/l"),
    unit("lb/ft3", POUND / (FOOT * FOOT * FOOT), D::DENSITY, "[lb_av]/[cft_i]"),
    unit("m3/kg", 1.0, D::SPECIFIC_VOLUME, "m3/kg"),
    unit("ft3/lb", FOOT * FOOT * FOOT / POUND, D::SPECIFIC_VOLUME, "[cft_i]/[lb_av]"),
    // Amount of substance.
    unit("mol/s", 1.0, D::MOLAR_FLOW, "mol/s"),
    unit("kmol/s", 1e3, D::MOLAR_FLOW, "kmol/s"),
    unit("kmol/h", 1e3 / HOUR, D::MOLAR_FLOW, "kmol/h"),
    unit("kg/mol", 1.0, D::MOLAR_MASS, "kg/mol"),
    unit("kg/kmol", 1e-3, D::MOLAR_MASS, "kg/kmol"),
    unit("g/mol", 1e-3, D::MOLAR_MASS, "g/mol"),
    // Length, area, velocity, time and speed.
    unit("m", 1.0, D::LENGTH, "m"),
    unit("cm", 1e-2, D::LENGTH, "cm"),
    unit("mm", 1e-3, D::LENGTH, "mm"),
    unit("in", INCH, D::LENGTH, "[in_i]"),
    unit("ft", FOOT, D::LENGTH, "[ft_i]"),
    unit("m2", 1.0, D::AREA, "m2"),
    unit("cm2", 1e-4, D::AREA, "cm2"),
    unit("mm2", 1e-6, D::AREA, "mm2"),
    unit("in2", INCH * INCH, D::AREA, "[sin_i]"),
    unit("ft2", FOOT * FOOT, D::AREA, "[sft_i]"),
    unit("m/s", 1.0, D::VELOCITY, "m/s"),
    unit("mm/s", 1e-3, D::VELOCITY, "mm/s"),
    unit("ft/s", FOOT, D::VELOCITY, "[ft_i]/s"),
    unit("s", 1.0, D::TIME, "s"),
    unit("min", MINUTE, D::TIME, "min"),
    unit("h", HOUR, D::TIME, "h"),
    unit("d", DAY, D::TIME, "d"),
    unit("Hz", 1.0, D::FREQUENCY, "Hz"),
    unit("rpm", 1.0 / MINUTE, D::FREQUENCY, "{rev}/min"),
    unit("1/m4", 1.0, D::LOSS_COEFFICIENT, "m-4"),
    // Electricity.
    unit("A", 1.0, D::ELECTRIC_CURRENT, "A"),
    unit("kA", 1e3, D::ELECTRIC_CURRENT, "kA"),
    unit("mA", 1e-3, D::ELECTRIC_CURRENT, "mA"),
    unit("V", 1.0, D::VOLTAGE, "V"),
    unit("kV", 1e3, D::VOLTAGE, "kV"),
    unit("uS/cm", 1e-4, D::ELECTRIC_CONDUCTIVITY, "uS/cm"),
];

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::Unit;

    /// Every factor and dimension against the Unified Code for Units of Measure (crate octofhir-ucum with the official
    /// `ucum-essence.xml`).
    #[test]
    fn factors_and_dimensions_are_those_of_the_unified_code() {
        for definition in definitions() {
            let Some(code) = definition.ucum else { continue };
            let coherent = definition.dimension.to_string();
            let (zero, hundred) = (convert(0.0, code, &coherent), convert(100.0, code, &coherent));
            let unit = Unit::parse(definition.name).unwrap();
            let scale = unit.to_si(100.0).abs();
            assert!((unit.to_si(0.0) - zero).abs() <= 1e-12 * scale, "{unit}: {} {zero}", unit.to_si(0.0));
            assert!((unit.to_si(100.0) - hundred).abs() <= 1e-12 * scale, "{unit}: {scale} {hundred}");
        }
    }

    /// Converting to the coherent unit fails unless the dimensions agree.
    fn convert(value: f64, from: &str, to: &str) -> f64 {
        octofhir_ucum::convert(value, from, to).unwrap_or_else(|error| panic!("{from} to {to}: {error}"))
    }

    /// Where the Unified Code has no such unit: NIST SP 811 (2008), appendix B.8 (from memory), to the digits it prints.
    #[test]
    fn conventional_columns_are_those_of_nist_sp_811() {
        for (name, pascals) in
            [("mmHg", 133.3224), ("inHg", 3386.389), ("ftH2O", 2989.067), ("psi", 6894.757)]
        {
            let si = Unit::parse(name).unwrap().to_si(1.0);
            assert!((si / pascals - 1.0).abs() < 5e-7, "{name}: {si}");
        }
    }

    #[test]
    fn every_name_and_alias_is_written_once() {
        let mut names: Vec<&str> =
            definitions().flat_map(|d| std::iter::once(d.name).chain(d.aliases.iter().copied())).collect();
        names.sort_unstable();
        for pair in names.windows(2) {
            assert_ne!(pair[0], pair[1]);
        }
    }

    #[test]
    fn every_hint_names_a_unit_and_is_none() {
        for (written, meant) in HINTS {
            assert!(Unit::parse(meant).is_ok(), "{meant}");
            assert!(Unit::parse(written).is_err(), "{written}");
        }
    }
}
