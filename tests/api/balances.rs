//! `steady-periods`, `balances`, `findings` and `indicators`.

use std::process::Command;

use serde_json::{Value, json};

use crate::server::{REHEAT_LOG, REHEAT_UNIT, Server, hourly_log};

/// What the command line makes of the reheat unit's log, with errors looked for.
fn of_command_line() -> Value {
    let output = Command::new(env!("CARGO_BIN_EXE_meterwright"))
        .args([
            "reconcile",
            "tests/plants/reheat_unit.toml",
            "tests/plants/reheat_unit.csv",
            "--periods",
            "row",
            "--json",
        ])
        .output()
        .unwrap();
    assert!(output.status.success());
    serde_json::from_slice(&output.stdout).unwrap()
}

/// Panics unless two results are the same: words exactly, numbers to what a record keeps.
fn same(path: &str, stored: &Value, made: &Value) {
    match (stored, made) {
        (Value::Array(a), Value::Array(b)) => {
            assert_eq!(a.len(), b.len(), "{path}");
            a.iter().zip(b).enumerate().for_each(|(place, (a, b))| same(&format!("{path}[{place}]"), a, b));
        }
        (Value::Object(a), Value::Object(b)) => {
            b.iter()
                .for_each(|(key, b)| same(&format!("{path}.{key}"), a.get(key).unwrap_or(&Value::Null), b));
        }
        (Value::Number(a), Value::Number(b)) => {
            let (a, b) = (a.as_f64().unwrap(), b.as_f64().unwrap());
            let is_difference = path.ends_with("correction");
            let is_value =
                ["measured", "reconciled", "value"].iter().any(|end| path.ends_with(&format!(".{end}")));
            let share = if is_value { 1e-11 } else { 2e-4 };
            let allowed = if is_difference { 1e-7 } else { share * b.abs() };
            assert!((a - b).abs() <= allowed, "{path}: {a} is not {b}");
        }
        (a, b) => assert_eq!(a, b, "{path}"),
    }
}

#[test]
fn a_stored_balance_is_what_the_command_line_says() {
    let server = Server::start();
    let client = &server.client;
    let plant = client.plant(REHEAT_UNIT);
    client.log(&plant, "three.csv", "row", REHEAT_LOG);
    let made = of_command_line();
    let list = client.got(&format!("/balances?plant={plant}"));
    for (place, made) in made["balances"].as_array().unwrap().iter().enumerate() {
        let summary = &list["balances"][place];
        assert_eq!(summary["global_test_passes"], made["global_test"]["passes"]);
        let stored = client.got(&format!("/balances/{}", summary["id"].as_str().unwrap()));
        same("balance", &stored, made);
        assert_eq!((&stored["plant"], &stored["log"]), (&json!(plant), &summary["log"]));
        assert_eq!(stored["settings"], json!({ "periods": "row", "false_alarm_rate": 0.05 }));
        assert_eq!(stored["readings"].as_array().unwrap().len(), stored["tags"].as_array().unwrap().len());
        assert_eq!(stored["readings"][0]["mean"], made["tags"][0]["measured"]);
        assert!(stored["evidence"].as_array().unwrap().len() > 50);
        assert!(!stored["tags"][0]["description"].as_str().unwrap().is_empty());
    }
}

#[test]
fn a_wrong_meter_is_a_finding_of_its_balance_and_of_the_plant() {
    let server = Server::start();
    let client = &server.client;
    let plant = client.plant(REHEAT_UNIT);
    let wrong = REHEAT_LOG.replacen("432", "460", 1);
    let log = client.log(&plant, "wrong.csv", "row", &wrong);
    let id = log["id"].as_str().unwrap();
    let list = client.got(&format!("/balances?log={id}"));
    assert_eq!(list["balances"][0]["findings"], json!(["FT-1001"]));
    assert_eq!(list["balances"][1]["findings"], json!([]));
    let balance = client.got(&format!("/balances/{}", list["balances"][0]["id"].as_str().unwrap()));
    let sentence = balance["findings"][0]["sentence"].as_str().unwrap();
    assert!(sentence.starts_with("FT-1001 reads") && sentence.contains("t/h high"), "{sentence}");
    assert_eq!(balance["tags"][0]["verdict"], "suspect");
    let findings = client.got(&format!("/findings?plant={plant}"));
    assert_eq!(findings["findings"].as_array().unwrap().len(), 1);
    assert_eq!(findings["findings"][0]["balance"], list["balances"][0]["id"]);
    assert_eq!(findings["findings"][0]["sentence"], sentence);
    let none = client.got(&format!("/findings?plant={plant}&from=2026-02-10T07:00:00Z"));
    assert_eq!(none["findings"], json!([]));
}

