//! Balances: one record each, written with everything that belongs to it or not at all.

use std::collections::{BTreeMap, HashSet};

use jiff::Timestamp;
use sqlx::sqlite::SqliteRow;
use sqlx::{FromRow, Row, SqliteConnection};

use super::columns::{Day, TrendPoint};
use super::{Store, StoreError, instant, millisecond, new_id, of_json, to_json};
use crate::record::{Layout, Mark};

/// Where balances come from: what they have in common.
#[derive(Clone, Debug)]
pub struct Place {
    /// The plant.
    pub plant: String,
    /// Number of the plant file's revision.
    pub revision: u32,
    /// The log.
    pub log: String,
    /// Name of the layout of its records.
    pub layout: String,
    /// The layout's text.
    pub layout_text: String,
    /// What each point of a balance's columns is of, in their order: series and measure.
    pub series: Vec<(String, String)>,
    /// Share of error-free balances in which anything is found.
    pub false_alarm_rate: f64,
}

/// A balance that is to be stored.
#[derive(Clone, Debug)]
pub struct NewBalance {
    /// Beginning of its period.
    pub from: Timestamp,
    /// End of its period.
    pub to: Timestamp,
    /// Whether the global test passes; absent where it did not converge.
    pub test_passes: Option<bool>,
    /// The packed record.
    pub record: Vec<u8>,
    /// Findings: what is at fault, and the whole as JSON.
    pub findings: Vec<(String, String)>,
    /// What tells it apart in a trend.
    pub mark: Mark,
    /// One point a series; none where it did not converge.
    pub points: Vec<TrendPoint>,
}

/// What a list of balances shows.
#[derive(Clone, Debug, PartialEq)]
pub struct BalanceSummary {
    /// Its id.
    pub id: String,
    /// The log it is of.
    pub log: String,
    /// Number of the plant file's revision.
    pub revision: u32,
    /// Beginning of its period.
    pub from: Timestamp,
    /// End of its period.
    pub to: Timestamp,
    /// Whether it converged.
    pub converged: bool,
    /// Whether the global test passes; absent where it did not converge.
    pub test_passes: Option<bool>,
    /// What its findings name.
    pub findings: Vec<String>,
    /// The log whose balances count instead.
    pub superseded_by: Option<String>,
}

/// One balance with its record.
#[derive(Clone, Debug)]
pub struct StoredBalance {
    /// What a list shows of it.
    pub summary: BalanceSummary,
    /// The plant.
    pub plant: String,
    /// Share of error-free balances in which anything is found.
    pub false_alarm_rate: f64,
    /// Version of the program that made it.
    pub program_version: String,
    /// What the record's numbers mean.
    pub layout: Layout,
    /// The packed record.
    pub record: Vec<u8>,
}

/// A stretch of a log.
#[derive(Clone, Debug, PartialEq)]
pub struct StoredPeriod {
    /// Its beginning.
    pub from: Timestamp,
    /// Its end.
    pub to: Timestamp,
    /// The log it is of.
    pub log: String,
    /// Its balance, once there is one.
    pub balance: Option<String>,
    /// Why it can't be balanced.
    pub rejected: Option<String>,
}

/// Which balances or periods are wanted.
#[derive(Clone, Debug, Default)]
pub struct Query {
    /// Of this plant.
    pub plant: Option<String>,
    /// Of this log.
    pub log: Option<String>,
    /// That begin at this time or later.
    pub from: Option<Timestamp>,
    /// That begin before this time.
    pub to: Option<Timestamp>,
    /// That follow this one: beginning and id.
    pub after: Option<(Timestamp, String)>,
    /// At most so many.
    pub limit: u32,
}

/// Which periods of a log have a balance already.
pub type Seen = HashSet<(i64, i64)>;

impl FromRow<'_, SqliteRow> for BalanceSummary {
    fn from_row(row: &SqliteRow) -> Result<Self, sqlx::Error> {
        let findings: String = row.try_get("found")?;
        Ok(Self {
            id: row.try_get("id")?,
            log: row.try_get("log")?,
            revision: row.try_get("revision")?,
            from: instant(row.try_get("begins_at")?),
            to: instant(row.try_get("ends_at")?),
            converged: row.try_get("converged")?,
            test_passes: row.try_get("test_passes")?,
            findings: of_json("the names of findings", &findings)
                .map_err(|error| sqlx::Error::Decode(error.into()))?,
            superseded_by: row.try_get("superseded_by")?,
        })
    }
}

