//! `plants` and their revisions.

use serde_json::json;

use crate::server::{REHEAT_UNIT, Server, hourly_log};

#[test]
fn a_plant_is_stored_once_and_found_again() {
    let server = Server::start();
    let client = &server.client;
    assert_eq!(client.got("/plants"), json!({ "plants": [] }));
    let id = client.plant(REHEAT_UNIT);
    let plant = client.got(&format!("/plants/{id}"));
    assert_eq!(plant["name"], "Tarnhope Wharf unit 3");
    assert_eq!(plant["time_zone"], "Europe/London");
    assert_eq!(plant["revision"]["number"], 1);
    assert_eq!(plant["revision"]["valid_from"], json!(null));
    assert_eq!(client.got("/plants")["plants"], json!([plant]));
    let again = client.post("/plants", REHEAT_UNIT);
    assert_eq!((again.status, &again.json()["existing"]), (409, &json!(id)));
    let text = client.got(&format!("/plants/{id}/revisions/1"))["text"].clone();
    assert_eq!(text, REHEAT_UNIT);
}

#[test]
fn faults_of_a_plant_file_are_told_all_at_once_with_their_places() {
    let server = Server::start();
    let wrong = REHEAT_UNIT.replacen("fluid = \"water\"", "fluid = \"watter\"", 1).replacen(
        "unit = \"t/h\"",
        "unit = \"t/hour\"",
        1,
    );
    let answer = server.client.post("/plants", wrong.as_str());
    assert_eq!((answer.status, answer.kind.as_str()), (422, "application/problem+json"));
    let faults = answer.json()["faults"].as_array().unwrap().clone();
    assert_eq!(faults.len(), 2, "{faults:?}");
    for (fault, word) in faults.iter().zip(["watter", "t/hour"]) {
        let line = fault["line"].as_u64().unwrap() as usize;
        let text = wrong.lines().nth(line - 1).unwrap();
        assert!(
            text.contains(word) && fault["message"].as_str().unwrap().contains(word),
            "{fault} at {text}"
        );
        let column = fault["column"].as_u64().unwrap() as usize;
        assert!(text[column - 1..].trim_start_matches('"').starts_with(word), "{fault} at {text}");
    }
    assert_eq!(server.client.got("/plants"), json!({ "plants": [] }), "nothing is stored of it");
    let answer = server.client.post("/plants", vec![0xff, 0xfe, b'x']);
    assert_eq!((answer.status, answer.json()["status"].as_u64()), (400, Some(400)));
}

#[test]
fn revisions_are_numbered_and_each_holds_from_its_time_on() {
    let server = Server::start();
    let client = &server.client;
    let id = client.plant(REHEAT_UNIT);
    let second = REHEAT_UNIT
        .replace("accuracy = [\"1.0 %\", \"0.2 % span\"]", "accuracy = [\"0.5 %\", \"0.1 % span\"]");
    let path = format!("/plants/{id}/revisions?valid_from=2026-03-01T12:00:00Z");
    assert_eq!(client.post(&path, second.as_str()).status, 201);
    assert_eq!(client.post(&path, second.as_str()).status, 200, "the same again changes nothing");
    let revisions = client.got(&format!("/plants/{id}/revisions"));
    assert_eq!(revisions["revisions"].as_array().unwrap().len(), 2);
    assert_eq!(revisions["revisions"][1]["valid_from"], "2026-03-01T12:00:00Z");
    // A log across that time is balanced by both.
    let log = client.log(&id, "day.csv", "row", &hourly_log("2026-03-01T09:00:00Z", 6));
    assert_eq!(
        (&log["state"], &log["balance_count"], &log["period_count"]),
        (&json!("done"), &json!(6), &json!(6))
    );
    let balances = client.got(&format!("/balances?plant={id}"));
    let numbers: Vec<u64> = balances["balances"]
        .as_array()
        .unwrap()
        .iter()
        .map(|one| one["revision"].as_u64().unwrap())
        .collect();
    assert_eq!(numbers, [1, 1, 1, 2, 2, 2]);
    let sigma = |place: usize| {
        let id = balances["balances"][place]["id"].as_str().unwrap();
        client.got(&format!("/balances/{id}"))["tags"][0]["sigma"].as_f64().unwrap()
    };
    assert!((sigma(0) / sigma(5) - 2.0).abs() < 0.01, "{} {}", sigma(0), sigma(5));
    let trend = client.got(&format!("/trends/FT-1001?plant={id}"));
    assert_eq!(trend["breaks"][0]["at"], 1_772_366_400_000_i64);
    assert_eq!(trend["breaks"][0]["causes"], json!(["revision 2 of the plant file"]));
}

#[test]
fn what_is_not_there_is_said() {
    let server = Server::start();
    let client = &server.client;
    let id = client.plant(REHEAT_UNIT);
    for path in ["/plants/none", "/plants/none/revisions", &format!("/plants/{id}/revisions/2")] {
        let answer = client.get(path);
        assert_eq!((answer.status, answer.kind.as_str()), (404, "application/problem+json"), "{path}");
    }
    assert_eq!(client.post("/plants/none/revisions", REHEAT_UNIT).status, 404);
    let other = REHEAT_UNIT.replace("Tarnhope Wharf unit 3", "Tarnhope Wharf unit 4");
    client.plant(&other);
    let answer = client.post(&format!("/plants/{id}/revisions"), other.as_str());
    assert_eq!(answer.status, 409, "another plant has the name");
}
