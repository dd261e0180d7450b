//! What is said of each fault.

use std::fmt::Write;

use super::{LONGEST_FILE, SOUND, parse};

/// One change to the sound file, the text that must be pointed at, and what must be said.
#[rustfmt::skip] // One row a fault.
const FAULTY: &[(&str, &str, &str, &str)] = &[
    // The TOML itself.
    ("phase = \"vapour\"", "phase = vapour", "vapour", "this is not valid TOML: string values must be quoted, expected literal string"),
    ("[search]", "[search", "", "this is not valid TOML: unclosed table, expected `]`"),
    ("phase = \"vapour\"", "fluid = \"water\"", "fluid", "`fluid` is defined twice"),
    // Keys and types.
    ("format = 1", "format = 2", "2", "this version reads plant files of format 1, not 2"),
    ("format = 1\n", "", "", "the plant file needs `format`, for example format = 1"),
    ("[steady]", "[steddy]", "steddy", "unknown key `steddy` in the plant file; did you mean `steady`?"),
    ("phase =", "phaze =", "phaze", "unknown key `phaze` in stream `main_steam`; did you mean `phase`?"),
    ("reversible = true", "reversible = \"yes\"", "\"yes\"", "`reversible` must be true or false, not a string"),
    ("typical = 360", "typical = \"360 t/h\"", "\"360 t/h\"", "`typical` must be a number without quotes, not a string"),
    ("typical = 360", "typical = inf", "inf", "`typical` must be a finite number"),
    ("closes = [\"mass\"]", "closes = \"mass\"", "\"mass\"", "`closes` must be a list in brackets, not a string"),
    ("closes = [\"mass\"]", "closes = [\"maas\"]", "\"maas\"", "`closes` can't be `maas`; did you mean `mass`? (it can be `mass`, `energy`)"),
    ("stages = 12", "stages = { a = 1 }", "{ a = 1 }", "`stages` must be a string, a number, true or false, or a list of them"),
    ("kind = \"boiler\"\n", "", "boiler", "equipment `boiler` needs `kind`, for example kind = \"turbine\""),
    ("[search]", "[[search]]", "[[search]]", "`search` must be a table, not a list"),
    // The site.
    ("name = \"Skerrow Point unit 1\"\n", "", "plant", "[plant] needs `name`, for example name = \"Unit 1\""),
    ("Europe/Oslo", "Europe Oslo", "Europe Oslo", "`Europe Oslo` is no name of a time zone; write one such as Europe/Oslo or UTC"),
    ("1.013 bar", "1013 bar", "\"1013 bar\"", "the pressure of the surroundings must lie between 0.3 and 1.2 bar"),
    ("1.013 bar", "0 barg", "\"0 barg\"", "`pressure` must be an absolute pressure, for example \"1.013 bar\""),
    ("1.013 bar", "15 degC", "\"15 degC\"", "`pressure` is a pressure: write it with such a unit, for example \"1.013 bar\""),
    ("mass_flow = \"kg/s\"", "mass_flow = \"bar\"", "\"bar\"", "`bar` is no unit of a mass flow"),
    ("mass_flow = \"kg/s\"", "massflow = \"kg/s\"", "\"kg/s\"", "`units` knows no dimension `massflow`; did you mean `mass_flow`?"),
    ("mass_flow = \"kg/s\"", "heat_rate = \"kJ/kWh\"", "\"kJ/kWh\"", "a heat rate is heat over energy and has no dimension of its own: write `unit` at its indicator"),
    ("mass_flow = \"kg/s\"", "pressure = \"barg\"", "\"barg\"", "pressures are shown as absolute pressures: `barg` can't be their display unit"),
    // Names and what refers to them.
    ("[tags.QT-3001]", "[tags.boiler]", "boiler", "`boiler` names a piece of equipment already (line 31); streams, equipment, tags, shafts and indicators share one name space"),
    ("[tags.QT-3001]", "[tags.\"QT 3001\"]", "QT 3001", "`QT 3001` can't name a tag: a name has letters, digits, `_` and `-` only"),
    ("[tags.QT-3001]", "[tags.3001]", "3001", "`3001` can't name a tag: it could be taken for a number"),
    ("[tags.QT-3001]", "[tags.surroundings]", "surroundings", "`surroundings` can't name a tag: the word is reserved"),
    ("[fluids.thermal_oil]", "[fluids.water]", "water", "the fluid `water` exists without declaration; choose another name"),
    ("fluid = \"water\"\nto", "fluid = \"thermal_oli\"\nto", "thermal_oli", "there is no fluid `thermal_oli`; did you mean `thermal_oil`?"),
    ("fluid = \"water\"\nto", "fluid = \"brine\"\nto", "brine", "there is no fluid `brine`; declare it in [fluids.brine]"),
    ("from = \"boiler.steam\"", "from = \"boilr.steam\"", "boilr.steam", "there is no equipment `boilr`; did you mean `boiler`?"),
    ("from = \"boiler.steam\"", "from = \"FT-1001.steam\"", "FT-1001.steam", "`FT-1001` is a tag, not a piece of equipment"),
    ("from = \"boiler.steam\"", "from = \"boiler\"", "boiler", "`from` must be EQUIPMENT.PORT, for example \"hp_turbine.inlet\", not `boiler`"),
    ("from = \"boiler.steam\"", "from = \"boiler.main-steam\"", "boiler.main-steam", "`from` must be EQUIPMENT.PORT, for example \"hp_turbine.inlet\", not `boiler.main-steam`"),
    ("to = \"boiler.feedwater\"", "to = \"hp_turbine.inlet\"", "hp_turbine.inlet", "stream `main_steam` is connected to `hp_turbine.inlet` already; a port takes one stream"),
    ("to = \"boiler.feedwater\"", "to = \"surroundings\"", "surroundings", "leave `to` out: the stream then ends in the surroundings"),
    ("from = \"hp_turbine.outlet\"", "", "exhaust", "stream `exhaust` touches no equipment: write `from`, `to` or both, for example to = \"boiler.feedwater\""),
    ("members = [\"hp_turbine\", \"generator\"]", "members = [\"hp_turbine\", \"generatr\"]", "generatr", "there is no equipment `generatr`; did you mean `generator`?"),
    ("members = [\"hp_turbine\", \"generator\"]", "members = [\"generator\", \"generator\"]", "generator", "`generator` stands twice in this list"),
    ("watch = [\"FT-1001\"]", "watch = [\"FT1001\"]", "FT1001", "there is no tag `FT1001`; did you mean `FT-1001`?"),
    ("tags = [\"FT-1001\", \"PT-2001\"]", "tags = [\"FT-1001\"]", "[\"FT-1001\"]", "an error is shared by two tags or more"),
    // Units and spreads.
    ("unit = \"t/h\"", "unit = \"T/h\"", "\"T/h\"", "unknown unit `T/h`; did you mean `t/h`?"),
    ("area = \"500 cm2\"", "area = \"500 cm\"", "\"500 cm\"", "`area` is an area: write it with such a unit, for example \"0.05 m2\""),
    ("area = \"500 cm2\"", "area = \"-1 m2\"", "\"-1 m2\"", "`area` must be above zero"),
    ("area = \"500 cm2\"", "area = \"wide\"", "\"wide\"", "`wide` does not start with a number; write a number and its unit, such as `1.2 MW`"),
    ("area = \"500 cm2\"", "area = 0.05", "0.05", "`area` must be a string in quotes, not a number"),
    ("sigma = \"2 mbar\"", "sigma = \"2\"", "\"2\"", "`2` has no unit; write `2 mbar vac` or `2 %`"),
    ("sigma = \"2 mbar\"", "sigma = \"2 degC\"", "\"2 degC\"", "`degC` is a unit of a temperature, but the readings in `mbar vac` are a pressure; write it in `mbar vac`, or in `%` of the reading"),
    ("sigma = \"2 mbar\"", "sigma = \"-2 mbar\"", "\"-2 mbar\"", "`-2 mbar` must not be negative"),
    ("sigma = \"2 mbar\"", "sigma = \"2 % rdg\"", "\"2 % rdg\"", "`2 % rdg`: write `%` (of the reading) or `% span`"),
    ("sigma = \"2 mbar\"", "", "PT-2001", "tag `PT-2001` needs `accuracy` or `sigma`, for example accuracy = \"0.6 %\""),
    ("sigma = \"2 mbar\"", "sigma = \"2 mbar\"\naccuracy = \"1 %\"", "\"2 mbar\"", "tag `PT-2001` has both `accuracy` and `sigma`: leave one out"),
    ("sigma = \"2 mbar\"", "sigma = []", "[]", "`sigma` needs one to 16 parts, for example \"0.5 %\""),
    ("sigma = \"0.3 pp\"", "sigma = \"0.3 % span\"", "\"0.3 % span\"", "`sigma` speaks of the span: tag `QT-3001` needs `span` = [low, high]"),
    ("unit = \"degC\"", "unit = \"degC\"\nrepeatability = \"1 K\"", "\"1 K\"", "`repeatability` is a part of `accuracy` or `sigma`: write one of them too"),
    ("span = [0, 450]", "span = [450, 0]", "[450, 0]", "the low end of the span, 450, must lie below the high end, 0"),
    ("span = [0, 450]", "span = [450]", "[450]", "`span` must have two numbers: [low, high]"),
    ("cut_off = \"5 t/h\"", "cut_off = \"5 bar\"", "\"5 bar\"", "`cut_off` is a mass flow: write it with such a unit, for example \"5 t/h\""),
    ("offset = \"1 mbar\"", "cut_off = \"1 mbar\"", "\"1 mbar\"", "readings in `mbar vac` have no natural zero, so they can't have a `cut_off`"),
    ("offset = \"1 mbar\"", "offset = \"1 t/h\"", "\"1 t/h\"", "`offset` is added to readings in `mbar vac`: write it in a unit of a pressure"),
    ("factor = 0.988", "factor = 0", "0", "`factor` must be above zero, not 0"),
    ("fault_rate = 0.1", "fault_rate = 2", "2", "`fault_rate` must be between 0 and 1, for example 0.02, not 2"),
    ("hold = \"36 h\"", "hold = \"36\"", "\"36\"", "`hold` is a time: write it with such a unit, for example \"36 h\""),
    ("hold = \"36 h\"", "water_leg = \"3 m\"", "\"3 m\"", "only pressures have a `water_leg`, but these readings are in `t/h`"),
    ("roll_over = 1_000_000", "roll_over = 1, rollover = 1", "rollover", "unknown key `rollover` in `counter`; did you mean `roll_over`?"),
    ("sigma = \"0.4 %\"", "sigma = \"0.4 bar\"", "\"0.4 bar\"", "`bar` is a unit of a pressure, but the readings in `t/h` are a mass flow; write it in `t/h`, or in `%` of the reading"),
    // Givens.
    ("\"hp_turbine.heat_loss\" =", "hp_turbine.heat_loss =", "hp_turbine", "write the whole name in quotes, such as \"hp_turbine.heat_loss\" = \"0 kW\""),
    ("\"0 kW\"", "true", "true", "`hp_turbine.heat_loss` must be an amount such as \"1.2 MW\", a number, or \"unknown\""),
    ("\"0.4 MW\"", "\"0.4 bar\"", "\"0.4 bar\"", "`sigma` is a pressure, but `value` is a power: write both in units of one dimension"),
    ("\"0.4 MW\"", "\"0 MW\"", "\"0 MW\"", "`sigma` must be above zero; for an exact value write the value alone, without a table"),
    (", sigma = \"0.4 MW\"", "", "boiler.heat_loss", "given `boiler.heat_loss` needs `sigma`, for example sigma = \"0.4 MW\""),
    // What is computed, and how.
    ("\"bias\", \"loss\"", "\"bias\", \"loses\"", "\"loses\"", "`hypotheses` can't be `loses`; did you mean `loss`? (it can be `bias`, `loss`, `given`, `shared`)"),
    ("period = \"30 min\"", "period = \"30 mm\"", "\"30 mm\"", "`period` is a time: write it with such a unit, for example \"60 min\""),
    ("unit = \"kJ/kWh\"", "unit = \"kJ/kWhr\"", "\"kJ/kWhr\"", "unknown unit `kJ/kWhr`; did you mean `kJ/kWh`?"),
    // What later versions read.
    ("kind = \"liquid\"", "kind = \"gas\"", "\"gas\"", "this version does not support fluids of kind `gas` yet"),
    ("fluid = \"water\"\nto", "fluid = \"air\"\nto", "air", "this version does not support the fluid `air` yet"),
    ("from = \"boiler.steam\"", "from = \"surroundings\"", "surroundings", "this version does not support air from the surroundings yet"),
    ("stages = 12", "in_service = \"JT-120B > 100\"", "in_service", "this version does not support `in_service` yet"),
    ("stages = 12", "level_area = \"38 m2\"", "level_area", "this version does not support `level_area` yet"),
    ("elevation = \"-2 m\"", "in_service = \"JT-120B > 100\"", "in_service", "this version does not support `in_service` yet"),
    ("typical = 360", "meter = \"volumetric\"", "meter", "this version does not support `meter` yet"),
    ("typical = 360", "density = { pressure = \"1 bar\" }", "density", "this version does not support `density` yet"),
    ("typical = 360", "element = { kind = \"orifice\" }", "element", "this version does not support `element` yet"),
    ("repeatability = \"0.15 %\"", "repeatability = \"0.1 % dp span\"", "\"0.1 % dp span\"", "this version does not support `% dp span` yet"),
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
            writeln!(surprises, "{sound} -> {faulty}: {found:?}").unwrap();
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
        write!(text, "\n[streams.s{i}]\nfluid = \"watr\"\nfrom = \"nowhere{i}.outlet\"").unwrap();
    }
    assert_eq!(parse(&text).unwrap_err().len(), 200);
    assert_eq!(
        parse(&"#".repeat(LONGEST_FILE + 1)).unwrap_err()[0].message,
        "the plant file is larger than 4 MiB"
    );
}