impl FromRow<'_, SqliteRow> for StoredPeriod {
    fn from_row(row: &SqliteRow) -> Result<Self, sqlx::Error> {
        Ok(Self {
            from: instant(row.try_get("begins_at")?),
            to: instant(row.try_get("ends_at")?),
            log: row.try_get("log")?,
            balance: row.try_get("balance")?,
            rejected: row.try_get("rejected")?,
        })
    }
}

impl Store {
    /// Balances in order of time.
    ///
    /// # Errors
    /// The database fails.
    pub async fn balances(&self, query: &Query) -> Result<Vec<BalanceSummary>, StoreError> {
        const BALANCES: &str = "
            SELECT * FROM balances
            WHERE ($1 IS NULL OR plant = $1) AND ($2 IS NULL OR log = $2)
                AND begins_at >= $3 AND begins_at < $4
                AND (begins_at > $5 OR (begins_at = $5 AND id > $6))
            ORDER BY begins_at, id LIMIT $7";
        let (after, after_id) = match &query.after {
            Some((time, id)) => (millisecond(*time), id.as_str()),
            None => (i64::MIN, ""),
        };
        Ok(sqlx::query_as(BALANCES)
            .bind(&query.plant)
            .bind(&query.log)
            .bind(query.from.map_or(i64::MIN, millisecond))
            .bind(query.to.map_or(i64::MAX, millisecond))
            .bind(after)
            .bind(after_id)
            .bind(query.limit)
            .fetch_all(&self.readers)
            .await?)
    }

    /// One balance.
    ///
    /// # Errors
    /// The database fails, or what it has of the balance can't be read.
    pub async fn balance(&self, id: &str) -> Result<Option<StoredBalance>, StoreError> {
        const BALANCE: &str = "
            SELECT balances.*, layouts.text AS layout_text, records.record
            FROM balances
            JOIN layouts ON layouts.plant = balances.plant AND layouts.id = balances.layout
            JOIN records ON records.balance = balances.id
            WHERE balances.id = $1";
        let Some(row) = sqlx::query(BALANCE).bind(id).fetch_optional(&self.readers).await? else {
            return Ok(None);
        };
        let layout: String = row.try_get("layout_text")?;
        Ok(Some(StoredBalance {
            summary: BalanceSummary::from_row(&row)?,
            plant: row.try_get("plant")?,
            false_alarm_rate: row.try_get("false_alarm_rate")?,
            program_version: row.try_get("program_version")?,
            layout: of_json("a layout", &layout)?,
            record: row.try_get("record")?,
        }))
    }

    /// The last balance of a plant that counts and converged.
    ///
    /// # Errors
    /// The database fails.
    pub async fn last_balance(&self, plant: &str) -> Result<Option<StoredBalance>, StoreError> {
        const LAST: &str = "
            SELECT id FROM balances WHERE plant = $1 AND superseded_by IS NULL AND converged <> 0
            ORDER BY begins_at DESC, id DESC LIMIT 1";
        let id: Option<String> = sqlx::query_scalar(LAST).bind(plant).fetch_optional(&self.readers).await?;
        match id {
            Some(id) => self.balance(&id).await,
            None => Ok(None),
        }
    }

    /// The stretches of logs in order of time.
    ///
    /// # Errors
    /// The database fails.
    pub async fn periods(&self, query: &Query) -> Result<Vec<StoredPeriod>, StoreError> {
        const PERIODS: &str = "
            SELECT steady_periods.*, balances.id AS balance
            FROM steady_periods
            JOIN logs ON logs.id = steady_periods.log
            LEFT JOIN balances ON balances.log = steady_periods.log
                AND balances.begins_at = steady_periods.begins_at AND balances.ends_at = steady_periods.ends_at
            WHERE ($1 IS NULL OR logs.plant = $1) AND ($2 IS NULL OR logs.id = $2)
                AND steady_periods.begins_at >= $3 AND steady_periods.begins_at < $4
            ORDER BY steady_periods.begins_at, steady_periods.log LIMIT $5";
        Ok(sqlx::query_as(PERIODS)
            .bind(&query.plant)
            .bind(&query.log)
            .bind(query.from.map_or(i64::MIN, millisecond))
            .bind(query.to.map_or(i64::MAX, millisecond))
            .bind(query.limit)
            .fetch_all(&self.readers)
            .await?)
    }

