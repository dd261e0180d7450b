//! Logs: files of samples, read row after row.
//!
//! A log is first a table of cells ([`form`]: one file a form, found by a table), then wide or long ([`wide`], [`long`]).
//! Everything that is wrong with it is found when it is opened; wide text logs are then read a second time as they are
//! used, so that memory stays flat however long they are.

mod cell;
mod compression;
mod delimited;
mod expectation;
mod fault;
mod form;
mod layout;
mod long;
mod quality;
mod time;
mod wide;
mod workbook;

use std::path::{Path, PathBuf};

use jiff::Timestamp;

pub use expectation::{Expectation, ExpectedTag};
pub use fault::{LogFault, LogFaults, Problem};
pub use layout::Note;
pub use quality::Sample;
pub use time::TimeError;

pub(crate) use time::{Instants, WrittenTime, instants};

use cell::{Cell, DecimalMark};
use layout::{Layout, Shape};
use long::{LongColumns, LongSample};
use time::Clock;
use wide::WideRows;

/// What a log has at one time.
#[derive(Clone, Debug, PartialEq)]
pub struct Row {
    /// When.
    pub time: Timestamp,
    /// Line of the file, from 1.
    pub line: u64,
    /// One a tag of the plant, in its order.
    pub samples: Vec<Sample>,
}

/// A log that has been read once and in which nothing is wrong.
#[derive(Debug)]
pub struct Log {
    path: PathBuf,
    expectation: Expectation,
    layout: Layout,
    notes: Vec<Note>,
    /// The samples of a long log.
    held: Vec<LongSample>,
    /// One a tag of the plant: whether it has any sample.
    has_samples: Vec<bool>,
}

impl Log {
    /// Opens a log and reads it once.
    ///
    /// # Errors
    /// Everything that is wrong with it, in the order of the file.
    pub fn open(path: &Path, expectation: Expectation) -> Result<Self, LogFaults> {
        let mut table = form::open(path)?;
        let (layout, mut notes) = Layout::read(&mut *table, &expectation)?;
        let mut held = Vec::new();
        if let Shape::Long { time, tag, value, quality } = layout.shape {
            let columns = LongColumns { time, tag, value, quality };
            let (samples, unknown) = long::read(&mut *table, &layout, columns, &expectation)?;
            held = samples;
            notes.extend(unknown);
        }
        let mut log =
            Self { path: path.to_owned(), expectation, layout, notes, held, has_samples: Vec::new() };
        log.has_samples = log.check()?;
        log.notes.extend(log.without_samples());
        Ok(log)
    }

    /// What its user should know.
    pub fn notes(&self) -> &[Note] {
        &self.notes
    }

    /// Whether there is any sample of each tag of the plant, in its order.
    pub fn has_samples(&self) -> &[bool] {
        &self.has_samples
    }

    /// What it was read with.
    pub fn expectation(&self) -> &Expectation {
        &self.expectation
    }

    /// Its rows: a wide log's in their own order, a long log's in the order of time.
    ///
    /// # Errors
    /// The file can't be opened or read again, or has changed since.
    pub fn rows(&self) -> Result<Box<dyn Iterator<Item = Result<Row, LogFaults>> + '_>, LogFaults> {
        match &self.layout.shape {
            Shape::Long { .. } => Ok(Box::new(long::rows(&self.held, self.expectation.tags.len()).map(Ok))),
            Shape::Wide { time, tags } => {
                let mut table = form::open(&self.path)?;
                for _ in 0..self.layout.head_rows {
                    table.advance()?;
                }
                let clock = Clock::new(&self.expectation.zone);
                let (layout, expectation) = (&self.layout, &self.expectation);
                let rows = WideRows { table, layout, time: *time, tags, expectation, clock, broken: false };
                Ok(Box::new(rows.map(collected)))
            }
        }
    }

    /// Reads everything once for its faults; answers which tags have samples.
    fn check(&self) -> Result<Vec<bool>, LogFaults> {
        let mut faults = LogFaults::default();
        let mut has_samples = vec![false; self.expectation.tags.len()];
        let mut order = Order::default();
        for row in self.rows()? {
            match row {
                Ok(row) => {
                    order.see(row.time);
                    for (has, sample) in has_samples.iter_mut().zip(&row.samples) {
                        *has |= *sample != Sample::Absent;
                    }
                }
                Err(found) => faults.extend(found.first),
            }
        }
        if order.may_repeat() {
            faults.extend(self.repeated_times()?);
        }
        if order.previous.is_none() && faults.first.is_empty() {
            faults.push(LogFault::of_file(Problem::NoSamples));
        }
        faults.in_order().or(has_samples)
    }

    /// Rows at a time that an earlier row has.
    fn repeated_times(&self) -> Result<Vec<LogFault>, LogFaults> {
        let mut times: Vec<(Timestamp, u64)> =
            self.rows()?.filter_map(Result::ok).map(|row| (row.time, row.line)).collect();
        times.sort_unstable();
        let repeats = times.chunk_by(|a, b| a.0 == b.0).flat_map(|same| {
            let first = same[0].1;
            same[1..].iter().map(move |(_, line)| LogFault {
                line: *line,
                column: 1,
                problem: Problem::RepeatedTime { first },
            })
        });
        Ok(repeats.collect())
    }

    /// A note that lists the tags of the plant of which there is nothing.
    fn without_samples(&self) -> Option<Note> {
        let tags = self.expectation.names().zip(&self.has_samples);
        let missing: Vec<&str> = tags.filter(|(_, has)| !**has).map(|(name, _)| name).collect();
        (!missing.is_empty()).then(|| Note {
            line: 1,
            column: 1,
            message: format!("the log has no samples of {}", missing.join(", ")),
        })
    }
}

fn collected(row: Result<Row, Vec<LogFault>>) -> Result<Row, LogFaults> {
    row.map_err(|first| LogFaults { first, beyond: 0 })
}

/// Whether the times of a log only rise or only fall: then none is there twice, and none need be kept.
#[derive(Default)]
struct Order {
    previous: Option<Timestamp>,
    rises: bool,
    falls: bool,
    stands: bool,
}

impl Order {
    fn see(&mut self, time: Timestamp) {
        if let Some(previous) = self.previous {
            self.rises |= time > previous;
            self.falls |= time < previous;
            self.stands |= time == previous;
        }
        self.previous = Some(time);
    }

    fn may_repeat(&self) -> bool {
        self.stands || (self.rises && self.falls)
    }
}

impl Problem {
    fn not_a_number(tag: &str, cell: &Cell<'_>, mark: DecimalMark) -> Self {
        let text = cell.shown().trim().to_owned();
        let hint = match mark {
            DecimalMark::Point if DecimalMark::Comma.number(&text).is_some() => {
                "; numbers of this log have a decimal point"
            }
            DecimalMark::Comma if DecimalMark::Point.number(&text).is_some() => {
                "; numbers of this log have a decimal comma"
            }
            _ => "",
        };
        Self::NotANumber { tag: tag.to_owned(), text, hint }
    }
}
