//! Findings of all balances.

use jiff::Timestamp;

use super::balances::Query;
use super::{Store, StoreError, instant, millisecond, of_json};
use crate::report::document::FindingDocument;

/// A finding and the balance that it is of.
#[derive(Clone, Debug, PartialEq)]
pub struct StoredFinding {
    /// The balance.
    pub balance: String,
    /// Beginning of its period.
    pub from: Timestamp,
    /// End of its period.
    pub to: Timestamp,
    /// The finding.
    pub finding: FindingDocument<'static>,
}

impl Store {
    /// Findings of a plant's balances that count, the newest first.
    ///
    /// # Errors
    /// The database fails, or what it has can't be read.
    pub async fn findings(&self, query: &Query) -> Result<Vec<StoredFinding>, StoreError> {
        const FINDINGS: &str = "
            SELECT findings.balance, balances.begins_at, balances.ends_at, findings.document
            FROM findings JOIN balances ON balances.id = findings.balance
            WHERE findings.plant = $1 AND findings.begins_at >= $2 AND findings.begins_at < $3
                AND balances.superseded_by IS NULL
            ORDER BY findings.begins_at DESC, findings.balance, findings.place LIMIT $4";
        let rows: Vec<(String, i64, i64, String)> = sqlx::query_as(FINDINGS)
            .bind(&query.plant)
            .bind(query.from.map_or(i64::MIN, millisecond))
            .bind(query.to.map_or(i64::MAX, millisecond))
            .bind(query.limit)
            .fetch_all(&self.readers)
            .await?;
        let finding = |(balance, from, to, document): (String, i64, i64, String)| {
            let finding = of_json("a finding", &document)?;
            Ok(StoredFinding { balance, from: instant(from), to: instant(to), finding })
        };
        rows.into_iter().map(finding).collect()
    }
}
