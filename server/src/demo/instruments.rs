//! The invented unit's instruments: what each reads of a state, with its own errors.

use meterwright_engine::plant::{Plant, Spread, Tag};
use rand_distr::{Distribution, StandardNormal};
use rand_pcg::Pcg64Mcg;

use super::snapshot::Snapshot;

/// Calibration errors are drawn with this share of the stated standard uncertainty: the unit's instruments were looked after.
const CALIBRATION: f64 = 0.5;
/// How much of a sample's noise is that of the one before it.
const PERSISTENCE: f64 = 0.3;

/// All instruments of the unit.
pub(super) struct Instruments<'p> {
    tags: Vec<Instrument<'p>>,
}

struct Instrument<'p> {
    tag: &'p Tag,
    quantity: &'p str,
    /// Calibration error, in standard uncertainties of what doesn't repeat; constant for good.
    calibration: f64,
    /// Noise of the last sample, in its own standard deviations.
    noise: f64,
}

/// Errors that are put into readings: of a tag, the share and the amount (in its unit) that it reads too high.
pub(super) type Errors<'e> = &'e [(&'static str, f64, f64)];

impl<'p> Instruments<'p> {
    /// The instruments that a plant file states, calibrated once for all logs.
    pub(super) fn of(plant: &'p Plant) -> Self {
        let mut random = Pcg64Mcg::new(20_260_131);
        let one = |tag: &'p Tag| {
            let quantity = tag.reads.as_ref().map_or("", |reads| reads.value.as_str());
            Instrument { tag, quantity, calibration: CALIBRATION * normal(&mut random), noise: 0.0 }
        };
        Self { tags: plant.tags.iter().map(one).collect() }
    }

    /// Names of the tags.
    pub(super) fn names(&self) -> impl Iterator<Item = &'p str> {
        self.tags.iter().map(|instrument| instrument.tag.name.value.as_str())
    }

    /// What every tag reads of a state, in its unit, and what it would read without error. `spread` is how large the noise is
    /// beside the stated repeatability.
    pub(super) fn read(
        &mut self,
        state: &Snapshot,
        errors: Errors<'_>,
        spread: f64,
        random: &mut Pcg64Mcg,
    ) -> Vec<(f64, f64)> {
        let mut one = |instrument: &mut Instrument<'_>| {
            let unit = instrument.tag.unit.value;
            // Every tag of the plant file reads something that the simulator knows; a test holds it to that.
            let truth = state.reading(instrument.quantity, unit).unwrap_or(f64::NAN);
            let repeatable =
                instrument.tag.repeatability.map_or(0.0, |part| size(part, instrument.tag, truth));
            let stated = instrument
                .tag
                .sigma
                .iter()
                .map(|part| size(*part, instrument.tag, truth).powi(2))
                .sum::<f64>();
            let constant = (stated - repeatable.powi(2)).max(0.0).sqrt();
            let fresh = (1.0 - PERSISTENCE.powi(2)).sqrt() * normal(random);
            instrument.noise = PERSISTENCE * instrument.noise + fresh;
            let error = errors.iter().filter(|(tag, ..)| *tag == instrument.tag.name.value);
            let put_in: f64 = error.map(|(_, share, amount)| share * truth + amount).sum();
            let reading =
                truth + constant * instrument.calibration + spread * repeatable * instrument.noise + put_in;
            (reading, truth)
        };
        self.tags.iter_mut().map(&mut one).collect()
    }
}

/// Size of a part of an uncertainty for a reading, in the tag's unit.
fn size(part: Spread, tag: &Tag, reading: f64) -> f64 {
    let unit = tag.unit.value;
    match part {
        Spread::OfReading(share) => share * reading.abs(),
        Spread::OfSpan(share) => tag
            .span
            .as_ref()
            .map_or(0.0, |span| unit.spread_from_si(share * (span.value[1] - span.value[0]).abs())),
        Spread::Absolute(amount) => unit.spread_from_si(amount),
    }
}

/// A standard normal number.
pub(super) fn normal(random: &mut Pcg64Mcg) -> f64 {
    StandardNormal.sample(random)
}
