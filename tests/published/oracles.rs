//! What a balance must get right whatever the plant, on small plants whose answer can be had by hand or by dense linear
//! algebra.

use crate::support::{Case, Told, balance, compiled, near, path, readings};
use meterwright_engine::{CompiledPlant, Outcome, QuantityClass, Reading, TagClass, Verdict};
use nalgebra::{DMatrix, DVector};

/// A plant of water streams; each piece is a line of a table.
fn plant(rest: &str) -> CompiledPlant {
    compiled(&format!("format = 1\n[plant]\nname = \"bench\"\n{rest}"))
}

/// Streams of a flow network: name, from, to.
fn network(streams: &[(&str, &str, &str)], nodes: &[&str], tags: &[(&str, &str, &str)]) -> String {
    let mut text = String::new();
    for (name, from, to) in streams {
        text += &format!("[streams.{name}]\nfluid = \"water\"\nreversible = true\n");
        if !from.is_empty() {
            text += &format!("from = \"{from}.outlet.{name}\"\n");
        }
        if !to.is_empty() {
            text += &format!("to = \"{to}.inlet.{name}\"\n");
        }
    }
    for node in nodes {
        text += &format!("[equipment.{node}]\nkind = \"header\"\ncloses = [\"mass\"]\n");
    }
    for (tag, stream, sigma) in tags {
        text +=
            &format!("[tags.{tag}]\nreads = \"{stream}.mass_flow\"\nunit = \"kg/s\"\nsigma = \"{sigma}\"\n");
    }
    text
}

#[test]
fn a_closed_circuit_writes_one_mass_balance_too_many() {
    let streams = [("a", "n1", "n2"), ("b", "n2", "n3"), ("c", "n3", "n1")];
    let tags = [("FA", "a", "1 kg/s"), ("FB", "b", "1 kg/s"), ("FC", "c", "2 kg/s")];
    let plant = plant(&network(&streams, &["n1", "n2", "n3"], &tags));
    let told = balance(&plant, &readings(&plant, &[("FA", 10.0), ("FB", 11.0), ("FC", 13.0)]));
    // Weighted mean of three readings of one flow: weights 1, 1 and 1/4.
    let mean = (10.0 + 11.0 + 13.0 / 4.0) / 2.25;
    assert_eq!(told.freedom(), 2);
    near("flow", told.quantity("a.mass_flow").value.unwrap(), mean, 1e-12);
    near("sigma", told.quantity("c.mass_flow").sigma.unwrap(), 1.0 / 2.25_f64.sqrt(), 1e-12);
}

#[test]
fn contradictory_exact_givens_are_named() {
    let text = network(&[("a", "", "n"), ("b", "n", "")], &["n"], &[("FA", "a", "1 kg/s")]);
    let plant =
        plant(&format!("{text}[given]\n\"a.mass_flow\" = \"10 kg/s\"\n\"b.mass_flow\" = \"12 kg/s\"\n"));
    let balance = plant.balance(&readings(&plant, &[("FA", 10.0)]), None);
    let Outcome::NotFound { reason } = balance.outcome else { panic!("{:?}", balance.outcome) };
    assert!(reason.contains("n: mass balance"), "{reason}");
    assert!(balance.quantities.is_empty(), "no value is shown");
}

#[test]
fn a_loop_of_unmetered_pipes_is_unknown_and_disturbs_nothing() {
    let streams = [
        ("feed", "", "n1"),
        ("left", "n1", "n2"),
        ("right", "n1", "n2"),
        ("out", "n2", ""),
        ("side", "n2", ""),
    ];
    let tags = [("FF", "feed", "1 kg/s"), ("FO", "out", "1 kg/s"), ("FS", "side", "0.5 kg/s")];
    let plant = plant(&network(&streams, &["n1", "n2"], &tags));
    let told = balance(&plant, &readings(&plant, &[("FF", 100.0), ("FO", 60.0), ("FS", 38.0)]));
    for stream in ["left", "right"] {
        let quantity = told.quantity(&format!("{stream}.mass_flow"));
        assert_eq!(
            (quantity.class, quantity.value, quantity.sigma),
            (QuantityClass::Unobservable, None, None)
        );
    }
    assert_eq!(told.freedom(), 1);
    near("statistic", told.statistic(), 4.0 / 2.25, 1e-12);
}

