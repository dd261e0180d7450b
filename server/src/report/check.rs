//! What `check` shows: people the sentences and tables, scripts one JSON object.

use std::fmt::Write;

use meterwright_engine::{Assumption, Basis, Check, Label, QuantityClass, TagBalance, TagClass, Verdict};
use serde_json::{Value, json};

use super::Labels;
use super::number::{difference_unit, shown, two_digits};
use super::quantities::unknown;
use super::table::{Column, table, wrapped};
use super::words::listed;

/// Writes what a check found.
pub struct CheckReport<'p> {
    /// Name of the plant.
    pub plant: &'p str,
    /// Hash of the plant file.
    pub revision: &'p str,
    /// What the numbers are named and measured in.
    pub labels: Labels<'p>,
}

/// Assumptions that move no indicator by this share of its uncertainty are counted, not listed.
const WORTH_TELLING: f64 = 0.01;

impl CheckReport<'_> {
    /// For people.
    pub fn text(&self, check: &Check) -> String {
        let revision: String = self.revision.chars().take(12).collect();
        let mut text = wrapped(&format!("{}, plant file {revision}", self.plant), "");
        text += &wrapped(&format!("Checked {}.", basis(check.basis)), "");
        text.push('\n');
        text += &wrapped(&Self::size(check), "");
        section(
            &mut text,
            "What the meters check, the best checked first",
            &reads("Tag", self.labels.tags, &check.balance.tags),
        );
        section(&mut text, "Soft givens", &reads("Given", self.labels.givens, &check.balance.givens));
        section(&mut text, "What can't be known from these meters", &self.unknown(check));
        section(&mut text, "What is taken for exact, and what that is worth", &self.assumptions(check));
        let warnings: String =
            check.warnings.iter().map(|warning| wrapped(&format!("- {warning}"), "  ")).collect();
        section(&mut text, "Warnings", &warnings);
        text + super::text::CAUTIONS
    }

    fn size(check: &Check) -> String {
        let live =
            |balances: &[TagBalance]| balances.iter().filter(|tag| tag.verdict != Verdict::Excluded).count();
        let (tags, givens) = (live(&check.balance.tags), live(&check.balance.givens));
        let mut said = format!(
            "{} variables, {} independent equations, {tags} tags and {givens} soft givens that take part",
            check.variables, check.equations
        );
        if check.dependent_equations > 0 {
            let _ = write!(said, "; {} equations follow from others", check.dependent_equations);
        }
        match check.balance.global_test {
            Some(test) => {
                let _ = write!(said, "; {} degrees of freedom.", test.degrees_of_freedom);
            }
            None => said.push('.'),
        }
        said
    }

    /// What is unknown, and which meters would change that.
    fn unknown(&self, check: &Check) -> String {
        let mut text = unknown(&self.labels, &check.balance);
        for meter in &check.meters {
            let others: Vec<String> = meter
                .makes_known
                .iter()
                .map(|at| self.labels.quantities[*at].name.clone())
                .filter(|name| *name != meter.quantity)
                .collect();
            let also = if others.is_empty() {
                String::new()
            } else {
                format!(" and make known {}", listed(&others, "and", 6))
            };
            text += &wrapped(&format!("A meter of {} would tell it{also}.", meter.quantity), "  ");
        }
        text
    }

    fn assumptions(&self, check: &Check) -> String {
        let worth = |assumption: &Assumption| {
            Self::worst(check, assumption).is_some_and(|(_, share)| share >= WORTH_TELLING)
        };
        let told: Vec<&Assumption> = check.assumptions.iter().filter(|one| worth(one)).collect();
        let mut text = String::new();
        if !told.is_empty() {
            let effect = |assumption: &&Assumption| {
                Self::worst(check, assumption).map_or_else(String::new, |(at, _)| {
                    let label = &self.labels.indicators[at];
                    let change = assumption.effects[at].map_or(0.0, |si| label.unit.difference_from_si(si));
                    let sign = if change < 0.0 { "-" } else { "+" };
                    format!(
                        "{} {sign}{} {}",
                        label.name,
                        two_digits(change.abs()),
                        difference_unit(label.unit)
                    )
                })
            };
            text += &table(vec![
                Column::words("Quantity", told.iter().map(|of| of.quantity.clone()).collect()),
                Column::numbers(
                    "Exactly",
                    told.iter().map(|of| shown(of.unit.from_si(of.value), None)).collect(),
                ),
                Column::words("Unit", told.iter().map(|of| of.unit.to_string()).collect()),
                Column::numbers(
                    "Change",
                    told.iter().map(|of| two_digits(of.unit.spread_from_si(of.change))).collect(),
                ),
                Column::words("of", told.iter().map(|of| difference_unit(of.unit).into_owned()).collect()),
                Column::words("moves most", told.iter().map(effect).collect()),
            ])
            .concat();
        }
        let rest = check.assumptions.len() - told.len();
        if rest > 0 && !check.assumptions.is_empty() {
            text += &wrapped(
                &format!(
                    "{rest} {} that move no indicator by a hundredth of its uncertainty.",
                    if told.is_empty() { "exact values" } else { "more" }
                ),
                "  ",
            );
        }
        text
    }

    /// The indicator that an assumption moves most, and by what share of its uncertainty.
    fn worst(check: &Check, assumption: &Assumption) -> Option<(usize, f64)> {
        let share = |(at, effect): (usize, &Option<f64>)| {
            let sigma = check.balance.indicators[at].sigma.filter(|sigma| *sigma > 0.0)?;
            Some((at, (*effect)?.abs() / sigma))
        };
        assumption.effects.iter().enumerate().filter_map(share).max_by(|a, b| a.1.total_cmp(&b.1))
    }

    /// For scripts.
    pub fn json(&self, check: &Check) -> Value {
        let tag = |key: &str| {
            let key = key.to_owned();
            move |(label, of): (&Label, &TagBalance)| {
                json!({
                    key.as_str(): label.name,
                    "quantity": label.quantity,
                    "unit": label.unit.name(),
                    "sigma": of.sigma.map(|si| label.unit.spread_from_si(si)),
                    "redundancy": of.redundancy,
                    "minimum_detectable_bias": of.minimum_detectable_bias.map(|si| label.unit.spread_from_si(si)),
                    "class": if of.class == TagClass::Redundant { "redundant" } else { "nonredundant" },
                    "verdict": match of.verdict {
                        Verdict::Trusted | Verdict::Suspect => "trusted",
                        Verdict::Unchecked => "unchecked",
                        Verdict::Excluded => "excluded",
                    },
                })
            }
        };
        let quantities = self.labels.quantities.iter().zip(&check.balance.quantities).map(|(label, of)| {
            json!({
                "quantity": label.name,
                "unit": label.unit.name(),
                "value": of.value.map(|si| label.unit.from_si(si)),
                "sigma": of.sigma.map(|si| label.unit.spread_from_si(si)),
                "class": match of.class {
                    QuantityClass::Redundant => "redundant",
                    QuantityClass::Observable => "observable",
                    QuantityClass::Unobservable => "unobservable",
                },
            })
        });
        let indicators = self.labels.indicators.iter().zip(&check.balance.indicators).map(|(label, of)| {
            json!({
                "indicator": label.name,
                "unit": label.unit.name(),
                "value": of.value.map(|si| label.unit.from_si(si)),
                "sigma": of.sigma.map(|si| label.unit.spread_from_si(si)),
            })
        });
        let assumptions = check.assumptions.iter().map(|of| {
            let effects = self.labels.indicators.iter().zip(&of.effects).map(|(label, effect)| {
                json!({
                    "indicator": label.name,
                    "change": effect.map(|si| label.unit.difference_from_si(si)),
                    "unit": difference_unit(label.unit),
                })
            });
            json!({
                "quantity": of.quantity,
                "value": of.unit.from_si(of.value),
                "unit": of.unit.name(),
                "change": of.unit.difference_from_si(of.change),
                "change_unit": difference_unit(of.unit),
                "effects": effects.collect::<Vec<_>>(),
            })
        });
        let meters = check.meters.iter().map(|meter| {
            let known: Vec<&str> =
                meter.makes_known.iter().map(|at| self.labels.quantities[*at].name.as_str()).collect();
            json!({ "quantity": meter.quantity, "makes_known": known })
        });
        json!({
            "plant": self.plant,
            "revision": self.revision,
            "basis": match check.basis {
                Basis::Readings => "log",
                Basis::Typical => "typical",
                Basis::Guess => "rank",
            },
            "variables": check.variables,
            "equations": check.equations,
            "dependent_equations": check.dependent_equations,
            "degrees_of_freedom": check.balance.global_test.map(|test| test.degrees_of_freedom),
            "tags": self.labels.tags.iter().zip(&check.balance.tags).map(tag("tag")).collect::<Vec<_>>(),
            "givens": self.labels.givens.iter().zip(&check.balance.givens).map(tag("given")).collect::<Vec<_>>(),
            "quantities": quantities.collect::<Vec<_>>(),
            "indicators": indicators.collect::<Vec<_>>(),
            "assumptions": assumptions.collect::<Vec<_>>(),
            "meters": meters.collect::<Vec<_>>(),
            "warnings": check.warnings,
        })
    }
}

