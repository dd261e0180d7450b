//! Steady periods by the real program: what it balances, and what it says of the rest.

#![expect(clippy::unwrap_used, reason = "a test stops where what it needs can't be had")]

use serde_json::Value;

use crate::command_line::{PLANT, reconcile};
use crate::files::lines;

const STEADY: &[&str] = &["--no-search"];
const STEADY_JSON: &[&str] = &["--no-search", "--json"];

/// Four hours of minutes from 07:00 local time, in which the river swells within a quarter of an hour after the first two.
/// What stands for noise is the same in every run.
fn swelling() -> impl Iterator<Item = (i64, [f64; 3])> {
    let wobble =
        |minute: i64, tag: i64| ((minute * minute * 7 + minute * 13 + tag * 29) % 17) as f64 / 17.0 - 0.5;
    (0..240).map(move |minute| {
        let swell = 2.0 * (minute - 120).clamp(0, 15) as f64;
        let flows = [(100.0 + swell, 0), (60.0 + 0.6 * swell, 1), (40.0 + 0.4 * swell, 2)];
        (minute, flows.map(|(flow, tag)| flow + wobble(minute, tag)))
    })
}

fn clock(minute: i64) -> String {
    format!("2026-03-01 {:02}:{:02}", 7 + minute / 60, minute % 60)
}

fn wide() -> Vec<String> {
    swelling().map(|(minute, [a, b, c])| format!("{},{a:.3},{b:.3},{c:.3}", clock(minute))).collect()
}

fn log() -> String {
    lines("time,FT-1,FT-2,FT-3", wide().into_iter())
}

fn balances(output: &str) -> Vec<Value> {
    let result: Value = serde_json::from_str(output).unwrap();
    result["balances"].as_array().unwrap().clone()
}

#[test]
fn steady_stretches_are_cut_into_hours_and_what_moved_is_told() {
    let (status, output, errors) = reconcile(PLANT, &log(), STEADY_JSON);
    assert_eq!(status, 0, "{errors}");
    let balances = balances(&output);
    let hours: Vec<(&str, &str)> = balances
        .iter()
        .map(|balance| (balance["from"].as_str().unwrap(), balance["to"].as_str().unwrap()))
        .collect();
    assert_eq!(hours[0], ("2026-03-01T06:00:00Z", "2026-03-01T07:00:00Z"));
    assert_eq!(hours.len(), 2, "{hours:?} {errors}");
    assert_eq!(balances[0]["tags"][0]["samples"], 60);
    let flow = |balance: &Value| balance["tags"][0]["measured"].as_f64().unwrap();
    assert!((flow(&balances[0]) - 100.0).abs() < 0.2 && (flow(&balances[1]) - 130.0).abs() < 0.2);
    // The line on standard error stands among the warnings of the balance that follows.
    let told = errors.lines().find(|line| line.contains("is no steady period")).unwrap();
    assert!(told.contains("moved (R "), "{told}");
    assert!(told.starts_with("2026-03-01 08:"), "{told}");
    assert!(balances[1]["warnings"].as_array().unwrap().contains(&told.into()), "{output}");
    assert!(
        errors.ends_with("2 steady periods of 60 min, 1 stretch rejected; watched: FT-1, FT-2, FT-3\n"),
        "{errors}"
    );
}

#[test]
fn people_read_of_rejected_stretches_in_the_report() {
    let (_, output, errors) = reconcile(PLANT, &log(), STEADY);
    assert!(errors.contains("is no steady period"), "{errors}");
    assert!(output.contains("2026-03-01 07:00:00 +01:00 to 2026-03-01 08:00:00 +01:00\n==="), "{output}");
    assert!(output.contains("is no steady period:"), "{output}");
}

#[test]
fn the_order_and_the_form_of_the_rows_change_nothing() {
    let (_, expected, _) = reconcile(PLANT, &log(), STEADY_JSON);
    let mut shuffled = wide();
    shuffled.sort_by_key(|row| row.chars().rev().collect::<String>());
    let long = |tag: usize| {
        wide().into_iter().map(move |row| {
            let cells: Vec<&str> = row.split(',').collect();
            format!("{},FT-{},{}", cells[0], tag + 1, cells[tag + 1])
        })
    };
    let tag_after_tag: Vec<String> = (0..3).flat_map(long).collect();
    let mut in_order = tag_after_tag.clone();
    in_order.sort();
    for (head, rows) in
        [("time,FT-1,FT-2,FT-3", shuffled), ("time,tag,value", tag_after_tag), ("time,tag,value", in_order)]
    {
        let (status, output, errors) = reconcile(PLANT, &lines(head, rows.into_iter()), STEADY_JSON);
        assert_eq!((status, output == expected), (0, true), "{head}: {errors}");
    }
}

#[test]
fn a_plant_that_is_never_steady_has_no_balance_and_ends_with_three() {
    let ramp = (0..180).map(|minute| format!("{},{},{},40", clock(minute), 100 + minute, 60 + minute));
    let log = lines("time,FT-1,FT-2,FT-3", ramp);
    let (status, output, errors) = reconcile(PLANT, &log, STEADY_JSON);
    assert_eq!((status, balances(&output).len()), (3, 0), "{errors}");
    assert!(errors.contains("is no steady period: FT-"), "{errors}");
    let (status, output, _) = reconcile(PLANT, &log, STEADY);
    assert_eq!(status, 3);
    assert!(output.contains("is no steady period: FT-"), "{output}");
    let nothing = [STEADY, &["--from", "2027-01-01 00:00"]].concat();
    let (status, output, errors) = reconcile(PLANT, &log, &nothing);
    assert_eq!((status, output.as_str()), (1, ""));
    assert!(errors.ends_with("TT-4\nshift.csv:1:1: no row lies between the times given\n"), "{errors}");
}

#[test]
fn the_plant_file_says_what_is_watched_and_how_long_a_period_is() {
    let plant = PLANT.to_owned() + "\n[steady]\nperiod = \"30 min\"\nwatch = [\"FT-3\", \"TT-4\"]\n";
    let (status, output, errors) = reconcile(&plant, &log(), STEADY_JSON);
    assert_eq!(status, 0, "{errors}");
    assert!(balances(&output).len() >= 6, "{errors}");
    let warned = "plant.toml:51:19: warning: `TT-4` has no good sample in the log and can't show whether the plant is steady";
    assert!(errors.lines().any(|line| line == warned), "{errors}");
    assert!(errors.ends_with("of 30 min, 1 stretch rejected; watched: FT-3\n"), "{errors}");
}

#[test]
fn hourly_averages_are_periods_of_one_sample() {
    let rows = (0..8).map(|hour| format!("2026-03-01 {:02}:00,100.{hour},60.1,40.2", 7 + hour));
    let (status, output, errors) = reconcile(PLANT, &lines("time,FT-1,FT-2,FT-3", rows), STEADY_JSON);
    let balances = balances(&output);
    assert_eq!((status, balances.len()), (0, 8), "{errors}");
    assert_eq!(
        (&balances[0]["to"], &balances[0]["tags"][0]["samples"]),
        (&"2026-03-01T07:00:00Z".into(), &1.into())
    );
    // The stated sigma alone.
    assert!((balances[0]["tags"][0]["sigma"].as_f64().unwrap() - 1.0).abs() < 1e-12);
}
