//! Files for a test, and a plant to read them with.

#![expect(clippy::unwrap_used, reason = "a test stops where what it needs can't be had")]

use std::fs;
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicUsize, Ordering};

use jiff::tz::TimeZone;
use meterwright::log::{Expectation, ExpectedTag, Log, LogFaults, Row, Sample};
use meterwright_engine::quantity::Unit;

/// A folder that is gone when the test is over.
pub(crate) struct Folder(PathBuf);

impl Folder {
    pub(crate) fn new() -> Self {
        static NEXT: AtomicUsize = AtomicUsize::new(0);
        let number = NEXT.fetch_add(1, Ordering::Relaxed);
        let path = std::env::temp_dir().join(format!("meterwright-{}-{number}", std::process::id()));
        fs::create_dir_all(&path).unwrap();
        Self(path)
    }

    pub(crate) fn path(&self, name: &str) -> PathBuf {
        self.0.join(name)
    }

    pub(crate) fn write(&self, name: &str, content: impl AsRef<[u8]>) -> PathBuf {
        let path = self.path(name);
        fs::write(&path, content).unwrap();
        path
    }
}

impl Drop for Folder {
    fn drop(&mut self) {
        let _ = fs::remove_dir_all(&self.0);
    }
}

/// A file that is part of the tests.
pub(crate) fn data(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/service/data").join(name)
}

fn tag(name: &str, unit: &str) -> ExpectedTag {
    ExpectedTag {
        name: name.to_owned(),
        unit: Unit::parse(unit).unwrap(),
        span: None,
        hold: None,
        is_counter: false,
    }
}

/// Three meters at a plant in Oslo: a flow with a span, a temperature, and a laboratory value that stays valid for an hour.
pub(crate) fn plant() -> Expectation {
    let flow = ExpectedTag { span: Some([0.0, 100.0]), ..tag("FT-1", "t/h") };
    let laboratory = ExpectedTag { hold: Some(3600.0), ..tag("AT-3", "%") };
    Expectation {
        zone: TimeZone::get("Europe/Oslo").unwrap(),
        tags: vec![flow, tag("TT-2", "degC"), laboratory],
    }
}

pub(crate) fn open(content: impl AsRef<[u8]>) -> Result<Log, LogFaults> {
    let folder = Folder::new();
    Log::open(&folder.write("shift.csv", content), plant())
}

/// A text of lines.
pub(crate) fn lines(first: &str, rest: impl Iterator<Item = String>) -> String {
    std::iter::once(first.to_owned()).chain(rest).map(|line| line + "\n").collect()
}

/// All rows of a log in which nothing is wrong.
pub(crate) fn rows(content: impl AsRef<[u8]>) -> Vec<Row> {
    let folder = Folder::new();
    rows_of(&folder.write("shift.csv", content))
}

pub(crate) fn rows_of(path: &Path) -> Vec<Row> {
    let log = Log::open(path, plant()).unwrap();
    log.rows().unwrap().map(Result::unwrap).collect()
}

/// Times of all rows in UTC.
pub(crate) fn times(content: impl AsRef<[u8]>) -> Vec<String> {
    rows(content).iter().map(|row| row.time.to_string()).collect()
}

/// Faults as they are shown behind the file's name.
pub(crate) fn faults(content: impl AsRef<[u8]>) -> Vec<String> {
    open(content).unwrap_err().first.iter().map(ToString::to_string).collect()
}

/// Notes as line, column and message.
pub(crate) fn notes(content: impl AsRef<[u8]>) -> Vec<String> {
    let log = open(content).unwrap();
    log.notes().iter().map(|note| format!("{}:{}: {}", note.line, note.column, note.message)).collect()
}

/// Samples of one row: flow, temperature, laboratory value.
pub(crate) fn good(flow: f64, temperature: f64) -> Vec<Sample> {
    vec![Sample::Good(flow), Sample::Good(temperature), Sample::Absent]
}
