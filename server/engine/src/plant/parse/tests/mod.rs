mod faults;

use super::*;
use crate::plant::{FluidKind, GivenSigma, GivenValue, HypothesisKind, PhaseHint, SettingValue, Spread};
use crate::quantity::{Dimension, Unit};

const SOUND: &str = r#"format = 1

[plant]
name = "Skerrow Point unit 1"
time_zone = "Europe/Oslo"
surroundings = { pressure = "1.013 bar", temperature = "15 degC" }
units = { mass_flow = "kg/s" }

[fluids.thermal_oil]
kind = "liquid"
density = "870 kg/m3"
specific_heat = "1.9 kJ/(kg.K)"

[streams.main_steam]
fluid = "water"
from = "boiler.steam"
to = "hp_turbine.inlet"
phase = "vapour"
area = "500 cm2"
elevation = "-2 m"

[streams.exhaust]
fluid = "water"
from = "hp_turbine.outlet"

[streams.feedwater]
fluid = "water"
to = "boiler.feedwater"
reversible = true

[equipment.boiler]
kind = "boiler"
closes = ["mass"]

[equipment.hp_turbine]
kind = "turbine"
sections = ["a", "b"]
stages = 12
wet = true

[equipment.generator]
kind = "generator"

[tags.FT-1001]
reads = "main_steam.mass_flow"
unit = "t/h"
accuracy = ["0.6 %", "0.2 % span", "1 kg/s"]
span = [0, 450]
repeatability = "0.15 %"
description = "Main steam flow, venturi"
typical = 360
cut_off = "5 t/h"
offset = "-0.8 t/h"
factor = 0.988
hold = "36 h"
counter = { roll_over = 1_000_000 }
fault_rate = 0.1

[tags.PT-2001]
reads = "exhaust.pressure"
unit = "mbar vac"
sigma = "2 mbar"
span = [0, 1000]
typical = 950
offset = "1 mbar"
water_leg = "3.2 m"

[tags.10LBA10CT001]
unit = "degC"

[tags.QT-3001]
reads = "exhaust.quality"
unit = "%"
sigma = "0.3 pp"

[shared.FE-1001]
tags = ["FT-1001", "PT-2001"]
sigma = "0.4 %"

[given]
"boiler.heat_loss" = { value = "1.2 MW", sigma = "0.4 MW" }
"hp_turbine.heat_loss" = "0 kW"
"generator.efficiency" = { value = "98.5 %", sigma = "0.3 pp" }
"boiler.efficiency" = { value = 0.91, sigma = "2 %" }
"exhaust.quality" = 0.98
"main.loss" = "unknown"

[shafts.main]
members = ["hp_turbine", "generator"]

[indicators.gross_heat_rate]
formula = "main_steam.mass_flow * (main_steam.enthalpy - feedwater.enthalpy) / generator.electric_power"
unit = "kJ/kWh"

[search]
hypotheses = ["bias", "loss"]
fault_rate = 0.03
bias_size = 8

[steady]
period = "30 min"
watch = ["FT-1001"]
"#;

fn sound() -> Plant {
    parse(SOUND).unwrap()
}

#[test]
fn the_site_is_read() {
    let plant = sound();
    assert_eq!(plant.name.value, "Skerrow Point unit 1");
    assert_eq!(plant.time_zone.value, "Europe/Oslo");
    assert_eq!((plant.surroundings.pressure, plant.surroundings.temperature), (1.013 * 1e5, 288.15));
    assert_eq!(plant.display_units, [(Dimension::MASS_FLOW, Unit::parse("kg/s").unwrap())]);
    let FluidKind::Liquid { density, specific_heat } = plant.fluids[0].kind else { panic!() };
    assert_eq!((density, specific_heat), (870.0, 1900.0));
}

#[test]
fn the_smallest_plant_file_has_the_documented_defaults() {
    let plant = parse("format = 1\n[plant]\nname = \"A\"").unwrap();
    assert_eq!(plant.time_zone.value, "UTC");
    assert_eq!((plant.surroundings.pressure, plant.surroundings.temperature), (101_325.0, 288.15));
    assert_eq!(plant.search.hypotheses.len(), 4);
    assert_eq!((plant.search.fault_rate, plant.search.bias_size), (0.02, 10.0));
    assert_eq!(plant.steady.period, 3600.0);
    assert!(plant.steady.watch.is_empty() && plant.tags.is_empty());
}

