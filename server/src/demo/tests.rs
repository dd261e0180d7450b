use meterwright_engine::{Balance, Reading, plant};

use super::scenario::{BIAS, BIASED, DRIFTING, FOULED, LEAK, WEAR, history, shift};
use super::snapshot::Snapshot;
use super::unit::{Condition, Operation, Unit};
use super::*;
use crate::log::Log;
use crate::period::{Period, Window};
use crate::ready::ReadyPlant;
use crate::steady::{SteadyRule, steady_periods};

const FRESH: Condition = Condition { high_pressure_wear: 0.0, cleanliness: 1.0 };

fn operation(load: f64) -> Operation {
    Operation {
        load,
        cooling_water: 289.45,
        makeup: 291.15,
        station_pressure: 100_600.0,
        steam_offset: [0.0, 0.0],
        auxiliary_steam: 7.8 / 3.6,
        boiler_leak: 0.0,
    }
}

/// What every tag reads without error.
fn exact(state: &Snapshot) -> Vec<Option<Reading>> {
    let plant = plant::parse(PLANT).unwrap();
    let read = plant.tags.iter().map(|tag| {
        let quantity = &tag.reads.as_ref().unwrap().value;
        let value = state.reading(quantity, tag.unit.value);
        Some(Reading::single(value.unwrap_or_else(|| panic!("{quantity} is not simulated"))))
    });
    read.collect()
}

/// The plant file and the simulator, which knows nothing of reconciliation, describe the same unit: without errors
/// everything closes.
#[test]
fn readings_without_error_balance_with_nothing_to_adjust() {
    let unit = Unit::new().unwrap();
    let ready = ReadyPlant::of(PLANT).unwrap();
    for load in [150e6, 120e6, 95e6] {
        let state = unit.predict(&operation(load), &FRESH).unwrap();
        assert!((state.electric_power / load - 1.0).abs() < 1e-12);
        let balance = ready.balance(&exact(&state), 0.05);
        let test = balance.global_test.unwrap();
        assert!(test.statistic < 0.1, "{} MW: {test:?}", load / 1e6);
    }
}

/// Mass and energy close round every machine, and mass round the boiler and the turbine, with and without a leak.
#[test]
fn every_machine_closes() {
    for (load, leak) in [(137e6, 0.0), (150e6, LEAK / 3.6), (95e6, LEAK / 3.6)] {
        let operation = Operation { boiler_leak: leak, ..operation(load) };
        closes(&Unit::new().unwrap().predict(&operation, &FRESH).unwrap(), leak);
    }
}

fn closes(state: &Snapshot, leak: f64) {
    let flow = |name: &str| state.stream(name).unwrap();
    let mass = |names: &[&str]| names.iter().map(|name| flow(name).mass_flow).sum::<f64>();
    let boiler = mass(&["feedwater", "main_spray"]) / (mass(&["main_steam", "blowdown"]) + leak);
    let reheater = mass(&["cold_reheat", "reheat_spray"]) / mass(&["hot_reheat"]);
    let sections = ["extraction_5", "extraction_4", "extraction_3", "extraction_2", "exhaust"];
    let turbine = mass(&["hot_reheat"]) / mass(&sections);
    for (part, share) in [("boiler", boiler), ("reheater", reheater), ("turbine", turbine)] {
        assert!((share - 1.0).abs() < 1e-9, "{part}: {share}");
    }
    let machines: [(&str, &[&str], &[&str], f64); 10] = [
        ("cold reheat", &["hp_exhaust"], &["cold_reheat", "extraction_6", "auxiliary_supply"], 0.0),
        ("heater 6", &["heater_6_steam", "feedwater_5"], &["drain_6", "feedwater"], 0.0),
        ("heater 5", &["extraction_5", "drain_6", "feedwater_4"], &["drain_5", "feedwater_5"], 0.0),
        ("heater 3", &["extraction_3", "condensate_2"], &["drain_3", "condensate_3"], 0.0),
        ("heater 2", &["extraction_2", "drain_3", "condensate"], &["drain_2", "condensate_2"], 0.0),
        ("deaerator", &["deaerator_steam", "condensate_3", "drain_5"], &["feed_suction"], 0.0),
        (
            "condenser",
            &["exhaust", "makeup", "drain_2", "cooling_water_in"],
            &["hotwell", "cooling_water_out"],
            0.0,
        ),
        ("desuperheater", &["auxiliary_supply", "auxiliary_spray"], &["auxiliary_steam"], 0.0),
        (
            "feed split",
            &["feed_discharge"],
            &["feedwater_4", "main_spray", "reheat_spray", "auxiliary_spray"],
            0.0,
        ),
        ("feed pump", &["feed_suction"], &["feed_discharge"], 0.958 * state.motor_power),
    ];
    for (machine, into, out, power) in machines {
        let sum = |names: &[&str], of: fn(&super::snapshot::Stream) -> f64| -> f64 {
            names.iter().map(|name| of(flow(name))).sum()
        };
        let (mass_in, mass_out) = (sum(into, |flow| flow.mass_flow), sum(out, |flow| flow.mass_flow));
        assert!((mass_in / mass_out - 1.0).abs() < 1e-9, "{machine}: {mass_in} and {mass_out} kg/s");
        let energy = |names: &[&str]| sum(names, |flow| flow.mass_flow * flow.enthalpy);
        let (energy_in, energy_out) = (energy(into) + power, energy(out));
        assert!((energy_in / energy_out - 1.0).abs() < 1e-9, "{machine}: {energy_in} and {energy_out} W");
    }
}

