//! A plant file and its log in a test: balances with their values found by name.

use std::collections::HashMap;
use std::path::{Path, PathBuf};

use meterwright_engine::plant::parse;
use meterwright_engine::{
    Balance, CompiledPlant, Fault, IndicatorBalance, Label, Outcome, Position, QuantityBalance, Reading,
    TagBalance,
};

/// A compiled plant with rows of readings.
pub(crate) struct Case {
    pub(crate) compiled: CompiledPlant,
    pub(crate) rows: Vec<Vec<Option<Reading>>>,
}

/// A path inside the repository.
pub(crate) fn path(relative: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join(relative)
}

/// Compiles the text of a plant file.
pub(crate) fn compiled(text: &str) -> CompiledPlant {
    let said = |faults: Vec<Fault>| -> Vec<String> {
        faults.iter().map(|fault| format!("{:?}: {fault}", Position::of(text, fault.span.start))).collect()
    };
    let plant = parse(text).map_err(said).unwrap();
    CompiledPlant::compile(&plant).map_err(said).unwrap()
}

impl Case {
    /// A plant file and the wide log beside it.
    pub(crate) fn load(stem: &str) -> Self {
        Self::with(&std::fs::read_to_string(path(&format!("{stem}.toml"))).unwrap(), stem)
    }

    /// The text of a plant file and the wide log of `stem`.
    pub(crate) fn with(text: &str, stem: &str) -> Self {
        let compiled = compiled(text);
        let log = std::fs::read_to_string(path(&format!("{stem}.csv"))).unwrap();
        let mut lines = log.lines();
        let head: Vec<&str> = lines.next().unwrap().split(',').collect();
        let columns: Vec<usize> = compiled
            .tags()
            .iter()
            .map(|tag| head.iter().position(|name| *name == tag.name).unwrap())
            .collect();
        let rows = lines
            .map(|line| {
                let cells: Vec<&str> = line.split(',').collect();
                columns.iter().map(|column| cells[*column].parse().ok().map(Reading::single)).collect()
            })
            .collect();
        Self { compiled, rows }
    }

    /// Balances a row, from its own anchor.
    pub(crate) fn balance(&self, row: usize) -> Told<'_> {
        self.balance_of(&self.rows[row])
    }

    /// Balances readings, from an anchor of their own.
    pub(crate) fn balance_of(&self, readings: &[Option<Reading>]) -> Told<'_> {
        balance(&self.compiled, readings)
    }

    /// A row without the readings of these tags.
    pub(crate) fn without(&self, row: usize, tags: &[&str]) -> Vec<Option<Reading>> {
        let mut readings = self.rows[row].clone();
        for name in tags {
            readings[place(self.compiled.tags(), name)] = None;
        }
        readings
    }
}

/// Balances readings, from an anchor of their own.
pub(crate) fn balance<'c>(compiled: &'c CompiledPlant, readings: &[Option<Reading>]) -> Told<'c> {
    let anchor = compiled.anchor(readings);
    let balance = compiled.balance(readings, anchor.as_ref());
    assert_eq!(balance.outcome, Outcome::Converged, "{:?}", balance.warnings);
    Told { compiled, balance }
}

/// Readings by tag; the others are missing.
pub(crate) fn readings(compiled: &CompiledPlant, values: &[(&str, f64)]) -> Vec<Option<Reading>> {
    let values: HashMap<&str, f64> = values.iter().copied().collect();
    compiled.tags().iter().map(|tag| values.get(tag.name.as_str()).copied().map(Reading::single)).collect()
}

fn place(labels: &[Label], name: &str) -> usize {
    labels
        .iter()
        .position(|label| label.name == name)
        .unwrap_or_else(|| panic!("`{name}` isn't in the result"))
}

/// A balance with the names of what it holds.
pub(crate) struct Told<'c> {
    pub(crate) compiled: &'c CompiledPlant,
    pub(crate) balance: Balance,
}

impl Told<'_> {
    pub(crate) fn tag(&self, name: &str) -> &TagBalance {
        &self.balance.tags[place(self.compiled.tags(), name)]
    }

    pub(crate) fn given(&self, name: &str) -> &TagBalance {
        &self.balance.givens[place(self.compiled.givens(), name)]
    }

    pub(crate) fn quantity(&self, name: &str) -> &QuantityBalance {
        &self.balance.quantities[place(self.compiled.quantities(), name)]
    }

    pub(crate) fn indicator(&self, name: &str) -> &IndicatorBalance {
        &self.balance.indicators[place(self.compiled.indicators(), name)]
    }

    /// Sum of squares.
    pub(crate) fn statistic(&self) -> f64 {
        self.balance.global_test.unwrap().statistic
    }

    /// Degrees of freedom.
    pub(crate) fn freedom(&self) -> u32 {
        self.balance.global_test.unwrap().degrees_of_freedom
    }

    /// Sum of the redundancies of tags and soft givens.
    pub(crate) fn redundancies(&self) -> f64 {
        self.balance.tags.iter().chain(&self.balance.givens).filter_map(|tag| tag.redundancy).sum()
    }
}

/// Asserts that a number lies near another.
#[track_caller]
pub(crate) fn near(what: &str, found: f64, expected: f64, tolerance: f64) {
    assert!((found - expected).abs() <= tolerance, "{what}: {found} instead of {expected} +- {tolerance}");
}
