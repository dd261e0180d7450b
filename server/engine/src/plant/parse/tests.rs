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

/// One change to the sound file, the text that must be pointed at, and what must be said.
const FAULTY: &[(&str, &str, &str, &str)] = &[
    // The TOML itself.
    (
        "phase = \"vapour\"",
        "phase = vapour",
        "vapour",
        "this is not valid TOML: string values must be quoted, expected literal string",
    ),
    ("[search]", "[search", "", "this is not valid TOML: unclosed table, expected `]`"),
    ("phase = \"vapour\"", "fluid = \"water\"", "fluid", "`fluid` is defined twice"),
    // Keys and types.
    ("format = 1", "format = 2", "2", "this version reads plant files of format 1, not 2"),
    ("format = 1\n", "", "", "the plant file needs `format`, for example format = 1"),
    ("[steady]", "[steddy]", "steddy", "unknown key `steddy` in the plant file; did you mean `steady`?"),
    ("phase =", "phaze =", "phaze", "unknown key `phaze` in stream `main_steam`; did you mean `phase`?"),
    (
        "reversible = true",
        "reversible = \"yes\"",
        "\"yes\"",
        "`reversible` must be true or false, not a string",
    ),
    (
        "typical = 360",
        "typical = \"360 t/h\"",
        "\"360 t/h\"",
        "`typical` must be a number without quotes, not a string",
    ),
    ("typical = 360", "typical = inf", "inf", "`typical` must be a finite number"),
    (
        "closes = [\"mass\"]",
        "closes = \"mass\"",
        "\"mass\"",
        "`closes` must be a list in brackets, not a string",
    ),
    (
        "closes = [\"mass\"]",
        "closes = [\"maas\"]",
        "\"maas\"",
        "`closes` can't be `maas`; did you mean `mass`? (it can be `mass`, `energy`)",
    ),
    (
        "stages = 12",
        "stages = { a = 1 }",
        "{ a = 1 }",
        "`stages` must be a string, a number, true or false, or a list of them",
    ),
    ("kind = \"boiler\"\n", "", "boiler", "equipment `boiler` needs `kind`, for example kind = \"turbine\""),
    ("[search]", "[[search]]", "[[search]]", "`search` must be a table, not a list"),
    // The site.
    ("name = \"Skerrow Point unit 1\"\n", "", "plant", "[plant] needs `name`, for example name = \"Unit 1\""),
    (
        "Europe/Oslo",
        "Europe Oslo",
        "Europe Oslo",
        "`Europe Oslo` is no name of a time zone; write one such as Europe/Oslo or UTC",
    ),
    (
        "1.013 bar",
        "1013 bar",
        "\"1013 bar\"",
        "the pressure of the surroundings must lie between 0.3 and 1.2 bar",
    ),
    (
        "1.013 bar",
        "0 barg",
        "\"0 barg\"",
        "`pressure` must be an absolute pressure, for example \"1.013 bar\"",
    ),
    (
        "1.013 bar",
        "15 degC",
        "\"15 degC\"",
        "`pressure` is a pressure: write it with such a unit, for example \"1.013 bar\"",
    ),
    ("mass_flow = \"kg/s\"", "mass_flow = \"bar\"", "\"bar\"", "`bar` is no unit of a mass flow"),
    (
        "mass_flow = \"kg/s\"",
        "massflow = \"kg/s\"",
        "\"kg/s\"",
        "`units` knows no dimension `massflow`; did you mean `mass_flow`?",
    ),
    (
        "mass_flow = \"kg/s\"",
        "heat_rate = \"kJ/kWh\"",
        "\"kJ/kWh\"",
        "a heat rate is heat over energy and has no dimension of its own: write `unit` at its indicator",
    ),
    (
        "mass_flow = \"kg/s\"",
        "pressure = \"barg\"",
        "\"barg\"",
        "pressures are shown as absolute pressures: `barg` can't be their display unit",
    ),
    // Names and what refers to them.
    (
        "[tags.QT-3001]",
        "[tags.boiler]",
        "boiler",
        "`boiler` names a piece of equipment already (line 31); streams, equipment, tags, shafts and indicators share one name space",
    ),
    (
        "[tags.QT-3001]",
        "[tags.\"QT 3001\"]",
        "QT 3001",
        "`QT 3001` can't name a tag: a name has letters, digits, `_` and `-` only",
    ),
    ("[tags.QT-3001]", "[tags.3001]", "3001", "`3001` can't name a tag: it could be taken for a number"),
    (
        "[tags.QT-3001]",
        "[tags.surroundings]",
        "surroundings",
        "`surroundings` can't name a tag: the word is reserved",
    ),
    (
        "[fluids.thermal_oil]",
        "[fluids.water]",
        "water",
        "the fluid `water` exists without declaration; choose another name",
    ),
    (
        "fluid = \"water\"\nto",
        "fluid = \"thermal_oli\"\nto",
        "thermal_oli",
        "there is no fluid `thermal_oli`; did you mean `thermal_oil`?",
    ),
    (
        "fluid = \"water\"\nto",
        "fluid = \"brine\"\nto",
        "brine",
        "there is no fluid `brine`; declare it in [fluids.brine]",
    ),
    (
        "from = \"boiler.steam\"",
        "from = \"boilr.steam\"",
        "boilr.steam",
        "there is no equipment `boilr`; did you mean `boiler`?",
    ),
    (
        "from = \"boiler.steam\"",
        "from = \"FT-1001.steam\"",
        "FT-1001.steam",
        "`FT-1001` is a tag, not a piece of equipment",
    ),
    (
        "from = \"boiler.steam\"",
        "from = \"boiler\"",
        "boiler",
        "`from` must be EQUIPMENT.PORT, for example \"hp_turbine.inlet\", not `boiler`",
    ),
    (
        "to = \"boiler.feedwater\"",
        "to = \"hp_turbine.inlet\"",
        "hp_turbine.inlet",
        "stream `main_steam` is connected to `hp_turbine.inlet` already; a port takes one stream",
    ),
    (
        "to = \"boiler.feedwater\"",
        "to = \"surroundings\"",
        "surroundings",
        "leave `to` out: the stream then ends in the surroundings",
    ),
    (
        "from = \"hp_turbine.outlet\"",
        "",
        "exhaust",
        "stream `exhaust` touches no equipment: write `from`, `to` or both, for example to = \"boiler.feedwater\"",
    ),
    (
        "members = [\"hp_turbine\", \"generator\"]",
        "members = [\"hp_turbine\", \"generatr\"]",
        "generatr",
        "there is no equipment `generatr`; did you mean `generator`?",
    ),
    (
        "members = [\"hp_turbine\", \"generator\"]",
        "members = [\"generator\", \"generator\"]",
        "generator",
        "`generator` stands twice in this list",
    ),
    (
        "watch = [\"FT-1001\"]",
        "watch = [\"FT1001\"]",
        "FT1001",
        "there is no tag `FT1001`; did you mean `FT-1001`?",
    ),
    (
        "tags = [\"FT-1001\", \"PT-2001\"]",
        "tags = [\"FT-1001\"]",
        "[\"FT-1001\"]",
        "an error is shared by two tags or more",
    ),
    // Units and spreads.
    ("unit = \"t/h\"", "unit = \"T/h\"", "\"T/h\"", "unknown unit `T/h`; did you mean `t/h`?"),
    (
        "area = \"500 cm2\"",
        "area = \"500 cm\"",
        "\"500 cm\"",
        "`area` is an area: write it with such a unit, for example \"0.05 m2\"",
    ),
    ("area = \"500 cm2\"", "area = \"-1 m2\"", "\"-1 m2\"", "`area` must be above zero"),
    (
        "area = \"500 cm2\"",
        "area = \"wide\"",
        "\"wide\"",
        "`wide` does not start with a number; write a number and its unit, such as `1.2 MW`",
    ),
    ("area = \"500 cm2\"", "area = 0.05", "0.05", "`area` must be a string in quotes, not a number"),
    ("sigma = \"2 mbar\"", "sigma = \"2\"", "\"2\"", "`2` has no unit; write `2 mbar vac` or `2 %`"),
    (
        "sigma = \"2 mbar\"",
        "sigma = \"2 degC\"",
        "\"2 degC\"",
        "`degC` is a unit of a temperature, but the readings in `mbar vac` are a pressure; write it in `mbar vac`, or in `%` of the reading",
    ),
    ("sigma = \"2 mbar\"", "sigma = \"-2 mbar\"", "\"-2 mbar\"", "`-2 mbar` must not be negative"),
    (
        "sigma = \"2 mbar\"",
        "sigma = \"2 % rdg\"",
        "\"2 % rdg\"",
        "`2 % rdg`: write `%` (of the reading) or `% span`",
    ),
    (
        "sigma = \"2 mbar\"",
        "",
        "PT-2001",
        "tag `PT-2001` needs `accuracy` or `sigma`, for example accuracy = \"0.6 %\"",
    ),
    (
        "sigma = \"2 mbar\"",
        "sigma = \"2 mbar\"\naccuracy = \"1 %\"",
        "\"2 mbar\"",
        "tag `PT-2001` has both `accuracy` and `sigma`: leave one out",
    ),
    ("sigma = \"2 mbar\"", "sigma = []", "[]", "`sigma` needs one to 16 parts, for example \"0.5 %\""),
    (
        "sigma = \"0.3 pp\"",
        "sigma = \"0.3 % span\"",
        "\"0.3 % span\"",
        "`sigma` speaks of the span: tag `QT-3001` needs `span` = [low, high]",
    ),
    (
        "unit = \"degC\"",
        "unit = \"degC\"\nrepeatability = \"1 K\"",
        "\"1 K\"",
        "`repeatability` is a part of `accuracy` or `sigma`: write one of them too",
    ),
    (
        "span = [0, 450]",
        "span = [450, 0]",
        "[450, 0]",
        "the low end of the span, 450, must lie below the high end, 0",
    ),
    ("span = [0, 450]", "span = [450]", "[450]", "`span` must have two numbers: [low, high]"),
    (
        "cut_off = \"5 t/h\"",
        "cut_off = \"5 bar\"",
        "\"5 bar\"",
        "`cut_off` is a mass flow: write it with such a unit, for example \"5 t/h\"",
    ),
    (
        "offset = \"1 mbar\"",
        "cut_off = \"1 mbar\"",
        "\"1 mbar\"",
        "readings in `mbar vac` have no natural zero, so they can't have a `cut_off`",
    ),
    (
        "offset = \"1 mbar\"",
        "offset = \"1 t/h\"",
        "\"1 t/h\"",
        "`offset` is added to readings in `mbar vac`: write it in a unit of a pressure",
    ),
    ("factor = 0.988", "factor = 0", "0", "`factor` must be above zero, not 0"),
    (
        "fault_rate = 0.1",
        "fault_rate = 2",
        "2",
        "`fault_rate` must be between 0 and 1, for example 0.02, not 2",
    ),
    (
        "hold = \"36 h\"",
        "hold = \"36\"",
        "\"36\"",
        "`hold` is a time: write it with such a unit, for example \"36 h\"",
    ),
    (
        "hold = \"36 h\"",
        "water_leg = \"3 m\"",
        "\"3 m\"",
        "only pressures have a `water_leg`, but these readings are in `t/h`",
    ),
    (
        "roll_over = 1_000_000",
        "roll_over = 1, rollover = 1",
        "rollover",
        "unknown key `rollover` in `counter`; did you mean `roll_over`?",
    ),
    (
        "sigma = \"0.4 %\"",
        "sigma = \"0.4 bar\"",
        "\"0.4 bar\"",
        "`bar` is a unit of a pressure, but the readings in `t/h` are a mass flow; write it in `t/h`, or in `%` of the reading",
    ),
    // Givens.
    (
        "\"hp_turbine.heat_loss\" =",
        "hp_turbine.heat_loss =",
        "hp_turbine",
        "write the whole name in quotes, such as \"hp_turbine.heat_loss\" = \"0 kW\"",
    ),
    (
        "\"0 kW\"",
        "true",
        "true",
        "`hp_turbine.heat_loss` must be an amount such as \"1.2 MW\", a number, or \"unknown\"",
    ),
    (
        "\"0.4 MW\"",
        "\"0.4 bar\"",
        "\"0.4 bar\"",
        "`sigma` is a pressure, but `value` is a power: write both in units of one dimension",
    ),
    (
        "\"0.4 MW\"",
        "\"0 MW\"",
        "\"0 MW\"",
        "`sigma` must be above zero; for an exact value write the value alone, without a table",
    ),
    (
        ", sigma = \"0.4 MW\"",
        "",
        "boiler.heat_loss",
        "given `boiler.heat_loss` needs `sigma`, for example sigma = \"0.4 MW\"",
    ),
    // What is computed, and how.
    (
        "\"bias\", \"loss\"",
        "\"bias\", \"loses\"",
        "\"loses\"",
        "`hypotheses` can't be `loses`; did you mean `loss`? (it can be `bias`, `loss`, `given`, `shared`)",
    ),
    (
        "period = \"30 min\"",
        "period = \"30 mm\"",
        "\"30 mm\"",
        "`period` is a time: write it with such a unit, for example \"60 min\"",
    ),
    (
        "unit = \"kJ/kWh\"",
        "unit = \"kJ/kWhr\"",
        "\"kJ/kWhr\"",
        "unknown unit `kJ/kWhr`; did you mean `kJ/kWh`?",
    ),
    // What later versions read.
    (
        "kind = \"liquid\"",
        "kind = \"gas\"",
        "\"gas\"",
        "this version does not support fluids of kind `gas` yet",
    ),
    (
        "fluid = \"water\"\nto",
        "fluid = \"air\"\nto",
        "air",
        "this version does not support the fluid `air` yet",
    ),
    (
        "from = \"boiler.steam\"",
        "from = \"surroundings\"",
        "surroundings",
        "this version does not support air from the surroundings yet",
    ),
    (
        "stages = 12",
        "in_service = \"JT-120B > 100\"",
        "in_service",
        "this version does not support `in_service` yet",
    ),
    ("stages = 12", "level_area = \"38 m2\"", "level_area", "this version does not support `level_area` yet"),
    (
        "elevation = \"-2 m\"",
        "in_service = \"JT-120B > 100\"",
        "in_service",
        "this version does not support `in_service` yet",
    ),
    ("typical = 360", "meter = \"volumetric\"", "meter", "this version does not support `meter` yet"),
    (
        "typical = 360",
        "density = { pressure = \"1 bar\" }",
        "density",
        "this version does not support `density` yet",
    ),
    (
        "typical = 360",
        "element = { kind = \"orifice\" }",
        "element",
        "this version does not support `element` yet",
    ),
    (
        "repeatability = \"0.15 %\"",
        "repeatability = \"0.1 % dp span\"",
        "\"0.1 % dp span\"",
        "this version does not support `% dp span` yet",
    ),
];