/// The steady periods of a shift and their balances.
fn balanced(ready: &ReadyPlant, csv: &str) -> Vec<(Period, Balance)> {
    let file = tempfile::NamedTempFile::new().unwrap();
    std::fs::write(file.path(), csv).unwrap();
    let log = Log::open(file.path(), ready.expectation.clone()).unwrap();
    let steady = steady_periods(&log, Window::default(), &SteadyRule::of(&ready.plant)).unwrap();
    let balance = |period: &Period| ready.balance(&period.readings, 0.05);
    steady.periods.into_iter().map(|period| (period.clone(), balance(&period))).collect()
}

/// What the findings of a balance name, and the size of each in its unit.
fn named(ready: &ReadyPlant, balance: &Balance) -> Vec<(String, f64, f64)> {
    let labels = ready.labels();
    let one = |finding: &meterwright_engine::Finding| {
        let error = labels.hypotheses[finding.hypothesis];
        let (size, sigma) =
            (error.unit.difference_from_si(finding.estimate), error.unit.spread_from_si(finding.sigma));
        (error.name.clone(), size, sigma)
    };
    balance.findings.iter().map(one).collect()
}

/// What was put in is found, in every period, and nothing else; the thermocouple as soon as it is far enough off.
#[test]
fn the_shifts_say_what_was_put_into_them() {
    let ready = ReadyPlant::of(PLANT).unwrap();
    for (number, log) in shift_logs().iter().enumerate() {
        let periods = balanced(&ready, &log.csv);
        assert!(periods.len() >= 5, "{}: {} steady periods", log.name, periods.len());
        for (period, balance) in &periods {
            let found = named(&ready, balance);
            let of = |name: &str| found.iter().find(|(at, ..)| at == name);
            let near = |name: &str, truth: f64| {
                let (_, size, sigma) =
                    of(name).unwrap_or_else(|| panic!("{}: {found:?} lacks {name}", period.from));
                assert!((size - truth).abs() < 3.0 * sigma, "{name}: {size} ± {sigma} is not {truth}");
            };
            near(BIASED, BIAS);
            if number < 2 {
                near("boiler", LEAK);
            }
            let known = [BIASED, DRIFTING, "boiler"];
            assert!(found.iter().all(|(at, ..)| known.contains(&at.as_str())), "{}: {found:?}", period.from);
            assert!(number < 2 || of("boiler").is_none(), "the leak was isolated");
            assert!(number < 1 || of(DRIFTING).is_none(), "the thermocouple was changed");
        }
        let (last, balance) = periods.last().unwrap();
        assert!(number > 0 || named(&ready, balance).iter().any(|(at, ..)| at == DRIFTING), "{}", last.from);
    }
}

