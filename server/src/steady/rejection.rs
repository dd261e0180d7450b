//! Why a stretch of a log is not balanced.

use jiff::Timestamp;
use jiff::tz::TimeZone;

/// A stretch of a log in which no steady period was found.
#[derive(Clone, Debug, PartialEq)]
pub struct Rejection {
    /// Its beginning.
    pub from: Timestamp,
    /// Its end.
    pub to: Timestamp,
    /// Why, the strongest reason first.
    pub reasons: Vec<Reason>,
}

/// Something that keeps a stretch of time from being steady.
#[derive(Clone, Debug, PartialEq)]
pub struct Reason {
    /// When it began.
    pub from: Timestamp,
    /// When it was over.
    pub to: Timestamp,
    /// What it is.
    pub cause: Cause,
}

/// What keeps a stretch of time from being steady.
#[derive(Clone, Debug, PartialEq)]
pub enum Cause {
    /// A tag left its steady state.
    Moved {
        /// Its name.
        tag: String,
        /// The largest R.
        ratio: f64,
        /// What R must not exceed.
        limit: f64,
    },
    /// A tag drifted over a period by more than its uncertainty, too slowly for R.
    Drifted {
        /// Its name.
        tag: String,
        /// How far, in its unit.
        drift: f64,
        /// Its stated standard uncertainty, in its unit.
        sigma: f64,
        /// Its unit, for a difference.
        unit: String,
    },
    /// The log has no rows.
    NoRows,
    /// A tag that must be steady has no good sample.
    NoGoodSample {
        /// Its name.
        tag: String,
    },
    /// Not one tag can be watched.
    NothingToWatch,
    /// It was steady, but for less than a period.
    Short {
        /// How long a period is, min.
        period: f64,
    },
}

/// So many reasons of a stretch are told in words; the others are counted.
const TOLD: usize = 4;

impl Rejection {
    /// A rejection of one reason.
    pub(super) fn of(reason: Reason) -> Self {
        Self { from: reason.from, to: reason.to, reasons: vec![reason] }
    }

    /// Takes in another one that follows, with no period between.
    pub(super) fn extend(&mut self, next: Self) {
        self.from = self.from.min(next.from);
        self.to = self.to.max(next.to);
        self.reasons.extend(next.reasons);
    }

    /// Puts the reasons in order: each tag's movements as one, gaps first, then by how far beyond its limit each is. That
    /// what lies between them is too short is a reason only where there is no other.
    pub(super) fn settle(&mut self) {
        let is_short = |reason: &Reason| matches!(reason.cause, Cause::Short { .. });
        if !self.reasons.iter().all(is_short) {
            self.reasons.retain(|reason| !is_short(reason));
        }
        let mut settled: Vec<Reason> = Vec::new();
        for reason in self.reasons.drain(..) {
            match settled.iter_mut().find(|known| known.cause.is_like(&reason.cause)) {
                Some(known) => {
                    known.from = known.from.min(reason.from);
                    known.to = known.to.max(reason.to);
                    if reason.cause.weight() > known.cause.weight() {
                        known.cause = reason.cause;
                    }
                }
                None => settled.push(reason),
            }
        }
        settled.sort_by(|a, b| b.cause.weight().total_cmp(&a.cause.weight()));
        self.reasons = settled;
    }

    /// A line for people, with times in a zone; times of the day on which the stretch begins need no date.
    pub fn told(&self, zone: &TimeZone) -> String {
        let local = |time: Timestamp| time.to_zoned_datetime(zone.clone());
        let whole = |time| local(time).strftime("%Y-%m-%d %H:%M:%S %:z").to_string();
        let day = local(self.from).date();
        let short = |time| match local(time) {
            time if time.date() == day => time.strftime("%H:%M:%S").to_string(),
            time => time.strftime("%Y-%m-%d %H:%M:%S").to_string(),
        };
        let reason = |reason: &Reason| {
            let words = reason.cause.to_string();
            if (reason.from, reason.to) == (self.from, self.to) {
                words
            } else {
                format!("{words} from {} to {}", short(reason.from), short(reason.to))
            }
        };
        let mut reasons: Vec<String> = self.reasons.iter().take(TOLD).map(reason).collect();
        if let Some(more @ 1..) = self.reasons.len().checked_sub(TOLD) {
            reasons.push(format!("and {more} reasons more"));
        }
        format!("{} to {} is no steady period: {}", whole(self.from), whole(self.to), reasons.join("; "))
    }
}

impl Cause {
    fn is_like(&self, other: &Self) -> bool {
        match (self, other) {
            (Self::Moved { tag, .. }, Self::Moved { tag: other, .. })
            | (Self::Drifted { tag, .. }, Self::Drifted { tag: other, .. })
            | (Self::NoGoodSample { tag }, Self::NoGoodSample { tag: other }) => tag == other,
            (Self::Short { .. }, Self::Short { .. }) => true,
            _ => false,
        }
    }

    /// How far beyond its limit it is.
    fn weight(&self) -> f64 {
        match self {
            Self::NoRows | Self::NothingToWatch => f64::INFINITY,
            Self::NoGoodSample { .. } => f64::MAX,
            Self::Moved { ratio, limit, .. } => ratio / limit,
            Self::Drifted { drift, sigma, .. } => drift.abs() / sigma,
            Self::Short { .. } => 0.0,
        }
    }
}

impl std::fmt::Display for Cause {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            Self::Moved { tag, ratio, limit } => {
                write!(f, "{tag} moved (R {ratio:.1}, limit {limit:.2})")
            }
            Self::Drifted { tag, drift, sigma, unit } => {
                write!(
                    f,
                    "{tag} drifted by {drift:+.3} {unit} in a period (its standard uncertainty is {sigma:.3})"
                )
            }
            Self::NoRows => write!(f, "the log has no rows"),
            Self::NothingToWatch => {
                write!(f, "no tag that would show whether the plant is steady has a good sample")
            }
            Self::NoGoodSample { tag } => write!(f, "{tag} has no good sample"),
            Self::Short { period } => write!(f, "steady, but shorter than a period of {period:.0} min"),
        }
    }
}
