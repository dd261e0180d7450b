//! Logs: files of samples, read row after row.
//!
//! A log is first a table of cells ([`form`]: one file a form, found by a table), then wide or long ([`wide`], [`long`]).
//! Everything that is wrong with it is found when it is opened; text logs are then read a second time as they are
//! used, so that memory stays flat however long they are. Only the samples of a long log that is not in order of time
//! are held, and the cells of a workbook while it is read.

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

use cell::{Cell, DecimalMark, Table};
use layout::{Layout, Shape};
use long::{LongColumns, LongRows, LongSample, LongSamples, Surveyed};
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
    survey: Survey,
    /// The samples of a long log that is not in order of time.
    held: Option<Vec<LongSample>>,
}

/// How much there is in a log.
#[derive(Debug, Default)]
struct Survey {
    rows: usize,
    /// One a tag of the plant.
    samples: Vec<usize>,
}

impl Log {
    /// Opens a log and reads it once.
    ///
    /// # Errors
    /// Everything that is wrong with it, in the order of the file.
    pub fn open(path: &Path, expectation: Expectation) -> Result<Self, LogFaults> {
        let (layout, notes) = Layout::read(&mut *form::open(path)?, &expectation)?;
        let mut log =
            Self { path: path.to_owned(), expectation, layout, notes, survey: Survey::default(), held: None };
        match log.layout.shape {
            Shape::Wide { .. } => log.survey = log.survey()?,
            Shape::Long(columns) => {
                let Surveyed { survey, notes, held } = long::survey(|| log.long_samples(columns))?;
                (log.survey, log.held) = (survey, held);
                log.notes.extend(notes);
            }
        }
        log.notes.extend(log.without_samples());
        Ok(log)
    }

    /// What its user should know.
    pub fn notes(&self) -> &[Note] {
        &self.notes
    }

    /// How many samples of any quality there are of each tag of the plant, in its order.
    pub fn sample_counts(&self) -> &[usize] {
        &self.survey.samples
    }

    /// How many rows [`Log::rows`] has.
    pub fn row_count(&self) -> usize {
        self.survey.rows
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
        let tag_count = self.expectation.tags.len();
        match (&self.layout.shape, &self.held) {
            (Shape::Long(_), Some(held)) => {
                Ok(Box::new(LongRows::new(held.iter().copied().map(Ok), tag_count).map(collected)))
            }
            (Shape::Long(columns), None) => {
                Ok(Box::new(LongRows::new(self.long_samples(*columns)?, tag_count).map(collected)))
            }
            (Shape::Wide { time, tags }, _) => {
                let table = self.behind_head()?;
                let clock = Clock::new(&self.expectation.zone);
                let (layout, expectation) = (&self.layout, &self.expectation);
                let rows = WideRows { table, layout, time: *time, tags, expectation, clock, broken: false };
                Ok(Box::new(rows.map(collected)))
            }
        }
    }

    fn long_samples(&self, columns: LongColumns) -> Result<LongSamples<'_>, LogFaults> {
        Ok(LongSamples::new(self.behind_head()?, &self.layout, columns, &self.expectation))
    }

    /// The file, opened anew and read to the last row before its samples.
    fn behind_head(&self) -> Result<Box<dyn Table>, LogFaults> {
        let mut table = form::open(&self.path)?;
        for _ in 0..self.layout.head_rows {
            table.advance()?;
        }
        Ok(table)
    }

    /// Reads all rows of a wide log once for their faults.
    fn survey(&self) -> Result<Survey, LogFaults> {
        let mut faults = LogFaults::default();
        let mut survey = Survey { rows: 0, samples: vec![0; self.expectation.tags.len()] };
        let mut order = Order::default();
        for row in self.rows()? {
            match row {
                Ok(row) => {
                    order.see(row.time);
                    survey.rows += 1;
                    for (count, sample) in survey.samples.iter_mut().zip(&row.samples) {
                        *count += usize::from(*sample != Sample::Absent);
                    }
                }
                Err(found) => faults.extend(found.first),
            }
        }
        if order.may_repeat() {
            faults.extend(self.repeated_times()?);
        }
        if survey.rows == 0 && faults.first.is_empty() {
            faults.push(LogFault::of_file(Problem::NoSamples));
        }
        faults.in_order().or(survey)
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
        let tags = self.expectation.names().zip(&self.survey.samples);
        let missing: Vec<&str> = tags.filter(|(_, count)| **count == 0).map(|(name, _)| name).collect();
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
            _ if WrittenTime::of_text(&text).is_some() => {
                " but a time; do the headings stand over the right columns?"
            }
            _ if text.contains('.') && mark.number(&text.replace(mark.of_groups(), "")).is_some() => {
                "; write it without separators of thousands"
            }
            _ => "",
        };
        Self::NotANumber { tag: tag.to_owned(), text, hint }
    }
}
