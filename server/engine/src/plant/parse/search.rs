//! `[indicators.NAME]`, `[search]` and `[steady]`: what is computed from the balances, and how.

use super::equipment::check_members;
use super::names::Names;
use super::reader::{Entry, Faults, Reader};
use super::tag::probability;
use crate::plant::{HypothesisKind, Indicator, Located, Search, Steady};
use crate::quantity::{Dimension, Unit};

const HYPOTHESES: [(&str, HypothesisKind); 4] = [
    ("bias", HypothesisKind::Bias),
    ("loss", HypothesisKind::Loss),
    ("given", HypothesisKind::Given),
    ("shared", HypothesisKind::Shared),
];

/// The search of a plant file that says nothing of it.
pub(super) fn by_default() -> Search {
    let hypotheses = HYPOTHESES.iter().map(|(_, kind)| *kind).collect();
    Search { hypotheses, fault_rate: 0.02, bias_size: 10.0 }
}

/// The steady periods of a plant file that says nothing of them.
pub(super) fn steady_by_default() -> Steady {
    Steady { period: 3600.0, watch: Vec::new() }
}

pub(super) fn read(root: &mut Reader<'_>) -> Search {
    let mut search = by_default();
    let Some(mut reader) = root.entry("search").and_then(|e| e.table("[search]")) else { return search };
    if let Some(list) = reader.entry("hypotheses").and_then(|e| e.list()) {
        search.hypotheses.clear();
        for kind in list.iter().filter_map(|item| item.word(&HYPOTHESES)) {
            if !search.hypotheses.contains(&kind) {
                search.hypotheses.push(kind);
            }
        }
    }
    if let Some(rate) = reader.entry("fault_rate").and_then(|e| probability(&e)) {
        search.fault_rate = rate;
    }
    if let Some(size) = reader.entry("bias_size").and_then(|e| e.number_where(|n| n > 0.0, "above zero")) {
        search.bias_size = size;
    }
    reader.finish();
    search
}

pub(super) fn read_steady(root: &mut Reader<'_>, names: &Names<'_>, faults: &Faults<'_>) -> Steady {
    let mut steady = steady_by_default();
    let Some(mut reader) = root.entry("steady").and_then(|e| e.table("[steady]")) else { return steady };
    if let Some(period) = reader.entry("period").and_then(|e| e.positive_si(Dimension::TIME, "60 min")) {
        steady.period = period.value;
    }
    if let Some(watch) = reader.entry("watch").and_then(|e| e.texts()) {
        check_members(&watch, "tag", names, faults);
        steady.watch = watch;
    }
    reader.finish();
    steady
}

pub(super) fn read_indicator(entry: &Entry<'_>) -> Option<Indicator> {
    let mut reader = entry.table(format!("indicator `{}`", entry.key))?;
    let example = "\"generator.electric_power / boiler.fuel_heat\"";
    let formula = reader.required("formula", example).and_then(|e| e.text());
    let unit = reader.entry("unit").and_then(|e| {
        let text = e.text()?;
        let value = e.take(Unit::parse(&text.value).map_err(|error| error.to_string()))?;
        Some(Located { value, span: text.span })
    });
    reader.finish();
    Some(Indicator { name: entry.name(), formula: formula?, unit })
}
