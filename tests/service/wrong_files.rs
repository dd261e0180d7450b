//! Plant files and logs with the mistakes that people make, and what they are told, word for word.
//!
//! Every file under `snapshots/plants` and `snapshots/logs` has its expected text beside it; the others are right.

#![expect(clippy::unwrap_used, reason = "a test stops where what it needs can't be had")]

use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;

fn snapshots() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/service/snapshots")
}

/// Exit status and standard error of a run among the snapshots, where nothing but faults is expected.
fn told(plant: &str, log: &str) -> (i32, String) {
    let output = Command::new(env!("CARGO_BIN_EXE_meterwright"))
        .args(["reconcile", plant, log, "--periods", "whole", "--json"])
        .current_dir(snapshots())
        .output()
        .unwrap();
    (output.status.code().unwrap(), String::from_utf8(output.stderr).unwrap())
}

/// Lines that only one of two texts has.
fn difference(expected: &str, told: &str) -> Vec<String> {
    let only = |mark: &str, one: &str, other: &str| -> Vec<String> {
        let lines = one.lines().filter(|line| !other.lines().any(|same| same == *line));
        lines.map(|line| format!("{mark} {line}")).collect()
    };
    [only("-", expected, told), only("+", told, expected)].concat()
}

/// Compares what is said of every wrong file of a folder with the text beside it.
fn compare(folder: &str, run: impl Fn(&str) -> (i32, String), status: impl Fn(&str) -> i32) {
    let mut names: Vec<String> = fs::read_dir(snapshots().join(folder))
        .unwrap()
        .map(|entry| entry.unwrap().file_name().into_string().unwrap())
        .filter(|name| !name.ends_with(".expected"))
        .collect();
    names.sort();
    assert!(names.len() >= 10, "{names:?}");
    let mut wrong = Vec::new();
    for name in names {
        let (ended, told) = run(&format!("{folder}/{name}"));
        let expected = fs::read_to_string(snapshots().join(folder).join(format!("{name}.expected")));
        let expected = expected.unwrap_or_default();
        if told != expected || ended != status(&name) {
            wrong.push(format!("{name} ended with {ended} and other lines, or in another order:"));
            wrong.extend(difference(&expected, &told));
        }
        let places = told.lines().all(|line| {
            let place: Vec<&str> = line.splitn(4, ':').collect();
            place.len() == 4 && place[1].parse::<u32>().is_ok() && place[2].parse::<u32>().is_ok()
        });
        assert!(places, "every fault begins with file:line:column: {told}");
    }
    assert!(wrong.is_empty(), "\n{}", wrong.join("\n"));
}

#[test]
fn wrong_plant_files_are_answered_as_people_need_it() {
    compare("plants", |plant| told(plant, "log.csv"), |_| 1);
}

#[test]
fn wrong_logs_are_answered_as_people_need_it() {
    // Columns that no tag knows are told, and the rest is balanced.
    let status = |name: &str| i32::from(name != "tags_misspelt.csv");
    compare("logs", |log| told("plant.toml", log), status);
}

#[test]
fn the_right_files_beside_them_are_right() {
    assert_eq!(told("plant.toml", "log.csv"), (0, String::new()));
}
