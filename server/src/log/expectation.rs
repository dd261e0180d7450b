//! What the reader of a log must know of the plant.

use jiff::tz::TimeZone;
use meterwright_engine::Fault;
use meterwright_engine::plant::{Plant, Tag};
use meterwright_engine::quantity::Unit;

use super::quality::Sample;

/// The tags of a plant and the zone of its local times.
#[derive(Clone, Debug)]
pub struct Expectation {
    /// Zone in which times without an offset are read.
    pub zone: TimeZone,
    /// Tags in the order of the plant file.
    pub tags: Vec<ExpectedTag>,
}

/// One tag as its log is read.
#[derive(Clone, Debug)]
pub struct ExpectedTag {
    /// Its name.
    pub name: String,
    /// Unit of its readings.
    pub unit: Unit,
    /// Ends of its span, in its unit.
    pub span: Option<[f64; 2]>,
    /// How long a laboratory value stays valid, s.
    pub hold: Option<f64>,
    /// Whether it counts up instead of reading a rate.
    pub is_counter: bool,
}

impl Expectation {
    /// What a plant file says of its logs.
    ///
    /// # Errors
    /// A fault at the plant's time zone, if there is none of that name.
    pub fn of(plant: &Plant) -> Result<Self, Fault> {
        let zone = TimeZone::get(&plant.time_zone.value).map_err(|_| Fault {
            span: plant.time_zone.span,
            message: format!(
                "`{}` is not a time zone; write an IANA name such as `Europe/Oslo` or `UTC`",
                plant.time_zone.value
            ),
        })?;
        Ok(Self { zone, tags: plant.tags.iter().map(ExpectedTag::of).collect() })
    }

    /// The tag of a name, by its place in the plant file.
    pub(super) fn tag(&self, name: &str) -> Option<usize> {
        self.tags.iter().position(|tag| tag.name == name)
    }

    /// Names of all tags.
    pub(super) fn names(&self) -> impl Iterator<Item = &str> {
        self.tags.iter().map(|tag| tag.name.as_str())
    }
}

impl ExpectedTag {
    fn of(tag: &Tag) -> Self {
        let unit = tag.unit.value;
        Self {
            name: tag.name.value.clone(),
            unit,
            span: tag.span.as_ref().map(|span| span.value.map(|end| unit.from_si(end))),
            hold: tag.hold,
            is_counter: tag.roll_over.is_some(),
        }
    }

    /// A good sample that lies beyond what a live signal of 3.6 to 21 mA can say, -2.5 % to 106 % of the span, isn't one.
    pub(super) fn within_span(&self, sample: Sample) -> Sample {
        match (sample, self.span) {
            (Sample::Good(value), Some([low, high])) => {
                let share = (value - low) / (high - low);
                if (-0.025..=1.06).contains(&share) { sample } else { Sample::OutOfSpan(value) }
            }
            _ => sample,
        }
    }
}
