//! `reconcile`.

use serde_json::{Value, json};

use crate::server::{REHEAT_UNIT, Server, readings};

fn asked(server: &Server, body: &Value) -> (u16, Value) {
    let answer = server.client.ask("POST", "/reconcile", "application/json", body.to_string());
    (answer.status, answer.json())
}

#[test]
fn readings_are_balanced_and_nothing_is_stored() {
    let server = Server::start();
    let (status, balance) = asked(&server, &json!({ "plant": REHEAT_UNIT, "readings": readings() }));
    assert_eq!((status, &balance["converged"]), (200, &json!(true)));
    assert_eq!(balance["global_test"]["degrees_of_freedom"], 19);
    assert_eq!(server.client.got("/plants"), json!({ "plants": [] }));
    let mut wrong = readings();
    wrong["FT-1001"] = json!(460.0);
    wrong["TT-1005"] = Value::Null;
    let (_, balance) = asked(&server, &json!({ "plant": REHEAT_UNIT, "readings": wrong }));
    assert_eq!(balance["findings"][0]["at"], "FT-1001");
    let tag = |name: &str| {
        balance["tags"].as_array().unwrap().iter().find(|tag| tag["tag"] == name).unwrap().clone()
    };
    assert_eq!(tag("TT-1005")["verdict"], "excluded");
    // Believed to be as bad as that, it is no longer suspected.
    let (_, balance) =
        asked(&server, &json!({ "plant": REHEAT_UNIT, "readings": wrong, "sigmas": { "FT-1001": 30.0 } }));
    assert_eq!((&balance["findings"], &balance["tags"][0]["sigma"]), (&json!([]), &json!(30.0)));
}

#[test]
fn what_can_t_be_balanced_is_said() {
    let server = Server::start();
    let (status, problem) = asked(&server, &json!({ "plant": REHEAT_UNIT, "readings": { "FT-1000": 1.0 } }));
    assert_eq!(status, 422);
    assert!(problem["detail"].as_str().unwrap().contains("did you mean `FT-1001`"), "{problem}");
    let (status, problem) =
        asked(&server, &json!({ "plant": "format = 1\n[plant]\nname = 3\n", "readings": {} }));
    let lines: Vec<&Value> =
        problem["faults"].as_array().unwrap().iter().map(|fault| &fault["line"]).collect();
    assert!(status == 422 && lines.contains(&&json!(3)), "{problem}");
    for body in [json!({ "readings": {} }), json!({ "plant": REHEAT_UNIT, "readings": { "FT-1001": "x" } })] {
        assert_eq!(asked(&server, &body).0, 422);
    }
    let body = json!({ "plant": REHEAT_UNIT, "readings": {}, "false_alarm_rate": 2.0 });
    assert_eq!(asked(&server, &body).0, 422);
    let answer = server.client.ask("POST", "/reconcile", "application/json", "{");
    assert_eq!(answer.status, 400);
    let (_, balance) = asked(&server, &json!({ "plant": REHEAT_UNIT, "readings": {} }));
    assert!(balance["tags"].as_array().unwrap().iter().all(|tag| tag["measured"].is_null()));
}