#[test]
fn lists_come_in_pieces_and_by_time() {
    let server = Server::start();
    let client = &server.client;
    let plant = client.plant(REHEAT_UNIT);
    client.log(&plant, "day.csv", "row", &hourly_log("2026-05-01T00:00:00Z", 50));
    let mut seen = Vec::new();
    let mut after = String::new();
    loop {
        let piece = client.got(&format!("/balances?plant={plant}&limit=7{after}"));
        seen.extend(
            piece["balances"].as_array().unwrap().iter().map(|one| one["from"].as_str().unwrap().to_owned()),
        );
        let Some(next) = piece["next"].as_str() else { break };
        after = format!("&after={next}");
    }
    assert_eq!(seen.len(), 50);
    assert!(seen.is_sorted());
    let some =
        client.got(&format!("/balances?plant={plant}&from=2026-05-01T10:00:00Z&to=2026-05-01T12:00:00Z"));
    assert_eq!(some["balances"].as_array().unwrap().len(), 2);
    let periods = client.got(&format!("/steady-periods?plant={plant}"));
    let periods = periods["steady_periods"].as_array().unwrap();
    assert_eq!(periods.len(), 50);
    assert!(periods.iter().all(|period| period["balance"].is_string() && period["rejected"].is_null()));
    let indicators = client.got(&format!("/indicators?plant={plant}"));
    let heat_rate = &indicators["indicators"][0];
    assert_eq!((&heat_rate["indicator"], &heat_rate["unit"]), (&json!("gross_heat_rate"), &json!("kJ/kWh")));
    assert_eq!(heat_rate["from"], "2026-05-03T01:00:00Z");
    for wrong in ["", "?plant=none", "?log=none"] {
        assert!([400, 404].contains(&client.get(&format!("/balances{wrong}")).status));
    }
    for wrong in ["from=yesterday", "limit=0", "limit=x", "after=soon"] {
        assert_eq!(client.get(&format!("/balances?plant={plant}&{wrong}")).status, 400, "{wrong}");
    }
    assert_eq!(client.get("/balances/none").status, 404);
}

#[test]
fn a_later_log_over_the_same_time_counts_instead() {
    let server = Server::start();
    let client = &server.client;
    let plant = client.plant(REHEAT_UNIT);
    let first = client.log(&plant, "first.csv", "row", &hourly_log("2026-05-01T00:00:00Z", 30));
    let wrong = client.got(&format!("/trends/FT-1001?plant={plant}"));
    let mended = hourly_log("2026-05-01T10:00:00Z", 10).replace(",432", ",433");
    let second = client.log(&plant, "mended.csv", "row", &mended);
    assert_eq!(client.got(&format!("/plants/{plant}"))["balance_count"], 30);
    let list = client.got(&format!("/balances?plant={plant}"));
    let list = list["balances"].as_array().unwrap();
    let superseded: Vec<&Value> = list.iter().filter(|balance| balance["superseded"] == true).collect();
    assert_eq!((list.len(), superseded.len()), (40, 10));
    assert!(superseded.iter().all(|balance| balance["log"] == first["id"]));
    let balance = client.got(&format!("/balances/{}", superseded[0]["id"].as_str().unwrap()));
    assert_eq!(balance["superseded_by"], second["id"]);
    // The trend has the new values in their places, and every other as it was.
    let trend = client.got(&format!("/trends/FT-1001?plant={plant}"));
    assert_eq!(trend["from"], wrong["from"]);
    let (old, new) = (wrong["measured"].as_array().unwrap(), trend["measured"].as_array().unwrap());
    for place in 0..30 {
        let moved = new[place].as_f64().unwrap() - old[place].as_f64().unwrap();
        let is_mended = (10..20).contains(&place);
        assert!(if is_mended { moved != 0.0 } else { moved == 0.0 }, "{place}: {moved}");
    }
}
