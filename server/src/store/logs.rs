//! Logs and how far the work on each has come.

use jiff::Timestamp;
use serde::{Deserialize, Serialize};
use sqlx::sqlite::SqliteRow;
use sqlx::{FromRow, Row};

use super::balances::count_periods;
use super::{Store, StoreError, instant, millisecond, new_id, of_json, to_json};
use crate::found::PeriodChoice;

/// How far the work on a log has come.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum LogState {
    /// Its turn has not come.
    Waiting,
    /// It is being read and balanced.
    Working,
    /// All its periods are balanced.
    Done,
    /// It could not be read.
    Failed,
    /// Somebody stopped it.
    Cancelled,
}

/// The states by name.
const STATES: [(LogState, &str); 5] = [
    (LogState::Waiting, "waiting"),
    (LogState::Working, "working"),
    (LogState::Done, "done"),
    (LogState::Failed, "failed"),
    (LogState::Cancelled, "cancelled"),
];

impl LogState {
    /// Its name.
    pub fn name(self) -> &'static str {
        STATES.iter().find(|(state, _)| *state == self).map_or("", |(_, name)| name)
    }

    fn named(name: &str) -> Option<Self> {
        STATES.iter().find(|(_, other)| *other == name).map(|(state, _)| *state)
    }
}

/// One log.
#[derive(Clone, Debug, PartialEq)]
pub struct LogEntry {
    /// Its id.
    pub id: String,
    /// The plant it is of.
    pub plant: String,
    /// Name of the file.
    pub name: String,
    /// Its size, bytes.
    pub size: i64,
    /// Hash of its bytes, in hexadecimal: the name of its file in the store.
    pub sha256: String,
    /// What makes a period.
    pub periods: PeriodChoice,
    /// When it came.
    pub uploaded_at: Timestamp,
    /// How far the work has come.
    pub state: LogState,
    /// Number of its periods, once they are found.
    pub period_count: Option<i64>,
    /// Number of its stretches that can't be balanced.
    pub rejected_count: Option<i64>,
    /// Number of its balances that are stored.
    pub balance_count: i64,
    /// Beginning of its first stretch.
    pub begins_at: Option<Timestamp>,
    /// End of its last.
    pub ends_at: Option<Timestamp>,
    /// What there is to say of it.
    pub said: Said,
}

/// What there is to say of a log.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Said {
    /// What its user should know.
    pub notes: Vec<String>,
    /// What is wrong in the file.
    pub faults: Vec<LogFaultLine>,
    /// Why the work ended as it did.
    pub reason: Option<String>,
}

/// One fault of a log.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct LogFaultLine {
    /// Line, from 1.
    pub line: u64,
    /// Column, from 1.
    pub column: u64,
    /// What is wrong and what to do.
    pub message: String,
}

/// A log that has come.
#[derive(Clone, Debug)]
pub struct NewLog {
    /// The plant it is of.
    pub plant: String,
    /// Name of the file.
    pub name: String,
    /// Its size, bytes.
    pub size: i64,
    /// Hash of its bytes.
    pub sha256: String,
    /// What makes a period.
    pub periods: PeriodChoice,
}

impl FromRow<'_, SqliteRow> for LogEntry {
    fn from_row(row: &SqliteRow) -> Result<Self, sqlx::Error> {
        let foreign = |what: &str| sqlx::Error::Decode(what.into());
        let said: String = row.try_get("said")?;
        let (periods, state): (String, String) = (row.try_get("periods")?, row.try_get("state")?);
        let time = |column: &str| row.try_get::<Option<i64>, _>(column).map(|time| time.map(instant));
        Ok(Self {
            id: row.try_get("id")?,
            plant: row.try_get("plant")?,
            name: row.try_get("name")?,
            size: row.try_get("size")?,
            sha256: row.try_get("sha256")?,
            periods: PeriodChoice::named(&periods).ok_or_else(|| foreign("no kind of period"))?,
            uploaded_at: instant(row.try_get("uploaded_at")?),
            state: LogState::named(&state).ok_or_else(|| foreign("no state of a log"))?,
            period_count: row.try_get("period_count")?,
            rejected_count: row.try_get("rejected_count")?,
            balance_count: row.try_get("balance_count")?,
            begins_at: time("begins_at")?,
            ends_at: time("ends_at")?,
            said: of_json("what there is to say of a log", &said)
                .map_err(|error| sqlx::Error::Decode(error.into()))?,
        })
    }
}

impl Store {
    /// The logs of a plant, the newest first.
    ///
    /// # Errors
    /// The database fails.
    pub async fn logs(&self, plant: &str) -> Result<Vec<LogEntry>, StoreError> {
        const LOGS: &str = "SELECT * FROM logs WHERE plant = $1 ORDER BY uploaded_at DESC, id DESC";
        Ok(sqlx::query_as(LOGS).bind(plant).fetch_all(&self.readers).await?)
    }

