//! What the service takes: bytes and time a balance in the store, the time to read a trend, and the time of one balance over
//! HTTP beside the engine called directly.
//!
//! `cargo bench --bench service -- DAYS` stores so many days of five-minute balances of the reheat unit (10 by default; 365
//! is the year that the design speaks of) through the same doors as an upload.

#![expect(clippy::unwrap_used, reason = "a measurement stops where what it needs can't be had")]

use std::fmt::Write;
use std::fs;
use std::hint::black_box;
use std::path::Path;
use std::time::{Duration, Instant};

use futures_util::stream;
use jiff::{SignedDuration, Timestamp};
use meterwright::found::PeriodChoice;
use meterwright::http::{Reach, serve};
use meterwright::ready::ReadyPlant;
use meterwright::store::{LogState, PlantSaved};
use meterwright::work::Work;
use meterwright_engine::Reading;
use rand_distr::{Distribution, StandardNormal};
use rand_pcg::Pcg64Mcg;
use serde_json::json;
use tempfile::TempDir;
use tokio::net::TcpListener;
use tokio::runtime::Runtime;

const PLANT: &str = include_str!("../plants/reheat_unit.toml");
const LOG: &str = include_str!("../plants/reheat_unit.csv");
const SERIES: [&str; 3] = ["main_steam.mass_flow", "gross_heat_rate", "FT-1001"];

fn main() {
    let days = std::env::args().skip(1).find_map(|word| word.parse().ok()).unwrap_or(10);
    let folder = TempDir::new().unwrap();
    let runtime = Runtime::new().unwrap();
    runtime.block_on(async {
        let work = Work::open(folder.path()).await.unwrap();
        tokio::spawn(work.clone().run());
        store(&work, folder.path(), days).await;
    });
    one_balance(&runtime);
}

/// Names and values of the log's first row.
fn first_row() -> (Vec<&'static str>, Vec<f64>) {
    let mut lines = LOG.lines();
    let names = lines.next().unwrap().split(',').skip(1).collect();
    (names, lines.next().unwrap().split(',').skip(1).map(|value| value.parse().unwrap()).collect())
}

/// A log of five-minute rows, each reading moved by a thousandth at random.
fn log(days: u32) -> String {
    let mut random = Pcg64Mcg::new(4);
    let (names, values) = first_row();
    let begin: Timestamp = "2025-01-01T00:00:00Z".parse().unwrap();
    let mut text = format!("time,{}\n", names.join(","));
    for row in 0..days * 288 {
        let _ = write!(text, "{}", begin + SignedDuration::from_mins(5 * i64::from(row)));
        for value in &values {
            let moved: f64 = StandardNormal.sample(&mut random);
            let _ = write!(text, ",{:.3}", value * (1.0 + 1e-3 * moved));
        }
        text.push('\n');
    }
    text
}

async fn store(work: &Work, folder: &Path, days: u32) {
    let ready = ReadyPlant::of(PLANT).unwrap();
    let (name, hash) = (&ready.plant.name.value, &ready.plant.revision);
    let saved = work.store.create_plant(name, hash, PLANT, Timestamp::now()).await.unwrap();
    let PlantSaved::New(plant) = saved else { return };
    let mut events = work.events();
    let body = stream::iter([Ok::<_, String>(log(days).into_bytes())]);
    let begun = Instant::now();
    work.receive(plant.clone(), "days.csv".into(), PeriodChoice::Row, body).await.unwrap();
    while events.recv().await.unwrap().log.state != LogState::Done {}
    let took = begun.elapsed();
    let count = f64::from(days * 288);
    println!(
        "{count} balances of 66 tags stored in {:.1} s: {:.2} ms each",
        took.as_secs_f64(),
        1e3 * took.as_secs_f64() / count
    );
    let series = work.store.series(&plant).await.unwrap();
    for name in SERIES {
        let measure = &series.iter().find(|one| one.name == name).unwrap().measure;
        let times = timed(20, async || {
            black_box(work.store.trend(&plant, name, measure, None, None).await.unwrap());
        })
        .await;
        println!(
            "{days} days of {name} read in {:.1} ms (slowest {:.1} ms)",
            milliseconds(times[10]),
            milliseconds(times[19])
        );
    }
    // Closing writes everything into the one file.
    work.store.close().await;
    let bytes = fs::metadata(folder.join("meterwright.db")).unwrap().len() as f64;
    println!(
        "{:.2} kB each, so {:.2} GB a year of 105,120",
        bytes / count / 1e3,
        bytes / count * 105_120.0 / 1e9
    );
    if let Some(kept) = std::env::var_os("KEEP") {
        fs::copy(folder.join("meterwright.db"), kept).unwrap();
    }
}

/// Times of so many runs, in order.
async fn timed(runs: usize, mut run: impl AsyncFnMut()) -> Vec<Duration> {
    let mut times = Vec::with_capacity(runs);
    for _ in 0..runs {
        let begun = Instant::now();
        run().await;
        times.push(begun.elapsed());
    }
    times.sort_unstable();
    times
}

fn milliseconds(time: Duration) -> f64 {
    1e3 * time.as_secs_f64()
}

/// One balance over HTTP, beside the engine called directly.
fn one_balance(runtime: &Runtime) {
    let folder = TempDir::new().unwrap();
    let address = runtime.block_on(async {
        let work = Work::open(folder.path()).await.unwrap();
        let listener = TcpListener::bind("127.0.0.1:0").await.unwrap();
        let address = listener.local_addr().unwrap();
        tokio::spawn(serve(listener, work, Reach::Loopback, std::future::pending()));
        address
    });
    let ready = ReadyPlant::of(PLANT).unwrap();
    let agent = ureq::Agent::new_with_defaults();
    let (names, values) = first_row();
    let mut random = Pcg64Mcg::new(5);
    let (mut direct, mut over_http) = (Vec::new(), Vec::new());
    for _ in 0..300 {
        let moved: Vec<f64> = values
            .iter()
            .map(|value| {
                let moved: f64 = StandardNormal.sample(&mut random);
                value * (1.0 + 1e-3 * moved)
            })
            .collect();
        let readings: Vec<Option<Reading>> =
            moved.iter().map(|value| Some(Reading::single(*value))).collect();
        let begun = Instant::now();
        black_box(ready.balance(&readings, 0.05));
        direct.push(begun.elapsed());
        let readings: serde_json::Map<_, _> =
            names.iter().zip(&moved).map(|(name, value)| ((*name).to_owned(), json!(value))).collect();
        let body = json!({ "plant": PLANT, "readings": readings }).to_string();
        let begun = Instant::now();
        let mut answer = agent
            .post(format!("http://{address}/api/v1/reconcile"))
            .content_type("application/json")
            .send(body)
            .unwrap();
        black_box(answer.body_mut().read_to_string().unwrap());
        over_http.push(begun.elapsed());
    }
    for (what, mut times) in [("the engine, with its search", direct), ("the same over HTTP", over_http)] {
        let first = times[0];
        times.sort_unstable();
        println!(
            "{what}: median {:.2} ms, slowest of 300 but the first {:.2} ms; the first {:.0} ms",
            milliseconds(times[150]),
            milliseconds(times[298]),
            milliseconds(first)
        );
    }
}
