//! `[plant]`: the site.

use super::reader::{Entry, Faults, Reader};
use crate::fault::suggestion;
use crate::plant::{Located, Plant, Surroundings};
use crate::quantity::{Dimension, Reference, Unit};

/// Surroundings of a plant file that says nothing of them.
const STANDARD: Surroundings = Surroundings { pressure: 101_325.0, temperature: 288.15 };

/// Reads `[plant]` into the plant.
pub(super) fn read(root: &mut Reader<'_>, faults: &Faults<'_>, plant: &mut Plant) {
    let Some(mut reader) =
        root.required("plant", "{ name = \"Unit 1\" }").and_then(|entry| entry.table("[plant]"))
    else {
        return;
    };
    if let Some(name) = reader.required("name", "\"Unit 1\"").and_then(|entry| entry.text()) {
        if name.value.trim().is_empty() {
            faults.add(name.span, "the plant needs a name that is not empty");
        }
        plant.name = name;
    }
    if let Some(zone) = reader.entry("time_zone").and_then(|entry| entry.text()) {
        check_time_zone(&zone, faults);
        plant.time_zone = zone;
    }
    if let Some(entry) = reader.entry("surroundings") {
        plant.surroundings = surroundings(&entry);
    }
    if let Some(units) = reader.entry("units").and_then(|entry| entry.table("`units`")) {
        plant.display_units = units.entries().iter().filter_map(display_unit).collect();
    }
    reader.finish();
}

/// What stands in the plant before the file has spoken.
pub(super) fn silent() -> Plant {
    let nowhere = |value: &str| Located { value: value.to_owned(), span: crate::plant::Span::default() };
    Plant {
        revision: String::new(),
        name: nowhere(""),
        time_zone: nowhere("UTC"),
        surroundings: STANDARD,
        display_units: Vec::new(),
        fluids: Vec::new(),
        streams: Vec::new(),
        equipment: Vec::new(),
        tags: Vec::new(),
        shared: Vec::new(),
        givens: Vec::new(),
        shafts: Vec::new(),
        indicators: Vec::new(),
        search: super::search::by_default(),
        steady: super::search::steady_by_default(),
    }
}

/// Only the shape: the database of time zones belongs to the service.
fn check_time_zone(zone: &Located<String>, faults: &Faults<'_>) {
    let part = |part: &str| {
        part.starts_with(|c: char| c.is_ascii_alphabetic())
            && part.chars().all(|c| c.is_ascii_alphanumeric() || matches!(c, '_' | '-' | '+'))
    };
    if zone.value.len() > 64 || !zone.value.split('/').all(part) {
        let message =
            format!("`{}` is no name of a time zone; write one such as Europe/Oslo or UTC", zone.value);
        faults.add(zone.span, message);
    }
}

fn surroundings(entry: &Entry<'_>) -> Surroundings {
    let mut found = STANDARD;
    let Some(mut reader) = entry.table("`surroundings`") else { return found };
    if let Some(entry) = reader.entry("pressure")
        && let Some(pressure) = entry.si(Dimension::PRESSURE, "1.013 bar")
    {
        found.pressure = pressure.value;
        if !(30e3..=120e3).contains(&pressure.value) {
            entry.fault("the pressure of the surroundings must lie between 0.3 and 1.2 bar");
        }
    }
    if let Some(entry) = reader.entry("temperature")
        && let Some(temperature) = entry.si(Dimension::TEMPERATURE, "15 degC")
    {
        found.temperature = temperature.value;
        if !(183.15..=333.15).contains(&temperature.value) {
            entry.fault("the temperature of the surroundings must lie between -90 and 60 degC");
        }
    }
    reader.finish();
    found
}

fn display_unit(entry: &Entry<'_>) -> Option<(Dimension, Unit)> {
    let word = entry.key;
    if word == "heat_rate" {
        entry.fault(
            "a heat rate is heat over energy and has no dimension of its own: write `unit` at its indicator",
        );
        return None;
    }
    let Some(dimension) = Dimension::from_word(word) else {
        entry.fault_with(|| {
            format!("`units` knows no dimension `{word}`{}", suggestion(word, Dimension::words()))
        });
        return None;
    };
    let unit = entry.take(Unit::parse(&entry.text()?.value).map_err(|error| error.to_string()))?;
    if unit.dimension() != dimension {
        entry.fault(format!("`{unit}` is no unit of {}", dimension.name()));
        return None;
    }
    if unit.reference() != Reference::Absolute {
        entry.fault(format!(
            "pressures are shown as absolute pressures: `{unit}` can't be their display unit"
        ));
        return None;
    }
    Some((dimension, unit))
}