/// Balanced flows are the true ones within what they say of themselves, whatever the meters read.
#[test]
fn balanced_flows_are_the_true_ones() {
    let ready = ReadyPlant::of(PLANT).unwrap();
    let morning = shift(0);
    let (period, balance) = balanced(&ready, &shift_logs()[0].csv).swap_remove(1);
    let minutes = morning.times.iter().zip(&morning.rows);
    let within: Vec<_> = minutes.filter(|(time, _)| (period.from..period.to).contains(time)).collect();
    for name in ["FT-4001", BIASED, "FT-4703", "FT-4708A", "FT-4608", "JT-5001"] {
        let tag = morning.tags.iter().position(|tag| tag == name).unwrap();
        let truth = within.iter().map(|(_, row)| row[tag].1).sum::<f64>() / within.len() as f64;
        let (told, unit) = (&balance.tags[tag], ready.compiled.tags()[tag].unit);
        let (value, sigma) = (told.reconciled.unwrap(), told.reconciled_sigma.unwrap());
        let (value, sigma) = (unit.from_si(value), unit.spread_from_si(sigma));
        assert!((value - truth).abs() < 3.0 * sigma, "{name}: {value} ± {sigma} is not {truth}");
    }
}

/// Every two days of a month: how far the balanced efficiency of the high-pressure section is from the true one in its standard
/// uncertainties, how often each tag is named, and how many balances there are.
fn month(ready: &ReadyPlant, month: Month) -> (Vec<f64>, Vec<String>, usize) {
    let simulated = history(month);
    let place =
        ready.compiled.quantities().iter().position(|label| label.name == "hp_turbine.efficiency").unwrap();
    let (mut off, mut found, mut count) = (Vec::new(), Vec::new(), 0);
    for (row, efficiency) in simulated.rows.iter().zip(&simulated.efficiency).step_by(48) {
        let readings: Vec<_> = row.iter().map(|(reading, _)| Some(Reading::single(*reading))).collect();
        let balance = ready.balance(&readings, 0.05);
        let told = balance.quantities[place];
        off.push((told.value.unwrap() - efficiency) / told.sigma.unwrap());
        found.extend(named(ready, &balance).into_iter().map(|(at, ..)| at));
        count += 1;
    }
    (off, found, count)
}

#[test]
fn history_follows_the_worn_section_and_names_the_fouled_element_once_it_is_fouled() {
    let ready = ReadyPlant::of(PLANT).unwrap();
    let all: Vec<Month> = months().collect();
    assert_eq!(
        (all.len(), all[0].to_string(), all[8].to_string()),
        (9, "2026-02".to_owned(), "2026-10".to_owned())
    );
    let (first, found, count) = month(&ready, all[0]);
    assert!(first.iter().all(|off| off.abs() < 2.0), "{first:?}");
    assert!(found.len() <= count / 5, "nothing is wrong yet: {found:?}");
    let (last, found, count) = month(&ready, all[8]);
    assert!(last.iter().all(|off| off.abs() < 2.0), "{last:?}");
    assert!(found.iter().filter(|at| *at == FOULED).count() >= count - 1, "{found:?}");
    assert!(found.iter().all(|at| at == FOULED), "{found:?}");
    // What changes over the months is the section's, not the meters': their errors are the same in both.
    let mean = |off: &[f64]| off.iter().sum::<f64>() / off.len() as f64;
    assert!((mean(&first) - mean(&last)).abs() < 0.5, "{} {}", mean(&first), mean(&last));
}

#[test]
fn the_same_logs_are_made_every_time() {
    let month = months().next().unwrap();
    let log = history_log(month);
    assert_eq!(log, history_log(month));
    let lines: Vec<&str> = log.lines().collect();
    assert_eq!((lines.len(), lines[0].split(',').count()), (1 + 28 * 24, 1 + 66));
    assert!(lines[1].starts_with("2026-01-31T23:00:00Z,"), "midnight in the plant's zone: {}", lines[1]);
    let shifts = shift_logs();
    assert!(shifts.iter().all(|log| log.csv.lines().count() == 1 + 480), "no minute is left out");
    // As many hours in all as there are in 273 days, from one winter time to the next.
    let hours: usize = months().map(|month| history(month).rows.len()).sum();
    assert_eq!(hours, 273 * 24);
    let names: Vec<String> = shifts.into_iter().map(|log| log.name).collect();
    assert_eq!(names, ["2026-11-02-morning.csv", "2026-11-02-afternoon.csv", "2026-11-02-night.csv"]);
    let truth = truth();
    assert!(truth.to_json().contains(BIASED));
    assert!((truth.months[0].high_pressure_points - 100.0 * WEAR * 28.0 / 273.0).abs() < 1e-12);
    assert!((truth.months[8].high_pressure_points - 100.0 * WEAR).abs() < 1e-12);
}
