//! `meterwright check` through the real program.

#![expect(clippy::unwrap_used, reason = "a test stops where what it needs can't be had")]

use std::process::{Command, Output};

use serde_json::Value;

fn check(arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_meterwright"))
        .arg("check")
        .args(arguments)
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .output()
        .unwrap()
}

fn json(arguments: &[&str]) -> Value {
    let output = check(arguments);
    assert_eq!(output.status.code(), Some(0), "{}", String::from_utf8_lossy(&output.stderr));
    serde_json::from_slice(&output.stdout).unwrap()
}

#[test]
fn people_are_told_what_is_checked_what_is_not_and_what_would_help() {
    let output = check(&["tests/plants/header_network.toml"]);
    assert_eq!(output.status.code(), Some(0));
    let text = String::from_utf8(output.stdout).unwrap();
    for part in [
        "3 degrees of",
        "FT-303  hp_to_turbine.mass_flow",
        "Nothing here would show an error of less than ten standard deviations of FT-308",
        "Nothing here determines the mass flow of ring_north and ring_south.",
        "A meter of ring_north.mass_flow would tell it and make known ring_south.mass_flow.",
        "Advice to engineers",
    ] {
        assert!(text.contains(part), "{part} is missing from\n{text}");
    }
    assert!(text.lines().all(|line| line.chars().count() <= 100), "{text}");
}

#[test]
fn scripts_get_one_object_with_a_unit_beside_every_number() {
    let found = json(&["tests/plants/reheat_unit.toml", "tests/plants/reheat_unit.csv", "--json"]);
    assert_eq!(found["basis"], "log");
    assert_eq!(found["degrees_of_freedom"], 19);
    assert_eq!(found["tags"].as_array().unwrap().len(), 66);
    let redundancies: f64 = ["tags", "givens"]
        .iter()
        .flat_map(|list| found[list].as_array().unwrap())
        .filter_map(|tag| tag["redundancy"].as_f64())
        .sum();
    assert!((redundancies - 19.0).abs() < 1e-6);
    let assumption = &found["assumptions"][0];
    assert!(assumption["change"].is_number() && assumption["change_unit"].is_string());
    assert!(!assumption["effects"].as_array().unwrap().is_empty());
    let unknown = |quantity: &&Value| quantity["class"] == "unobservable";
    let quantities = found["quantities"].as_array().unwrap();
    assert!(quantities.iter().filter(unknown).all(|quantity| quantity["value"].is_null()));
    assert!(
        found["meters"].as_array().unwrap().iter().any(|meter| meter["quantity"] == "gland_steam.mass_flow")
    );
    assert_eq!(json(&["tests/plants/reheat_unit.toml", "--json"])["basis"], "typical");
}

#[test]
fn wrong_input_is_told_with_its_place() {
    let output = check(&["tests/plants/reheat_unit.csv"]);
    assert_eq!(output.status.code(), Some(1));
    let said = String::from_utf8(output.stderr).unwrap();
    assert!(said.starts_with("tests/plants/reheat_unit.csv:1:"), "{said}");
    assert_eq!(check(&["tests/plants/nowhere.toml"]).status.code(), Some(1));
    assert_eq!(check(&[]).status.code(), Some(2));
}
