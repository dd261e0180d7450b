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

use meterwright_engine::plant::parse;
use meterwright_engine::{Balance, CompiledPlant, Outcome, Reading};

const UNIT: &str = include_str!("../plants/reheat_unit.toml");
const LOG: &str = include_str!("../plants/reheat_unit.csv");

/// Balances for each number of errors.
const DRAWS: usize = 1000;

/// A seeded generator: uniform numbers of a linear congruence, normal ones by Box and Muller.
struct Random(u64);

impl Random {
    fn uniform(&mut self) -> f64 {
        self.0 = self.0.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        ((self.0 >> 33) as f64 + 1.0) / f64::from(1_u32 << 31)
    }

    fn below(&mut self, count: usize) -> usize {
        self.uniform();
        (self.0 >> 33) as usize % count
    }

    fn normal(&mut self) -> f64 {
        (-2.0 * self.uniform().ln()).sqrt() * (std::f64::consts::TAU * self.uniform()).cos()
    }
}

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
    random: &mut Random,
) -> Vec<Option<Reading>> {
    let mut noise: Vec<f64> = truth.tags.iter().map(|_| random.normal()).collect();
    for _ in 0..wrong {
        let at = random.below(noise.len());
        let sign = if random.uniform() > 0.5 { 1.0 } else { -1.0 };
        noise[at] += sign * (5.0 + 10.0 * random.uniform());
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
        let mut random = Random(wrong as u64 + 1);
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
