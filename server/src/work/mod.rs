//! Use cases: what the service does with plants and logs, whoever asks for it.
//!
//! A log that has come waits for its turn in the store. One at a time is read and balanced on threads of its own
//! ([`balancing`]); what is finished goes to the store in batches, each all or nothing, so that a crash at any moment
//! leaves whole balances only and the work goes on where it was.

mod balancing;
mod files;
mod plants;
mod queue;
mod saved;

use std::collections::HashMap;
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Arc, Mutex, MutexGuard, PoisonError};

use tokio::sync::{Notify, broadcast, watch};

use crate::store::{LogEntry, Store, StoreError};

pub use files::UploadError;
pub use plants::CompiledPlants;
pub use queue::CancelError;

/// Share of error-free balances in which anything is found.
pub const FALSE_ALARM_RATE: f64 = 0.05;
/// So many events may wait for a slow listener, who then misses the oldest.
const EVENTS: usize = 256;

/// What the work on a log is busy with.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Phase {
    /// Reading the file and finding its periods.
    Reading,
    /// Balancing them.
    Balancing,
}

/// A log and what the work on it is busy with.
#[derive(Clone, Debug, PartialEq)]
pub struct LogProgress {
    /// The log.
    pub log: LogEntry,
    /// Absent where it isn't being worked on.
    pub phase: Option<Phase>,
}

/// Why the service's folder can't be used.
#[derive(Debug, thiserror::Error)]
pub enum OpenError {
    /// The folder.
    #[error("{}: {error}", folder.display())]
    Folder {
        /// The folder.
        folder: PathBuf,
        /// What the system says.
        error: std::io::Error,
    },
    /// Another program is at work in it.
    #[error("{}: another meterwright is at work in this folder; stop it or name another folder", .0.display())]
    InUse(PathBuf),
    /// The database.
    #[error("{}: {error}", file.display())]
    Store {
        /// The database's file.
        file: PathBuf,
        /// What is wrong.
        error: StoreError,
    },
}

/// Everything that requests share.
pub struct Work {
    /// What is kept.
    pub store: Store,
    /// Plants that were compiled.
    pub plants: CompiledPlants,
    folder: PathBuf,
    events: broadcast::Sender<LogProgress>,
    /// The log that is being worked on.
    current: Mutex<Option<Current>>,
    wake: Notify,
    stopping: watch::Sender<bool>,
    /// Held while the program runs, so that no other works in the folder.
    _lock: std::fs::File,
}

/// What is known of the log that is being worked on.
#[derive(Clone)]
struct Current {
    log: String,
    phase: Phase,
    cancelled: Arc<AtomicBool>,
}

impl Work {
    /// Opens the folder of a service, which is made if it isn't there.
    ///
    /// # Errors
    /// It can't be made, another program is at work in it, or its database can't be opened.
    pub async fn open(folder: &Path) -> Result<Arc<Self>, OpenError> {
        let lock = files::prepare(folder)?;
        let file = folder.join("meterwright.db");
        let wrong = |error| OpenError::Store { file: file.clone(), error };
        let store = Store::open(&file).await.map_err(wrong)?;
        store.requeue_interrupted().await.map_err(wrong)?;
        files::sweep(folder, &store.log_hashes().await.map_err(wrong)?);
        Ok(Arc::new(Self {
            store,
            plants: CompiledPlants::default(),
            folder: folder.to_owned(),
            events: broadcast::Sender::new(EVENTS),
            current: Mutex::new(None),
            wake: Notify::new(),
            stopping: watch::Sender::new(false),
            _lock: lock,
        }))
    }

    /// What happens to logs from now on.
    pub fn events(&self) -> broadcast::Receiver<LogProgress> {
        self.events.subscribe()
    }

    /// A log with what the work on it is busy with.
    pub fn progress(&self, log: LogEntry) -> LogProgress {
        let phase =
            self.current().as_ref().filter(|current| current.log == log.id).map(|current| current.phase);
        LogProgress { log, phase }
    }

    /// Becomes true when the service stops.
    pub fn stopping(&self) -> watch::Receiver<bool> {
        self.stopping.subscribe()
    }

    /// Ends the work at the next balance; what it was in the midst of goes on at the next start.
    pub fn stop(&self) {
        self.stopping.send_replace(true);
        if let Some(current) = &*self.current() {
            current.cancelled.store(true, Ordering::Relaxed);
        }
        self.wake.notify_one();
    }

    fn current(&self) -> MutexGuard<'_, Option<Current>> {
        self.current.lock().unwrap_or_else(PoisonError::into_inner)
    }

    /// Tells listeners how a log stands. Whoever listens to none of it is told nothing.
    async fn tell(&self, log: &str) -> Result<(), StoreError> {
        if let Some(entry) = self.store.log(log).await? {
            let _ = self.events.send(self.progress(entry));
        }
        Ok(())
    }
}

/// Things by name of which only so many are kept: the ones used last.
struct Kept<T> {
    things: HashMap<String, (T, u64)>,
    uses: u64,
}

impl<T> Default for Kept<T> {
    fn default() -> Self {
        Self { things: HashMap::new(), uses: 0 }
    }
}

impl<T: Clone> Kept<T> {
    fn get(&mut self, name: &str) -> Option<T> {
        self.uses += 1;
        let (thing, used) = self.things.get_mut(name)?;
        *used = self.uses;
        Some(thing.clone())
    }

    fn keep(&mut self, name: &str, thing: T, most: usize) {
        if self.things.len() >= most {
            let oldest = self.things.iter().min_by_key(|(_, (_, used))| *used).map(|(name, _)| name.clone());
            if let Some(oldest) = oldest {
                self.things.remove(&oldest);
            }
        }
        self.uses += 1;
        self.things.insert(name.to_owned(), (thing, self.uses));
    }
}
