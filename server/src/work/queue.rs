//! One log after another.

use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::Duration;

use tokio::sync::mpsc;
use tokio::task::spawn_blocking;

use super::balancing::{Ended, Job, Message};
use super::{Current, FALSE_ALARM_RATE, Phase, Work};
use crate::store::{LogEntry, LogState, Revision, Said, StoreError};

/// Messages that may wait for the store: the threads that balance wait rather than pile up what they made.
const MESSAGES: usize = 2;
/// After a failure of the store the work begins again after this time.
const PAUSE: Duration = Duration::from_secs(5);

/// Why a log's work can't be stopped or begun again.
#[derive(Debug, thiserror::Error)]
pub enum CancelError {
    /// It isn't in a state to be.
    #[error("the log is {0}")]
    State(&'static str),
    /// The store failed.
    #[error(transparent)]
    Store(#[from] StoreError),
}

impl Work {
    /// Works on logs as they come, until the service stops.
    pub async fn run(self: Arc<Self>) {
        while !*self.stopping.borrow() {
            let worked = match self.store.next_log().await {
                Ok(Some(log)) => self.work_on(log).await,
                Ok(None) => {
                    self.wake.notified().await;
                    Ok(())
                }
                Err(error) => Err(error),
            };
            if let Err(error) = worked {
                tracing::error!(%error, "the store failed: the work on logs begins again soon");
                tokio::time::sleep(PAUSE).await;
                let _ = self.store.requeue_interrupted().await;
            }
        }
    }

    /// Cancels the work on a log; what is balanced stays.
    ///
    /// # Errors
    /// It is neither waiting nor being worked on, or the store fails.
    pub async fn cancel(&self, log: &LogEntry) -> Result<(), CancelError> {
        if let Some(current) = self.current().as_ref().filter(|current| current.log == log.id) {
            current.cancelled.store(true, Ordering::Relaxed);
            return Ok(());
        }
        if !self.store.move_log(&log.id, &[LogState::Waiting], LogState::Cancelled).await? {
            return Err(CancelError::State(log.state.name()));
        }
        Ok(self.tell(&log.id).await?)
    }

    /// Lets a log that failed or was cancelled wait for its turn again; false where it did neither.
    ///
    /// # Errors
    /// The store fails.
    pub async fn begin_again(&self, log: &str) -> Result<bool, StoreError> {
        let ended = [LogState::Failed, LogState::Cancelled];
        let moved = self.store.move_log(log, &ended, LogState::Waiting).await?;
        if moved {
            self.wake.notify_one();
            self.tell(log).await?;
        }
        Ok(moved)
    }

    async fn work_on(&self, log: LogEntry) -> Result<(), StoreError> {
        if !self.store.move_log(&log.id, &[LogState::Waiting], LogState::Working).await? {
            return Ok(());
        }
        let cancelled = Arc::new(AtomicBool::new(*self.stopping.borrow()));
        let current = Current { log: log.id.clone(), phase: Phase::Reading, cancelled: cancelled.clone() };
        *self.current() = Some(current);
        tracing::info!(log = %log.id, name = log.name, size_bytes = log.size, "begins to work on log {}", log.id);
        let ended = self.balance_all(&log, cancelled).await;
        *self.current() = None;
        let (state, said) = ended?;
        // What the service is stopped in the midst of goes on when it starts again.
        if state != LogState::Cancelled || !*self.stopping.borrow() {
            self.store.end_log(&log.id, state, &said).await?;
        }
        tracing::info!(log = %log.id, state = state.name(), "the work on log {} has ended", log.id);
        self.tell(&log.id).await
    }

    async fn balance_all(
        &self,
        log: &LogEntry,
        cancelled: Arc<AtomicBool>,
    ) -> Result<(LogState, Said), StoreError> {
        self.tell(&log.id).await?;
        let revisions = self.store.revisions(&log.plant).await?;
        let mut plants = Vec::new();
        for (revision, window) in Revision::in_force(&revisions) {
            match self.plants.ready(&revision.text).await {
                Ok(ready) => plants.push((revision.number, ready, window)),
                Err(_) => return Ok((LogState::Failed, unreadable(revision))),
            }
        }
        let job = Job {
            log: log.clone(),
            file: self.file(&log.sha256),
            plants,
            false_alarm_rate: FALSE_ALARM_RATE,
            seen: self.store.balanced_periods(&log.id).await?,
            cancelled: cancelled.clone(),
        };
        let (sender, mut messages) = mpsc::channel(MESSAGES);
        let worker = spawn_blocking(move || job.run(&sender));
        while let Some(message) = messages.recv().await {
            let saved = self.save(log, message).await;
            if saved.is_err() {
                // Whoever sends finds nobody listening, and ends.
                cancelled.store(true, Ordering::Relaxed);
                messages.close();
                let _ = worker.await;
                return saved.map(|()| (LogState::Failed, Said::default()));
            }
        }
        Ok(match worker.await {
            Ok(Ended::Done(said)) => (LogState::Done, said),
            Ok(Ended::Failed(said)) => (LogState::Failed, said),
            Ok(Ended::Cancelled(said)) => (LogState::Cancelled, said),
            Err(_) => {
                (LogState::Failed, because("this log makes the program fail; please report it with the log"))
            }
        })
    }

    async fn save(&self, log: &LogEntry, message: Message) -> Result<(), StoreError> {
        match message {
            Message::Periods(periods, expected) => {
                self.store.save_periods(&log.id, &periods, expected).await?;
                if let Some(current) = &mut *self.current() {
                    current.phase = Phase::Balancing;
                }
            }
            Message::Balances(place, balances) => self.store.save_balances(&place, &balances).await?,
        }
        self.tell(&log.id).await
    }
}

fn because(reason: &str) -> Said {
    Said { reason: Some(reason.to_owned()), ..Said::default() }
}

fn unreadable(revision: &Revision) -> Said {
    because(&format!(
        "revision {} of the plant file is not one that this version of the program reads; store a revision that is",
        revision.number
    ))
}
