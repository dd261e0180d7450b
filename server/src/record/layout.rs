//! What the numbers of a record mean: names and units in their order.
//!
//! Records of one plant file and one version of the program share a layout, stored once. A later version may list other
//! quantities or hypotheses; old records still say what they said.

use meterwright_engine::{Hypothesis, Label};
use serde::{Deserialize, Serialize};
use sha2::{Digest, Sha256};

use crate::hash::hexadecimal;
use crate::report::Labels;
use crate::report::document::ErrorKind;

/// Names and units of everything in a balance.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Layout {
    /// The tags.
    pub tags: Vec<Name>,
    /// The soft givens.
    pub givens: Vec<Name>,
    /// The quantities.
    pub quantities: Vec<Name>,
    /// The indicators.
    pub indicators: Vec<Name>,
    /// The errors that are looked for.
    pub hypotheses: Vec<HypothesisName>,
}

/// One name.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Name {
    /// What it is called.
    pub name: String,
    /// Of a tag or a given, the quantity it speaks of.
    pub quantity: Option<String>,
    /// Unit of its values.
    pub unit: String,
    /// What it measures: values of one measure can be compared over time.
    pub measure: String,
    /// What it is, in words; tags only.
    pub description: String,
}

/// One error that is looked for.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct HypothesisName {
    /// What it is called.
    pub name: String,
    /// What kind.
    pub kind: ErrorKind,
    /// Unit of its size.
    pub unit: String,
}

impl Layout {
    /// The layout of a plant's balances; `descriptions` are those of the tags, in their order.
    pub fn new(labels: &Labels<'_>, descriptions: &[String]) -> Self {
        let names = |labels: &[Label]| labels.iter().map(Name::new).collect::<Vec<_>>();
        let mut tags = names(labels.tags);
        for (tag, description) in tags.iter_mut().zip(descriptions) {
            tag.description.clone_from(description);
        }
        let hypothesis = |error: &&Hypothesis| HypothesisName {
            name: error.name.clone(),
            kind: ErrorKind::of(error.kind),
            unit: labels.size_unit(error).into_owned(),
        };
        Self {
            tags,
            givens: names(labels.givens),
            quantities: names(labels.quantities),
            indicators: names(labels.indicators),
            hypotheses: labels.hypotheses.iter().map(hypothesis).collect(),
        }
    }

    /// The layout as text.
    pub fn to_text(&self) -> String {
        // A plain structure with text keys goes into memory without fail; an empty text would be told as foreign.
        serde_json::to_string(self).unwrap_or_default()
    }

    /// The name of a layout's text: equal layouts have equal names.
    pub fn name_of(text: &str) -> String {
        hexadecimal(&Sha256::digest(text))
    }
}

impl Name {
    fn new(label: &Label) -> Self {
        Self {
            name: label.name.clone(),
            quantity: label.quantity.clone(),
            unit: label.unit.name().into_owned(),
            measure: format!("{} {:?}", label.unit.dimension(), label.unit.reference()),
            description: String::new(),
        }
    }
}
