//! The service's description of itself.

use std::collections::BTreeSet;

use crate::server::{REHEAT_LOG, REHEAT_UNIT, Server, readings};

/// Asks for everything that is described; what each answers is held against the description by the client itself.
#[test]
fn everything_that_is_described_answers_as_described() {
    let server = Server::start();
    let client = &server.client;
    let plant = client.plant(REHEAT_UNIT);
    let log = client.log(&plant, "three.csv", "row", REHEAT_LOG);
    let log = log["id"].as_str().unwrap();
    let balances = client.got(&format!("/balances?plant={plant}"));
    let balance = balances["balances"][0]["id"].as_str().unwrap();
    for path in [
        "/plants".to_owned(),
        format!("/plants/{plant}"),
        format!("/plants/{plant}/revisions"),
        format!("/plants/{plant}/revisions/1"),
        format!("/logs?plant={plant}"),
        format!("/logs/{log}"),
        format!("/steady-periods?log={log}"),
        format!("/balances/{balance}"),
        format!("/findings?plant={plant}"),
        format!("/indicators?plant={plant}"),
        format!("/trends?plant={plant}"),
        format!("/trends/gross_heat_rate?plant={plant}"),
        "/status".to_owned(),
    ] {
        client.got(&path);
    }
    client.post(&format!("/plants/{plant}/revisions"), REHEAT_UNIT);
    client.post(&format!("/logs/{log}/work"), "");
    client.ask("DELETE", &format!("/logs/{log}/work"), "", "");
    let body = serde_json::json!({ "plant": REHEAT_UNIT, "readings": readings() });
    client.ask("POST", "/reconcile", "application/json", body.to_string());
    // The events are read by the client whenever it waits for a log.
    let mut asked: BTreeSet<(String, String)> = client.asked.lock().unwrap().iter().cloned().collect();
    asked.insert(("/api/v1/events".to_owned(), "get".to_owned()));
    let paths = client.description()["paths"].as_object().unwrap();
    let described: BTreeSet<(String, String)> = paths
        .iter()
        .flat_map(|(path, methods)| {
            methods.as_object().unwrap().keys().map(move |method| (path.clone(), method.clone()))
        })
        .collect();
    assert_eq!(asked, described);
}

/// Names, units and uncertainties of a balance are described too: whoever writes a client finds them.
#[test]
fn a_balance_is_described_to_its_last_number() {
    let server = Server::start();
    let schemas = &server.client.description()["components"]["schemas"];
    for (name, properties) in [
        ("Read", &["measured", "sigma", "reconciled", "reconciled_sigma", "statistic", "verdict"][..]),
        ("Quantity", &["value", "sigma", "repeat_sigma", "unit", "class"]),
        ("Finding", &["estimate", "sigma", "probability", "indistinguishable_from"]),
    ] {
        for property in properties {
            let described = &schemas[name]["properties"][property];
            assert!(described.is_object(), "{name}.{property}: {}", schemas[name]);
        }
    }
}
