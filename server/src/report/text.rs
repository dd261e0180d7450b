//! What `reconcile` shows people: findings first, the worst meters first, everything with its unit and uncertainty, and
//! what can't be known.

use jiff::Timestamp;
use jiff::tz::TimeZone;
use meterwright_engine::{Balance, GlobalTest, Outcome};

use super::findings::findings;
use super::paint::Paint;
use super::quantities::{Quantities, indicators, unknown};
use super::reads::Reads;
use super::table::{WIDTH, wrapped};
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
    /// Whether errors were looked for.
    pub is_searched: bool,
    /// Whether it may use colour.
    pub has_colour: bool,
}

pub(super) const CAUTIONS: &str = "
Advice to engineers, not a protection, custody-transfer or safety system. Isolate and lock out
before touching an instrument. Local codes and licensed practice come first.
";

/// Said where the balance shown accounts for findings.
const TEST_BEFORE: &str =
    "Test is the change in its own standard deviations before the findings are accounted for.";

impl Report for TextReport<'_> {
    fn head(&self) -> Vec<u8> {
        let revision: String = self.revision.chars().take(12).collect();
        let head = format!("{}, plant file {revision}", self.plant);
        (wrapped(&head, "") + "What stands after ± is one standard uncertainty.\n\n").into_bytes()
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
        self.section(&mut text, "Warnings", &warnings);
        text.into_bytes()
    }

    fn between(&self) -> &'static [u8] {
        b"\n"
    }

    fn tail(&self) -> &'static [u8] {
        CAUTIONS.as_bytes()
    }
}

impl TextReport<'_> {
    fn paint(&self) -> Paint {
        Paint { on: self.has_colour }
    }

    fn title(&self, period: &Period) -> String {
        let local = |time: Timestamp| {
            time.to_zoned_datetime(self.zone.clone()).strftime("%Y-%m-%d %H:%M:%S %:z").to_string()
        };
        let (from, to) = (local(period.from), local(period.to));
        let title = if period.to == period.from { from } else { format!("{from} to {to}") };
        let rule = "=".repeat(title.chars().count().min(WIDTH));
        self.paint().heading(&format!("{title}\n{rule}\n"))
    }

    fn values(&self, text: &mut String, balance: &Balance) {
        let labels = &self.labels;
        *text += &wrapped(&self.summary(balance), "");
        let found = findings(labels, balance);
        self.section(text, "Findings", &self.paint().alarm(&found));
        let tags = Reads::of(["Tag", "Read"], labels.tags, &balance.tags, self.paint());
        let checked = if found.is_empty() { tags.checked } else { wrapped(TEST_BEFORE, "") + &tags.checked };
        self.section(text, "Meters, the worst first", &checked);
        self.section(text, "Meters unchecked: nothing here would show an error", &tags.unchecked);
        self.section(text, "Meters not used", &tags.unused);
        let givens = Reads::of(["Given", "Stated"], labels.givens, &balance.givens, self.paint());
        self.section(text, "Givens with an uncertainty", &givens.checked);
        self.section(text, "Givens unchecked: nothing here would show an error", &givens.unchecked);
        self.section(text, "Givens not used", &givens.unused);
        self.section(text, "Indicators", &indicators(labels.indicators, &balance.indicators));
        let quantities = Quantities::of(labels, balance);
        self.section(text, "Balanced streams", &quantities.streams);
        self.section(text, "Other balanced quantities", &quantities.others);
        self.section(text, "What can't be known from these meters", &unknown(labels, balance));
    }

    /// What was found, and how well everything agrees.
    fn summary(&self, balance: &Balance) -> String {
        let found = match (balance.findings.len(), self.is_searched) {
            (0, false) => "No errors were looked for.".to_owned(),
            (0, true) => "No error found.".to_owned(),
            (1, _) => "1 error found.".to_owned(),
            (count, _) => format!("{count} errors found."),
        };
        let Some(before) = &balance.global_test else { return found };
        let after = balance.global_test_after.as_ref().filter(|_| !balance.findings.is_empty());
        match after {
            Some(after) => {
                let meaning = meaning(after);
                format!(
                    "{found} {}; with what is found accounted for {}: {meaning}",
                    test(before),
                    figures(after)
                )
            }
            None => format!("{found} {}: {}", test(before), meaning(before)),
        }
    }

    fn section(&self, text: &mut String, heading: &str, content: &str) {
        if !content.is_empty() {
            let rule = "-".repeat(heading.chars().count());
            let heading = self.paint().heading(&format!("{heading}\n{rule}\n"));
            for part in ["\n", &heading, content] {
                text.push_str(part);
            }
        }
    }
}

fn test(test: &GlobalTest) -> String {
    format!("Global test {}", figures(test))
}

fn figures(test: &GlobalTest) -> String {
    let freedom = match test.degrees_of_freedom {
        1 => "1 degree".to_owned(),
        count => format!("{count} degrees"),
    };
    format!("{:.2}, 95 % limit {:.2} ({freedom} of freedom)", test.statistic, test.critical)
}

fn meaning(test: &GlobalTest) -> &'static str {
    if test.degrees_of_freedom == 0 {
        "no reading is checked by another."
    } else if test.passes {
        "as a whole the readings agree within their uncertainties."
    } else {
        "as a whole the readings contradict one another by more than their uncertainties allow. At least one is wrong \
         or less certain than stated, or the plant file leaves something out."
    }
}
