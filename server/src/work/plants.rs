//! Plants compiled once, found again by the hash of their plant file.

use std::sync::{Arc, Mutex, PoisonError};

use meterwright_engine::plant::revision;
use tokio::task::spawn_blocking;

use super::Kept;
use crate::ready::{ReadyPlant, TextFault};

/// So many compiled plants are kept; one of 66 tags takes a few megabytes.
const MOST: usize = 32;

/// Plants that were compiled.
#[derive(Default)]
pub struct CompiledPlants {
    kept: Mutex<Kept<Arc<ReadyPlant>>>,
}

impl CompiledPlants {
    /// The plant of a plant file. What isn't kept is compiled away from the threads that answer requests.
    ///
    /// # Errors
    /// Everything that is wrong with the plant file.
    pub async fn ready(&self, text: &str) -> Result<Arc<ReadyPlant>, Vec<TextFault>> {
        let hash = revision(text);
        if let Some(ready) = self.kept(&hash) {
            return Ok(ready);
        }
        let owned = text.to_owned();
        let ready = spawn_blocking(move || ReadyPlant::of(&owned)).await;
        let ready = Arc::new(ready.unwrap_or_else(|_| Err(vec![unreadable()]))?);
        self.keep(&hash, &ready);
        Ok(ready)
    }

    fn kept(&self, hash: &str) -> Option<Arc<ReadyPlant>> {
        self.kept.lock().unwrap_or_else(PoisonError::into_inner).get(hash)
    }

    fn keep(&self, hash: &str, ready: &Arc<ReadyPlant>) {
        self.kept.lock().unwrap_or_else(PoisonError::into_inner).keep(hash, ready.clone(), MOST);
    }
}

/// What is said of a plant file that made the program fail.
fn unreadable() -> TextFault {
    TextFault {
        line: 1,
        column: 1,
        message: "this plant file makes the program fail; please report it with the file".to_owned(),
    }
}
