//! `trends`.

use serde_json::{Value, json};

use crate::server::{REHEAT_UNIT, Server, hourly_log};

#[test]
fn a_trend_has_a_value_of_each_balance_with_its_uncertainty_and_a_slope() {
    let server = Server::start();
    let client = &server.client;
    let plant = client.plant(REHEAT_UNIT);
    client.log(&plant, "days.csv", "row", &hourly_log("2026-05-01T00:00:00Z", 60));
    let series = client.got(&format!("/trends?plant={plant}"));
    let series = series["series"].as_array().unwrap();
    let mut kinds: Vec<&str> = series.iter().map(|one| one["kind"].as_str().unwrap()).collect();
    kinds.dedup();
    assert_eq!(kinds, ["indicator", "tag", "quantity"]);
    let balances = client.got(&format!("/balances?plant={plant}&limit=1&from=2026-05-02T05:00:00Z"));
    let balance = client.got(&format!("/balances/{}", balances["balances"][0]["id"].as_str().unwrap()));
    for (list, name, value) in [
        ("indicators", "indicator", "value"),
        ("quantities", "quantity", "value"),
        ("tags", "tag", "reconciled"),
    ] {
        let one = balance[list].as_array().unwrap().iter().find(|one| one[value].is_number()).unwrap();
        let trend = client.got(&format!("/trends/{}?plant={plant}", one[name].as_str().unwrap()));
        assert_eq!(trend["unit"], one["unit"]);
        let (shown, stored) = (trend["value"][29].as_f64().unwrap(), one[value].as_f64().unwrap());
        assert!((shown - stored).abs() <= 1e-6 * stored.abs(), "{}: {shown} is not {stored}", one[name]);
        let sigma = if list == "tags" { &one["reconciled_sigma"] } else { &one["sigma"] };
        let (shown, stored) = (trend["sigma"][29].as_f64().unwrap(), sigma.as_f64().unwrap());
        assert!((shown - stored).abs() <= 3e-4 * stored, "{shown} is not {stored}");
        let count = |column: &str| trend[column].as_array().map_or(0, Vec::len);
        assert!(["from", "to", "value", "sigma", "repeat_sigma"].iter().all(|column| count(column) == 60));
        assert_eq!(count("measured"), if list == "tags" { 60 } else { 0 });
        let slope = &trend["slope"];
        assert!(slope["low"].as_f64() <= slope["per_month"].as_f64() && slope["points"] == 60, "{slope}");
    }
    let part = client.got(&format!(
        "/trends/gross_heat_rate?plant={plant}&from=2026-05-02T00:00:00Z&to=2026-05-02T05:00:00Z"
    ));
    assert_eq!(part["value"].as_array().unwrap().len(), 5);
    assert_eq!(part["slope"], Value::Null);
    assert!(part["slope_reason"].as_str().unwrap().contains("5 points"));
}

#[test]
fn what_there_is_no_trend_of_is_said() {
    let server = Server::start();
    let client = &server.client;
    let plant = client.plant(REHEAT_UNIT);
    assert_eq!(client.got(&format!("/trends?plant={plant}")), json!({ "series": [] }));
    assert_eq!(client.get(&format!("/trends/FT-1001?plant={plant}")).status, 404);
    assert_eq!(client.get("/trends/FT-1001?plant=none").status, 404);
    assert_eq!(client.get("/trends?plant=none").status, 404);
}
