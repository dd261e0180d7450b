//! Several reheat units in one plant, joined by headers of make-up and cooling water.

use std::collections::HashMap;
use std::fmt::Write;

use meterwright::period::Period;
use meterwright::report::{JsonReport, Labels, Report};
use meterwright_engine::plant::{Plant, parse};
use meterwright_engine::{Balance, CompiledPlant};

const UNIT: &str = include_str!("../../plants/reheat_unit.toml");
const READINGS: &str = include_str!("../../plants/reheat_unit.csv");

/// Units on one header.
const BLOCK: usize = 8;

/// The plant file of `count` units, and a reading of every tag.
pub(crate) fn joined(count: usize) -> (String, HashMap<String, f64>) {
    let readings = first_row();
    if count == 1 {
        return (UNIT.to_owned(), readings);
    }
    let plant = parse(UNIT).expect("the shipped unit is a sound plant file");
    let names = names(&plant);
    let (head, body) = UNIT.split_once("\n[streams.").expect("the unit has streams");
    let (mut text, mut givens) = (head.to_owned(), String::from("\n[given]\n"));
    let mut all = HashMap::new();
    for unit in 0..count {
        let prefix = format!("u{unit}_");
        let once =
            |table: &&str| unit == 0 || !(table.starts_with("[search]") || table.starts_with("[steady]"));
        let (tables, given): (Vec<String>, Vec<String>) = split(&format!("\n[streams.{body}"))
            .filter(once)
            .map(|table| renamed(table, &names, &prefix, unit))
            .partition(|table| !table.starts_with("[given]"));
        text.extend(tables);
        givens.extend(given.iter().map(|table| &table["[given]".len()..]));
        all.extend(readings.iter().map(|(tag, value)| (format!("{prefix}{tag}"), *value)));
    }
    text.push_str(&givens);
    headers(&mut text, count);
    (text, all)
}

/// The tables of a plant file.
fn split(body: &str) -> impl Iterator<Item = &str> {
    let starts: Vec<usize> = body.match_indices("\n[").map(|(at, _)| at + 1).chain([body.len()]).collect();
    (0..starts.len() - 1).map(move |place| &body[starts[place]..starts[place + 1]])
}

fn first_row() -> HashMap<String, f64> {
    let mut lines = READINGS.lines();
    let (head, row) = (lines.next().unwrap_or_default(), lines.next().unwrap_or_default());
    head.split(',')
        .zip(row.split(','))
        .filter_map(|(tag, cell)| Some((tag.to_owned(), cell.parse().ok()?)))
        .collect()
}

fn names(plant: &Plant) -> Vec<String> {
    let streams = plant.streams.iter().map(|stream| &stream.name);
    let equipment = plant.equipment.iter().map(|equipment| &equipment.name);
    let tags = plant.tags.iter().map(|tag| &tag.name);
    let shafts = plant.shafts.iter().map(|shaft| &shaft.name);
    let indicators = plant.indicators.iter().map(|indicator| &indicator.name);
    streams
        .chain(equipment)
        .chain(tags)
        .chain(shafts)
        .chain(indicators)
        .map(|name| name.value.clone())
        .collect()
}

/// A table of the unit with a prefix before every name, its make-up and cooling water drawn from the headers. Of the
/// pressure that a header's outlets share only the first unit of a block states the value.
fn renamed(table: &str, names: &[String], prefix: &str, unit: usize) -> String {
    let mut text = String::with_capacity(table.len() * 2);
    for line in table.lines() {
        let literal = ["kind", "fluid", "description", "unit ", "unit=", "phase", "#"];
        if line.starts_with("\"makeup.pressure\"") && !unit.is_multiple_of(BLOCK) {
            continue;
        }
        if literal.iter().any(|key| line.trim_start().starts_with(key)) {
            text.push_str(line);
        } else {
            prefixed(&mut text, line, names, prefix);
        }
        text.push('\n');
        for (stream, header) in [("makeup", "makeup_block"), ("cooling_water_in", "intake_block")] {
            if line == format!("[streams.{stream}]") {
                let _ = writeln!(text, "from = \"{header}_{}.outlet.u{unit}\"", unit / BLOCK);
            }
        }
    }
    text
}

/// One line with the prefix before every word that is a name and stands at the start of a path.
fn prefixed(text: &mut String, line: &str, names: &[String], prefix: &str) {
    let is_word = |c: char| c.is_ascii_alphanumeric() || c == '_' || c == '-';
    let table = line.starts_with('[');
    let mut rest = line;
    let mut before = ' ';
    while let Some(c) = rest.chars().next() {
        let end = rest.find(|c: char| !is_word(c)).unwrap_or(rest.len());
        if end == 0 {
            text.push(c);
            before = c;
            rest = &rest[c.len_utf8()..];
            continue;
        }
        let word = &rest[..end];
        if (before != '.' || table) && names.iter().any(|name| name == word) {
            text.push_str(prefix);
        }
        text.push_str(word);
        before = '_';
        rest = &rest[end..];
    }
}

/// A header of make-up and one of cooling water for each block of units, and one above them.
fn headers(text: &mut String, count: usize) {
    let blocks = count.div_ceil(BLOCK);
    for system in ["makeup", "intake"] {
        let _ = writeln!(
            text,
            "\n[streams.{system}_site]\nfluid = \"water\"\nphase = \"liquid\"\nto = \"{system}_main.inlet.site\""
        );
        let _ = writeln!(text, "\n[equipment.{system}_main]\nkind = \"header\"");
        for block in 0..blocks {
            let _ = writeln!(
                text,
                "\n[streams.{system}_to_block_{block}]\nfluid = \"water\"\nphase = \"liquid\"\n\
                 from = \"{system}_main.outlet.b{block}\"\nto = \"{system}_block_{block}.inlet.main\"\n\
                 \n[equipment.{system}_block_{block}]\nkind = \"header\""
            );
        }
    }
}

/// What writes a balance as JSON.
pub(crate) fn written<'b>(compiled: &'b CompiledPlant, balance: &'b Balance) -> impl Fn() -> Vec<u8> + 'b {
    let report = JsonReport { plant: "bench", revision: "0", labels: Labels::from(compiled) };
    let (from, to) = (jiff::Timestamp::UNIX_EPOCH, jiff::Timestamp::UNIX_EPOCH);
    let period = Period { from, to, readings: Vec::new(), trends: Vec::new(), warnings: Vec::new() };
    move || report.balance(&period, balance)
}