    /// Stores stretches of a log: beginning, end and why one can't be balanced. Where more are to come, `expected` says how
    /// many of them can be.
    ///
    /// # Errors
    /// The database fails; then nothing is stored.
    pub async fn save_periods(
        &self,
        log: &str,
        periods: &[(Timestamp, Timestamp, Option<String>)],
        expected: Option<usize>,
    ) -> Result<(), StoreError> {
        let expected = expected.and_then(|expected| i64::try_from(expected).ok());
        let mut change = self.writer.begin_with("BEGIN IMMEDIATE").await?;
        for (from, to, rejected) in periods {
            insert_period(log, (*from, *to), rejected.as_deref(), &mut change).await?;
        }
        count_periods(log, expected, &mut change).await?;
        change.commit().await?;
        Ok(())
    }

    /// The periods of a log that have a balance.
    ///
    /// # Errors
    /// The database fails.
    pub async fn balanced_periods(&self, log: &str) -> Result<Seen, StoreError> {
        const SEEN: &str = "SELECT begins_at, ends_at FROM balances WHERE log = $1";
        let seen: Vec<(i64, i64)> = sqlx::query_as(SEEN).bind(log).fetch_all(&self.readers).await?;
        Ok(seen.into_iter().collect())
    }

    /// Stores balances with their records, findings and columns, all or none of them. Those of the same period and log that
    /// are there already stay; balances of other logs over the same time no longer count.
    ///
    /// # Errors
    /// The database fails; then nothing is stored.
    pub async fn save_balances(&self, place: &Place, balances: &[NewBalance]) -> Result<(), StoreError> {
        const LAYOUT: &str = "
            INSERT INTO layouts (plant, id, created_at, text) VALUES ($1, $2, $3, $4) ON CONFLICT DO NOTHING";
        const COUNT: &str = "
            UPDATE logs SET balance_count = (SELECT count(*) FROM balances WHERE log = $1),
                begins_at = (SELECT min(begins_at) FROM steady_periods WHERE log = $1),
                ends_at = (SELECT max(ends_at) FROM steady_periods WHERE log = $1)
            WHERE id = $1";
        let mut change = self.writer.begin_with("BEGIN IMMEDIATE").await?;
        sqlx::query(LAYOUT)
            .bind(&place.plant)
            .bind(&place.layout)
            .bind(balances.first().map_or(0, |balance| millisecond(balance.from)))
            .bind(&place.layout_text)
            .execute(&mut *change)
            .await?;
        let longest = longest_period(place, &mut change).await?;
        let mut days: BTreeMap<i64, Day<'_>> = BTreeMap::new();
        for balance in balances {
            insert_period(&place.log, (balance.from, balance.to), None, &mut change).await?;
            if !insert(place, balance, &mut change).await? {
                continue;
            }
            for from in supersede(place, balance, longest, &mut change).await? {
                days.entry(Day::of(from)).or_default().remove(from);
            }
            if !balance.points.is_empty() {
                let from = millisecond(balance.from);
                days.entry(Day::of(from)).or_default().add(balance);
            }
        }
        for (day, changes) in days {
            changes.write(place, day, &mut change).await?;
        }
        sqlx::query(COUNT).bind(&place.log).execute(&mut *change).await?;
        change.commit().await?;
        Ok(())
    }
}

/// Inserts a stretch of a log, unless it is there.
async fn insert_period(
    log: &str,
    (from, to): (Timestamp, Timestamp),
    rejected: Option<&str>,
    connection: &mut SqliteConnection,
) -> Result<(), StoreError> {
    const PERIOD: &str = "
        INSERT INTO steady_periods (log, begins_at, ends_at, rejected) VALUES ($1, $2, $3, $4)
        ON CONFLICT DO NOTHING";
    let period = sqlx::query(PERIOD).bind(log).bind(millisecond(from)).bind(millisecond(to)).bind(rejected);
    period.execute(connection).await?;
    Ok(())
}

