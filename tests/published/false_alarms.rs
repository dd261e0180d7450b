//! The share of error-free balances in which anything is found, on three plants, by simulation.

use meterwright_engine::{Outcome, Reading};

use crate::support::Case;

/// The generator splitmix64 (Steele, Lea and Flood, OOPSLA 2014) with Box and Muller's normals.
struct Random(u64);

impl Random {
    fn uniform(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^= z >> 31;
        ((z >> 11) + 1) as f64 / (1_u64 << 53) as f64
    }

    fn normal(&mut self) -> f64 {
        (-2.0 * self.uniform().ln()).sqrt() * (std::f64::consts::TAU * self.uniform()).cos()
    }
}

/// Balances a plant's first row, takes that state for the truth, draws every reading (and what is given with a standard
/// deviation is true) and counts the draws in which anything is found.
fn alarms(stem: &str, draws: u32, rate: f64) -> u32 {
    let case = Case::load(stem);
    let anchor = case.compiled.anchor(&case.rows[0]);
    let truth = case.compiled.balance(&case.rows[0], anchor.as_ref());
    let mut random = Random(7);
    let mut alarms = 0;
    for _ in 0..draws {
        let draw = |(tag, (label, read)): (
            &meterwright_engine::TagBalance,
            (&meterwright_engine::Label, &Option<Reading>),
        )| {
            read.as_ref()?;
            let (value, sigma) = (tag.reconciled?, tag.sigma?);
            Some(Reading::single(label.unit.from_si(value + sigma * random.normal())))
        };
        let readings: Vec<Option<Reading>> =
            truth.tags.iter().zip(case.compiled.tags().iter().zip(&case.rows[0])).map(draw).collect();
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
