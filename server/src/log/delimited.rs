//! Text logs: CSV and TSV with comma, semicolon or tab, decimal point or comma, quoted or not, in UTF-8, UTF-16 (with its
//! byte-order mark) or Latin-1.

use std::borrow::Cow;
use std::io::{BufRead, Cursor, Read};

use csv::ByteRecord;
use encoding_rs_io::DecodeReaderBytesBuilder;

use super::cell::{Cell, DecimalMark, Table};
use super::fault::{LogFault, Problem};
use super::form::{Form, Opened};

/// The form's entry in the table of forms.
pub(super) const FORM: Form = Form { recognises, open };

/// How much of the text is looked at to find delimiter and decimal mark.
const HEAD: u64 = 1 << 18;

/// Anything without a zero byte may be text; UTF-16 announces itself by its mark.
fn recognises(head: &[u8]) -> bool {
    head.starts_with(&[0xff, 0xfe]) || head.starts_with(&[0xfe, 0xff]) || !head.contains(&0)
}

fn open(bytes: Box<dyn BufRead>) -> Opened {
    let mut text = DecodeReaderBytesBuilder::new().strip_bom(true).utf8_passthru(true).build(bytes);
    let mut head = Vec::new();
    text.by_ref().take(HEAD).read_to_end(&mut head).map_err(|error| unreadable(&error, 1))?;
    let delimiter = delimiter(&head);
    let mark = decimal_mark(&head, delimiter);
    let reader = reader(delimiter, Cursor::new(head).chain(text));
    Ok(Box::new(Delimited { reader, record: ByteRecord::new(), mark }))
}

fn reader<R: Read>(delimiter: u8, text: R) -> csv::Reader<R> {
    csv::ReaderBuilder::new().delimiter(delimiter).has_headers(false).flexible(true).from_reader(text)
}

/// The delimiter by which the most rows at the head of the text have as many cells as the first, more than one; of
/// equals the one that makes most cells.
fn delimiter(head: &[u8]) -> u8 {
    let score = |delimiter: u8| {
        let mut widths = records(head, delimiter).map(|record| record.len());
        let first = widths.next().unwrap_or(0);
        if first > 1 { (1 + widths.filter(|width| *width == first).count(), first) } else { (0, 0) }
    };
    // `max_by_key` keeps the last of equals: the comma, where nothing speaks for another.
    [b'\t', b';', b','].into_iter().max_by_key(|delimiter| score(*delimiter)).unwrap_or(b',')
}

/// Comma if numbers at the head of the text have decimal commas and none has a decimal point.
fn decimal_mark(head: &[u8], delimiter: u8) -> DecimalMark {
    let (mut points, mut commas) = (false, false);
    for record in records(head, delimiter) {
        for field in &record {
            let Ok(field) = std::str::from_utf8(field) else { continue };
            points |= field.contains('.') && DecimalMark::Point.number(field).is_some();
            commas |= field.contains(',') && DecimalMark::Comma.number(field).is_some();
        }
    }
    if commas && !points { DecimalMark::Comma } else { DecimalMark::Point }
}

/// The rows at the head of the text; the last may be cut off.
fn records(head: &[u8], delimiter: u8) -> impl Iterator<Item = ByteRecord> {
    reader(delimiter, head).into_byte_records().filter_map(Result::ok)
}

struct Delimited<R> {
    reader: csv::Reader<R>,
    record: ByteRecord,
    mark: DecimalMark,
}

impl<R: Read> Table for Delimited<R> {
    fn advance(&mut self) -> Result<bool, LogFault> {
        loop {
            let read = self.reader.read_byte_record(&mut self.record);
            match read {
                Ok(true) if self.record.iter().all(|field| field.trim_ascii().is_empty()) => {}
                Ok(more) => return Ok(more),
                Err(error) => return Err(unreadable(&error, self.reader.position().line())),
            }
        }
    }

    fn line(&self) -> u64 {
        self.record.position().map_or(1, csv::Position::line)
    }

    fn width(&self) -> usize {
        self.record.len()
    }

    fn cell(&self, index: usize) -> Cell<'_> {
        Cell::Text(text(self.record.get(index).unwrap_or_default()))
    }

    fn decimal_mark(&self) -> DecimalMark {
        self.mark
    }
}

/// Bytes as text: UTF-8, and where they aren't, Latin-1, whose bytes are the first 256 characters of Unicode.
fn text(bytes: &[u8]) -> Cow<'_, str> {
    match std::str::from_utf8(bytes) {
        Ok(text) => Cow::Borrowed(text),
        Err(_) => Cow::Owned(bytes.iter().copied().map(char::from).collect()),
    }
}

fn unreadable(error: &impl ToString, line: u64) -> LogFault {
    LogFault { line, column: 1, problem: Problem::Unreadable(error.to_string()) }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_delimiter_is_the_one_that_cuts_every_row_alike() {
        assert_eq!(delimiter(b"time,A,B\n1,2,3\n"), b',');
        assert_eq!(delimiter(b"time;A;B\n1;2,5;3,5\n1;2,5;3,5\n"), b';');
        assert_eq!(delimiter(b"time\tA\tB\n1\t2,5\t3,5\n"), b'\t');
        assert_eq!(delimiter(b"time,\"A;b\",\"C;d\"\n1,2,3\n"), b',');
        assert_eq!(delimiter(b""), b',');
    }

    #[test]
    fn a_decimal_comma_needs_numbers_that_have_one_and_none_with_a_point() {
        assert_eq!(decimal_mark(b"time;A\n1;2,5\n", b';'), DecimalMark::Comma);
        assert_eq!(decimal_mark(b"time,A\n1,\"2,5\"\n", b','), DecimalMark::Comma);
        assert_eq!(decimal_mark(b"time;A\n1;2.5\n2;2,5\n", b';'), DecimalMark::Point);
        assert_eq!(decimal_mark(b"time;A\n1;25\n", b';'), DecimalMark::Point);
    }
}