    /// One log.
    ///
    /// # Errors
    /// The database fails.
    pub async fn log(&self, id: &str) -> Result<Option<LogEntry>, StoreError> {
        const LOG: &str = "SELECT * FROM logs WHERE id = $1";
        Ok(sqlx::query_as(LOG).bind(id).fetch_optional(&self.readers).await?)
    }

    /// Stores that a log has come, which waits for its turn; true with it where it is new, false with the one of the same
    /// bytes that is there already.
    ///
    /// # Errors
    /// The database fails; then nothing is stored.
    pub async fn add_log(&self, log: &NewLog, now: Timestamp) -> Result<(bool, LogEntry), StoreError> {
        const LOG: &str = "
            INSERT INTO logs (id, plant, name, size, sha256, periods, uploaded_at, state, said)
            VALUES ($1, $2, $3, $4, $5, $6, $7, $8, $9)
            ON CONFLICT (plant, sha256, periods) DO NOTHING";
        const SAME: &str = "SELECT * FROM logs WHERE plant = $1 AND sha256 = $2 AND periods = $3";
        let mut change = self.writer.begin_with("BEGIN IMMEDIATE").await?;
        let made = sqlx::query(LOG)
            .bind(new_id())
            .bind(&log.plant)
            .bind(&log.name)
            .bind(log.size)
            .bind(&log.sha256)
            .bind(log.periods.name())
            .bind(millisecond(now))
            .bind(LogState::Waiting.name())
            .bind(to_json("what there is to say of a log", &Said::default())?)
            .execute(&mut *change)
            .await?;
        let there = sqlx::query_as(SAME).bind(&log.plant).bind(&log.sha256).bind(log.periods.name());
        let entry = there.fetch_one(&mut *change).await?;
        change.commit().await?;
        Ok((made.rows_affected() > 0, entry))
    }

    /// The log whose turn it is.
    ///
    /// # Errors
    /// The database fails.
    pub async fn next_log(&self) -> Result<Option<LogEntry>, StoreError> {
        const NEXT: &str = "SELECT * FROM logs WHERE state = $1 ORDER BY uploaded_at, id LIMIT 1";
        Ok(sqlx::query_as(NEXT).bind(LogState::Waiting.name()).fetch_optional(&self.readers).await?)
    }

    /// Number of logs that wait or are being worked on.
    ///
    /// # Errors
    /// The database fails.
    pub async fn open_log_count(&self) -> Result<i64, StoreError> {
        const OPEN: &str = "SELECT count(*) FROM logs WHERE state IN ($1, $2)";
        let open = sqlx::query_scalar(OPEN).bind(LogState::Waiting.name()).bind(LogState::Working.name());
        Ok(open.fetch_one(&self.readers).await?)
    }

    /// Moves a log from one of some states to another; false where it is in none of them.
    ///
    /// # Errors
    /// The database fails; then nothing is changed.
    pub async fn move_log(&self, id: &str, from: &[LogState], to: LogState) -> Result<bool, StoreError> {
        const MOVE: &str = "UPDATE logs SET state = $1 WHERE id = $2 AND state = $3";
        let mut change = self.writer.begin_with("BEGIN IMMEDIATE").await?;
        for state in from {
            let moved =
                sqlx::query(MOVE).bind(to.name()).bind(id).bind(state.name()).execute(&mut *change).await?;
            if moved.rows_affected() > 0 {
                change.commit().await?;
                return Ok(true);
            }
        }
        Ok(false)
    }

    /// Logs that were being worked on when the program ended wait again.
    ///
    /// # Errors
    /// The database fails; then nothing is changed.
    pub async fn requeue_interrupted(&self) -> Result<(), StoreError> {
        const REQUEUE: &str = "UPDATE logs SET state = $1 WHERE state = $2";
        let requeue = sqlx::query(REQUEUE).bind(LogState::Waiting.name()).bind(LogState::Working.name());
        requeue.execute(&self.writer).await?;
        Ok(())
    }

    /// Stores how the work on a log ended and what there is to say of it.
    ///
    /// # Errors
    /// The database fails; then nothing is changed.
    pub async fn end_log(&self, id: &str, state: LogState, said: &Said) -> Result<(), StoreError> {
        const END: &str = "UPDATE logs SET state = $1, said = $2 WHERE id = $3";
        let said = to_json("what there is to say of a log", said)?;
        let mut change = self.writer.begin_with("BEGIN IMMEDIATE").await?;
        sqlx::query(END).bind(state.name()).bind(said).bind(id).execute(&mut *change).await?;
        count_periods(id, None, &mut change).await?;
        change.commit().await?;
        Ok(())
    }

    /// Hashes of all logs, whose files are to be kept.
    ///
    /// # Errors
    /// The database fails.
    pub async fn log_hashes(&self) -> Result<Vec<String>, StoreError> {
        Ok(sqlx::query_scalar("SELECT sha256 FROM logs").fetch_all(&self.readers).await?)
    }
}