/// No flow is read, but whatever flows through a pipe without loss leaves with the enthalpy it came with: at equal pressures
/// both thermometers read one temperature, the mean of 60.2 and 59.7 degC, and differ by 0.5 K where 0.5 sqrt(2) is one
/// standard deviation.
#[test]
fn a_pipe_without_a_flow_meter_ties_its_thermometers() {
    let plant = plant(
        r#"
[streams.a]
fluid = "water"
to = "pipe.inlet"
[streams.b]
fluid = "water"
from = "pipe.outlet"
[equipment.pipe]
kind = "pipe"
[given]
"a.pressure" = "6 bar"
"b.pressure" = "6 bar"
[tags.TA]
reads = "a.temperature"
unit = "degC"
sigma = "0.5 K"
[tags.TB]
reads = "b.temperature"
unit = "degC"
sigma = "0.5 K"
"#,
    );
    let told = balance(&plant, &readings(&plant, &[("TA", 60.2), ("TB", 59.7)]));
    assert_eq!(told.quantity("a.mass_flow").class, QuantityClass::Unobservable);
    assert_eq!(told.freedom(), 1);
    near("statistic", told.statistic(), 0.5, 1e-9);
    for tag in ["TA", "TB"] {
        near(tag, told.tag(tag).reconciled.unwrap(), 59.95 + 273.15, 1e-9);
        near(tag, told.tag(tag).reconciled_sigma.unwrap(), 0.5 / 2.0_f64.sqrt(), 1e-9);
    }
}

/// A mixer whose second inlet is shut: exactly no flow, so that its enthalpy drops out.
#[test]
fn the_enthalpy_of_a_branch_without_flow_drops_out() {
    let plant = plant(
        r#"
[streams.main]
fluid = "water"
to = "mixer.inlet.main"
[streams.branch]
fluid = "water"
to = "mixer.inlet.branch"
[streams.out]
fluid = "water"
from = "mixer.outlet"
[equipment.mixer]
kind = "mixer"
[given]
"branch.mass_flow" = "0 kg/s"
"main.pressure" = "5 bar"
"out.pressure" = "5 bar"
[tags.FM]
reads = "main.mass_flow"
unit = "kg/s"
sigma = "0.1 kg/s"
[tags.FO]
reads = "out.mass_flow"
unit = "kg/s"
sigma = "0.1 kg/s"
[tags.TM]
reads = "main.temperature"
unit = "degC"
sigma = "1 K"
[tags.TO]
reads = "out.temperature"
unit = "degC"
sigma = "1 K"
"#,
    );
    let told = balance(&plant, &readings(&plant, &[("FM", 10.0), ("FO", 10.2), ("TM", 60.0), ("TO", 61.0)]));
    assert_eq!(told.quantity("branch.enthalpy").value, None);
    assert_eq!(told.freedom(), 2);
    near("flow", told.quantity("out.mass_flow").value.unwrap(), 10.1, 1e-9);
    near("temperature", told.tag("TO").reconciled.unwrap() - 273.15, 60.5, 1e-6);
    near("sigma", told.tag("TO").reconciled_sigma.unwrap(), 0.5_f64.sqrt(), 1e-6);
}

