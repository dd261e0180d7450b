//! Times of samples: RFC 3339, local times of the plant's zone, Excel serials.

use std::borrow::Cow;

use jiff::civil::{Date, DateTime};
use jiff::tz::{AmbiguousOffset, TimeZone};
use jiff::{SignedDuration, Timestamp};

use super::cell::{Cell, DecimalMark};

/// Why a cell is no time.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum TimeError {
    /// It can't be read as one.
    #[error(
        "`{0}` is not a time; write 2026-03-01T06:00:00Z, 2026-03-01T06:00:00+01:00, local time of the plant as \
         2026-03-01 06:00, or an Excel serial"
    )]
    NotATime(String),
    /// A local time that clocks skip at the start of summer time.
    #[error("{local} does not exist in {zone}: clocks go forward there from {gap_from} to {gap_to}")]
    Skipped {
        /// The local time.
        local: String,
        /// The zone.
        zone: String,
        /// Local time at which clocks go forward.
        gap_from: String,
        /// Local time to which they go.
        gap_to: String,
    },
}

/// A time as written: an instant, or a local time that still needs its zone.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum WrittenTime {
    Instant(Timestamp),
    Local(DateTime),
}

impl WrittenTime {
    /// The time a text or a number says; none if it says none.
    pub(super) fn of_cell(cell: &Cell<'_>, mark: DecimalMark) -> Option<Self> {
        match cell {
            Cell::Local(local) => Some(Self::Local(*local)),
            Cell::Number(serial) => of_serial(*serial),
            Cell::Text(text) => Self::of_text(text).or_else(|| of_serial(mark.number(text)?)),
        }
    }

    /// The time a text says; none if it says none.
    pub(crate) fn of_text(text: &str) -> Option<Self> {
        let text = ordered(text.trim());
        if has_offset(&text) {
            text.parse().ok().map(Self::Instant)
        } else {
            text.parse().ok().map(Self::Local)
        }
    }
}

/// Whether a date and time ends with `Z` or an offset.
fn has_offset(text: &str) -> bool {
    let clock = text.get("2026-03-01".len()..).unwrap_or_default();
    clock.contains(['Z', 'z', '+', '-'])
}

/// A date written `1.3.2026` or `2026/03/01`, and an hour of one digit, in the order and width of RFC 3339. Dates like
/// `03/01/2026` stay as they are, and are refused: they mean two things.
fn ordered(text: &str) -> Cow<'_, str> {
    let (date, clock) = text.split_at(text.find([' ', 'T', 't']).unwrap_or(text.len()));
    let parts: Vec<&str> = date.split(['.', '/']).collect();
    let date = match parts[..] {
        [day, month, year] if date.contains('.') && year.len() == 4 => {
            Cow::Owned(format!("{year}-{month:0>2}-{day:0>2}"))
        }
        [year, month, day] if year.len() == 4 => Cow::Owned(format!("{year}-{month:0>2}-{day:0>2}")),
        _ => Cow::Borrowed(date),
    };
    match (date, clock.find(':')) {
        (date, Some(2)) => Cow::Owned(format!("{date}T0{}", &clock[1..])),
        (Cow::Borrowed(_), _) => Cow::Borrowed(text),
        (Cow::Owned(date), _) => Cow::Owned(date + clock),
    }
}

/// Local time of an Excel serial: days since 30 December 1899, to the millisecond, as the 1900 date system counts from
/// March 1900 on. Only serials of 1970 to 2199 are times; a smaller or larger number is something else.
fn of_serial(serial: f64) -> Option<WrittenTime> {
    const FIRST: f64 = 25569.0;
    const END: f64 = 109575.0;
    if !(FIRST..END).contains(&serial) {
        return None;
    }
    let midnight = Date::constant(1899, 12, 30).at(0, 0, 0, 0);
    let milliseconds = (serial * 86_400_000.0).round() as i64;
    midnight.checked_add(SignedDuration::from_millis(milliseconds)).ok().map(WrittenTime::Local)
}

/// Turns the times of a log, row after row, into instants.
///
/// The hour that clocks repeat at the end of summer time is told apart by the order of the rows: of the two instants a
/// local time may mean it is the one next in the direction in which the log runs. A log that begins inside a
/// repeated hour is taken to begin in its first pass.
pub(super) struct Clock<'z> {
    zone: &'z TimeZone,
    previous: Option<Timestamp>,
    descending: bool,
}

impl<'z> Clock<'z> {
    pub(super) fn new(zone: &'z TimeZone) -> Self {
        Self { zone, previous: None, descending: false }
    }

    /// The instant of the next row.
    pub(super) fn instant(&mut self, cell: &Cell<'_>, mark: DecimalMark) -> Result<Timestamp, TimeError> {
        let written = WrittenTime::of_cell(cell, mark)
            .ok_or_else(|| TimeError::NotATime(cell.shown().trim().to_owned()))?;
        let (earlier, later) = match instants(written, self.zone)? {
            Instants::One(instant) => (instant, instant),
            Instants::Two(earlier, later) => (earlier, later),
        };
        let instant = self.next_of(earlier, later);
        self.previous = Some(instant);
        Ok(instant)
    }

    fn next_of(&mut self, earlier: Timestamp, later: Timestamp) -> Timestamp {
        let Some(previous) = self.previous else { return earlier };
        if earlier > previous {
            self.descending = false;
        } else if later < previous {
            self.descending = true;
        }
        let is_next = if self.descending { later < previous } else { earlier <= previous };
        if is_next { later } else { earlier }
    }
}

/// What a written time may mean.
pub(crate) enum Instants {
    One(Timestamp),
    /// The two passes of a repeated hour.
    Two(Timestamp, Timestamp),
}

/// The instants a written time may mean in a zone.
pub(crate) fn instants(written: WrittenTime, zone: &TimeZone) -> Result<Instants, TimeError> {
    let local = match written {
        WrittenTime::Instant(instant) => return Ok(Instants::One(instant)),
        WrittenTime::Local(local) => local,
    };
    // Times at the very edge of what can be counted (year 9999) overflow; they are no times of a log.
    let at = |offset: jiff::tz::Offset| {
        offset.to_timestamp(local).map_err(|_| TimeError::NotATime(local.to_string()))
    };
    match zone.to_ambiguous_timestamp(local).offset() {
        AmbiguousOffset::Unambiguous { offset } => at(offset).map(Instants::One),
        AmbiguousOffset::Fold { before, after } => Ok(Instants::Two(at(before)?, at(after)?)),
        AmbiguousOffset::Gap { before, after } => Err(skipped(local, zone, at(after)?, before, after)),
    }
}

/// `shortly_before` is an instant before the clocks go forward, so that the zone's next transition is the jump.
fn skipped(
    local: DateTime,
    zone: &TimeZone,
    shortly_before: Timestamp,
    before: jiff::tz::Offset,
    after: jiff::tz::Offset,
) -> TimeError {
    let jump = zone.following(shortly_before).next().map(|transition| transition.timestamp());
    let shown = |offset: jiff::tz::Offset| {
        jump.map_or_else(String::new, |jump| offset.to_datetime(jump).strftime("%H:%M").to_string())
    };
    TimeError::Skipped {
        local: local.strftime("%Y-%m-%d %H:%M:%S").to_string(),
        zone: zone.iana_name().unwrap_or("the plant's zone").to_owned(),
        gap_from: shown(before),
        gap_to: shown(after),
    }
}
