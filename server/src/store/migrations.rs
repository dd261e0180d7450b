//! The store's form, step by step. Steps are only ever added.

use std::borrow::Cow;

use sqlx::SqlSafeStr;
use sqlx::migrate::{MigrateError, Migration, MigrationType, Migrator};
use sqlx::sqlite::SqlitePool;

/// Number, what it does and its SQL.
const STEPS: &[(i64, &str, &str)] = &[(
    1,
    "plants, logs and balances",
    include_str!("../../../migrations/sqlite/0001_plants_logs_balances.sql"),
)];

/// Brings a database to the form of this version.
pub(super) async fn run(pool: &SqlitePool) -> Result<(), MigrateError> {
    let migration = |(number, does, sql): &(i64, &'static str, &'static str)| {
        Migration::new(*number, Cow::Borrowed(*does), MigrationType::Simple, (*sql).into_sql_str(), false)
    };
    Migrator::with_migrations(STEPS.iter().map(migration).collect()).run(pool).await
}