/// SHA-256 of the empty text and of `abc`: FIPS 180-4 examples (from memory).
#[test]
fn the_revision_is_the_hash_of_the_text() {
    assert_eq!(revision(""), "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855");
    assert_eq!(revision("abc"), "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
    assert_eq!(sound().revision, revision(SOUND));
}

#[test]
fn streams_and_equipment_keep_the_order_of_the_file() {
    let plant = sound();
    let names: Vec<&str> = plant.streams.iter().map(|stream| stream.name.value.as_str()).collect();
    assert_eq!(names, ["main_steam", "exhaust", "feedwater"]);
    let steam = &plant.streams[0];
    assert_eq!(steam.from.as_ref().unwrap().value.equipment, "boiler");
    assert_eq!(steam.to.as_ref().unwrap().value.port, "inlet");
    assert_eq!(steam.phase.as_ref().unwrap().value, PhaseHint::Vapour);
    assert!((steam.area.as_ref().unwrap().value - 0.05).abs() < 1e-15);
    assert_eq!(steam.elevation.as_ref().unwrap().value, -2.0);
    assert!(plant.streams[1].to.is_none() && plant.streams[2].reversible);
    assert!(plant.equipment[0].closes_mass && !plant.equipment[0].closes_energy);
    let settings: Vec<_> =
        plant.equipment[1].settings.iter().map(|setting| setting.key.value.as_str()).collect();
    assert_eq!(settings, ["sections", "stages", "wet"]);
    assert_eq!(plant.equipment[1].settings[1].value.value, SettingValue::Number(12.0));
    assert_eq!(plant.shafts[0].members[1].value, "generator");
}

#[test]
fn a_tag_is_in_si_and_its_accuracy_is_one_sigma() {
    let plant = sound();
    let tag = &plant.tags[0];
    assert_eq!(tag.name.value, "FT-1001");
    let expected = [
        Spread::OfReading(0.006 / 1.959964),
        Spread::OfSpan(0.002 / 1.959964),
        Spread::Absolute(1.0 / 1.959964),
    ];
    assert_eq!(tag.sigma, expected);
    assert_eq!(tag.repeatability, Some(Spread::OfReading(0.0015)));
    assert_eq!(tag.span.as_ref().unwrap().value, [0.0, 125.0]);
    assert!((tag.typical.unwrap() - 100.0).abs() < 1e-12);
    assert!((tag.offset + 0.8 / 3.6).abs() < 1e-12);
    assert_eq!((tag.factor, tag.hold, tag.roll_over), (0.988, Some(129_600.0), Some(1e6)));
    assert_eq!(tag.fault_rate, Some(0.1));
    assert_eq!(tag.description, "Main steam flow, venturi");
}

#[test]
fn a_vacuum_counts_downwards() {
    let plant = sound();
    let tag = &plant.tags[1];
    assert_eq!(tag.sigma, [Spread::Absolute(200.0)]);
    assert_eq!(tag.span.as_ref().unwrap().value, [-100_000.0, 0.0]);
    assert_eq!(tag.typical, Some(-95_000.0));
    assert_eq!(tag.offset, -100.0);
    assert_eq!(tag.water_leg, Some(3.2));
}

#[test]
fn a_tag_that_reads_nothing_needs_no_accuracy() {
    let plant = sound();
    assert!(plant.tags[2].reads.is_none() && plant.tags[2].sigma.is_empty());
    assert_eq!(plant.tags[2].factor, 1.0);
    assert_eq!(plant.tags[3].sigma, [Spread::Absolute(0.003)]);
}

#[test]
fn givens_are_exact_soft_or_unknown() {
    let plant = sound();
    let value = |name: &str| &plant.givens.iter().find(|given| given.quantity.value == name).unwrap().value;
    let GivenValue::Soft { value: loss, sigma } = value("boiler.heat_loss") else { panic!() };
    assert_eq!(loss.value.si(), 1.2e6);
    assert!(matches!(sigma.value, GivenSigma::Absolute(amount) if amount.si() == 4e5));
    assert!(matches!(value("hp_turbine.heat_loss"), GivenValue::Exact(amount) if amount.value.si() == 0.0));
    assert!(
        matches!(value("boiler.efficiency"), GivenValue::Soft { sigma, .. } if sigma.value == GivenSigma::OfValue(0.02))
    );
    assert!(matches!(value("exhaust.quality"), GivenValue::Exact(amount) if amount.value.unit == Unit::ONE));
    assert_eq!(*value("main.loss"), GivenValue::Unknown);
    assert_eq!(plant.search.hypotheses, [HypothesisKind::Bias, HypothesisKind::Loss]);
    assert_eq!(plant.steady.period, 1800.0);
}

#[test]
fn the_span_of_a_formula_covers_the_text_inside_the_quotes() {
    let formula = &sound().indicators[0].formula;
    assert_eq!(SOUND[formula.span.start..formula.span.end], formula.value);
    let text = SOUND
        .replace("\"main_steam.mass_flow *", "'''\nmain_steam.mass_flow *")
        .replace("_power\"\nunit", "_power'''\nunit");
    let formula = &parse(&text).unwrap().indicators[0].formula;
    assert_eq!(text[formula.span.start..formula.span.end], formula.value);
}

/// Numbers that look random (Steele, Lea and Flood 2014: splitmix64).
struct Random(u64);

impl Random {
    fn below(&mut self, limit: usize) -> usize {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((z ^ (z >> 31)) % limit as u64) as usize
    }
}

/// Cuts, doubles and swaps pieces of a sound file, and writes odd characters into it: whatever comes out is read or
/// refused, and every fault lies inside the text on borders of characters.
#[test]
fn no_text_makes_the_reader_panic() {
    const PIECES: [&str; 14] =
        ["\"", "'''", "=", "[", "]", "{", "}", ".", "\n", "ß", "\u{0}", "1e999", "-", "\"\"\""];
    let mut random = Random(0x5eed);
    for _ in 0..3000 {
        let mut text: Vec<char> = SOUND.chars().collect();
        for _ in 0..=random.below(4) {
            let (at, length) = (random.below(text.len()), random.below(30));
            let end = (at + length).min(text.len());
            match random.below(4) {
                0 => drop(text.drain(at..end)),
                1 => drop(text.splice(at..at, text[at..end].to_vec())),
                2 => drop(text.splice(at..end, PIECES[random.below(PIECES.len())].chars())),
                _ => {
                    let other = random.below(text.len());
                    text.swap(at, other);
                }
            }
        }
        let text: String = text.into_iter().collect();
        if let Err(faults) = parse(&text) {
            assert!(!faults.is_empty());
            for fault in faults {
                assert!(text.get(fault.span.start..fault.span.end).is_some(), "{fault:?} in {text}");
                assert!(!fault.message.is_empty());
            }
        }
    }
}

#[test]
fn deep_nesting_is_refused() {
    for text in ["a = ".to_owned() + &"[".repeat(100_000), "a.".repeat(100_000) + "a = 1"] {
        assert!(parse(&text).is_err());
    }
}
