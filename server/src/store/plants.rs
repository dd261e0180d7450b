//! Plants and the revisions of their plant files.

use jiff::Timestamp;
use sqlx::sqlite::SqliteRow;
use sqlx::{FromRow, Row};

use super::{Store, StoreError, instant, millisecond, new_id};
use crate::period::Window;

/// One plant and how much there is of it.
#[derive(Clone, Debug, PartialEq)]
pub struct PlantEntry {
    /// Its id.
    pub id: String,
    /// Its name, which no other has.
    pub name: String,
    /// When it was first stored.
    pub created_at: Timestamp,
    /// The last revision of its plant file.
    pub revision: Revision,
    /// Number of logs.
    pub log_count: i64,
    /// Number of balances that count.
    pub balance_count: i64,
    /// Beginning of the first of them.
    pub first_balance: Option<Timestamp>,
    /// Beginning of the last.
    pub last_balance: Option<Timestamp>,
}

/// One revision of a plant file; it never changes.
#[derive(Clone, Debug, PartialEq)]
pub struct Revision {
    /// Number, from 1.
    pub number: u32,
    /// Hash of the text.
    pub hash: String,
    /// From when on it describes the plant; from ever on where absent.
    pub valid_from: Option<Timestamp>,
    /// When it was stored.
    pub created_at: Timestamp,
    /// The plant file.
    pub text: String,
}

impl Revision {
    /// The time over which each of a plant's revisions is in force: from when it is valid until one of a higher number
    /// is. Revisions that never are in force are left out.
    pub fn in_force(revisions: &[Self]) -> Vec<(&Self, Window)> {
        let window = |(place, revision): (usize, &'_ Self)| {
            let to = revisions[place + 1..].iter().map(|later| later.valid_from).min();
            Window { from: revision.valid_from, to: to.map(|to| to.unwrap_or(Timestamp::MIN)) }
        };
        let windows =
            revisions.iter().enumerate().map(|(place, revision)| (revision, window((place, revision))));
        windows
            .filter(|(_, window)| window.to.is_none_or(|to| window.from.unwrap_or(Timestamp::MIN) < to))
            .collect()
    }
}

/// How storing a new plant ended.
#[derive(Clone, Debug, PartialEq)]
pub enum PlantSaved {
    /// It has this id.
    New(String),
    /// The plant of this id has the name.
    NameTaken(String),
}

/// How storing a revision ended.
#[derive(Clone, Debug, PartialEq)]
pub enum RevisionSaved {
    /// It has this number.
    New(u32),
    /// The last revision is this very text.
    Same(u32),
    /// Another plant, of this id, has the name.
    NameTaken(String),
    /// There is no such plant.
    NoPlant,
}

impl FromRow<'_, SqliteRow> for Revision {
    fn from_row(row: &SqliteRow) -> Result<Self, sqlx::Error> {
        Ok(Self {
            number: row.try_get("number")?,
            hash: row.try_get("hash")?,
            valid_from: row.try_get::<Option<i64>, _>("valid_from")?.map(instant),
            created_at: instant(row.try_get("created_at")?),
            text: row.try_get("text")?,
        })
    }
}

impl FromRow<'_, SqliteRow> for PlantEntry {
    fn from_row(row: &SqliteRow) -> Result<Self, sqlx::Error> {
        Ok(Self {
            id: row.try_get("id")?,
            name: row.try_get("name")?,
            created_at: instant(row.try_get("plant_created_at")?),
            revision: Revision::from_row(row)?,
            log_count: row.try_get("log_count")?,
            balance_count: row.try_get("balance_count")?,
            first_balance: row.try_get::<Option<i64>, _>("first_balance")?.map(instant),
            last_balance: row.try_get::<Option<i64>, _>("last_balance")?.map(instant),
        })
    }
}

const PLANTS: &str = "
    SELECT plants.id, plants.name, plants.created_at AS plant_created_at,
        revisions.number, revisions.hash, revisions.valid_from, revisions.created_at, revisions.text,
        (SELECT count(*) FROM logs WHERE logs.plant = plants.id) AS log_count,
        (SELECT count(*) FROM balances WHERE balances.plant = plants.id AND superseded_by IS NULL) AS balance_count,
        (SELECT min(begins_at) FROM balances WHERE balances.plant = plants.id) AS first_balance,
        (SELECT max(begins_at) FROM balances WHERE balances.plant = plants.id) AS last_balance
    FROM plants JOIN revisions ON revisions.plant = plants.id
    WHERE revisions.number = (SELECT max(number) FROM revisions AS every WHERE every.plant = plants.id)
        AND ($1 IS NULL OR plants.id = $1)
    ORDER BY plants.name";