#[test]
fn a_deaerator_s_outlet_lies_on_the_saturation_line() {
    let plant = plant(
        r#"
[streams.water]
fluid = "water"
to = "deaerator.inlet.water"
[streams.steam]
fluid = "water"
to = "deaerator.inlet.steam"
[streams.feed]
fluid = "water"
from = "deaerator.outlet"
[equipment.deaerator]
kind = "deaerator"
[given]
"water.pressure" = "8 bar"
"steam.pressure" = "5 bar"
[tags.F]
reads = "water.mass_flow"
unit = "t/h"
sigma = "0.5 %"
[tags.TW]
reads = "water.temperature"
unit = "degC"
sigma = "0.5 K"
[tags.TS]
reads = "steam.temperature"
unit = "degC"
sigma = "1 K"
[tags.P]
reads = "feed.pressure"
unit = "bar"
sigma = "0.03 bar"
[tags.T]
reads = "feed.temperature"
unit = "degC"
sigma = "0.5 K"
"#,
    );
    let told = balance(
        &plant,
        &readings(&plant, &[("F", 300.0), ("TW", 120.0), ("TS", 250.0), ("P", 4.7), ("T", 151.0)]),
    );
    assert_eq!(told.freedom(), 1);
    let pressure = told.quantity("feed.pressure").value.unwrap();
    let (saturation, _) = meterwright_thermo::water::saturation::temperature(pressure).unwrap();
    near("saturation", told.quantity("feed.temperature").value.unwrap(), saturation, 1e-9);
    // 83.3 kg/s from 120 to 150 degC by steam of 2.96 MJ/kg: 83.3 * (0.632 - 0.504) / (2.96 - 0.632) = 4.6 kg/s.
    near("steam", told.quantity("steam.mass_flow").value.unwrap(), 4.6, 0.1);
}

/// One pressure read in four references must be one pressure.
#[test]
fn gauge_vacuum_and_absolute_readings_agree_with_and_without_a_barometer() {
    let tags = r#"
[streams.a]
fluid = "water"
to = "v.inlet"
[streams.b]
fluid = "water"
from = "v.outlet"
[equipment.v]
kind = "valve"
closes = ["mass"]
[tags.PA]
reads = "a.pressure"
unit = "mbar"
sigma = "2 mbar"
[tags.PG]
reads = "a.pressure"
unit = "mbarg"
sigma = "2 mbar"
[tags.PV]
reads = "a.pressure"
unit = "mbar vac"
sigma = "2 mbar"
"#;
    let values = [("PA", 400.0), ("PG", -605.0), ("PV", 603.0), ("PB", 1004.0)];
    let surroundings = "surroundings = { pressure = \"1000 mbar\", temperature = \"15 degC\" }\n";
    let fixed = plant(&format!("{surroundings}{tags}"));
    let told = balance(&fixed, &readings(&fixed, &values[..3]));
    near(
        "station pressure exact",
        told.quantity("a.pressure").value.unwrap(),
        (400.0 + 395.0 + 397.0) / 3.0 * 100.0,
        1e-6,
    );
    assert_eq!(told.freedom(), 2);
    let barometer = "[tags.PB]\nreads = \"surroundings.pressure\"\nunit = \"mbar\"\nsigma = \"1 mbar\"\n";
    let read = plant(&format!("{surroundings}{tags}{barometer}"));
    let told = balance(&read, &readings(&read, &values));
    // Least squares for pressure p and station pressure s by the normal equations.
    let (w, b) = (0.25, 1.0);
    let matrix = DMatrix::from_row_slice(2, 2, &[3.0 * w, -2.0 * w, -2.0 * w, 2.0 * w + b]);
    let right = DVector::from_vec(vec![w * (400.0 - 605.0 - 603.0), w * (605.0 + 603.0) + b * 1004.0]);
    let solved = matrix.clone().lu().solve(&right).unwrap();
    let covariance = matrix.try_inverse().unwrap();
    near("pressure", told.quantity("a.pressure").value.unwrap(), solved[0] * 100.0, 1e-6);
    near("station", told.quantity("surroundings.pressure").value.unwrap(), solved[1] * 100.0, 1e-6);
    near("sigma", told.quantity("a.pressure").sigma.unwrap(), covariance[(0, 0)].sqrt() * 100.0, 1e-8);
    near("gauge", told.tag("PG").reconciled.unwrap(), (solved[0] - solved[1]) * 100.0, 1e-6);
    near("vacuum", told.tag("PV").reconciled.unwrap(), (solved[0] - solved[1]) * 100.0, 1e-6);
}

