//! What every tag and every soft given reads, and what is said of it: tables, the worst first.

use meterwright_engine::{Label, TagBalance, TagClass, Verdict};

use super::number::{decimals, difference_unit, shown, two_digits, written};
use super::paint::Paint;
use super::table::{Column, table};

/// What is said of a tag or given, in the order in which people should read it.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
enum Standing {
    Suspect,
    Agrees,
    Unchecked,
    Unused,
}

/// A tag or given with what was made of it.
type Row<'b> = (&'b Label, &'b TagBalance);

/// Tables of tags or givens.
pub(super) struct Reads {
    /// Those that the rest checks, suspects first.
    pub(super) checked: String,
    /// Those of which nothing would show an error.
    pub(super) unchecked: String,
    /// Those that took no part.
    pub(super) unused: String,
}

impl Reads {
    /// Of all of a kind; `names` are the headings of their names and of what they read.
    pub(super) fn of(
        names: [&'static str; 2],
        labels: &[Label],
        balances: &[TagBalance],
        paint: Paint,
    ) -> Self {
        let mut rows: Vec<Row<'_>> = labels.iter().zip(balances).collect();
        let statistic = |balance: &TagBalance| balance.statistic.unwrap_or(0.0);
        rows.sort_by(|a, b| standing(a).cmp(&standing(b)).then(statistic(b.1).total_cmp(&statistic(a.1))));
        let of = |wanted: &[Standing]| {
            rows.iter().copied().filter(|row| wanted.contains(&standing(row))).collect::<Vec<_>>()
        };
        Self {
            checked: checked(names, &of(&[Standing::Suspect, Standing::Agrees]), paint),
            unchecked: unchecked(names, &of(&[Standing::Unchecked])),
            unused: unused(names, &of(&[Standing::Unused])),
        }
    }
}

fn standing((label, balance): &Row<'_>) -> Standing {
    match balance.verdict {
        Verdict::Suspect => Standing::Suspect,
        Verdict::Excluded => Standing::Unused,
        Verdict::Unchecked | Verdict::Trusted if label.quantity.is_none() => Standing::Unused,
        Verdict::Trusted if balance.class == TagClass::Redundant => Standing::Agrees,
        Verdict::Unchecked | Verdict::Trusted => Standing::Unchecked,
    }
}

fn checked(names: [&'static str; 2], rows: &[Row<'_>], paint: Paint) -> String {
    let mut columns = read(names, rows);
    columns.push(Column::numbers("Change", column(rows, change)).of_rank(2));
    columns
        .push(Column::numbers("Test", column(rows, |(_, balance)| written(balance.statistic, 2))).of_rank(1));
    columns.push(Column::words("Check", column(rows, check)));
    let mut lines = tabled(columns, rows);
    for (line, row) in lines.iter_mut().skip(1).zip(rows) {
        if standing(row) == Standing::Suspect {
            *line = paint.alarm(line);
        }
    }
    lines.concat()
}

fn unchecked(names: [&'static str; 2], rows: &[Row<'_>]) -> String {
    let mut columns = read(names, rows);
    columns.push(Column::words("", column(rows, would_show)));
    tabled(columns, rows).concat()
}

fn unused(names: [&'static str; 2], rows: &[Row<'_>]) -> String {
    let why = |(label, balance): &Row<'_>| match (&label.quantity, balance.measured) {
        (None, _) => "reads nothing that is balanced".to_owned(),
        (Some(_), _) if balance.samples == 0 => "no good reading".to_owned(),
        (Some(_), _) => "left out: see the warnings".to_owned(),
    };
    let mut columns = read(names, rows);
    columns.push(Column::words("", column(rows, why)));
    tabled(columns, rows).concat()
}

fn tabled(columns: Vec<Column>, rows: &[Row<'_>]) -> Vec<String> {
    if rows.is_empty() { Vec::new() } else { table(columns) }
}

/// What all tables begin with: reading and balanced value, each with its standard uncertainty.
fn read([kind, read]: [&'static str; 2], rows: &[Row<'_>]) -> Vec<Column> {
    vec![
        Column::words(kind, column(rows, |(label, _)| label.name.clone())),
        Column::words("Unit", column(rows, |(label, _)| label.unit.to_string())),
        Column::numbers(read, column(rows, |row| value(row, row.1.measured, row.1.sigma))),
        Column::numbers("±", column(rows, |row| spread(row, row.1.sigma))),
        Column::numbers("Balanced", column(rows, |row| value(row, row.1.reconciled, row.1.reconciled_sigma))),
        Column::numbers("±", column(rows, |row| spread(row, row.1.reconciled_sigma))),
    ]
}

fn column(rows: &[Row<'_>], cell: impl Fn(&Row<'_>) -> String) -> Vec<String> {
    rows.iter().map(cell).collect()
}

/// A value with the digits that its own uncertainty leaves.
fn value((label, _): &Row<'_>, si: Option<f64>, sigma: Option<f64>) -> String {
    let sigma = sigma.map(|sigma| label.unit.spread_from_si(sigma));
    si.map_or_else(String::new, |si| shown(label.unit.from_si(si), sigma))
}

/// A change with the digits of whichever of reading and balanced value is known better.
fn change((label, balance): &Row<'_>) -> String {
    let change = balance.correction.map(|si| label.unit.difference_from_si(si));
    let sigma = balance.sigma.into_iter().chain(balance.reconciled_sigma).reduce(f64::min);
    let sigma = sigma.map(|sigma| label.unit.spread_from_si(sigma));
    written(change, decimals(sigma, change.unwrap_or_default()))
}

fn spread(row: &Row<'_>, sigma: Option<f64>) -> String {
    sigma.map_or_else(String::new, |sigma| two_digits(row.0.unit.spread_from_si(sigma)))
}

fn check(row: &Row<'_>) -> String {
    if standing(row) == Standing::Suspect {
        return "suspect".to_owned();
    }
    format!("agrees (would show from {})", detectable(row).unwrap_or_else(|| "nothing".to_owned()))
}

/// An error beyond so many of a meter's sigmas is no comfort.
const ABSURD: f64 = 100.0;

fn would_show(row: &Row<'_>) -> String {
    let (bias, sigma) = (row.1.minimum_detectable_bias, row.1.sigma);
    let is_sane = bias.zip(sigma).is_some_and(|(bias, sigma)| bias < ABSURD * sigma);
    let size = detectable(row).filter(|_| is_sane);
    size.map_or_else(String::new, |size| format!("would show only from {size}"))
}

fn detectable((label, balance): &Row<'_>) -> Option<String> {
    let size = label.unit.spread_from_si(balance.minimum_detectable_bias?);
    Some(format!("{} {}", two_digits(size), difference_unit(label.unit)))
}
