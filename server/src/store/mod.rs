//! The store: plants, logs, balances and their columns in one SQLite file.
//!
//! All SQL is here and in `migrations/`. Statements are plain SQL with `$1` placeholders, `ON CONFLICT` and `RETURNING`, so
//! that another database can stand in; ids are made by the program and times are milliseconds since 1970. Rows become
//! domain types before they leave. There is one writer; what a call has answered is on the disk (`synchronous = FULL`).

mod balances;
mod columns;
mod findings;
mod logs;
mod migrations;
mod plants;

use std::path::Path;
use std::time::Duration;

use jiff::Timestamp;
use sqlx::sqlite::{
    SqliteConnectOptions, SqliteJournalMode, SqlitePool, SqlitePoolOptions, SqliteSynchronous,
};
use uuid::Uuid;

use crate::record::RecordError;

pub use balances::{BalanceSummary, NewBalance, Place, Query, Seen, StoredBalance, StoredPeriod};
pub use columns::{Series, SeriesKind, TrendData, TrendPoint};
pub use findings::StoredFinding;
pub use logs::{LogEntry, LogFaultLine, LogState, NewLog, Said};
pub use plants::{PlantEntry, PlantSaved, Revision, RevisionSaved};

/// Why the store did not answer.
#[derive(Debug, thiserror::Error)]
pub enum StoreError {
    /// The database.
    #[error("the database failed: {0}")]
    Database(#[from] sqlx::Error),
    /// The database has another form than this version of the program makes.
    #[error("the database can't be brought to the form of this version: {0}")]
    Migration(#[from] sqlx::migrate::MigrateError),
    /// A record can't be read.
    #[error(transparent)]
    Record(#[from] RecordError),
    /// A text that the program wrote can't be read.
    #[error("what is stored as {what} can't be read: {reason}")]
    Foreign {
        /// What it should be.
        what: &'static str,
        /// Why it isn't.
        reason: String,
    },
}

/// Everything that is kept, but for the files of the logs.
#[derive(Clone, Debug)]
pub struct Store {
    /// One connection: writes come one after another.
    writer: SqlitePool,
    readers: SqlitePool,
}

/// So many readers at once.
const READERS: u32 = 4;
/// Size of a page: a record of some 5,500 bytes fills one and a part of another.
const PAGE_SIZE: u32 = 4096;

impl Store {
    /// Opens the store in a file, which is made if it isn't there, and brings it to the form of this version.
    ///
    /// # Errors
    /// The file can't be opened, is no database, or was made by a later version.
    pub async fn open(file: &Path) -> Result<Self, StoreError> {
        let options = SqliteConnectOptions::new()
            .filename(file)
            .create_if_missing(true)
            .page_size(PAGE_SIZE)
            .journal_mode(SqliteJournalMode::Wal)
            .synchronous(SqliteSynchronous::Full)
            .foreign_keys(true)
            .busy_timeout(Duration::from_secs(10));
        let writer = SqlitePoolOptions::new().max_connections(1).connect_with(options.clone()).await?;
        migrations::run(&writer).await?;
        let readers = SqlitePoolOptions::new()
            .max_connections(READERS)
            .connect_with(options.create_if_missing(false).read_only(true))
            .await?;
        Ok(Self { writer, readers })
    }

    /// Closes all connections once what they do is done.
    pub async fn close(&self) {
        self.readers.close().await;
        self.writer.close().await;
    }
}

/// A new id: unique, and in the order of making.
fn new_id() -> String {
    Uuid::now_v7().to_string()
}

/// An instant as the store keeps it.
fn millisecond(time: Timestamp) -> i64 {
    time.as_millisecond()
}

/// An instant that the store has kept.
fn instant(millisecond: i64) -> Timestamp {
    Timestamp::from_millisecond(millisecond).unwrap_or(Timestamp::MAX)
}

/// Reads a text that the program wrote as JSON.
fn of_json<T: serde::de::DeserializeOwned>(what: &'static str, text: &str) -> Result<T, StoreError> {
    serde_json::from_str(text).map_err(|error| StoreError::Foreign { what, reason: error.to_string() })
}

/// Writes something as JSON.
fn to_json<T: serde::Serialize>(what: &'static str, value: &T) -> Result<String, StoreError> {
    serde_json::to_string(value).map_err(|error| StoreError::Foreign { what, reason: error.to_string() })
}
