//! The table of log forms: one entry a form, each in its own file.

use std::fs::File;
use std::io::BufRead;
use std::path::Path;

use super::cell::Table;
use super::compression;
use super::fault::{LogFault, Problem};
use super::{delimited, workbook};

/// A log as a table of cells, or why it is none.
pub(super) type Opened = Result<Box<dyn Table>, LogFault>;

/// One form of log.
pub(super) struct Form {
    /// Whether a file that begins like this has the form.
    pub(super) recognises: fn(&[u8]) -> bool,
    /// Reads it as a table of cells.
    pub(super) open: fn(Box<dyn BufRead>) -> Opened,
}

/// Every form, the most particular first.
const FORMS: &[Form] = &[workbook::FORM, delimited::FORM];

/// Opens a log by what its bytes say, not by its name.
pub(super) fn open(path: &Path) -> Opened {
    let unreadable = |error: std::io::Error| LogFault::of_file(Problem::Unreadable(error.to_string()));
    let file = File::open(path).map_err(unreadable)?;
    let mut bytes = compression::plain(file).map_err(unreadable)?;
    let head = bytes.fill_buf().map_err(unreadable)?;
    if head.is_empty() {
        return Err(LogFault::of_file(Problem::Empty));
    }
    match FORMS.iter().find(|form| (form.recognises)(head)) {
        Some(form) => (form.open)(bytes),
        None => Err(LogFault::of_file(Problem::NoKnownForm)),
    }
}