fn section(text: &mut String, heading: &str, body: &str) {
    if !body.is_empty() {
        let _ = write!(text, "\n{heading}\n{}\n{body}", "-".repeat(heading.chars().count()));
    }
}

fn basis(basis: Basis) -> &'static str {
    match basis {
        Basis::Readings => "at the mean of the log's readings",
        Basis::Typical => "at the tags' typical values or the middle of their spans",
        Basis::Guess => {
            "by the rank of the equations at a guessed state, since nothing says where the plant runs: state `typical` or \
             `span` of the tags, or give a log, to see how well each is checked"
        }
    }
}

/// Tags or givens: from what size an error of each would show, and of which none would.
fn reads(heading: &'static str, labels: &[Label], balances: &[TagBalance]) -> String {
    let mut rows: Vec<(&Label, &TagBalance)> = labels.iter().zip(balances).collect();
    rows.sort_by(|a, b| b.1.redundancy.unwrap_or(-1.0).total_cmp(&a.1.redundancy.unwrap_or(-1.0)));
    let is_checked = |(label, of): &&(&Label, &TagBalance)| {
        label.quantity.is_some() && of.class == TagClass::Redundant && of.verdict == Verdict::Trusted
    };
    let checked: Vec<_> = rows.iter().filter(is_checked).collect();
    let spread = |label: &Label, si: Option<f64>| {
        si.map_or_else(String::new, |si| two_digits(label.unit.spread_from_si(si)))
    };
    let mut text = String::new();
    if !checked.is_empty() {
        let cells = |cell: &dyn Fn(&Label, &TagBalance) -> String| -> Vec<String> {
            checked.iter().map(|(label, of)| cell(label, of)).collect()
        };
        let mut columns = vec![Column::words(heading, cells(&|label, _| label.name.clone()))];
        if checked.iter().any(|(label, _)| label.quantity.as_ref() != Some(&label.name)) {
            columns
                .push(Column::words("Reads", cells(&|label, _| label.quantity.clone().unwrap_or_default())));
        }
        columns.extend([
            Column::numbers("±", cells(&|label, of| spread(label, of.sigma))),
            Column::numbers("Shows from", cells(&|label, of| spread(label, of.minimum_detectable_bias))),
            Column::words("Unit", cells(&|label, _| difference_unit(label.unit).into_owned())),
            Column::numbers(
                "Redundancy",
                cells(&|_, of| of.redundancy.map_or_else(String::new, |share| format!("{share:.2}"))),
            ),
        ]);
        text += &table(columns).concat();
    }
    let named = |wanted: &dyn Fn(&(&Label, &TagBalance)) -> bool| -> Vec<String> {
        rows.iter().filter(|row| wanted(row)).map(|(label, _)| label.name.clone()).collect()
    };
    let unchecked = named(&|row| row.1.verdict != Verdict::Excluded && !is_checked(&row));
    let unused = named(&|row| row.1.verdict == Verdict::Excluded);
    for (said, names) in [
        ("Nothing here would show an error of less than ten standard deviations of", unchecked),
        ("No part takes", unused),
    ] {
        if !names.is_empty() {
            text += &wrapped(&format!("{said} {}.", listed(&names, "and", usize::MAX)), "  ");
        }
    }
    text
}
