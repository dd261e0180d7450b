//! A balance as it is stored.

use meterwright_engine::Balance;

use crate::period::Period;
use crate::ready::ReadyPlant;
use crate::record::{HypothesisEvidence, Layout, Mark, PeriodReading, Record};
use crate::report::Labels;
use crate::report::document::{BalanceDocument, VerdictWord};
use crate::store::{NewBalance, TrendPoint};

/// What the balances of a plant have in common when they are stored.
pub(crate) struct Shape<'p> {
    labels: Labels<'p>,
    revision: u32,
    /// Where the quantity or the indicator that each tag reads stands.
    read: Vec<Option<Place>>,
}

/// Where a value stands in a balance.
#[derive(Clone, Copy)]
enum Place {
    Quantity(usize),
    Indicator(usize),
}

impl<'p> Shape<'p> {
    pub(crate) fn new(ready: &'p ReadyPlant, revision: u32) -> Self {
        let labels = ready.labels();
        let find = |name: &str| {
            let quantity = labels.quantities.iter().position(|label| label.name == name).map(Place::Quantity);
            quantity.or_else(|| {
                labels.indicators.iter().position(|label| label.name == name).map(Place::Indicator)
            })
        };
        let read = labels.tags.iter().map(|tag| tag.quantity.as_deref().and_then(find)).collect();
        Self { labels, revision, read }
    }

    /// The layout of the records.
    pub(crate) fn layout(&self, ready: &ReadyPlant) -> Layout {
        let descriptions: Vec<String> = ready.plant.tags.iter().map(|tag| tag.description.clone()).collect();
        Layout::new(&self.labels, &descriptions)
    }

    /// What is stored of a balance.
    pub(crate) fn saved(&self, period: &Period, balance: &Balance) -> NewBalance {
        let document = BalanceDocument::new(&self.labels, period, balance, true);
        let mut at: Vec<String> = document.findings.iter().map(|finding| finding.at.to_string()).collect();
        let findings = document.findings.iter().map(|finding| {
            // A plain structure with text keys becomes text without fail.
            (finding.at.to_string(), serde_json::to_string(finding).unwrap_or_default())
        });
        let findings = findings.collect();
        at.sort_unstable();
        let excluded = document.tags.iter().filter(|tag| tag.read.verdict == VerdictWord::Excluded);
        let mark = Mark {
            revision: self.revision,
            findings: at,
            excluded: excluded.map(|tag| tag.tag.to_string()).collect(),
        };
        let test_passes = balance.global_test.filter(|_| document.converged).map(|test| test.passes);
        let points = if document.converged { self.points(balance) } else { Vec::new() };
        let record =
            Record { balance: document, readings: readings(period), evidence: self.evidence(balance) };
        let record = record.pack();
        NewBalance { from: period.from, to: period.to, test_passes, record, findings, mark, points }
    }

    fn evidence(&self, balance: &Balance) -> Vec<HypothesisEvidence> {
        let told = balance.evidence.iter().map(|evidence| {
            let unit = self.labels.hypotheses[evidence.hypothesis].unit.difference_to_si(1.0);
            HypothesisEvidence {
                hypothesis: evidence.hypothesis as u16,
                score: evidence.score * unit,
                information: evidence.information * unit * unit,
            }
        });
        told.collect()
    }

    /// A point of each series, in the order of the layout's tags, quantities and indicators.
    fn points(&self, balance: &Balance) -> Vec<TrendPoint> {
        let single = |value: Option<f64>| value.map_or(f32::NAN, |value| value as f32);
        let repeat_sigma = |place: Option<Place>| match place {
            Some(Place::Quantity(at)) => balance.quantities[at].repeat_sigma,
            Some(Place::Indicator(at)) => balance.indicators[at].repeat_sigma,
            None => None,
        };
        let tags = balance.tags.iter().zip(&self.read).map(|(tag, place)| TrendPoint {
            value: single(tag.reconciled),
            sigma: single(tag.reconciled_sigma),
            repeat_sigma: single(repeat_sigma(*place)),
            measured: single(tag.measured),
        });
        let point = |value, sigma, repeat_sigma| TrendPoint {
            value: single(value),
            sigma: single(sigma),
            repeat_sigma: single(repeat_sigma),
            measured: f32::NAN,
        };
        let quantities = balance.quantities.iter();
        let quantities = quantities.map(|told| point(told.value, told.sigma, told.repeat_sigma));
        let indicators = balance.indicators.iter();
        tags.chain(quantities)
            .chain(indicators.map(|told| point(told.value, told.sigma, told.repeat_sigma)))
            .collect()
    }
}

/// What each series of a layout is named and measures, in the order of the points.
pub(crate) fn series(layout: &Layout) -> Vec<(String, String)> {
    let names = layout.tags.iter().chain(&layout.quantities).chain(&layout.indicators);
    names.map(|name| (name.name.clone(), name.measure.clone())).collect()
}

