//! Which tags must be steady, and how large a movement of each matters.

use meterwright_engine::plant::{Plant, Spread, Tag};
use meterwright_engine::quantity::{Dimension, Unit};

use crate::series::{Moment, Series};

/// What a plant file says of steady periods.
#[derive(Clone, Debug)]
pub struct SteadyRule {
    /// Length of a period.
    pub(super) period: Moment,
    /// Tags that may be watched.
    watch: Vec<Watched>,
    /// Whether the plant file names them.
    named: bool,
}

/// One tag that is watched.
#[derive(Clone, Debug)]
pub(super) struct Watched {
    /// Its place in the plant file.
    pub(super) tag: usize,
    pub(super) unit: Unit,
    /// Share of the reading in its standard uncertainty.
    of_reading: f64,
    /// The rest of its standard uncertainty, in its unit.
    absolute: f64,
}

/// What R takes for noise of a tag, as a share of its standard uncertainty.
const NOISE: f64 = 0.5;
/// Standard uncertainty of a tag of which none is stated, as a share of its reading.
const UNSTATED: f64 = 0.005;
/// Where the plant file names no tags, readings of less than this share of the largest don't show whether the plant is steady.
const SMALL: f64 = 0.1;

/// Longer periods, of a thousand years, are cut to it, so that times that are added up can be counted.
const LONGEST: Moment = 1000 * 366 * 86_400 * 1_000_000;

impl SteadyRule {
    /// The rule of a plant: the tags that `[steady]` names or, where it names none, those that read mass flows and powers;
    /// where there are no such, all that read anything. Laboratory values and counters are watched only where named.
    pub fn of(plant: &Plant) -> Self {
        let named = &plant.steady.watch;
        let all = || plant.tags.iter().enumerate();
        let chosen = |chosen: &dyn Fn(&Tag) -> bool| -> Vec<Watched> {
            all().filter(|(_, tag)| chosen(tag)).map(|(place, tag)| Watched::of(place, tag)).collect()
        };
        let reads = |tag: &Tag| tag.reads.is_some() && tag.hold.is_none() && tag.roll_over.is_none();
        let is_throughput =
            |tag: &Tag| [Dimension::MASS_FLOW, Dimension::POWER].contains(&tag.unit.value.dimension());
        let watch = if named.is_empty() {
            let throughput = chosen(&|tag| reads(tag) && is_throughput(tag));
            if throughput.is_empty() { chosen(&reads) } else { throughput }
        } else {
            chosen(&|tag| named.iter().any(|name| name.value == tag.name.value))
        };
        let period = ((plant.steady.period * 1e6).round() as Moment).clamp(1, LONGEST);
        Self { period, watch, named: !named.is_empty() }
    }

    /// The tags to watch in a log, and how many of them must have good samples at a time: all that the plant file
    /// names, else half.
    ///
    /// Tags without one good sample are left out. So are, where the plant file names none, those whose mean is less than a
    /// tenth of the largest of its dimension: a blow-down or a spray that comes and goes doesn't make a plant unsteady.
    pub(super) fn watched(&self, series: &[Series]) -> (Vec<&Watched>, usize) {
        let means: Vec<(&Watched, f64)> = self
            .watch
            .iter()
            .filter_map(|watched| Some((watched, series[watched.tag].plain_mean()?)))
            .collect();
        if self.named {
            return (means.iter().map(|(watched, _)| *watched).collect(), means.len());
        }
        let size = |(watched, mean): &(&Watched, f64)| watched.unit.to_si(*mean).abs();
        let is_large = |one: &&(&Watched, f64)| {
            let alike = means.iter().filter(|other| other.0.unit.dimension() == one.0.unit.dimension());
            size(one) >= SMALL * alike.map(size).fold(0.0, f64::max)
        };
        let large: Vec<&Watched> = means.iter().filter(is_large).map(|(watched, _)| *watched).collect();
        let needed = large.len().div_ceil(2);
        (large, needed)
    }

    /// Places of the tags that the plant file names and of which there is no good sample.
    pub(super) fn silent<'r>(&'r self, series: &'r [Series]) -> impl Iterator<Item = usize> + 'r {
        let tags = self.watch.iter().map(|watched| watched.tag).filter(|_| self.named);
        tags.filter(|tag| series[*tag].plain_mean().is_none())
    }
}

impl Watched {
    fn of(place: usize, tag: &Tag) -> Self {
        let unit = tag.unit.value;
        let width =
            tag.span.as_ref().map_or(0.0, |span| unit.spread_from_si((span.value[1] - span.value[0]).abs()));
        let mut watched = Self { tag: place, unit, of_reading: 0.0, absolute: 0.0 };
        for spread in &tag.sigma {
            match *spread {
                Spread::OfReading(share) => watched.of_reading = watched.of_reading.hypot(share),
                Spread::OfSpan(share) => watched.absolute = watched.absolute.hypot(share * width),
                Spread::Absolute(si) => watched.absolute = watched.absolute.hypot(unit.spread_from_si(si)),
            }
        }
        if tag.sigma.is_empty() {
            watched.of_reading = UNSTATED;
        }
        watched
    }

    /// Standard uncertainty of a reading, in the tag's unit.
    pub(super) fn sigma(&self, reading: f64) -> f64 {
        (self.of_reading * reading).hypot(self.absolute)
    }

    /// What R takes for noise of the tag at such a reading, in its unit.
    pub(super) fn noise(&self, reading: f64) -> f64 {
        NOISE * self.sigma(reading)
    }
}
