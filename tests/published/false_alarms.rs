//! The share of error-free balances in which anything is found, on three plants, by simulation.

use rand_distr::{Distribution, StandardNormal};
use rand_pcg::Pcg64Mcg;

use meterwright_engine::{Outcome, Reading};

use crate::support::Case;

/// Balances a plant's first row, takes that state for the truth, draws every reading (and what is given with a standard
/// deviation is true) and counts the draws in which anything is found.
fn alarms(stem: &str, draws: u32, rate: f64) -> u32 {
    let case = Case::load(stem);
    let anchor = case.compiled.anchor(&case.rows[0]);
    let truth = case.compiled.balance(&case.rows[0], anchor.as_ref());
    let mut random = Pcg64Mcg::new(7);
    let mut alarms = 0;
    for _ in 0..draws {
        let mut readings = vec![None; truth.tags.len()];
        for (at, tag) in truth.tags.iter().enumerate() {
            let noise: f64 = StandardNormal.sample(&mut random);
            if let (Some(_), Some(value), Some(sigma)) = (case.rows[0][at], tag.reconciled, tag.sigma) {
                let unit = case.compiled.tags()[at].unit;
                readings[at] = Some(Reading::single(unit.from_si(value + sigma * noise)));
            }
        }
        let balance = case.compiled.balance_and_search(&readings, anchor.as_ref(), rate);
        assert_eq!(balance.outcome, Outcome::Converged);
        alarms += u32::from(!balance.findings.is_empty());
    }
    alarms
}

#[test]
fn the_false_alarm_rate_is_held() {
    for (stem, draws, rate) in [
        ("tests/published/net_15", 4000, 0.05),
        ("tests/published/net_4", 4000, 0.10),
        ("tests/plants/exchanger_train", 4000, 0.05),
        ("tests/plants/reheat_unit", 4000, 0.05),
    ] {
        let alarms = alarms(stem, draws, rate);
        let (share, error) =
            (f64::from(alarms) / f64::from(draws), (rate * (1.0 - rate) / f64::from(draws)).sqrt());
        println!("{stem}: {share}");
        assert!((share - rate).abs() < 3.0 * error, "{stem}: {share} of error-free balances, not {rate}");
    }
}