#[test]
fn every_fault_says_what_is_wrong_at_its_place() {
    let mut surprises = String::new();
    for (sound, faulty, at, message) in FAULTY {
        assert!(SOUND.contains(sound), "{sound}");
        let text = SOUND.replacen(sound, faulty, 1);
        let faults = parse(&text).expect_err(faulty);
        let found: Vec<(&str, &str)> =
            faults.iter().map(|f| (&text[f.span.start..f.span.end], f.message.as_str())).collect();
        if found != [(*at, *message)] {
            surprises.push_str(&format!("{sound} -> {faulty}: {found:?}\n"));
        }
    }
    assert!(surprises.is_empty(), "{surprises}");
}

#[test]
fn all_faults_are_given_at_once_in_their_order() {
    let text = SOUND
        .replace("0.6 %", "0.6 percent")
        .replace("boiler.steam", "boilr.steam")
        .replace("[steady]", "[stead]");
    let faults = parse(&text).unwrap_err();
    assert_eq!(faults.len(), 3, "{faults:?}");
    assert!(faults.is_sorted_by_key(|fault| fault.span));
}

#[test]
fn a_flood_of_faults_is_cut_off() {
    let mut text = SOUND.to_owned();
    for i in 0..5000 {
        text.push_str(&format!("\n[streams.s{i}]\nfluid = \"watr\"\nfrom = \"nowhere{i}.outlet\""));
    }
    assert_eq!(parse(&text).unwrap_err().len(), 200);
    assert_eq!(
        parse(&"#".repeat(LONGEST_FILE + 1)).unwrap_err()[0].message,
        "the plant file is larger than 4 MiB"
    );
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
