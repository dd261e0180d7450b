//! Standard deviations and half-widths as they are written at a tag.

use super::reader::Entry;
use crate::plant::Spread;
use crate::quantity::{Dimension, Unit, split_number};

/// A half-width of a 95 % interval over one standard deviation of a normal distribution (its 97.5 % quantile).
const HALF_WIDTH_IN_SIGMAS: f64 = 1.959_964;

/// A list of spreads is the sum of squares of its parts; more than this many is a mistake.
const MOST_PARTS: usize = 16;

/// Reads a spread or a list of spreads for readings in `unit`; without a unit, amounts of any dimension are faults.
pub(super) fn parts(entry: &Entry<'_>, unit: Option<Unit>) -> Option<Vec<Spread>> {
    let items = if entry.value.is_array() { entry.list()? } else { vec![*entry] };
    if items.is_empty() || items.len() > MOST_PARTS {
        entry.fault(format!("`{}` needs one to {MOST_PARTS} parts, for example \"0.5 %\"", entry.key));
        return None;
    }
    items.iter().map(|item| one(item, unit)).collect()
}

/// Reads one spread for readings in `unit`. Nothing but a fault of the text itself is reported without a unit.
pub(super) fn one(entry: &Entry<'_>, unit: Option<Unit>) -> Option<Spread> {
    let text = entry.text()?.value;
    entry.take(parse(&text, unit?))
}

/// One standard deviation from the half-width of a 95 % interval.
pub(super) fn from_half_width(spread: Spread) -> Spread {
    match spread {
        Spread::OfReading(share) => Spread::OfReading(share / HALF_WIDTH_IN_SIGMAS),
        Spread::OfSpan(share) => Spread::OfSpan(share / HALF_WIDTH_IN_SIGMAS),
        Spread::Absolute(amount) => Spread::Absolute(amount / HALF_WIDTH_IN_SIGMAS),
    }
}

/// Reads `0.6 %`, `0.2 % span`, `0.3 pp` or an amount in a unit like that of the readings.
fn parse(text: &str, unit: Unit) -> Result<Spread, String> {
    let (number, rest) = split_number(text).map_err(|error| error.to_string())?;
    if number < 0.0 {
        return Err(format!("`{text}` must not be negative"));
    }
    let words: Vec<&str> = rest.split_whitespace().collect();
    match words.as_slice() {
        ["%"] => Ok(Spread::OfReading(number / 100.0)),
        ["%", "span"] => Ok(Spread::OfSpan(number / 100.0)),
        ["%", "dp", "span"] => Err("this version does not support `% dp span` yet".to_owned()),
        ["%", ..] => Err(format!("`{text}`: write `%` (of the reading) or `% span`")),
        [] if unit != Unit::ONE => {
            Err(format!("`{text}` has no unit; write `{text} {}` or `{text} %`", example(unit)))
        }
        [] => Ok(Spread::Absolute(number)),
        _ => absolute(number, Unit::parse(rest).map_err(|error| error.to_string())?, unit),
    }
}

fn absolute(number: f64, written: Unit, unit: Unit) -> Result<Spread, String> {
    if written.dimension() == unit.dimension() {
        return Ok(Spread::Absolute(written.spread_to_si(number)));
    }
    Err(format!(
        "`{written}` is a unit of {}, but the readings in `{unit}` are {}; write it in `{}`, or in `%` of the reading",
        written.dimension().name(),
        unit.dimension().name(),
        example(unit)
    ))
}

/// The unit in which an engineer would write a spread of readings in `unit`.
fn example(unit: Unit) -> String {
    match unit.dimension() {
        Dimension::TEMPERATURE => "K".to_owned(),
        Dimension::RATIO if unit.name() == "%" => "pp".to_owned(),
        _ => unit.to_string(),
    }
}
