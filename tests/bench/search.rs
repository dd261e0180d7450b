//! How long one balance takes with a search for errors, every loss a hypothesis, one core: the reheat unit, with none to
//! five of its tags wrong by 5 to 15 standard deviations.
//!
//! `cargo bench --bench search`

#![allow(
    clippy::unwrap_used,
    clippy::expect_used,
    clippy::panic,
    reason = "a benchmark may stop at the first surprise"
)]

use std::collections::HashMap;
use std::hint::black_box;
use std::time::Instant;

use rand_distr::{Distribution, StandardNormal, Uniform};
use rand_pcg::Pcg64Mcg;

use meterwright_engine::plant::parse;
use meterwright_engine::{Balance, CompiledPlant, Outcome, Reading};

const UNIT: &str = include_str!("../plants/reheat_unit.toml");
const LOG: &str = include_str!("../plants/reheat_unit.csv");

/// Balances for each number of errors.
const DRAWS: usize = 1000;

fn first_row(compiled: &CompiledPlant) -> Vec<Option<Reading>> {
    let mut lines = LOG.lines().map(|line| line.split(','));
    let (head, row) = (lines.next().expect("a head"), lines.next().expect("a row"));
    let cells: HashMap<&str, &str> = head.zip(row).collect();
    let reading = |name: &str| cells.get(name)?.parse().ok().map(Reading::single);
    compiled.tags().iter().map(|tag| reading(&tag.name)).collect()
}

/// Readings of a true state with noise, and so many of them wrong.
fn readings(
    compiled: &CompiledPlant,
    truth: &Balance,
    wrong: usize,
    random: &mut Pcg64Mcg,
) -> Vec<Option<Reading>> {
    let mut noise: Vec<f64> = truth.tags.iter().map(|_| StandardNormal.sample(&mut *random)).collect();
    let place = Uniform::new(0, noise.len()).expect("there are tags");
    let size = Uniform::new(5.0, 15.0).expect("a range");
    for _ in 0..wrong {
        let at = place.sample(random);
        let size: f64 = size.sample(random);
        noise[at] += size.copysign(noise[at]);
    }
    let read =
        |((tag, label), noise): ((&meterwright_engine::TagBalance, &meterwright_engine::Label), &f64)| {
            Some(Reading::single(label.unit.from_si(tag.reconciled? + tag.sigma? * noise)))
        };
    truth.tags.iter().zip(compiled.tags()).zip(&noise).map(read).collect()
}

fn main() {
    let compiled = CompiledPlant::compile(&parse(UNIT).expect("sound")).expect("compiles");
    let first = first_row(&compiled);
    let anchor = compiled.anchor(&first);
    let begin = Instant::now();
    black_box(compiled.balance_and_search(&first, anchor.as_ref(), 0.05));
    let tested = compiled.hypotheses().len();
    println!("{tested} hypotheses; the first balance, with its simulation: {:.0} ms", milliseconds(begin));
    println!("wrong tags   median ms   90 % ms   worst ms   findings");
    let truth = compiled.balance(&first, anchor.as_ref());
    for wrong in 0..=5 {
        let mut random = Pcg64Mcg::new(wrong as u128 + 1);
        let (mut times, mut findings) = (Vec::new(), 0);
        for _ in 0..DRAWS {
            let readings = readings(&compiled, &truth, wrong, &mut random);
            let begin = Instant::now();
            let balance = black_box(compiled.balance_and_search(black_box(&readings), anchor.as_ref(), 0.05));
            times.push(milliseconds(begin));
            assert_eq!(balance.outcome, Outcome::Converged);
            findings += balance.findings.len();
        }
        times.sort_by(f64::total_cmp);
        println!(
            "{wrong:>10}   {:>9.2}   {:>7.2}   {:>8.2}   {:>8.2}",
            times[DRAWS / 2],
            times[DRAWS * 9 / 10],
            times[DRAWS - 1],
            findings as f64 / DRAWS as f64
        );
    }
}

fn milliseconds(begin: Instant) -> f64 {
    begin.elapsed().as_secs_f64() * 1e3
}
