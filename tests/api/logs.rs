//! `logs` and `events`.

use serde_json::json;

use crate::server::{REHEAT_LOG, REHEAT_UNIT, Server, hourly_log};

#[test]
fn a_log_is_taken_at_once_and_its_work_can_be_followed() {
    let server = Server::start();
    let client = &server.client;
    let plant = client.plant(REHEAT_UNIT);
    let events = client.events(&plant);
    let answer = client.post(&format!("/logs?plant={plant}&name=three.csv&periods=row"), REHEAT_LOG);
    assert_eq!((answer.status, &answer.json()["state"]), (202, &json!("waiting")));
    let mut states: Vec<String> = Vec::new();
    for log in events {
        let state = format!("{} {}", log["state"].as_str().unwrap(), log["phase"].as_str().unwrap_or(""));
        if states.last() != Some(&state) {
            states.push(state);
        }
        if log["state"] == "done" {
            assert_eq!((&log["period_count"], &log["balance_count"]), (&json!(3), &json!(3)));
            assert_eq!(log["from"], "2026-02-10T06:00:00Z");
            break;
        }
    }
    assert_eq!(states, ["waiting ", "working reading", "working balancing", "done "]);
}

#[test]
fn the_same_log_again_changes_nothing() {
    let server = Server::start();
    let client = &server.client;
    let plant = client.plant(REHEAT_UNIT);
    let log = client.log(&plant, "a.csv", "row", REHEAT_LOG);
    let before = client.got(&format!("/balances?plant={plant}"));
    let again = client.post(&format!("/logs?plant={plant}&name=b.csv&periods=row"), REHEAT_LOG);
    assert_eq!((again.status, &again.json()["id"]), (200, &log["id"]));
    assert_eq!(client.got(&format!("/logs?plant={plant}"))["logs"].as_array().unwrap().len(), 1);
    assert_eq!(client.got(&format!("/balances?plant={plant}")), before);
}

#[test]
fn a_form_may_bring_a_log_too() {
    let server = Server::start();
    let client = &server.client;
    let plant = client.plant(REHEAT_UNIT);
    let form = format!(
        "--cut\r\nContent-Disposition: form-data; name=\"plant\"\r\n\r\n{plant}\r\n\
         --cut\r\nContent-Disposition: form-data; name=\"periods\"\r\n\r\nwhole\r\n\
         --cut\r\nContent-Disposition: form-data; name=\"file\"; filename=\"shift.csv\"\r\n\
         Content-Type: text/csv\r\n\r\n{REHEAT_LOG}\r\n--cut--\r\n"
    );
    let answer = client.ask("POST", "/logs", "multipart/form-data; boundary=cut", form);
    assert_eq!(answer.status, 202, "{}", answer.text);
    let log = answer.json();
    assert_eq!((&log["name"], &log["periods"]), (&json!("shift.csv"), &json!("whole")));
    assert_eq!(log["size"], REHEAT_LOG.len());
    let answer = client.ask("POST", "/logs", "multipart/form-data; boundary=cut", "--cut--\r\n");
    assert_eq!(answer.status, 400);
}

#[test]
fn a_log_with_faults_fails_with_their_places_and_stores_no_balance() {
    let server = Server::start();
    let client = &server.client;
    let plant = client.plant(REHEAT_UNIT);
    let wrong = REHEAT_LOG.replacen("432", "43x2", 1);
    let log = client.log(&plant, "wrong.csv", "row", &wrong);
    assert_eq!((&log["state"], &log["balance_count"]), (&json!("failed"), &json!(0)));
    let fault = &log["faults"][0];
    assert_eq!((&fault["line"], &fault["column"]), (&json!(2), &json!(2)));
    assert!(fault["message"].as_str().unwrap().contains("43x2"), "{fault}");
    assert!(log["reason"].as_str().unwrap().contains("mend"), "{log}");
    // It may be worked on again, to the same end.
    let id = log["id"].as_str().unwrap();
    let events = client.events(&plant);
    assert_eq!(client.post(&format!("/logs/{id}/work"), "").status, 202);
    assert!(events.into_iter().any(|log| log["state"] == "failed"));
}

#[test]
fn requests_that_say_too_little_are_told_what_is_missing() {
    let server = Server::start();
    let client = &server.client;
    let plant = client.plant(REHEAT_UNIT);
    assert_eq!(client.post("/logs", REHEAT_LOG).status, 400);
    assert_eq!(client.post("/logs?plant=none", REHEAT_LOG).status, 404);
    assert_eq!(client.post(&format!("/logs?plant={plant}&periods=weekly"), REHEAT_LOG).status, 400);
    assert_eq!(client.post(&format!("/logs?plant={plant}"), "").status, 422);
    assert_eq!(client.get("/logs/none").status, 404);
    assert_eq!(client.get("/logs?plant=none").status, 404);
    assert_eq!(client.ask("DELETE", "/logs/none/work", "", "").status, 404);
    assert_eq!(client.got(&format!("/logs?plant={plant}"))["logs"], json!([]), "nothing is kept of them");
}

#[test]
fn work_can_be_cancelled_and_goes_on_where_it_was() {
    let server = Server::start();
    let client = &server.client;
    let plant = client.plant(REHEAT_UNIT);
    let events = client.events(&plant);
    let first = client.post(
        &format!("/logs?plant={plant}&name=long.csv&periods=row"),
        hourly_log("2026-01-01T00:00:00Z", 3000),
    );
    let first = first.json()["id"].as_str().unwrap().to_owned();
    let second = client.post(&format!("/logs?plant={plant}&name=next.csv&periods=row"), REHEAT_LOG);
    let second = second.json()["id"].as_str().unwrap().to_owned();
    let waiting = client.ask("DELETE", &format!("/logs/{second}/work"), "", "");
    assert_eq!((waiting.status, &waiting.json()["state"]), (200, &json!("cancelled")));
    let mut events = events.into_iter();
    events.find(|log| log["id"] == first.as_str() && log["balance_count"].as_i64() > Some(0)).unwrap();
    assert_eq!(client.ask("DELETE", &format!("/logs/{first}/work"), "", "").status, 200);
    let cancelled = events.find(|log| log["id"] == first.as_str() && log["state"] == "cancelled").unwrap();
    let made = cancelled["balance_count"].as_u64().unwrap();
    assert!((1..3000).contains(&made), "{made}");
    assert_eq!(
        client.ask("DELETE", &format!("/logs/{first}/work"), "", "").status,
        409,
        "there is nothing to cancel"
    );
    let kept = client.got(&format!("/balances?log={first}&limit=10000"));
    assert_eq!(kept["balances"].as_array().unwrap().len() as u64, made, "what is balanced stays");
    assert_eq!(client.post(&format!("/logs/{first}/work"), "").status, 202);
    assert_eq!(client.post(&format!("/logs/{first}/work"), "").status, 409);
    let done = events.find(|log| log["id"] == first.as_str() && log["state"] == "done").unwrap();
    assert_eq!(done["balance_count"], 3000);
    let all = client.got(&format!("/balances?log={first}&limit=10000"));
    let ids = |list: &serde_json::Value| -> Vec<String> {
        list["balances"]
            .as_array()
            .unwrap()
            .iter()
            .map(|one| one["id"].as_str().unwrap().to_owned())
            .collect()
    };
    assert_eq!(ids(&all)[..ids(&kept).len()], ids(&kept)[..], "those that were there are the same");
}
