//! `meterwright demo`: the service with an invented plant, its months of history and a fresh shift.

use std::path::{Path, PathBuf};
use std::sync::Arc;

use clap::Args;
use futures_util::stream;
use jiff::Timestamp;
use tokio::task::spawn_blocking;

use super::Status;
use super::serve::{Listening, listening};
use crate::demo;
use crate::found::PeriodChoice;
use crate::ready::ReadyPlant;
use crate::store::{PlantSaved, StoreError};
use crate::work::{UploadError, Work};

/// Serve an invented plant with nine months of history and a fresh shift
#[derive(Args, Debug)]
pub(super) struct Arguments {
    /// The folder in which everything is kept; made if it isn't there
    #[arg(long, value_name = "DIR", default_value = "meterwright-demo", env = "METERWRIGHT_DEMO")]
    data: PathBuf,
    #[command(flatten)]
    listening: Listening,
}

/// Why the demo can't be filled.
#[derive(Debug, thiserror::Error)]
enum DemoError {
    #[error("its logs can't be written: {0}")]
    File(#[from] std::io::Error),
    #[error(transparent)]
    Store(#[from] StoreError),
    #[error(transparent)]
    Upload(#[from] UploadError),
    #[error("the invented plant has faults: {0}")]
    Plant(String),
    #[error("the simulator failed")]
    Simulator,
}

pub(super) fn run(arguments: &Arguments) -> Status {
    let logs = arguments.data.join("demo");
    let shown = logs.clone();
    println!(
        "An invented plant. Its shift logs, to drop on the page, and the truth behind them will lie in {}",
        shown.display()
    );
    listening(arguments.listening, &arguments.data, move |work| async move {
        if let Err(error) = fill(&work, &logs).await {
            tracing::error!(%error, "the demo can't be filled: {error}");
        }
    })
}

/// Brings in the fresh shift first, then history month by month. What is there already stays as it is, so that a demo that
/// was broken off goes on.
async fn fill(work: &Arc<Work>, folder: &Path) -> Result<(), DemoError> {
    tokio::fs::create_dir_all(folder).await?;
    let plant = plant(work).await?;
    let shifts = spawn_blocking(demo::shift_logs).await.map_err(|_| DemoError::Simulator)?;
    for shift in &shifts {
        tokio::fs::write(folder.join(&shift.name), &shift.csv).await?;
    }
    if let Some(fresh) = shifts.into_iter().next() {
        upload(work, &plant, fresh.name, PeriodChoice::Steady, fresh.csv).await?;
    }
    for month in demo::months() {
        let csv = spawn_blocking(move || demo::history_log(month)).await.map_err(|_| DemoError::Simulator)?;
        upload(work, &plant, format!("{month}.csv"), PeriodChoice::Row, csv).await?;
    }
    let truth = spawn_blocking(|| demo::truth().to_json()).await.map_err(|_| DemoError::Simulator)?;
    tokio::fs::write(folder.join("truth.json"), truth).await?;
    Ok(())
}

/// The invented plant in the store.
async fn plant(work: &Work) -> Result<String, DemoError> {
    let ready = work.plants.ready(demo::PLANT).await;
    let ready: Arc<ReadyPlant> = ready.map_err(|faults| {
        DemoError::Plant(faults.into_iter().map(|fault| fault.message).collect::<Vec<_>>().join("; "))
    })?;
    let (name, hash) = (&ready.plant.name.value, &ready.plant.revision);
    match work.store.create_plant(name, hash, demo::PLANT, Timestamp::now()).await? {
        PlantSaved::New(id) | PlantSaved::NameTaken(id) => Ok(id),
    }
}

async fn upload(
    work: &Work,
    plant: &str,
    name: String,
    periods: PeriodChoice,
    csv: String,
) -> Result<(), UploadError> {
    let body = stream::iter([Ok::<_, String>(csv.into_bytes())]);
    work.receive(plant.to_owned(), name, periods, body).await.map(drop)
}
