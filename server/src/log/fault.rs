//! What can be wrong with a log, and where.

use std::fmt;

use meterwright_engine::quantity::UnitError;

use super::time::TimeError;

/// One fault of a log. Faults are collected, so that a user sees all of them at once.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct LogFault {
    /// Line of the file (row of the sheet), from 1.
    pub line: u64,
    /// Column of the table, from 1: cells are counted, not characters.
    pub column: usize,
    /// What is wrong there.
    pub problem: Problem,
}

impl LogFault {
    /// A fault of the file as a whole.
    pub fn of_file(problem: Problem) -> Self {
        Self { line: 1, column: 1, problem }
    }
}

impl fmt::Display for LogFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}:{}: {}", self.line, self.column, self.problem)
    }
}

impl std::error::Error for LogFault {}

/// What is wrong at a place of a log.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum Problem {
    /// The file can't be opened, decompressed or read on.
    #[error("can't be read: {0}")]
    Unreadable(String),
    /// Nothing in it.
    #[error("the log is empty")]
    Empty,
    /// Bytes that are no text.
    #[error("this is neither text nor an XLSX workbook; save the log as CSV, TSV or XLSX")]
    NoKnownForm,
    /// No column of times.
    #[error(
        "no column is named `time`: the first row of a log names its columns, either `time` and one column a tag, \
         or `time,tag,value` and perhaps `quality`"
    )]
    NoTimeColumn,
    /// Not one column of a wide log is a tag of the plant.
    #[error("no column has the name of a tag of the plant file{0}")]
    NoTagColumn(String),
    /// Two columns with one name.
    #[error("column `{name}` stands twice, first as column {first}")]
    RepeatedColumn {
        /// The name.
        name: String,
        /// Column that has it already, from 1.
        first: usize,
    },
    /// A unit that is none.
    #[error("{tag}: {error}; the plant file reads it in {expected}")]
    UnknownUnit {
        /// The tag.
        tag: String,
        /// What is wrong with the unit.
        error: UnitError,
        /// Unit of the plant file.
        expected: String,
    },
    /// A unit that isn't the plant file's.
    #[error(
        "{tag} is logged in {logged}, but the plant file reads it in {expected}; state the unit of the log in the plant \
         file or convert the column"
    )]
    OtherUnit {
        /// The tag.
        tag: String,
        /// Unit of the log.
        logged: String,
        /// Unit of the plant file.
        expected: String,
    },
    /// A row that is cut off or has too much.
    #[error("this row has {found} cells where the first row names {expected} columns{}", split_numbers(*found, *expected))]
    Width {
        /// Cells of this row.
        found: usize,
        /// Columns of the log.
        expected: usize,
    },
    /// A cell of the time column that is no time.
    #[error(transparent)]
    Time(#[from] TimeError),
    /// Text where a number belongs.
    #[error("{tag}: `{text}` is not a number{hint}")]
    NotANumber {
        /// The tag.
        tag: String,
        /// The text.
        text: String,
        /// What may be the cause, as the end of a sentence, or nothing.
        hint: &'static str,
    },
    /// A quality that is none.
    #[error("`{0}` is not a quality; write good, uncertain or bad")]
    UnknownQuality(String),
    /// Two rows of a wide log at one time.
    #[error("the time of this row is that of line {first} again")]
    RepeatedTime {
        /// Line that has the time already.
        first: u64,
    },
    /// Two samples of a tag at one time.
    #[error("{tag} has a sample at this time already, in line {first}")]
    RepeatedSample {
        /// The tag.
        tag: String,
        /// Line that has the sample already.
        first: u64,
    },
    /// A header and nothing below it.
    #[error("the log has no samples")]
    NoSamples,
}

/// Why a row may have nearly twice its cells, as the end of a sentence.
fn split_numbers(found: usize, expected: usize) -> &'static str {
    if expected > 1 && found == 2 * expected - 1 {
        "; a decimal comma ends a cell as well: put such numbers in quotes, or semicolons or tabs between the cells"
    } else {
        ""
    }
}

/// The first thousand faults and the number of those beyond: a wrong file of a million lines stays readable.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct LogFaults {
    /// In the order of the file.
    pub first: Vec<LogFault>,
    /// How many more there are.
    pub beyond: usize,
}

impl LogFaults {
    const KEPT: usize = 1000;

    pub(super) fn push(&mut self, fault: LogFault) {
        if self.first.len() < Self::KEPT {
            self.first.push(fault);
        } else {
            self.beyond += 1;
        }
    }

    /// Sorted by place.
    pub(super) fn in_order(mut self) -> Self {
        self.first.sort_by_key(|fault| (fault.line, fault.column));
        self
    }

    /// The value if nothing is wrong.
    pub(super) fn or<T>(self, value: T) -> Result<T, Self> {
        if self.first.is_empty() { Ok(value) } else { Err(self) }
    }
}

impl Extend<LogFault> for LogFaults {
    fn extend<I: IntoIterator<Item = LogFault>>(&mut self, faults: I) {
        faults.into_iter().for_each(|fault| self.push(fault));
    }
}

impl From<LogFault> for LogFaults {
    fn from(fault: LogFault) -> Self {
        Self { first: vec![fault], beyond: 0 }
    }
}