#[test]
fn known_corrections_cut_offs_and_spans_act_on_the_reading() {
    let text = network(&[("a", "", "n"), ("b", "n", ""), ("c", "n", "")], &["n"], &[]);
    let plant = plant(&format!(
        "{text}
[tags.FA]
reads = \"a.mass_flow\"
unit = \"kg/s\"
sigma = \"0.1 kg/s\"
factor = 0.98
offset = \"-0.3 kg/s\"
[tags.FB]
reads = \"b.mass_flow\"
unit = \"kg/s\"
sigma = \"0.1 kg/s\"
cut_off = \"0.4 kg/s\"
[tags.FC]
reads = \"c.mass_flow\"
unit = \"kg/s\"
accuracy = [\"1 %\", \"0.5 % span\"]
span = [0, 20]
"
    ));
    let told = balance(&plant, &readings(&plant, &[("FA", 10.0), ("FB", 0.3), ("FC", 9.0)]));
    near("corrected", told.tag("FA").measured.unwrap(), 9.5, 1e-12);
    assert_eq!(told.tag("FB").measured, Some(0.0));
    near("cut off", told.tag("FB").sigma.unwrap(), 0.2, 1e-12);
    near("accuracy", told.tag("FC").sigma.unwrap(), 0.09_f64.hypot(0.1) / 1.959964, 1e-9);
    let told = balance(&plant, &readings(&plant, &[("FA", 10.0), ("FB", 0.3), ("FC", 21.3)]));
    assert_eq!((told.tag("FC").verdict, told.tag("FC").measured), (Verdict::Excluded, None));
    assert!(
        told.balance.warnings.iter().any(|warning| warning.contains("FC")),
        "{:?}",
        told.balance.warnings
    );
}

/// A shared error against dense generalised least squares with the full covariance of the readings.
#[test]
fn a_shared_error_is_generalised_least_squares() {
    let streams = [("a", "", "n"), ("b", "n", ""), ("c", "n", "")];
    let tags = [("FA", "a", "0.5 kg/s"), ("FB", "b", "0.4 kg/s"), ("FC", "c", "0.3 kg/s")];
    let text = network(&streams, &["n"], &tags);
    let plant = plant(&format!("{text}[shared.element]\ntags = [\"FB\", \"FC\"]\nsigma = \"1 %\"\n"));
    let y = [100.0, 62.0, 36.5];
    let told = balance(&plant, &readings(&plant, &[("FA", y[0]), ("FB", y[1]), ("FC", y[2])]));
    let shared = DVector::from_vec(vec![0.0, 0.62, 0.365]);
    let own = DMatrix::from_diagonal(&DVector::from_vec(vec![0.25, 0.16, 0.09]));
    let v = own + &shared * shared.transpose();
    let a = DMatrix::from_row_slice(1, 3, &[1.0, -1.0, -1.0]);
    let y = DVector::from_row_slice(&y);
    let h = &a * &v * a.transpose();
    let gain = &v * a.transpose() / h[(0, 0)];
    let x = &y - &gain * (&a * &y);
    let covariance = &v - &gain * &a * &v;
    near("statistic", told.statistic(), (&a * &y)[(0, 0)].powi(2) / h[(0, 0)], 1e-9);
    assert_eq!(told.freedom(), 1);
    for (place, tag) in ["FA", "FB", "FC"].into_iter().enumerate() {
        let tag = told.tag(tag);
        near("reconciled", tag.reconciled.unwrap(), x[place], 1e-9);
        near("sigma", tag.reconciled_sigma.unwrap(), covariance[(place, place)].sqrt(), 1e-9);
        near("total sigma", tag.sigma.unwrap(), v[(place, place)].sqrt(), 1e-12);
        let redundancy = 1.0 - covariance[(place, place)] / v[(place, place)];
        near("redundancy", tag.redundancy.unwrap(), redundancy, 1e-9);
        // One equation: every test is the root of the same drop, and so is that of each tag's own bias.
        near("test", tag.statistic.unwrap(), told.statistic().sqrt(), 1e-6);
    }
}

/// The repeatable part of an uncertainty is `G diag(r^2) G'` with the gain of the balanced values by the readings.
#[test]
fn repeat_sigma_is_what_the_gain_makes_of_repeatability() {
    let text = network(&[("a", "", "n"), ("b", "n", ""), ("c", "n", "")], &["n"], &[]);
    let tag = |name: &str, stream: &str, sigma: f64, repeat: f64| {
        format!(
            "[tags.{name}]\nreads = \"{stream}.mass_flow\"\nunit = \"kg/s\"\nsigma = \"{sigma} kg/s\"\nrepeatability = \"{repeat} kg/s\"\n"
        )
    };
    let tags = tag("FA", "a", 0.5, 0.1) + &tag("FB", "b", 0.4, 0.2) + &tag("FC", "c", 0.3, 0.05);
    let plant = plant(&format!("{text}{tags}"));
    let mut values = readings(&plant, &[("FA", 100.0), ("FB", 62.0), ("FC", 36.5)]);
    values[1] = Some(Reading { mean: 62.0, standard_error: Some(0.15), samples: 60, sigma: None });
    let told = balance(&plant, &values);
    let v = DMatrix::from_diagonal(&DVector::from_vec(vec![0.25, 0.16 + 0.15 * 0.15, 0.09]));
    let a = DMatrix::from_row_slice(1, 3, &[1.0, -1.0, -1.0]);
    let h = (&a * &v * a.transpose())[(0, 0)];
    let gain = DMatrix::<f64>::identity(3, 3) - &v * a.transpose() * &a / h;
    let r = DMatrix::from_diagonal(&DVector::from_vec(vec![0.01, 0.04 + 0.15 * 0.15, 0.0025]));
    let repeat = &gain * r * gain.transpose();
    for (place, stream) in ["a", "b", "c"].into_iter().enumerate() {
        let quantity = told.quantity(&format!("{stream}.mass_flow"));
        near(stream, quantity.repeat_sigma.unwrap(), repeat[(place, place)].sqrt(), 1e-9);
    }
    // Where no tag states it, nothing is told.
    let silent = plant_without_repeatability();
    let told = balance(&silent, &readings(&silent, &[("FA", 100.0), ("FB", 62.0), ("FC", 36.5)]));
    assert!(told.balance.quantities.iter().all(|quantity| quantity.repeat_sigma.is_none()));
}

fn plant_without_repeatability() -> CompiledPlant {
    let streams = [("a", "", "n"), ("b", "n", ""), ("c", "n", "")];
    let tags = [("FA", "a", "0.5 kg/s"), ("FB", "b", "0.4 kg/s"), ("FC", "c", "0.3 kg/s")];
    plant(&network(&streams, &["n"], &tags))
}

#[test]
fn an_indicator_can_be_read_and_given() {
    let streams = [("a", "", "n"), ("b", "n", ""), ("c", "n", "")];
    let text = network(&streams, &["n"], &[("FA", "a", "1 kg/s"), ("FB", "b", "1 kg/s")]);
    let plant = plant(&format!(
        "{text}
[indicators.both]
formula = \"b.mass_flow + c.mass_flow\"
unit = \"kg/s\"
[indicators.share]
formula = \"c.mass_flow / a.mass_flow\"
unit = \"%\"
[tags.FT]
reads = \"both\"
unit = \"kg/s\"
sigma = \"0.5 kg/s\"
[given]
share = {{ value = \"40 %\", sigma = \"1 pp\" }}
"
    ));
    let told = balance(&plant, &readings(&plant, &[("FA", 100.0), ("FB", 61.0), ("FT", 101.0)]));
    // Readings of a, of a again (b + c), of b, and of the share: two unknowns.
    assert_eq!(told.freedom(), 2);
    let both = told.indicator("both").value.unwrap();
    near("both is a", both, told.quantity("a.mass_flow").value.unwrap(), 1e-10);
    near("the tag reads it", told.tag("FT").reconciled.unwrap(), both, 1e-12);
    assert_eq!(told.tag("FT").class, TagClass::Redundant);
    near(
        "the given holds it",
        told.given("share").reconciled.unwrap(),
        told.indicator("share").value.unwrap(),
        1e-12,
    );
    near("redundancies", told.redundancies(), 2.0, 1e-9);
}

/// A stream whose phase nobody states: the exhaust of a turbine that ends wet.
#[test]
fn an_unstated_wet_exhaust_is_found() {
    let text = |phase: &str| {
        format!(
            r#"
[streams.steam]
fluid = "water"
to = "turbine.inlet"
[streams.exhaust]
fluid = "water"
from = "turbine.outlet"
{phase}
[equipment.turbine]
kind = "turbine"
[tags.F]
reads = "steam.mass_flow"
unit = "t/h"
sigma = "0.5 %"
[tags.P1]
reads = "steam.pressure"
unit = "bar"
sigma = "0.1 bar"
[tags.T1]
reads = "steam.temperature"
unit = "degC"
sigma = "1 K"
[tags.P2]
reads = "exhaust.pressure"
unit = "mbar"
sigma = "1 mbar"
[tags.T2]
reads = "exhaust.temperature"
unit = "degC"
sigma = "0.5 K"
[tags.W]
reads = "turbine.power"
unit = "MW"
sigma = "0.3 %"
"#
        )
    };
    let values = [("F", 100.0), ("P1", 60.0), ("T1", 480.0), ("P2", 45.0), ("T2", 31.2), ("W", 30.0)];
    let stated = plant(&text("phase = \"mixture\""));
    let unstated = plant(&text(""));
    let (told, again) =
        (balance(&stated, &readings(&stated, &values)), balance(&unstated, &readings(&unstated, &values)));
    near("statistic", again.statistic(), told.statistic(), 1e-9);
    near("enthalpy", enthalpy(&again), enthalpy(&told), 1e-3);
    assert!(enthalpy(&told) < 2.5e6, "it is wet");
}

fn enthalpy(told: &Told<'_>) -> f64 {
    told.quantity("exhaust.enthalpy").value.unwrap()
}

/// A third of the tags dropped at random: what is left must still classify, count and close.
#[test]
fn redundancies_count_the_degrees_of_freedom_whatever_is_missing() {
    let text = std::fs::read_to_string(path("tests/plants/reheat_unit.toml")).unwrap();
    let case = Case::with(&text, "tests/plants/reheat_unit");
    let anchor = case.compiled.anchor(&case.rows[0]);
    let mut state = 0x9e37_79b9_7f4a_7c15_u64;
    let mut random = || {
        state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (state >> 33) as f64 / f64::from(1_u32 << 31)
    };
    for seed in 0..100 {
        let row: Vec<Option<Reading>> =
            case.rows[seed % 3].iter().map(|reading| reading.filter(|_| random() > 0.3)).collect();
        let balance = case.compiled.balance(&row, anchor.as_ref());
        assert_eq!(balance.outcome, Outcome::Converged, "seed {seed}");
        let test = balance.global_test.unwrap();
        let bounds = balance.warnings.iter().filter(|warning| warning.contains("lies at its bound")).count();
        let sum: f64 = balance.tags.iter().chain(&balance.givens).filter_map(|tag| tag.redundancy).sum();
        // A bound adds a degree of freedom that no redundancy sees, unless it only settles what nothing determined.
        let unseen = f64::from(test.degrees_of_freedom) - sum;
        near(&format!("seed {seed}"), unseen, unseen.round(), 1e-6);
        assert!((-0.5..bounds as f64 + 0.5).contains(&unseen), "seed {seed}: {unseen} for {bounds} bounds");
        for quantity in &balance.quantities {
            assert_eq!(
                quantity.value.is_none(),
                quantity.class == QuantityClass::Unobservable,
                "seed {seed}"
            );
            assert_eq!(quantity.value.is_some(), quantity.sigma.is_some(), "seed {seed}");
        }
    }
}
