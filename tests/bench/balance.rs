//! How long one balance takes, from an array of readings to the result in memory, all statistics, no search, one core:
//! the reheat unit, and 4, 16 and 64 such units joined by headers. Beside it, where Python is present, a
//! general-purpose optimiser with exact derivatives on the same unit in the same run.
//!
//! `cargo bench --bench balance`

#![allow(
    clippy::unwrap_used,
    clippy::expect_used,
    clippy::panic,
    reason = "a benchmark may stop at the first surprise"
)]

mod units;

use std::hint::black_box;
use std::process::Command;
use std::time::{Duration, Instant};

use meterwright_engine::plant::parse;
use meterwright_engine::{CompiledPlant, Outcome, Reading};

/// Median and tenth percentile of so many runs, after a few that warm up.
fn measure(runs: usize, mut work: impl FnMut()) -> (Duration, Duration) {
    (0..runs.div_ceil(10)).for_each(|_| work());
    let mut times: Vec<Duration> = (0..runs)
        .map(|_| {
            let begin = Instant::now();
            work();
            begin.elapsed()
        })
        .collect();
    times.sort();
    (times[runs / 2], times[runs / 10])
}

fn micros(duration: Duration) -> f64 {
    duration.as_secs_f64() * 1e6
}

fn main() {
    println!("one balance, one core           variables  equations   tags    median us   10 % us   JSON us");
    let mut sizes = Vec::new();
    for count in [1, 4, 16, 64] {
        let (text, readings) = units::joined(count);
        let plant = parse(&text).expect("the joined units are a sound plant file");
        let compiled = CompiledPlant::compile(&plant).expect("the joined units compile");
        let readings: Vec<Option<Reading>> =
            compiled.tags().iter().map(|tag| readings.get(&tag.name).copied().map(Reading::single)).collect();
        let anchor = compiled.anchor(&readings);
        let balance = compiled.balance(&readings, anchor.as_ref());
        assert_eq!(balance.outcome, Outcome::Converged, "{count} units");
        let (median, low) = measure(4000 / count, || {
            black_box(compiled.balance(black_box(&readings), anchor.as_ref()));
        });
        let written = units::written(&compiled, &balance);
        let (json, _) = measure(4000 / count, || {
            black_box(written());
        });
        println!(
            "reheat unit x {count:<2}                {:>9}  {:>9}  {:>5}  {:>11.1}  {:>8.1}  {:>8.1}",
            compiled.problem().variables(),
            compiled.problem().rows(),
            compiled.tags().len(),
            micros(median),
            micros(low),
            micros(json),
        );
        sizes.push((f64::from(count as u32), micros(low)));
    }
    with_indicators();
    let ((small, fast), (large, slow)) = (sizes[0], sizes[sizes.len() - 1]);
    println!("growth from 1 to 64 units: n^{:.2}", (slow / fast).ln() / (large / small).ln());
    peer();
}

/// The unit once more with the indicators that its machines have ready-made.
fn with_indicators() {
    let (text, readings) = units::joined(1);
    let plant = parse(&text).expect("the unit is a sound plant file");
    let compiled = CompiledPlant::compile_with_indicators(&plant).expect("the unit compiles");
    let readings: Vec<Option<Reading>> =
        compiled.tags().iter().map(|tag| readings.get(&tag.name).copied().map(Reading::single)).collect();
    let anchor = compiled.anchor(&readings);
    let (median, low) = measure(4000, || {
        black_box(compiled.balance(black_box(&readings), anchor.as_ref()));
    });
    let (indicators, median, low) = (compiled.indicators().len(), micros(median), micros(low));
    println!(
        "reheat unit, all {indicators} indicators that are ready-made or its own   {median:>11.1}  {low:>8.1}"
    );
}

/// The peer, where there is a Python that has it.
fn peer() {
    let script = concat!(env!("CARGO_MANIFEST_DIR"), "/tests/oracle/time_peer.py");
    let python = std::env::var("PEER_PYTHON").unwrap_or_else(|_| "python3".into());
    match Command::new(&python).args([script, "reheat_unit"]).output() {
        Ok(output) if output.status.success() => {
            println!(
                "general-purpose optimiser on the reheat unit: {}",
                String::from_utf8_lossy(&output.stdout).trim()
            );
        }
        _ => println!(
            "general-purpose optimiser: not measured ({python} lacks what tests/oracle/README.md names)"
        ),
    }
}