/// Keeps what a log says of its stretches.
pub(super) async fn count_periods(
    log: &str,
    expected: Option<i64>,
    connection: &mut SqliteConnection,
) -> Result<(), StoreError> {
    const COUNT: &str = "
        UPDATE logs SET
            period_count = coalesce($2, (SELECT count(*) FROM steady_periods WHERE log = $1 AND rejected IS NULL)),
            rejected_count = (SELECT count(*) FROM steady_periods WHERE log = $1 AND rejected IS NOT NULL),
            begins_at = (SELECT min(begins_at) FROM steady_periods WHERE log = $1),
            ends_at = (SELECT max(ends_at) FROM steady_periods WHERE log = $1)
        WHERE id = $1";
    sqlx::query(COUNT).bind(log).bind(expected).execute(connection).await?;
    Ok(())
}

/// Inserts a balance with its record and findings; false where it is there already.
async fn insert(
    place: &Place,
    balance: &NewBalance,
    connection: &mut SqliteConnection,
) -> Result<bool, StoreError> {
    const BALANCE: &str = "
        INSERT INTO balances (id, plant, revision, log, layout, begins_at, ends_at, converged, test_passes,
            found, false_alarm_rate, program_version)
        VALUES ($1, $2, $3, $4, $5, $6, $7, $8, $9, $10, $11, $12)
        ON CONFLICT (log, begins_at, ends_at) DO NOTHING";
    const RECORD: &str = "INSERT INTO records (balance, record) VALUES ($1, $2)";
    const FINDING: &str = "
        INSERT INTO findings (balance, place, plant, begins_at, at, document) VALUES ($1, $2, $3, $4, $5, $6)";
    let id = new_id();
    let made = sqlx::query(BALANCE)
        .bind(&id)
        .bind(&place.plant)
        .bind(place.revision)
        .bind(&place.log)
        .bind(&place.layout)
        .bind(millisecond(balance.from))
        .bind(millisecond(balance.to))
        .bind(balance.test_passes.is_some())
        .bind(balance.test_passes)
        .bind(to_json(
            "the names of findings",
            &balance.findings.iter().map(|(at, _)| at).collect::<Vec<_>>(),
        )?)
        .bind(place.false_alarm_rate)
        .bind(env!("CARGO_PKG_VERSION"))
        .execute(&mut *connection)
        .await?;
    if made.rows_affected() == 0 {
        return Ok(false);
    }
    sqlx::query(RECORD).bind(&id).bind(&balance.record).execute(&mut *connection).await?;
    for (number, (at, document)) in (0_i64..).zip(&balance.findings) {
        sqlx::query(FINDING)
            .bind(&id)
            .bind(number)
            .bind(&place.plant)
            .bind(millisecond(balance.from))
            .bind(at)
            .bind(document)
            .execute(&mut *connection)
            .await?;
    }
    Ok(true)
}

/// Length of the longest period of a plant, ms.
async fn longest_period(place: &Place, connection: &mut SqliteConnection) -> Result<i64, StoreError> {
    const LONGEST: &str = "
        SELECT coalesce(max(steady_periods.ends_at - steady_periods.begins_at), 0)
        FROM steady_periods JOIN logs ON logs.id = steady_periods.log
        WHERE logs.plant = $1 AND rejected IS NULL";
    Ok(sqlx::query_scalar(LONGEST).bind(&place.plant).fetch_one(connection).await?)
}

/// Balances of other logs over the same time no longer count; the beginnings of those that did. None begins earlier than
/// the `longest` period before this one, so that few rows are looked at.
async fn supersede(
    place: &Place,
    balance: &NewBalance,
    longest: i64,
    connection: &mut SqliteConnection,
) -> Result<Vec<i64>, StoreError> {
    const SUPERSEDE: &str = "
        UPDATE balances SET superseded_by = $1
        WHERE plant = $2 AND begins_at >= $3 AND begins_at <= $4 AND log <> $1 AND superseded_by IS NULL
            AND (begins_at = $5 OR (begins_at < $4 AND ends_at > $5))
        RETURNING begins_at";
    let (from, to) = (millisecond(balance.from), millisecond(balance.to));
    Ok(sqlx::query_scalar(SUPERSEDE)
        .bind(&place.log)
        .bind(&place.plant)
        .bind(from.saturating_sub(longest))
        .bind(to)
        .bind(from)
        .fetch_all(connection)
        .await?)
}
