//! What `reconcile` shows people: the worst meters first, with units, and what can't be known.

use jiff::Timestamp;
use jiff::tz::TimeZone;
use meterwright_engine::{
    Balance, GlobalTest, IndicatorBalance, Label, Outcome, QuantityBalance, QuantityClass, TagBalance,
    TagClass, Verdict,
};

use super::number::{HALF_WIDTH, decimals, difference_unit, two_digits, written};
use super::table::{Column, WIDTH, table, wrapped};
use super::{Labels, Report};
use crate::period::Period;

/// Writes the report that people read.
pub struct TextReport<'p> {
    /// Name of the plant.
    pub plant: &'p str,
    /// Hash of the plant file.
    pub revision: &'p str,
    /// Zone in which times are written.
    pub(crate) zone: &'p TimeZone,
    /// What the numbers are named and measured in.
    pub labels: Labels<'p>,
}

const CAUTIONS: &[u8] = b"
Advice to engineers, not a protection, custody-transfer or safety system. Isolate and lock out
before touching an instrument. Local codes and licensed practice come first.
";

impl Report for TextReport<'_> {
    fn head(&self) -> Vec<u8> {
        let revision: String = self.revision.chars().take(12).collect();
        let head = format!("{}, plant file {revision}", self.plant);
        (wrapped(&head, "") + "Half-widths (+-) are of 95 % intervals.\n\n").into_bytes()
    }

    fn balance(&self, period: &Period, balance: &Balance) -> Vec<u8> {
        let mut text = self.title(period);
        match &balance.outcome {
            Outcome::Converged => self.values(&mut text, balance),
            Outcome::NotRun => text += "Not balanced.\n",
            Outcome::NotFound { reason } => text += &wrapped(&format!("Not balanced: {reason}"), "  "),
        }
        let warnings = period.warnings.iter().chain(&balance.warnings);
        let warnings: String = warnings.map(|warning| wrapped(&format!("- {warning}"), "  ")).collect();
        section(&mut text, "Warnings", &warnings);
        text.into_bytes()
    }

    fn between(&self) -> &'static [u8] {
        b"\n"
    }

    fn tail(&self) -> &'static [u8] {
        CAUTIONS
    }
}

impl TextReport<'_> {
    fn title(&self, period: &Period) -> String {
        let local = |time: Timestamp| {
            time.to_zoned_datetime(self.zone.clone()).strftime("%Y-%m-%d %H:%M:%S %:z").to_string()
        };
        let (from, to) = (local(period.from), local(period.to));
        let title = if period.to == period.from { from } else { format!("{from} to {to}") };
        format!("{title}\n{}\n", "=".repeat(title.chars().count().min(WIDTH)))
    }

    fn values(&self, text: &mut String, balance: &Balance) {
        if let Some(test) = &balance.global_test {
            *text += &wrapped(&global_test(test, balance.iterations), "");
        }
        section(text, "Meters, the worst first", &reads(["Tag", "Read"], self.labels.tags, &balance.tags));
        section(
            text,
            "Givens with an uncertainty",
            &reads(["Given", "Stated"], self.labels.givens, &balance.givens),
        );
        section(text, "Indicators", &indicators(self.labels.indicators, &balance.indicators));
        section(text, "Balanced quantities", &quantities(&self.labels, &balance.quantities));
        let unknown = unknown(self.labels.quantities, &balance.quantities);
        section(text, "What can't be known from these meters", &unknown);
    }
}

fn section(text: &mut String, heading: &str, content: &str) {
    if !content.is_empty() {
        let rule = "-".repeat(heading.chars().count());
        for part in ["\n", heading, "\n", &rule, "\n", content] {
            text.push_str(part);
        }
    }
}

fn global_test(test: &GlobalTest, iterations: u32) -> String {
    let meaning = if test.degrees_of_freedom == 0 {
        "No reading is checked by another."
    } else if test.passes {
        "As a whole the readings agree within their uncertainties."
    } else {
        "As a whole the readings contradict one another by more than their uncertainties allow: at least one is wrong, \
         is less certain than stated, or the plant file leaves something out."
    };
    format!(
        "Global test {:.2}, 95 % limit {:.2} (degrees of freedom {}, steps {iterations}). {meaning}",
        test.statistic, test.critical, test.degrees_of_freedom
    )
}

