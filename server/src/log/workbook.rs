//! XLSX workbooks: the first sheet that has anything in it.

use std::io::{BufRead, Cursor};

use calamine::{Data, ExcelDateTime, Range, Reader, Xlsx};
use jiff::civil::DateTime;

use super::cell::{Cell, DecimalMark, Table};
use super::fault::{LogFault, Problem};
use super::form::{Form, Opened};

/// The form's entry in the table of forms.
pub(super) const FORM: Form = Form { recognises, open };

/// A workbook is a ZIP archive.
fn recognises(head: &[u8]) -> bool {
    head.starts_with(b"PK\x03\x04")
}

fn open(mut bytes: Box<dyn BufRead>) -> Opened {
    let mut archive = Vec::new();
    bytes.read_to_end(&mut archive).map_err(|error| unreadable(&error))?;
    let mut workbook: Xlsx<_> = Xlsx::new(Cursor::new(archive)).map_err(|error| unreadable(&error))?;
    for name in workbook.sheet_names() {
        let range = workbook.worksheet_range(&name).map_err(|error| unreadable(&error))?;
        if !range.is_empty() {
            return Ok(Box::new(Sheet { range, next: 0 }));
        }
    }
    Err(LogFault::of_file(Problem::Empty))
}

struct Sheet {
    /// What is filled of the sheet; it need not begin in the first row and column.
    range: Range<Data>,
    /// Row after the current one, counted from the first of the range.
    next: usize,
}

impl Sheet {
    fn data(&self, index: usize) -> Option<&Data> {
        self.range.get((self.next.checked_sub(1)?, index))
    }
}

impl Table for Sheet {
    fn advance(&mut self) -> Result<bool, LogFault> {
        while self.next < self.range.height() {
            self.next += 1;
            if (0..self.width()).any(|index| self.data(index).is_some_and(|data| *data != Data::Empty)) {
                return Ok(true);
            }
        }
        Ok(false)
    }

    fn line(&self) -> u64 {
        self.range.start().map_or(0, |(row, _)| u64::from(row)) + self.next as u64
    }

    fn column(&self, index: usize) -> usize {
        self.range.start().map_or(0, |(_, column)| column as usize) + index + 1
    }

    fn width(&self) -> usize {
        self.range.width()
    }

    fn cell(&self, index: usize) -> Cell<'_> {
        self.data(index).map_or(Cell::Text("".into()), cell)
    }

    fn decimal_mark(&self) -> DecimalMark {
        DecimalMark::Point
    }
}

fn cell(data: &Data) -> Cell<'_> {
    match data {
        Data::Empty => Cell::Text("".into()),
        Data::Int(number) => Cell::Number(*number as f64),
        Data::Float(number) => Cell::Number(*number),
        Data::String(text) | Data::DateTimeIso(text) | Data::DurationIso(text) => Cell::Text(text.into()),
        Data::Bool(flag) => Cell::Text(if *flag { "TRUE" } else { "FALSE" }.into()),
        Data::DateTime(time) => local(time).map_or(Cell::Number(time.as_f64()), Cell::Local),
        Data::Error(_) => Cell::Text("#N/A".into()),
    }
}

/// Local time of a date cell, in the workbook's own date system; none for a duration.
fn local(time: &ExcelDateTime) -> Option<DateTime> {
    if time.is_duration() {
        return None;
    }
    let (year, month, day, hour, minute, second, millisecond) = time.to_ymd_hms_milli();
    let part = |value: u16| i8::try_from(value).ok();
    let nanosecond = i32::from(millisecond) * 1_000_000;
    DateTime::new(
        year.try_into().ok()?,
        part(month.into())?,
        part(day.into())?,
        part(hour.into())?,
        part(minute.into())?,
        part(second.into())?,
        nanosecond,
    )
    .ok()
}

fn unreadable(error: &impl ToString) -> LogFault {
    LogFault::of_file(Problem::Unreadable(error.to_string()))
}
