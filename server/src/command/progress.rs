//! How far long work is, on a terminal's standard error; nothing where that is no terminal.

use std::path::Path;
use std::time::Duration;

use indicatif::{ProgressBar, ProgressStyle};

/// A line that moves while something is done, and is gone after it.
pub(super) struct Progress {
    bar: ProgressBar,
}

impl Progress {
    /// While a log is read.
    pub(super) fn reading(log: &Path) -> Self {
        Self::moving(ProgressBar::new_spinner(), format!("Reading {}", log.display()))
    }

    /// While periods are balanced, of which there are so many if that is known.
    pub(super) fn balancing(periods: Option<usize>) -> Self {
        let Some(periods) = periods else {
            return Self::moving(ProgressBar::new_spinner(), "Balancing".to_owned());
        };
        let bar = ProgressBar::new(periods as u64);
        // The template is checked by a test; one that is wrong leaves the bar as it comes.
        if let Ok(style) = ProgressStyle::with_template(BAR) {
            bar.set_style(style);
        }
        Self::moving(bar, "Balancing".to_owned())
    }

    fn moving(bar: ProgressBar, message: String) -> Self {
        bar.set_message(message);
        if !bar.is_hidden() {
            bar.enable_steady_tick(Duration::from_millis(200));
        }
        Self { bar }
    }

    /// One more period is balanced.
    pub(super) fn advance(&self) {
        self.bar.inc(1);
    }

    /// Does something that writes to the terminal, with the line out of its way.
    pub(super) fn aside<R>(&self, write: impl FnOnce() -> R) -> R {
        self.bar.suspend(write)
    }
}

impl Drop for Progress {
    fn drop(&mut self) {
        self.bar.finish_and_clear();
    }
}

const BAR: &str = "{msg} [{bar:40}] {pos} of {len}, {eta} left";

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_template_of_the_bar_is_one() {
        assert!(ProgressStyle::with_template(BAR).is_ok());
    }
}