fn readings(period: &Period) -> Vec<PeriodReading> {
    const HOUR: f64 = 3600.0;
    let one = |(place, reading): (usize, &Option<meterwright_engine::Reading>)| {
        let trend = period.trends.get(place).copied().flatten();
        PeriodReading {
            mean: reading.map(|reading| reading.mean),
            standard_error: reading.and_then(|reading| reading.standard_error),
            samples: reading.map_or(0, |reading| reading.samples),
            slope: trend.map(|trend| trend.slope * HOUR),
            slope_error: trend.map(|trend| trend.standard_error * HOUR),
        }
    };
    period.readings.iter().enumerate().map(one).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::log::Log;
    use crate::period::{PeriodRule, Window, periods};
    use std::path::Path;

    const PLANT: &str = include_str!("../../../tests/plants/reheat_unit.toml");
    const LOG: &str = concat!(env!("CARGO_MANIFEST_DIR"), "/tests/plants/reheat_unit.csv");

    /// The first period of the reheat unit's log, one tag wrong by twelve sigmas and one without a reading.
    fn balanced(ready: &ReadyPlant) -> (Period, Balance) {
        let log = Log::open(Path::new(LOG), ready.expectation.clone()).unwrap();
        let mut period = periods(PeriodRule::Row, &log, Window::default()).unwrap().next().unwrap().unwrap();
        period.readings[0].as_mut().unwrap().mean += 27.0;
        period.readings[5] = None;
        let anchor = ready.compiled.anchor(&period.readings);
        let balance = ready.compiled.balance_and_search(&period.readings, anchor.as_ref(), 0.05);
        (period, balance)
    }

    fn near(a: Option<f64>, b: Option<f64>, share: f64) -> bool {
        match (a, b) {
            (Some(a), Some(b)) => (a - b).abs() <= share * a.abs(),
            (a, b) => a == b,
        }
    }

    #[test]
    fn a_record_says_what_the_balance_said() {
        let ready = ReadyPlant::of(PLANT).unwrap();
        let (period, balance) = balanced(&ready);
        let shape = Shape::new(&ready, 1);
        let layout = Layout { ..serde_json::from_str(&shape.layout(&ready).to_text()).unwrap() };
        let labels = ready.labels();
        let before = BalanceDocument::new(&labels, &period, &balance, true);
        let saved = shape.saved(&period, &balance);
        let record = Record::unpack(&saved.record, &layout).unwrap();
        let after = &record.balance;
        assert_eq!(before.findings[0].at, "FT-1001");
        assert_eq!((&after.findings, &after.warnings), (&before.findings, &before.warnings));
        assert_eq!((after.from, after.to, after.iterations), (before.from, before.to, before.iterations));
        assert_eq!(after.global_test_after, before.global_test_after);
        for (a, b) in before.tags.iter().zip(&after.tags) {
            assert_eq!((&a.tag, a.read.class, a.read.verdict), (&b.tag, b.read.class, b.read.verdict));
            assert_eq!((&a.read.unit, a.read.samples), (&b.read.unit, b.read.samples));
            let (a, b) = (&a.read, &b.read);
            assert!(near(a.measured, b.measured, 1e-11) && near(a.reconciled, b.reconciled, 1e-12));
            assert!(near(a.sigma, b.sigma, 2e-4) && near(a.statistic, b.statistic, 2e-4));
            assert!(near(a.minimum_detectable_bias, b.minimum_detectable_bias, 2e-4));
            let correction = a.correction.unwrap_or(0.0) - b.correction.unwrap_or(0.0);
            assert!(correction.abs() <= 1e-11 * a.measured.unwrap_or(1.0).abs(), "{correction}");
        }
        assert_eq!(before.quantities.len(), after.quantities.len());
        assert!(before.quantities.len() > 100);
        for (a, b) in before.quantities.iter().zip(&after.quantities) {
            assert_eq!((&a.quantity, &a.unit, a.class), (&b.quantity, &b.unit, b.class));
            assert!(near(a.value, b.value, 1e-12) && near(a.sigma, b.sigma, 2e-4));
            assert!(near(a.repeat_sigma, b.repeat_sigma, 2e-4));
        }
        assert_eq!(before.indicators.len(), after.indicators.len());
        assert_eq!(record.evidence.len(), balance.evidence.len());
        assert_eq!(record.readings[0].mean, period.readings[0].map(|reading| reading.mean));
        assert_eq!(saved.mark.excluded, [before.tags[5].tag.to_string()]);
    }

    #[test]
    fn a_damaged_record_is_refused_and_another_layout_too() {
        let ready = ReadyPlant::of(PLANT).unwrap();
        let (period, balance) = balanced(&ready);
        let shape = Shape::new(&ready, 1);
        let layout = shape.layout(&ready);
        let saved = shape.saved(&period, &balance);
        for place in (0..saved.record.len()).step_by(97) {
            let mut damaged = saved.record.clone();
            damaged[place] ^= 4;
            assert_eq!(Record::unpack(&damaged, &layout), Err(crate::record::RecordError::Damaged));
        }
        let mut other = layout.clone();
        other.quantities.pop();
        assert_eq!(Record::unpack(&saved.record, &other), Err(crate::record::RecordError::Foreign));
    }

    #[test]
    fn evidence_finds_the_error_again() {
        let ready = ReadyPlant::of(PLANT).unwrap();
        let (period, balance) = balanced(&ready);
        let shape = Shape::new(&ready, 1);
        let layout = shape.layout(&ready);
        let saved = shape.saved(&period, &balance);
        let record = Record::unpack(&saved.record, &layout).unwrap();
        let told = record
            .evidence
            .iter()
            .find(|told| layout.hypotheses[usize::from(told.hypothesis)].name == "FT-1001");
        let told = told.unwrap();
        let size = told.score / told.information;
        assert!((size - 27.0).abs() < 4.0 / told.information.sqrt(), "a bias of {size} t/h");
    }
}
