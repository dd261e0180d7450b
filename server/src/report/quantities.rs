//! Balanced states of streams, everything else that is balanced, indicators, and what can't be known.

use meterwright_engine::{Balance, IndicatorBalance, Label, QuantityBalance, QuantityClass};

use super::Labels;
use super::number::{shown, two_digits};
use super::table::{Column, table, wrapped};
use super::words::listed;

/// The state of a stream, one column each.
const STATE: [&str; 4] = ["mass_flow", "pressure", "temperature", "enthalpy"];

/// A value with its uncertainty, as two cells.
type Cells = [String; 2];

/// Balanced states, one stream a row, and everything else, one a row.
pub(super) struct Quantities {
    pub(super) streams: String,
    pub(super) others: String,
}

impl Quantities {
    pub(super) fn of(labels: &Labels<'_>, balance: &Balance) -> Self {
        let mut streams: Vec<(&str, [Option<Cells>; 4])> = Vec::new();
        let mut others = Vec::new();
        let mut units = [None; 4];
        for row in labels.quantities.iter().zip(&balance.quantities) {
            let (label, value) = row;
            match state(label) {
                Some((owner, place)) if *units[place].get_or_insert(label.unit) == label.unit => {
                    if streams.last().is_none_or(|(last, _)| *last != owner) {
                        streams.push((owner, Default::default()));
                    }
                    if let Some((_, cells)) = streams.last_mut() {
                        cells[place] = Some(known(label, value.value, value.sigma));
                    }
                }
                _ if value.class != QuantityClass::Unobservable => others.push(row),
                _ => {}
            }
        }
        Self { streams: stream_table(&streams, units), others: other_table(labels.tags, &others) }
    }
}

/// Stream and place in [`STATE`] of a quantity that is part of a state.
fn state(label: &Label) -> Option<(&str, usize)> {
    let (owner, quantity) = label.name.split_once('.')?;
    Some((owner, STATE.iter().position(|name| *name == quantity)?))
}

fn stream_table(
    streams: &[(&str, [Option<Cells>; 4])],
    units: [Option<meterwright_engine::quantity::Unit>; 4],
) -> String {
    if streams.is_empty() {
        return String::new();
    }
    let names = streams.iter().map(|(name, _)| (*name).to_owned()).collect();
    let mut columns = vec![Column::words("Stream", names)];
    for (place, unit) in units.iter().enumerate() {
        let Some(unit) = unit else { continue };
        let cell = |side: usize| {
            let of = |(_, cells): &(&str, [Option<Cells>; 4])| {
                cells[place].as_ref().map_or_else(String::new, |cells| cells[side].clone())
            };
            streams.iter().map(of).collect()
        };
        columns.push(Column::numbers(unit.name(), cell(0)));
        columns.push(Column::numbers("±", cell(1)));
    }
    table(columns).concat()
}

fn other_table(tags: &[Label], rows: &[(&Label, &QuantityBalance)]) -> String {
    if rows.is_empty() {
        return String::new();
    }
    let cells: Vec<Cells> = rows.iter().map(|(label, row)| known(label, row.value, row.sigma)).collect();
    table(vec![
        Column::words("Quantity", rows.iter().map(|(label, _)| label.name.clone()).collect()),
        Column::numbers("Value", cells.iter().map(|cells| cells[0].clone()).collect()),
        Column::numbers("±", cells.iter().map(|cells| cells[1].clone()).collect()),
        Column::words("Unit", rows.iter().map(|(label, _)| label.unit.to_string()).collect()),
        Column::words("", rows.iter().map(|(label, row)| source(tags, label, row)).collect()),
    ])
    .concat()
}

/// Which tags read a quantity, and whether it is held at its bound.
fn source(tags: &[Label], quantity: &Label, balance: &QuantityBalance) -> String {
    if balance.at_bound {
        return "at its bound".to_owned();
    }
    let readers = tags.iter().filter(|tag| tag.quantity.as_ref() == Some(&quantity.name));
    let readers: Vec<String> = readers.map(|tag| tag.name.clone()).collect();
    if readers.is_empty() { String::new() } else { format!("read by {}", listed(&readers, "and", 4)) }
}

/// A value and its standard uncertainty; what is given exactly has none.
fn known(label: &Label, si: Option<f64>, sigma: Option<f64>) -> Cells {
    let Some(value) = si.map(|si| label.unit.from_si(si)) else { return ["?".to_owned(), String::new()] };
    let sigma = sigma.map(|sigma| label.unit.spread_from_si(sigma));
    let uncertainty = match sigma {
        Some(0.0) => "exact".to_owned(),
        Some(sigma) => two_digits(sigma),
        None => String::new(),
    };
    [shown(value, sigma), uncertainty]
}

pub(super) fn indicators(labels: &[Label], balances: &[IndicatorBalance]) -> String {
    if labels.is_empty() || balances.is_empty() {
        return String::new();
    }
    let cells: Vec<Cells> =
        labels.iter().zip(balances).map(|(label, row)| known(label, row.value, row.sigma)).collect();
    table(vec![
        Column::words("Indicator", labels.iter().map(|label| label.name.clone()).collect()),
        Column::numbers("Value", cells.iter().map(|cells| cells[0].clone()).collect()),
        Column::numbers("±", cells.iter().map(|cells| cells[1].clone()).collect()),
        Column::words("Unit", labels.iter().map(|label| label.unit.to_string()).collect()),
    ])
    .concat()
}

/// So many streams or machines are named in one sentence; the others are counted.
const OWNERS: usize = 8;

/// What nothing determines, in sentences: what is unknown in the same way is told together.
pub(super) fn unknown(labels: &Labels<'_>, balance: &Balance) -> String {
    let rows = labels.quantities.iter().zip(&balance.quantities);
    let unknown = rows.filter(|(_, row)| row.class == QuantityClass::Unobservable);
    let mut owners: Vec<(&str, Vec<String>)> = Vec::new();
    for (label, _) in unknown {
        let (owner, quantity) = label.name.split_once('.').unwrap_or((&label.name, ""));
        let quantity = quantity.replace('_', " ");
        match owners.iter_mut().find(|(name, _)| *name == owner) {
            Some((_, quantities)) => quantities.push(quantity),
            None => owners.push((owner, vec![quantity])),
        }
    }
    let mut alike: Vec<(Vec<String>, Vec<String>)> = Vec::new();
    for (owner, quantities) in owners {
        match alike.iter_mut().find(|(same, _)| *same == quantities) {
            Some((_, owners)) => owners.push(owner.to_owned()),
            None => alike.push((quantities, vec![owner.to_owned()])),
        }
    }
    let sentence = |(quantities, owners): &(Vec<String>, Vec<String>)| {
        let (quantities, owners) = (listed(quantities, "and", OWNERS), listed(owners, "and", OWNERS));
        wrapped(&format!("Nothing here determines the {quantities} of {owners}."), "  ")
    };
    alike.iter().map(sentence).collect()
}
