//! Analyses of the problem's structure, kept by what they depend on.

use std::collections::HashMap;
use std::sync::{Arc, Mutex, PoisonError};

use crate::equation::Form;
use crate::kkt::{Analysis, Factor};

use super::evaluation::Evaluation;
use super::scaling::Scaling;

/// What an analysis depends on: which variables are free, weighted or fixed, and which formulas are held. The anchor
/// it was made at belongs to the key, so that no balance's result depends on which balance came first.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub(crate) struct Key {
    pub(crate) anchor: u64,
    pub(crate) columns: Vec<u8>,
    pub(crate) forms: Vec<Form>,
}

/// An analysis with the scaling it was made in, and the factor at the point it was made at.
pub(crate) struct Structure {
    pub(crate) analysis: Arc<Analysis>,
    pub(crate) scaling: Scaling,
    pub(crate) factor: Factor<f64>,
    /// That point.
    pub(crate) point: Vec<f64>,
    /// The rows there.
    pub(crate) evaluation: Evaluation,
}

/// The analyses made so far.
#[derive(Default)]
pub(crate) struct Cache {
    kept: Mutex<HashMap<Key, Arc<Structure>>>,
}

/// So many analyses are kept; line-ups and missing tags make a few dozen, never thousands, unless a log is strange.
const KEPT: usize = 256;

impl Cache {
    pub(crate) fn get(&self, key: &Key) -> Option<Arc<Structure>> {
        self.kept.lock().unwrap_or_else(PoisonError::into_inner).get(key).cloned()
    }

    pub(crate) fn put(&self, key: Key, structure: &Arc<Structure>) {
        let mut kept = self.kept.lock().unwrap_or_else(PoisonError::into_inner);
        if kept.len() >= KEPT {
            kept.clear();
        }
        kept.insert(key, Arc::clone(structure));
    }
}
