//! The result of `reconcile --json`: one object, its balances written one a line as they are finished.
//!
//! Numbers are written with the fewest digits that read back as the same bits.

use meterwright_engine::Balance;
use serde::Serialize;

use super::document::BalanceDocument;
use super::{Labels, Report};
use crate::period::Period;

/// Writes the one JSON object.
pub struct JsonReport<'p> {
    /// Name of the plant.
    pub plant: &'p str,
    /// Hash of the plant file.
    pub revision: &'p str,
    /// What the numbers are named and measured in.
    pub labels: Labels<'p>,
}

impl Report for JsonReport<'_> {
    fn head(&self) -> Vec<u8> {
        let quoted = |text: &str| serde_json::Value::from(text).to_string();
        let (plant, revision) = (quoted(self.plant), quoted(self.revision));
        format!("{{\"plant\":{plant},\"revision\":{revision},\"balances\":[\n").into_bytes()
    }

    fn balance(&self, period: &Period, balance: &Balance) -> Vec<u8> {
        let mut bytes = Vec::with_capacity(1 << 16);
        let written = BalanceDocument::new(&self.labels, period, balance, false)
            .serialize(&mut serde_json::Serializer::new(&mut bytes));
        debug_assert!(written.is_ok(), "a plain structure with text keys goes into memory without fail");
        bytes
    }

    fn between(&self) -> &'static [u8] {
        b",\n"
    }

    fn tail(&self) -> &'static [u8] {
        b"\n]}\n"
    }
}
