//! What the first rows of a log say: which column holds what, and in which units.

use meterwright_engine::fault::suggestion;
use meterwright_engine::quantity::Unit;

use super::cell::{Cell, Table};
use super::expectation::{Expectation, ExpectedTag};
use super::fault::{LogFault, LogFaults, Problem};
use super::long::LongColumns;
use super::quality::{Sample, is_bad_word, sample};
use super::time::WrittenTime;

/// Which column of a log holds what. Columns are counted from 0.
#[derive(Debug)]
pub(super) struct Layout {
    pub(super) shape: Shape,
    /// Rows before the first with samples: the names, perhaps the units.
    pub(super) head_rows: usize,
    /// Columns up to the last that has a name.
    named: usize,
    /// Columns of the first row.
    width: usize,
}

#[derive(Debug)]
pub(super) enum Shape {
    Wide { time: usize, tags: Vec<TagColumn> },
    Long(LongColumns),
}

/// A column of a wide log and its tag, by their places.
#[derive(Clone, Copy, Debug)]
pub(super) struct TagColumn {
    pub(super) column: usize,
    pub(super) tag: usize,
}

/// Something in a log that its user should know and that is no fault.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Note {
    /// Line of the file, from 1.
    pub line: u64,
    /// Column of the table, from 1.
    pub column: usize,
    /// What is to be known.
    pub message: String,
}

const TIME_NAMES: &[&str] = &["time", "timestamp", "datetime", "date time", "date/time"];

impl Layout {
    /// Reads the head of a log, which the table is at the beginning of.
    pub(super) fn read(
        table: &mut dyn Table,
        expectation: &Expectation,
    ) -> Result<(Self, Vec<Note>), LogFaults> {
        if !table.advance()? {
            return Err(LogFault::of_file(Problem::Empty).into());
        }
        let mut head =
            Head { expectation, names: names(table), faults: LogFaults::default(), notes: Vec::new() };
        let columns: Vec<usize> = (0..head.names.len()).map(|index| table.column(index)).collect();
        head.repeated(table.line(), &columns);
        let shape = head.shape(table.line(), &columns);
        let named = head.names.iter().rposition(|name| !name.is_empty()).map_or(0, |last| last + 1);
        let mut layout = Self { shape, head_rows: 1, named, width: head.names.len() };
        if let Shape::Wide { time, tags } = &layout.shape
            && table.advance()?
            && is_units_row(table, *time, tags)
        {
            layout.head_rows = 2;
            head.units_row(table, tags);
        }
        head.faults.or((layout, head.notes))
    }

    /// What is wrong with the number of cells of the current row, if anything: cells may be missing or stand over only
    /// where no column has a name and nothing is in them.
    pub(super) fn width_fault(&self, table: &dyn Table) -> Option<LogFault> {
        let found = table.width();
        let too_long = (self.width..found).any(|index| !table.cell(index).is_empty());
        (found < self.named || too_long).then(|| LogFault {
            line: table.line(),
            column: table.column(found.saturating_sub(1)),
            problem: Problem::Width { found, expected: self.named },
        })
    }
}

fn names(table: &dyn Table) -> Vec<String> {
    (0..table.width()).map(|index| table.cell(index).shown().trim().to_owned()).collect()
}

/// The head of a log while it is made out.
struct Head<'e> {
    expectation: &'e Expectation,
    names: Vec<String>,
    faults: LogFaults,
    notes: Vec<Note>,
}

