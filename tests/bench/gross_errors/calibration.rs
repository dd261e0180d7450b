//! Whether what is stated holds: intervals, probabilities, the rate of false alarms and the error of balanced flows, on
//! the example plants.

use rand_pcg::Pcg64Mcg;

use meterwright_engine::quantity::Dimension;
use meterwright_engine::{Balance, Outcome};

use crate::plant::{Draw, Law, Plant};

/// The rate of false alarms that is asked for.
const RATE: f64 = 0.05;
/// The two-sided 95 % point of the normal distribution.
const INTERVAL: f64 = 1.959_964;
/// So many quantities whose intervals hold least are shown.
const WORST: usize = 8;
/// Bins of stated probabilities.
const BINS: usize = 5;

/// A share of counted cases.
#[derive(Clone, Copy, Debug, Default)]
struct Share {
    cases: u32,
    held: u32,
}

impl Share {
    fn add(&mut self, held: bool) {
        self.cases += 1;
        self.held += u32::from(held);
    }

    fn value(self) -> f64 {
        f64::from(self.held) / f64::from(self.cases)
    }
}

/// What came of the draws of one plant and law.
#[derive(Default)]
struct Outcomes {
    skipped: u32,
    alarms: Share,
    quantities: Share,
    /// The same of each quantity.
    each: Vec<Share>,
    indicators: Share,
    /// The same in balances with a finding.
    quantities_found: Share,
    /// Stated probabilities by bins, and their sums.
    stated: [(f64, Share); BINS],
    found: Share,
    named: Share,
    /// Mean sizes of the errors of flows, in sigmas of their readings: read, balanced, by the oracle.
    flows: [f64; 3],
    flow_count: u32,
}

impl Outcomes {
    fn add(&mut self, plant: &Plant, draw: &Draw, balance: &Balance) {
        self.alarms.add(!balance.findings.is_empty());
        self.each.resize(balance.quantities.len(), Share::default());
        for ((told, truth), each) in balance.quantities.iter().zip(&draw.truth.quantities).zip(&mut self.each)
        {
            if let (Some(value), Some(sigma), Some(truth)) = (told.value, told.sigma, truth.value)
                && sigma > 0.0
            {
                let holds = (value - truth).abs() <= INTERVAL * sigma;
                self.quantities.add(holds);
                each.add(holds);
                if !balance.findings.is_empty() {
                    self.quantities_found.add(holds);
                }
            }
        }
        for (told, truth) in balance.indicators.iter().zip(&draw.truth.indicators) {
            if let (Some(value), Some(sigma), Some(truth)) = (told.value, told.sigma, truth.value) {
                self.indicators.add((value - truth).abs() <= INTERVAL * sigma);
            }
        }
        for finding in &balance.findings {
            self.named.add(draw.wrong.contains(&finding.hypothesis));
            let alternatives = finding.alternatives.iter().map(|other| (other.hypothesis, other.probability));
            for (hypothesis, probability) in alternatives.chain([(finding.hypothesis, finding.probability)]) {
                let probability = probability.expect("a search states it");
                let bin = (1..BINS).filter(|bin| probability >= *bin as f64 / BINS as f64).count();
                let (sum, share) = &mut self.stated[bin];
                *sum += probability;
                share.add(draw.wrong.contains(&hypothesis));
            }
        }
        for wrong in &draw.wrong {
            self.found.add(balance.findings.iter().any(|finding| finding.hypothesis == *wrong));
        }
        for (at, label) in plant.compiled.tags().iter().enumerate() {
            let tag = &balance.tags[at];
            if label.unit.dimension() != Dimension::MASS_FLOW {
                continue;
            }
            let values = [
                tag.measured,
                tag.reconciled,
                draw.oracle.tags[at].reconciled,
                draw.truth.tags[at].reconciled,
            ];
            if let ([Some(read), Some(balanced), Some(oracle), Some(truth)], Some(sigma)) =
                (values, tag.sigma)
            {
                for (sum, value) in self.flows.iter_mut().zip([read, balanced, oracle]) {
                    *sum += (value - truth).abs() / sigma;
                }
                self.flow_count += 1;
            }
        }
    }
}

/// Draws so many states of each plant under each law, and prints how what is stated holds.
pub(crate) fn calibration(trials: u32) {
    let trials = trials.min(2000);
    println!("\nWhat is stated, held against {trials} simulations of each example plant");
    for name in ["exchanger_train", "header_network", "reheat_unit"] {
        let plant = Plant::load(name);
        for law in [Law::None, Law::Own, Law::Uniform] {
            let mut random = Pcg64Mcg::new(20_261_201);
            let mut outcomes = Outcomes::default();
            for _ in 0..trials {
                let Some(draw) = plant.draw(law, &mut random) else {
                    outcomes.skipped += 1;
                    continue;
                };
                let balance = plant.compiled.balance_and_search(&draw.readings, Some(&plant.anchor), RATE);
                if balance.outcome == Outcome::Converged {
                    outcomes.add(&plant, &draw, &balance);
                } else {
                    outcomes.skipped += 1;
                }
            }
            print(name, law, &plant, &outcomes);
        }
    }
}

fn print(name: &str, law: Law, plant: &Plant, outcomes: &Outcomes) {
    let errors = match law {
        Law::None => "no error",
        Law::Own => "errors of the search's own prior",
        Law::Uniform => "errors of 0.5 to 1.5 prior standard deviations",
    };
    println!("\n{name}, {errors} ({} draws without a state that closes)", outcomes.skipped);
    println!("  anything found                     {:.4}", outcomes.alarms.value());
    println!("  95 % intervals of quantities hold  {:.4}", outcomes.quantities.value());
    let labels = plant.compiled.quantities();
    let known = outcomes.each.iter().zip(labels).filter(|(share, _)| share.cases > 0);
    let mut each: Vec<(f64, &str)> =
        known.map(|(share, label)| (share.value(), label.name.as_str())).collect();
    each.sort_by(|a, b| a.0.total_cmp(&b.0));
    let worst: Vec<String> =
        each.iter().take(WORST).map(|(share, name)| format!("{name} {share:.3}")).collect();
    println!("  ... the least                      {}", worst.join(", "));
    println!("  ... in balances with a finding     {:.4}", outcomes.quantities_found.value());
    println!("  95 % intervals of indicators hold  {:.4}", outcomes.indicators.value());
    let mean = outcomes.flows.map(|sum| sum / f64::from(outcomes.flow_count));
    println!(
        "  mean error of flows, sigmas: read {:.3}, balanced {:.3}, oracle {:.3}",
        mean[0], mean[1], mean[2]
    );
    if law == Law::None {
        return;
    }
    println!(
        "  errors named {:.3}, names that are right {:.3}",
        outcomes.found.value(),
        outcomes.named.value()
    );
    for (sum, share) in outcomes.stated.iter().filter(|(_, share)| share.cases > 0) {
        println!(
            "  stated {:.2} on average: true in {:.3} of {} cases",
            sum / f64::from(share.cases),
            share.value(),
            share.cases
        );
    }
}
