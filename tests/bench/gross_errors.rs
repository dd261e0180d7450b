//! Which gross errors are found: overall power, selectivity and wrong names of the search and of every published method,
//! beside the published figures, on the published networks with their papers' protocols and fixed seeds.
//!
//! `cargo bench --bench gross_errors -- [one-bias] [one-leak] [several] [calibration] [TRIALS]`; all sections and
//! 4,000 trials unless said. The last section holds what is stated of the example plants against simulations of them.

#![allow(
    clippy::unwrap_used,
    clippy::expect_used,
    clippy::panic,
    reason = "a benchmark may stop at the first surprise"
)]

#[path = "gross_errors/calibration.rs"]
mod calibration;
#[path = "gross_errors/mod.rs"]
mod gross_errors;
#[path = "gross_errors/plant.rs"]
mod plant;
#[path = "gross_errors/report.rs"]
mod report;

/// A section's name and what prints it with so many trials.
type Section = (&'static str, fn(u32));

const SECTIONS: &[Section] = &[
    ("one-bias", report::one_bias_each),
    ("one-leak", report::one_leak_each),
    ("several", report::several),
    ("calibration", calibration::calibration),
];

fn main() {
    let arguments: Vec<String> = std::env::args().skip(1).collect();
    let trials = arguments.iter().find_map(|argument| argument.parse().ok()).unwrap_or(4000);
    let asked = |section: &Section| arguments.iter().any(|argument| argument == section.0);
    let all = !SECTIONS.iter().any(asked);
    SECTIONS.iter().filter(|section| all || asked(section)).for_each(|(_, print)| print(trials));
}