impl Store {
    /// All plants, by name.
    ///
    /// # Errors
    /// The database fails.
    pub async fn plants(&self) -> Result<Vec<PlantEntry>, StoreError> {
        Ok(sqlx::query_as(PLANTS).bind(None::<String>).fetch_all(&self.readers).await?)
    }

    /// One plant.
    ///
    /// # Errors
    /// The database fails.
    pub async fn plant(&self, id: &str) -> Result<Option<PlantEntry>, StoreError> {
        Ok(sqlx::query_as(PLANTS).bind(id).fetch_optional(&self.readers).await?)
    }

    /// The revisions of a plant, by number.
    ///
    /// # Errors
    /// The database fails.
    pub async fn revisions(&self, plant: &str) -> Result<Vec<Revision>, StoreError> {
        const REVISIONS: &str = "SELECT * FROM revisions WHERE plant = $1 ORDER BY number";
        Ok(sqlx::query_as(REVISIONS).bind(plant).fetch_all(&self.readers).await?)
    }

    /// Stores a new plant with its first plant file, valid from ever on.
    ///
    /// # Errors
    /// The database fails; then nothing is stored.
    pub async fn create_plant(
        &self,
        name: &str,
        hash: &str,
        text: &str,
        now: Timestamp,
    ) -> Result<PlantSaved, StoreError> {
        const PLANT: &str =
            "INSERT INTO plants (id, name, created_at) VALUES ($1, $2, $3) ON CONFLICT DO NOTHING";
        let mut change = self.writer.begin_with("BEGIN IMMEDIATE").await?;
        let id = new_id();
        let made =
            sqlx::query(PLANT).bind(&id).bind(name).bind(millisecond(now)).execute(&mut *change).await?;
        if made.rows_affected() == 0 {
            let other = sqlx::query_scalar("SELECT id FROM plants WHERE name = $1");
            return Ok(PlantSaved::NameTaken(other.bind(name).fetch_one(&mut *change).await?));
        }
        let revision = NewRevision { number: 1, hash, text, valid_from: None, now };
        revision.insert(&id, &mut change).await?;
        change.commit().await?;
        Ok(PlantSaved::New(id))
    }

    /// Stores a revision of a plant file. Storing the last one again changes nothing.
    ///
    /// # Errors
    /// The database fails; then nothing is stored.
    pub async fn add_revision(
        &self,
        plant: &str,
        name: &str,
        hash: &str,
        text: &str,
        valid_from: Option<Timestamp>,
        now: Timestamp,
    ) -> Result<RevisionSaved, StoreError> {
        const LAST: &str =
            "SELECT number, hash, valid_from FROM revisions WHERE plant = $1 ORDER BY number DESC LIMIT 1";
        let mut change = self.writer.begin_with("BEGIN IMMEDIATE").await?;
        let last: Option<(u32, String, Option<i64>)> =
            sqlx::query_as(LAST).bind(plant).fetch_optional(&mut *change).await?;
        let Some((number, last_hash, last_from)) = last else { return Ok(RevisionSaved::NoPlant) };
        if last_hash == hash && valid_from.is_none_or(|from| last_from == Some(millisecond(from))) {
            return Ok(RevisionSaved::Same(number));
        }
        let other = sqlx::query_scalar("SELECT id FROM plants WHERE name = $1 AND id <> $2");
        if let Some(other) = other.bind(name).bind(plant).fetch_optional(&mut *change).await? {
            return Ok(RevisionSaved::NameTaken(other));
        }
        let rename = sqlx::query("UPDATE plants SET name = $1 WHERE id = $2");
        rename.bind(name).bind(plant).execute(&mut *change).await?;
        let number = number + 1;
        let revision = NewRevision { number, hash, text, valid_from: Some(valid_from.unwrap_or(now)), now };
        revision.insert(plant, &mut change).await?;
        change.commit().await?;
        Ok(RevisionSaved::New(number))
    }
}

struct NewRevision<'r> {
    number: u32,
    hash: &'r str,
    text: &'r str,
    valid_from: Option<Timestamp>,
    now: Timestamp,
}

impl NewRevision<'_> {
    async fn insert(&self, plant: &str, connection: &mut sqlx::SqliteConnection) -> Result<(), sqlx::Error> {
        const REVISION: &str = "
            INSERT INTO revisions (plant, number, hash, valid_from, created_at, text)
            VALUES ($1, $2, $3, $4, $5, $6)";
        sqlx::query(REVISION)
            .bind(plant)
            .bind(self.number)
            .bind(self.hash)
            .bind(self.valid_from.map(millisecond))
            .bind(millisecond(self.now))
            .bind(self.text)
            .execute(connection)
            .await
            .map(drop)
    }
}