impl Head<'_> {
    /// Two columns of one name are a fault.
    fn repeated(&mut self, line: u64, columns: &[usize]) {
        for (index, name) in self.names.iter().enumerate().filter(|(_, name)| !name.is_empty()) {
            let first = self.names.iter().position(|other| other == name).filter(|first| *first < index);
            if let Some(first) = first {
                let problem = Problem::RepeatedColumn { name: name.clone(), first: columns[first] };
                self.faults.push(LogFault { line, column: columns[index], problem });
            }
        }
    }

    fn shape(&mut self, line: u64, columns: &[usize]) -> Shape {
        let time = TIME_NAMES.iter().find_map(|name| self.position(name));
        if time.is_none() {
            self.faults.push(LogFault { line, column: 1, problem: Problem::NoTimeColumn });
        }
        // With the fault above the log isn't read any further; the place no longer matters.
        let time = time.unwrap_or(0);
        if let (Some(tag), Some(value)) = (self.position("tag"), self.position("value")) {
            let quality = self.position("quality");
            self.unread(line, columns, &[Some(time), Some(tag), Some(value), quality]);
            return Shape::Long(LongColumns { time, tag, value, quality });
        }
        let tags = self.tag_columns(line, columns, time);
        Shape::Wide { time, tags }
    }

    fn position(&self, wanted: &str) -> Option<usize> {
        self.names.iter().position(|name| name.eq_ignore_ascii_case(wanted))
    }

    /// Notes the columns of a long log that mean nothing to it.
    fn unread(&mut self, line: u64, columns: &[usize], read: &[Option<usize>]) {
        for (index, name) in self.names.iter().enumerate() {
            if !read.contains(&Some(index)) && !name.is_empty() {
                let message =
                    format!("column `{name}` is not read: a long log has time, tag, value and quality");
                self.notes.push(Note { line, column: columns[index], message });
            }
        }
    }

    /// Columns of a wide log that are tags; a name may carry its unit behind it, as in `FT-1001 [t/h]`.
    fn tag_columns(&mut self, line: u64, columns: &[usize], time: usize) -> Vec<TagColumn> {
        let expectation = self.expectation;
        let mut found: Vec<TagColumn> = Vec::new();
        for (index, name) in self.names.iter().enumerate().filter(|(index, _)| *index != time) {
            let (bare, unit) = match expectation.tag(name) {
                Some(_) => (name.as_str(), None),
                None => split_unit(name),
            };
            let column = columns[index];
            match expectation.tag(bare) {
                Some(tag) => {
                    let logged = unit.and_then(|unit| unit_problem(&expectation.tags[tag], unit));
                    let earlier = found
                        .iter()
                        .find(|earlier| earlier.tag == tag && self.names[earlier.column] != *name);
                    let again = earlier.map(|earlier| Problem::RepeatedColumn {
                        name: bare.to_owned(),
                        first: columns[earlier.column],
                    });
                    self.faults.extend(logged.into_iter().chain(again).map(|problem| LogFault {
                        line,
                        column,
                        problem,
                    }));
                    found.push(TagColumn { column: index, tag });
                }
                None if name.is_empty() && index + 1 == self.names.len() => {}
                None => self.notes.push(Note { line, column, message: unknown(name, expectation) }),
            }
        }
        if found.is_empty() {
            let near = self
                .names
                .iter()
                .map(|name| suggestion(name, expectation.names()))
                .find(|near| !near.is_empty());
            let problem = Problem::NoTagColumn(near.unwrap_or_default());
            self.faults.push(LogFault { line, column: 1, problem });
        }
        found
    }

    fn units_row(&mut self, table: &dyn Table, tags: &[TagColumn]) {
        for TagColumn { column, tag } in tags {
            let cell = table.cell(*column);
            if let Some(problem) = unit_problem(&self.expectation.tags[*tag], &cell.shown()) {
                self.faults.push(LogFault { line: table.line(), column: table.column(*column), problem });
            }
        }
    }
}

fn unknown(name: &str, expectation: &Expectation) -> String {
    if name.is_empty() {
        "a column without a name is not read".to_owned()
    } else {
        let near = suggestion(name, expectation.names());
        format!("column `{name}` is not read: no tag of the plant file has this name{near}")
    }
}

/// A column's name and the unit in brackets behind it.
fn split_unit(name: &str) -> (&str, Option<&str>) {
    for (open, close) in [('[', ']'), ('(', ')')] {
        if let Some((bare, unit)) = name.strip_suffix(close).and_then(|rest| rest.split_once(open)) {
            return (bare.trim_end(), Some(unit));
        }
    }
    (name, None)
}

/// A row of units has no time, and words where the samples of tags would stand.
fn is_units_row(table: &dyn Table, time: usize, tags: &[TagColumn]) -> bool {
    let mark = table.decimal_mark();
    let cell = |column: &TagColumn| table.cell(column.column);
    let is_number = |cell: Cell<'_>| matches!(sample(&cell, mark), Some(Sample::Good(_)));
    let is_word = |cell: Cell<'_>| matches!(&cell, Cell::Text(text) if !is_bad_word(text));
    WrittenTime::of_cell(&table.cell(time), mark).is_none()
        && !tags.iter().map(cell).any(is_number)
        && tags.iter().map(cell).any(is_word)
}

/// What is wrong with a unit that the log states for a tag. Saying nothing, or dashes, is right. A unit other than the
/// plant file's is a fault even where it could be converted: either of the two files may be the wrong one.
fn unit_problem(tag: &ExpectedTag, stated: &str) -> Option<Problem> {
    let stated = stated.trim().trim_matches(['[', ']', '(', ')']).trim();
    if is_bad_word(stated) {
        return None;
    }
    let expected = tag.unit.to_string();
    let tag_name = tag.name.clone();
    match Unit::parse(stated) {
        Ok(unit) if unit == tag.unit => None,
        Ok(unit) => Some(Problem::OtherUnit { tag: tag_name, logged: unit.to_string(), expected }),
        Err(error) => Some(Problem::UnknownUnit { tag: tag_name, error, expected }),
    }
}
