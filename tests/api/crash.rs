//! The program killed at any moment: nothing acknowledged is lost, no balance is there in half.

use std::collections::HashMap;
use std::io::{BufRead, BufReader};
use std::path::Path;
use std::process::{Child, Command, Stdio};
use std::time::Duration;

use rand_distr::{Distribution, Uniform};
use rand_pcg::Pcg64Mcg;
use serde_json::Value;
use tempfile::TempDir;

use crate::server::{Client, REHEAT_UNIT, Server, hourly_log};

/// So many times the program is killed.
const KILLS: u32 = 50;
/// Rows of each log: some tenths of a second of work.
const ROWS: u32 = 30;

/// The real program, which is killed when it is dropped.
struct Program {
    child: Child,
    address: String,
}

impl Program {
    fn start(folder: &Path) -> Self {
        let mut child = Command::new(env!("CARGO_BIN_EXE_meterwright"))
            .args(["serve", "--listen", "127.0.0.1:0", "--data"])
            .arg(folder)
            .stdout(Stdio::piped())
            .stderr(Stdio::null())
            .spawn()
            .unwrap();
        let mut lines = BufReader::new(child.stdout.take().unwrap()).lines().map_while(Result::ok);
        let line = lines.find(|line| line.contains("http://")).unwrap();
        let address = line.split_whitespace().find(|word| word.starts_with("http://")).unwrap();
        Self { child, address: address.trim_end_matches('/').to_owned() }
    }

    /// Ends it as a power cut does to a program.
    fn kill(mut self) {
        self.child.kill().unwrap();
        self.child.wait().unwrap();
    }
}

/// Panics unless everything that was acknowledged is there and every balance is whole.
fn hold(client: &Client, plant: &str, acknowledged: &[String]) {
    let logs = client.got(&format!("/logs?plant={plant}"));
    let logs: HashMap<&str, &Value> =
        logs["logs"].as_array().unwrap().iter().map(|log| (log["id"].as_str().unwrap(), log)).collect();
    for id in acknowledged {
        assert!(logs.contains_key(id.as_str()), "the log {id} was acknowledged");
    }
    for (id, log) in logs {
        let list = client.got(&format!("/balances?log={id}&limit=10000"));
        let list = list["balances"].as_array().unwrap();
        assert!(list.len() as u64 >= log["balance_count"].as_u64().unwrap(), "{log}");
        if let Some(last) = list.last() {
            let balance = client.got(&format!("/balances/{}", last["id"].as_str().unwrap()));
            assert_eq!(balance["tags"].as_array().unwrap().len(), 66, "a balance is whole");
        }
    }
}

#[test]
fn a_kill_at_any_moment_loses_nothing_that_was_acknowledged() {
    let folder = TempDir::new().unwrap();
    let mut random = Pcg64Mcg::new(20_261_201);
    let moment = Uniform::new(0, 250).unwrap();
    let mut program = Program::start(folder.path());
    let plant = Client::new(program.address.clone()).plant(REHEAT_UNIT);
    let mut acknowledged: Vec<String> = Vec::new();
    for kill in 0..KILLS {
        let address = program.address.clone();
        let path = format!("/api/v1/logs?plant={plant}&name=log-{kill}.csv&periods=row");
        // Later logs stand beside earlier ones; every fifth covers the time of one before it.
        let day = if kill % 5 == 4 { kill - 1 } else { kill };
        let begin = jiff::civil::date(2026, 1, 1).at(0, 0, 0, 0).in_tz("UTC").unwrap().timestamp();
        let begin = begin + jiff::SignedDuration::from_hours(48 * i64::from(day));
        let body = hourly_log(&begin.to_string(), ROWS + kill % 5);
        let upload = std::thread::spawn(move || {
            let agent: ureq::Agent = ureq::Agent::config_builder().http_status_as_error(false).build().into();
            let mut answer = agent.post(format!("{address}{path}")).send(body).ok()?;
            let log: Value = answer.body_mut().read_json().ok()?;
            log["id"].as_str().map(str::to_owned)
        });
        std::thread::sleep(Duration::from_millis(moment.sample(&mut random)));
        program.kill();
        acknowledged.extend(upload.join().unwrap());
        program = Program::start(folder.path());
        if kill % 10 == 9 {
            hold(&Client::new(program.address.clone()), &plant, &acknowledged);
        }
    }
    program.kill();
    assert!(acknowledged.len() > 12, "{} uploads were acknowledged", acknowledged.len());
    finish_and_compare(folder.path(), &plant, &acknowledged);
}

/// Lets all work be finished, and holds it against a service that was never killed.
fn finish_and_compare(folder: &Path, plant: &str, acknowledged: &[String]) {
    let server = Server::start_in(folder);
    let client = &server.client;
    let events = client.events(plant);
    let open = |client: &Client| client.got("/status")["logs_waiting"].as_i64().unwrap();
    if open(client) > 0 {
        events.into_iter().find(|log| log["state"] == "done" && open(client) == 0).unwrap();
    }
    hold(client, plant, acknowledged);
    let logs = client.got(&format!("/logs?plant={plant}"));
    let mut logs: Vec<Value> = logs["logs"].as_array().unwrap().clone();
    logs.reverse();
    let whole = Server::start();
    let other = whole.client.plant(REHEAT_UNIT);
    for log in &logs {
        assert_eq!(
            (log["state"].as_str(), &log["balance_count"]),
            (Some("done"), &log["period_count"]),
            "{log}"
        );
        let file = folder.join("logs").join(log["sha256"].as_str().unwrap());
        let text = std::fs::read_to_string(file).unwrap();
        whole.client.log(&other, log["name"].as_str().unwrap(), "row", &text);
    }
    for series in ["gross_heat_rate", "main_steam.mass_flow", "FT-1001"] {
        let after = client.got(&format!("/trends/{series}?plant={plant}"));
        let before = whole.client.got(&format!("/trends/{series}?plant={other}"));
        assert_eq!(after["from"], before["from"], "{series}");
        assert_eq!(after["value"], before["value"], "{series}: as if nothing had happened");
    }
}
