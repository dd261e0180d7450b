//! A log as a table of cells: what its forms have in common.

use std::borrow::Cow;

use jiff::civil::DateTime;

use super::fault::LogFault;

/// One cell.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Cell<'a> {
    /// Text as it stands; empty where the cell is.
    Text(Cow<'a, str>),
    /// A number of a form that knows numbers.
    Number(f64),
    /// A date and time of a form that knows them.
    Local(DateTime),
}

impl Cell<'_> {
    /// As people see it.
    pub(super) fn shown(&self) -> Cow<'_, str> {
        match self {
            Self::Text(text) => Cow::Borrowed(text),
            Self::Number(number) => Cow::Owned(number.to_string()),
            Self::Local(local) => Cow::Owned(local.to_string()),
        }
    }

    /// Whether nothing stands in it.
    pub(super) fn is_empty(&self) -> bool {
        matches!(self, Self::Text(text) if text.trim().is_empty())
    }
}

/// What separates the whole part of a number from its decimals.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum DecimalMark {
    Point,
    Comma,
}

impl DecimalMark {
    /// What then separates thousands, where anything does.
    pub(super) fn of_groups(self) -> char {
        match self {
            Self::Point => ',',
            Self::Comma => '.',
        }
    }

    /// The number a text says, infinite and not-a-number ones included. Digits in groups are refused: whether `1,234`
    /// is a thousand or one is decided for the whole log, never cell by cell.
    pub(super) fn number(self, text: &str) -> Option<f64> {
        let text = text.trim();
        match self {
            Self::Point => text.parse().ok(),
            Self::Comma if text.contains('.') => None,
            Self::Comma => text.replacen(',', ".", 1).parse().ok(),
        }
    }
}

/// Reads a log row after row; the cells of the current row can be looked at until the next is asked for.
pub(super) trait Table {
    /// Goes to the next row that has anything in it; false at the end.
    fn advance(&mut self) -> Result<bool, LogFault>;
    /// Line of the file (row of the sheet) where the current row begins, from 1.
    fn line(&self) -> u64;
    /// Column of the file in which a cell counted from 0 stands, from 1.
    fn column(&self, index: usize) -> usize {
        index + 1
    }
    /// Number of cells of the current row.
    fn width(&self) -> usize;
    /// A cell of the current row, counted from 0; an empty one beyond the last.
    fn cell(&self, index: usize) -> Cell<'_>;
    /// Decimal mark of the numbers that stand as text.
    fn decimal_mark(&self) -> DecimalMark;
}
