//! Tags and soft givens as observations: a logged number in, a value with its uncertainty out.

use meterwright_thermo::water::Region;

use crate::balance::{Label, Reading};
use crate::equation::GRAVITY;
use crate::plant::{Spread, Tag};
use crate::quantity::Unit;

/// A tag, ready to be read.
pub(crate) struct Instrument {
    /// What it is called and reads.
    pub(crate) label: Label,
    /// The quantity it reads.
    pub(crate) reads: Option<u32>,
    /// The variable that stands for that quantity in the tag's reference: a gauge pressure's is its own.
    pub(crate) base: Option<u32>,
    /// The variable it observes, shared errors counted in; none where nothing states its uncertainty.
    pub(crate) variable: Option<u32>,
    /// The variable that a reading without uncertainty fixes: a tag that enters no balance, named in a formula.
    pub(crate) constant: Option<u32>,
    /// Variable minus reading, SI: the surroundings' pressure for a gauge tag where that is exact.
    pub(crate) shift: f64,
    /// Shared errors it takes part in: the variable that holds the error's size for this reading, and that size.
    pub(crate) shares: Vec<(u32, Spread)>,
    /// Station pressure (Pa) and temperature (K) that a water leg is reckoned with.
    pub(crate) surroundings: (f64, f64),
    /// Its own standard uncertainty.
    pub(crate) uncertainty: Uncertainty,
    /// The tag as the plant file states it.
    pub(crate) tag: Tag,
}

/// A standard uncertainty of several parts, added up by kind.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Uncertainty {
    /// Share of the reading.
    of_reading: f64,
    /// The part that doesn't depend on it, SI.
    absolute: f64,
}

impl Uncertainty {
    /// Whether it vanishes with the reading.
    pub(crate) fn is_relative(self) -> bool {
        self.absolute == 0.0
    }

    /// Adds up what a tag states.
    pub(crate) fn of(tag: &Tag) -> Self {
        tag.sigma.iter().fold(Self { of_reading: 0.0, absolute: 0.0 }, |sum, part| match *part {
            Spread::OfReading(share) => Self { of_reading: sum.of_reading.hypot(share), ..sum },
            Spread::OfSpan(share) => Self { absolute: sum.absolute.hypot(share * span_length(tag)), ..sum },
            Spread::Absolute(amount) => Self { absolute: sum.absolute.hypot(amount), ..sum },
        })
    }
}

/// Length of a tag's span, SI; zero without one.
pub(super) fn span_length(tag: &Tag) -> f64 {
    tag.span.as_ref().map_or(0.0, |span| (span.value[1] - span.value[0]).abs())
}

/// A reading after known corrections, with its uncertainty, in the SI of the tag's unit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Observed {
    pub(crate) value: f64,
    /// The tag's own standard uncertainty, shared errors not counted.
    pub(crate) sigma: f64,
    /// The part of it that is drawn anew each period.
    pub(crate) repeat: Option<f64>,
}

/// Why a reading takes no part.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum Exclusion {
    /// There is none.
    Missing,
    /// It lies beyond what the transmitter can send.
    OutsideSpan,
    /// Its uncertainty comes out as zero.
    NoUncertainty,
}

/// How far beyond its span a transmitter still sends a reading: 3.6 mA and 21 mA of 4 to 20 mA (common practice, no
/// source).
const SPAN_LIMITS: (f64, f64) = (-0.025, 1.06);

impl Instrument {
    /// Turns a reading into an observation.
    pub(crate) fn read(&self, reading: Option<&Reading>) -> Result<Observed, Exclusion> {
        let reading = reading.filter(|reading| reading.mean.is_finite()).ok_or(Exclusion::Missing)?;
        let unit = self.tag.unit.value;
        if self.outside_span(unit.to_si(reading.mean)) {
            return Err(Exclusion::OutsideSpan);
        }
        let number = reading.mean * self.tag.factor;
        let mut value = unit.to_si(number) + self.tag.offset;
        let mut stated = match reading.sigma {
            Some(sigma) => unit.spread_to_si(sigma),
            None => self.stated_sigma(value, unit),
        };
        if let Some(cut_off) = self.tag.cut_off.filter(|cut_off| value < *cut_off) {
            (value, stated) = (0.0, cut_off / 2.0);
        }
        value -= self.water_leg(value);
        let error_of_mean = unit.difference_to_si(reading.standard_error.unwrap_or(0.0)).abs();
        let repeat = match (self.tag.repeatability, reading.standard_error) {
            (None, None) => None,
            (repeatability, _) => {
                let repeatability = repeatability.map_or(0.0, |spread| self.spread(spread, value, unit));
                Some(repeatability.hypot(error_of_mean))
            }
        };
        let sigma = stated.hypot(error_of_mean);
        let uncertain = sigma > 0.0 && sigma.is_finite() || self.variable.is_none();
        if uncertain && value.is_finite() {
            Ok(Observed { value, sigma, repeat })
        } else {
            Err(Exclusion::NoUncertainty)
        }
    }

    /// Standard uncertainty of a single reading of this size, SI.
    fn stated_sigma(&self, value: f64, unit: Unit) -> f64 {
        let of_reading = unit.difference_to_si(self.uncertainty.of_reading * unit.from_si(value));
        (of_reading * of_reading + self.uncertainty.absolute * self.uncertainty.absolute).sqrt()
    }

    /// Standard uncertainty of a reading that it shares with other tags, SI.
    pub(crate) fn shared_sigma(&self, observed: &Observed) -> f64 {
        let part =
            |(_, spread): &(u32, Spread)| self.spread(*spread, observed.value, self.tag.unit.value).powi(2);
        self.shares.iter().map(part).sum::<f64>().sqrt()
    }

    /// Size of one part of an uncertainty for a reading of this size, SI.
    pub(crate) fn spread(&self, spread: Spread, value: f64, unit: Unit) -> f64 {
        match spread {
            Spread::OfReading(share) => unit.difference_to_si(share * unit.from_si(value)).abs(),
            Spread::OfSpan(share) => share * span_length(&self.tag),
            Spread::Absolute(amount) => amount,
        }
    }

    fn outside_span(&self, value: f64) -> bool {
        self.tag.span.as_ref().is_some_and(|span| {
            let [low, high] = span.value;
            let place = (value - low) / (high - low);
            place < SPAN_LIMITS.0 || place > SPAN_LIMITS.1
        })
    }

    /// Pressure of the water between tapping and transmitter, Pa: water at the surroundings' temperature and the
    /// reading's pressure.
    fn water_leg(&self, value: f64) -> f64 {
        let Some(height) = self.tag.water_leg else { return 0.0 };
        let (station, temperature) = self.surroundings;
        let pressure = match self.tag.unit.value.reference() {
            crate::quantity::Reference::Absolute => value,
            _ => value + station,
        };
        let volume =
            Region::One.properties(pressure.max(station), temperature).map(|water| water.volume.value);
        volume.map_or(0.0, |volume| GRAVITY * height / volume)
    }
}

/// An error that several tags have in common.
pub(crate) struct SharedGroup {
    /// Its name and the unit it is told in.
    pub(crate) label: Label,
    /// The variable that stands for it, in its own standard deviations.
    pub(crate) variable: u32,
    /// Its standard deviation, in the SI of the label's unit.
    pub(crate) size: f64,
}

/// A quantity that is given with a standard deviation.
pub(crate) struct SoftGiven {
    pub(crate) label: Label,
    pub(crate) variable: u32,
    /// Variable minus given, SI.
    pub(crate) shift: f64,
    /// In the SI of the given's unit.
    pub(crate) value: f64,
    pub(crate) sigma: f64,
}
