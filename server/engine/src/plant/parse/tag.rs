//! `[tags.NAME]`.

use super::reader::{Entry, Reader};
use super::spread;
use crate::plant::{Located, Spread, Tag};
use crate::quantity::{Dimension, Unit};

/// How a reading errs.
struct Precision {
    sigma: Vec<Spread>,
    repeatability: Option<Spread>,
}

pub(super) fn read(entry: &Entry<'_>) -> Option<Tag> {
    let mut reader = entry.table(format!("tag `{}`", entry.key))?;
    let reads = reader.entry("reads").and_then(|e| e.text());
    let located_unit = reader.required("unit", "\"t/h\"").and_then(|e| read_unit(&e));
    let unit = located_unit.as_ref().map(|unit| unit.value);
    let span_entry = reader.entry("span");
    let span = span_entry.and_then(|e| read_span(&e, unit));
    let precision = precision(&mut reader, unit, reads.is_some(), span_entry.is_some());
    let description = reader.entry("description").and_then(|e| e.text());
    let typical = reader.entry("typical").and_then(|e| e.number());
    let cut_off = reader.entry("cut_off").and_then(|e| cut_off(&e, unit?));
    let offset = reader.entry("offset").and_then(|e| offset(&e, unit?));
    let factor = reader.entry("factor").and_then(|e| e.number_where(|n| n > 0.0, "above zero"));
    let hold = reader.entry("hold").and_then(|e| e.positive_si(Dimension::TIME, "36 h"));
    let roll_over = reader.entry("counter").and_then(|e| roll_over(&e));
    let water_leg = reader.entry("water_leg").and_then(|e| water_leg(&e, unit?));
    let fault_rate = reader.entry("fault_rate").and_then(|e| probability(&e));
    for key in ["meter", "density", "element"] {
        reader.later(key);
    }
    reader.finish();
    let unit = located_unit?;
    Some(Tag {
        name: entry.name(),
        reads,
        sigma: precision.sigma,
        repeatability: precision.repeatability,
        span,
        description: description.map_or_else(String::new, |text| text.value),
        typical: typical.map(|number| unit.value.to_si(number)),
        cut_off,
        offset: offset.unwrap_or(0.0),
        factor: factor.unwrap_or(1.0),
        hold: hold.map(|hold| hold.value),
        roll_over,
        water_leg,
        fault_rate,
        unit,
    })
}

fn read_unit(entry: &Entry<'_>) -> Option<Located<Unit>> {
    let text = entry.text()?;
    let value = entry.take(Unit::parse(&text.value).map_err(|error| error.to_string()))?;
    Some(Located { value, span: text.span })
}

/// The span in SI, lower end first; a span in a unit of vacuum turns round.
fn read_span(entry: &Entry<'_>, unit: Option<Unit>) -> Option<Located<[f64; 2]>> {
    let ends = entry.list()?.iter().map(Entry::number).collect::<Option<Vec<f64>>>()?;
    let [low, high] = ends[..] else {
        entry.fault(format!("`{}` must have two numbers: [low, high]", entry.key));
        return None;
    };
    if low >= high {
        entry.fault(format!("the low end of the span, {low}, must lie below the high end, {high}"));
        return None;
    }
    let (a, b) = (unit?.to_si(low), unit?.to_si(high));
    Some(Located { value: [a.min(b), a.max(b)], span: entry.span })
}

/// A tag that reads a quantity needs exactly one of `accuracy` and `sigma`.
fn precision(reader: &mut Reader<'_>, unit: Option<Unit>, reads: bool, has_span: bool) -> Precision {
    let (accuracy, sigma) = (reader.entry("accuracy"), reader.entry("sigma"));
    let stated = accuracy.or(sigma);
    if let (Some(_), Some(sigma)) = (accuracy, sigma) {
        sigma.fault(format!("{} has both `accuracy` and `sigma`: leave one out", reader.title()));
    }
    if reads && stated.is_none() {
        let title = reader.title();
        reader.fault(format!("{title} needs `accuracy` or `sigma`, for example accuracy = \"0.6 %\""));
    }
    let parts = stated.and_then(|entry| spread::parts(&entry, unit));
    if let Some((entry, _)) = stated.zip(parts.as_ref()).filter(|(_, parts)| !has_span && needs_span(parts)) {
        entry.fault(format!(
            "`{}` speaks of the span: {} needs `span` = [low, high]",
            entry.key,
            reader.title()
        ));
    }
    let repeatability_entry = reader.entry("repeatability");
    let repeatability = repeatability_entry.and_then(|entry| spread::one(&entry, unit));
    if let Some(entry) = repeatability_entry {
        if stated.is_none() {
            entry.fault("`repeatability` is a part of `accuracy` or `sigma`: write one of them too");
        } else if !has_span && repeatability.is_some_and(|spread| needs_span(&[spread])) {
            entry.fault(format!("`repeatability` speaks of the span: {} needs `span`", reader.title()));
        }
    }
    let parts = parts.unwrap_or_default();
    let sigma =
        if accuracy.is_some() { parts.into_iter().map(spread::from_half_width).collect() } else { parts };
    Precision { sigma, repeatability }
}

fn needs_span(parts: &[Spread]) -> bool {
    parts.iter().any(|part| matches!(part, Spread::OfSpan(_)))
}

/// A cut-off only means something where zero means nothing flows.
fn cut_off(entry: &Entry<'_>, unit: Unit) -> Option<f64> {
    if !unit.starts_at_zero() {
        entry.fault(format!("readings in `{unit}` have no natural zero, so they can't have a `cut_off`"));
        return None;
    }
    entry.positive_si(unit.dimension(), &format!("5 {unit}")).map(|cut_off| cut_off.value)
}

/// A correction is added to the reading, so it counts in the reading's direction whatever its own unit.
fn offset(entry: &Entry<'_>, unit: Unit) -> Option<f64> {
    let amount = entry.amount()?.value;
    if amount.unit.dimension() != unit.dimension() {
        entry.fault(format!(
            "`offset` is added to readings in `{unit}`: write it in a unit of {}",
            unit.dimension().name()
        ));
        return None;
    }
    let direction = unit.difference_to_si(1.0).signum();
    Some(direction * amount.unit.spread_to_si(amount.number))
}

fn roll_over(entry: &Entry<'_>) -> Option<f64> {
    let mut reader = entry.table("`counter`")?;
    let number = reader.required("roll_over", "1000000");
    reader.finish();
    number.and_then(|e| e.number_where(|n| n > 0.0, "above zero"))
}

fn water_leg(entry: &Entry<'_>, unit: Unit) -> Option<f64> {
    if unit.dimension() != Dimension::PRESSURE {
        entry.fault(format!("only pressures have a `water_leg`, but these readings are in `{unit}`"));
        return None;
    }
    entry.si(Dimension::LENGTH, "3.2 m").map(|height| height.value)
}

/// A prior probability: between zero and one, both excluded, since neither could be moved by any reading.
pub(super) fn probability(entry: &Entry<'_>) -> Option<f64> {
    entry.number_where(|n| n > 0.0 && n < 1.0, "between 0 and 1, for example 0.02")
}
