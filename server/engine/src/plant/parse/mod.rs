//! From the text of a plant file to plain data, or to all of its faults.
//!
//! What can be judged without knowing any equipment kind is judged here: the TOML, keys and types, names and what
//! refers to them, units that belong to a key or to a tag. Ports, quantities and formulas are held against the
//! equipment kinds later.

mod equipment;
mod fluid;
mod given;
mod names;
mod reader;
mod search;
mod shared;
mod site;
mod spread;
mod stream;
mod tag;
#[cfg(test)]
mod tests;

use std::fmt::Write;

use sha2::{Digest, Sha256};
use toml::de::DeTable;

use self::names::Names;
use self::reader::{Entry, Faults, Reader};
use super::{Plant, Span, Tag};
use crate::Position;
use crate::fault::Fault;

/// A plant file of a large site has a tenth of this.
const LONGEST_FILE: usize = 4 << 20;

/// Reads a plant file.
///
/// # Errors
/// Every fault of the text in its order (the first 200); where it is no TOML, only what makes it none.
pub fn parse(text: &str) -> Result<Plant, Vec<Fault>> {
    match parse_leniently(text) {
        (Some(plant), faults) if faults.is_empty() => Ok(plant),
        (_, faults) => Err(faults),
    }
}

/// Reads a plant file as far as it can be read: its faults, and the plant without what is at fault, unless a stream, a
/// machine or another part that the rest hangs on is missing. Compiling that plant tells the faults of its meaning, so
/// that a user sees all of them at once.
pub fn parse_leniently(text: &str) -> (Option<Plant>, Vec<Fault>) {
    if text.len() > LONGEST_FILE {
        let message = format!("the plant file is larger than {} MiB", LONGEST_FILE >> 20);
        return (None, vec![Fault { span: Span::default(), message }]);
    }
    let (document, errors) = DeTable::parse_recoverable(text);
    let faults = Faults::new(text);
    if errors.is_empty() {
        let root = Reader::new(document.get_ref(), "the plant file".to_owned(), Span::default(), &faults);
        let plant = read(root, &faults).map(|plant| Plant { revision: revision(text), ..plant });
        return (plant, faults.into_sorted());
    }
    let mut repeated = Vec::new();
    for (number, error) in errors.iter().enumerate() {
        let span: Span = error.span().unwrap_or_default().into();
        let heading = if number < MOST_HEADINGS { heading(text, span.start) } else { None };
        let is_heading = heading.is_some_and(|(at, line)| (at..=at + line.len()).contains(&span.start));
        let is_duplicate = error.message() == "duplicate key";
        if is_duplicate && is_heading {
            repeated.extend(heading.map(|(at, _)| at));
        } else if is_duplicate && heading.is_some_and(|(at, _)| repeated.contains(&at)) {
            // The keys of a table that stands twice are no faults of their own.
            continue;
        }
        let first = heading.filter(|_| is_heading).and_then(|(_, line)| text.find(line));
        faults.add_with(span, || {
            let told = syntax_message(error.message(), text.get(span.start..span.end));
            match first.filter(|_| is_duplicate) {
                Some(first) => format!("{told}, first on line {}", Position::of(text, first).line),
                None => told,
            }
        });
    }
    (None, faults.into_sorted())
}

/// For so many errors the heading is looked up: a file of nothing but errors would take seconds.
const MOST_HEADINGS: usize = 100;

/// Start and text of the table heading that a place stands in or under.
fn heading(text: &str, at: usize) -> Option<(usize, &str)> {
    let end = text.get(at..)?.find('\n').map_or(text.len(), |end| at + end);
    let before = text.get(..end)?;
    let is_heading = |(_, line): &(usize, &str)| line.starts_with('[');
    let starts = std::iter::once(0).chain(before.match_indices('\n').map(|(at, _)| at + 1));
    let lines = starts.filter_map(|start| Some((start, before.get(start..)?.lines().next()?.trim_end())));
    lines.rev().find(is_heading)
}

/// The name of a revision: SHA-256 of the plant file's text in lower-case hexadecimal.
pub fn revision(text: &str) -> String {
    Sha256::digest(text.as_bytes()).iter().fold(String::new(), |mut hexadecimal, byte| {
        // Writing to a string can't fail.
        let _ = write!(hexadecimal, "{byte:02x}");
        hexadecimal
    })
}

fn syntax_message(message: &str, place: Option<&str>) -> String {
    match (message, place) {
        ("duplicate key", Some(key)) => format!("`{key}` is defined twice"),
        _ => format!("this is not valid TOML: {message}"),
    }
}

/// The plant, unless a part of its network could not be read.
fn read<'a>(mut root: Reader<'a>, faults: &'a Faults<'a>) -> Option<Plant> {
    let names = Names::collect(&root, faults);
    let mut plant = site::silent();
    check_format(&mut root);
    site::read(&mut root, faults, &mut plant);
    plant.fluids = each(&mut root, "fluids", |entry| fluid::read(entry, faults));
    plant.streams = each(&mut root, "streams", |entry| stream::read(entry, &names, faults));
    stream::check_ports(&plant.streams, faults);
    plant.equipment = each(&mut root, "equipment", equipment::read);
    plant.tags = each(&mut root, "tags", tag::read);
    let tags = plant.tags.iter().map(|tag: &Tag| (tag.name.value.as_str(), tag)).collect();
    plant.shared = each(&mut root, "shared", |entry| shared::read(entry, &tags, &names, faults));
    plant.givens = each(&mut root, "given", given::read);
    plant.shafts = each(&mut root, "shafts", |entry| equipment::read_shaft(entry, &names, faults));
    plant.indicators = each(&mut root, "indicators", search::read_indicator);
    plant.search = search::read(&mut root);
    plant.steady = search::read_steady(&mut root, &names, faults);
    root.finish();
    let network = [
        ("stream", plant.streams.len()),
        ("equipment", plant.equipment.len()),
        ("shaft", plant.shafts.len()),
        ("indicator", plant.indicators.len()),
        ("fluid", plant.fluids.len()),
    ];
    network.iter().all(|(what, read)| names.count(what) == *read).then_some(plant)
}

fn check_format(root: &mut Reader<'_>) {
    if let Some(entry) = root.required("format", "1")
        && let Some(format) = entry.number()
        && format != 1.0
    {
        entry.fault(format!("this version reads plant files of format 1, not {format}"));
    }
}

/// Reads every entry of a table of tables.
fn each<'a, T>(
    root: &mut Reader<'a>,
    key: &'static str,
    mut read: impl FnMut(&Entry<'a>) -> Option<T>,
) -> Vec<T> {
    let table = root.entry(key).and_then(|entry| entry.table(format!("[{key}]")));
    table.map_or_else(Vec::new, |table| table.entries().iter().filter_map(&mut read).collect())
}
