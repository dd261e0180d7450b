//! The service's folder: the database, the files of the logs under the names of their hashes, and what is just coming in.
//!
//! A file is whole and on the disk under its name before the store says that the log has come.

use std::fs::{self, File, TryLockError};
use std::io;
use std::path::{Path, PathBuf};

use futures_util::{Stream, StreamExt};
use sha2::{Digest, Sha256};
use tokio::io::AsyncWriteExt;
use uuid::Uuid;

use super::{OpenError, Work};
use crate::found::PeriodChoice;
use crate::hash::hexadecimal;
use crate::store::{LogEntry, NewLog, StoreError};

const LOGS: &str = "logs";
const INCOMING: &str = "incoming";

/// Why a log could not be taken.
#[derive(Debug, thiserror::Error)]
pub enum UploadError {
    /// The sender broke off or sent too much.
    #[error("the upload broke off: {0}")]
    Broken(String),
    /// Nothing came.
    #[error("the log is empty")]
    Empty,
    /// It can't be written.
    #[error("the log can't be written: {0}")]
    Unwritable(#[from] io::Error),
    /// The store failed.
    #[error(transparent)]
    Store(#[from] StoreError),
}

/// Makes the folders, and sees to it that no other program works in them.
pub(super) fn prepare(folder: &Path) -> Result<File, OpenError> {
    let wrong = |error| OpenError::Folder { folder: folder.to_owned(), error };
    for name in [LOGS, INCOMING] {
        fs::create_dir_all(folder.join(name)).map_err(wrong)?;
    }
    let lock = File::create(folder.join("lock")).map_err(wrong)?;
    match lock.try_lock() {
        Ok(()) => Ok(lock),
        Err(TryLockError::WouldBlock) => Err(OpenError::InUse(folder.to_owned())),
        Err(TryLockError::Error(error)) => Err(wrong(error)),
    }
}

/// Removes what came in only half, and files that no log speaks of. What can't be removed stays.
pub(super) fn sweep(folder: &Path, hashes: &[String]) {
    let files = |name: &str| fs::read_dir(folder.join(name)).into_iter().flatten().flatten();
    for file in files(INCOMING) {
        let _ = fs::remove_file(file.path());
    }
    for file in files(LOGS) {
        if !file.file_name().to_str().is_some_and(|name| hashes.iter().any(|hash| hash == name)) {
            let _ = fs::remove_file(file.path());
        }
    }
}

impl Work {
    /// Takes a log as it comes in. True with it where it is new; false with the one of the same bytes that is there already,
    /// whose work begins again if it had failed or was cancelled.
    ///
    /// # Errors
    /// It breaks off, is empty, or can't be written; then nothing is kept.
    pub async fn receive<E: std::fmt::Display>(
        &self,
        plant: String,
        name: String,
        periods: PeriodChoice,
        body: impl Stream<Item = Result<impl AsRef<[u8]>, E>>,
    ) -> Result<(bool, LogEntry), UploadError> {
        let incoming = Incoming(self.folder.join(INCOMING).join(Uuid::now_v7().to_string()));
        let (size, sha256) = written(&incoming.0, body).await?;
        let file = self.file(&sha256);
        tokio::fs::rename(&incoming.0, &file).await?;
        synced(self.folder.join(LOGS)).await?;
        let log = NewLog { plant, name, size, sha256, periods };
        let (is_new, mut entry) = self.store.add_log(&log, jiff::Timestamp::now()).await?;
        if !is_new && self.begin_again(&entry.id).await? {
            entry = self.store.log(&entry.id).await?.unwrap_or(entry);
        }
        self.wake.notify_one();
        self.tell(&entry.id).await?;
        Ok((is_new, entry))
    }

    /// The file of a log.
    pub(super) fn file(&self, sha256: &str) -> PathBuf {
        self.folder.join(LOGS).join(sha256)
    }
}

/// A file that is removed unless it got another name.
struct Incoming(PathBuf);

impl Drop for Incoming {
    fn drop(&mut self) {
        let _ = fs::remove_file(&self.0);
    }
}

/// Writes a body to a file, to the disk; its size and hash.
async fn written<E: std::fmt::Display>(
    path: &Path,
    body: impl Stream<Item = Result<impl AsRef<[u8]>, E>>,
) -> Result<(i64, String), UploadError> {
    let mut file = tokio::fs::File::create_new(path).await?;
    let mut hash = Sha256::new();
    let mut size = 0_i64;
    let mut body = std::pin::pin!(body);
    while let Some(chunk) = body.next().await {
        let chunk = chunk.map_err(|error| UploadError::Broken(error.to_string()))?;
        hash.update(chunk.as_ref());
        size = size.saturating_add_unsigned(chunk.as_ref().len() as u64);
        file.write_all(chunk.as_ref()).await?;
    }
    if size == 0 {
        return Err(UploadError::Empty);
    }
    file.sync_all().await?;
    Ok((size, hexadecimal(&hash.finalize())))
}

/// The names in a folder are on the disk.
async fn synced(folder: PathBuf) -> io::Result<()> {
    tokio::fs::File::open(folder).await?.sync_all().await
}