/// Tags or soft givens: suspects, then those that the rest checks, then those it hardly or not at all checks, then
/// those that took no part; within each by the size of the test statistic.
fn reads([kind, read]: [&'static str; 2], labels: &[Label], balances: &[TagBalance]) -> String {
    let mut rows: Vec<(&Label, &TagBalance)> = labels.iter().zip(balances).collect();
    if rows.is_empty() {
        return String::new();
    }
    let group = |balance: &TagBalance| match (balance.verdict, balance.class) {
        (Verdict::Suspect, _) => 0,
        (Verdict::Trusted, TagClass::Redundant) => 1,
        (Verdict::Unchecked, TagClass::Redundant) => 2,
        (Verdict::Trusted | Verdict::Unchecked, TagClass::Nonredundant) => 3,
        (Verdict::Excluded, _) => 4,
    };
    let statistic = |balance: &TagBalance| balance.statistic.unwrap_or(0.0);
    rows.sort_by(|(_, a), (_, b)| group(a).cmp(&group(b)).then(statistic(b).total_cmp(&statistic(a))));
    let column = |cell: fn(&Label, &TagBalance) -> String| {
        rows.iter().map(|(label, balance)| cell(label, balance)).collect()
    };
    table(vec![
        Column::words(kind, column(|label, _| label.name.clone())),
        Column::words("Unit", column(|label, _| label.unit.to_string())),
        Column::numbers(read, column(|label, balance| value(label, balance, balance.measured))),
        Column::numbers("+-", column(|label, balance| half_width(label, balance.sigma))).of_rank(1),
        Column::numbers("Balanced", column(|label, balance| value(label, balance, balance.reconciled))),
        Column::numbers("+-", column(|label, balance| half_width(label, balance.reconciled_sigma)))
            .of_rank(2),
        Column::numbers("Change", column(change)),
        Column::numbers("Test", column(|_, balance| written(balance.statistic, 2))),
        Column::words("Verdict", column(verdict)),
    ])
}

/// Digits of everything that is said of a tag: those its own uncertainty leaves.
fn digits(label: &Label, balance: &TagBalance) -> usize {
    let sigma =
        balance.sigma.or(balance.reconciled_sigma).map(|sigma| label.unit.spread_from_si(sigma) * HALF_WIDTH);
    decimals(sigma, balance.reconciled.map_or(0.0, |si| label.unit.from_si(si)))
}

fn value(label: &Label, balance: &TagBalance, si: Option<f64>) -> String {
    written(si.map(|si| label.unit.from_si(si)), digits(label, balance))
}

fn change(label: &Label, balance: &TagBalance) -> String {
    written(balance.correction.map(|si| label.unit.difference_from_si(si)), digits(label, balance))
}

fn half_width(label: &Label, sigma: Option<f64>) -> String {
    sigma.map_or_else(String::new, |sigma| two_digits(label.unit.spread_from_si(sigma) * HALF_WIDTH))
}

fn verdict(label: &Label, balance: &TagBalance) -> String {
    let from = balance.minimum_detectable_bias.map_or_else(String::new, |bias| {
        format!("from {} {}", two_digits(label.unit.spread_from_si(bias)), difference_unit(label.unit))
    });
    match (balance.verdict, balance.class) {
        (Verdict::Suspect, _) => "SUSPECT: the rest disagrees".to_owned(),
        (_, TagClass::Nonredundant) if label.quantity.is_none() => "in no balance".to_owned(),
        (Verdict::Excluded, _) => "not used".to_owned(),
        (_, TagClass::Nonredundant) => "unchecked: nothing else tells".to_owned(),
        (Verdict::Unchecked, TagClass::Redundant) => format!("unchecked (would show only {from})"),
        (Verdict::Trusted, TagClass::Redundant) => format!("agrees (would show {from})"),
    }
}

fn indicators(labels: &[Label], balances: &[IndicatorBalance]) -> String {
    if labels.is_empty() || balances.is_empty() {
        return String::new();
    }
    let rows = || labels.iter().zip(balances);
    table(vec![
        Column::words("Indicator", labels.iter().map(|label| label.name.clone()).collect()),
        Column::numbers("Value", rows().map(|(label, row)| known(label, row.value, row.sigma)).collect()),
        Column::numbers("+-", rows().map(|(label, row)| half_width(label, row.sigma)).collect()),
        Column::words("Unit", labels.iter().map(|label| label.unit.to_string()).collect()),
    ])
}

fn quantities(labels: &Labels<'_>, balances: &[QuantityBalance]) -> String {
    let rows =
        labels.quantities.iter().zip(balances).filter(|(_, row)| row.class != QuantityClass::Unobservable);
    let rows: Vec<_> = rows.collect();
    if rows.is_empty() {
        return String::new();
    }
    table(vec![
        Column::words("Quantity", rows.iter().map(|(label, _)| label.name.clone()).collect()),
        Column::numbers(
            "Value",
            rows.iter().map(|(label, row)| known(label, row.value, row.sigma)).collect(),
        ),
        Column::numbers("+-", rows.iter().map(|(label, row)| half_width(label, row.sigma)).collect()),
        Column::words("Unit", rows.iter().map(|(label, _)| label.unit.to_string()).collect()),
        Column::words("", rows.iter().map(|(label, row)| source(labels.tags, label, row)).collect()),
    ])
}

/// Which tags read a quantity, and whether it is held at its bound.
fn source(tags: &[Label], quantity: &Label, balance: &QuantityBalance) -> String {
    let reads = tags.iter().filter(|tag| tag.quantity.as_ref() == Some(&quantity.name));
    let readers: Vec<&str> = reads.map(|tag| tag.name.as_str()).collect();
    match (balance.at_bound, readers.is_empty()) {
        (true, _) => "at its bound".to_owned(),
        (false, true) => String::new(),
        (false, false) => format!("read by {}", readers.join(", ")),
    }
}

fn known(label: &Label, si: Option<f64>, sigma: Option<f64>) -> String {
    let value = si.map(|si| label.unit.from_si(si));
    let half_width = sigma.map(|sigma| label.unit.spread_from_si(sigma) * HALF_WIDTH);
    value.map_or_else(|| "not known".to_owned(), |value| written(Some(value), decimals(half_width, value)))
}

fn unknown(labels: &[Label], balances: &[QuantityBalance]) -> String {
    let names: Vec<&str> = labels
        .iter()
        .zip(balances)
        .filter(|(_, row)| row.class == QuantityClass::Unobservable)
        .map(|(label, _)| label.name.as_str())
        .collect();
    if names.is_empty() { String::new() } else { wrapped(&names.join(", "), "") }
}
