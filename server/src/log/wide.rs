//! Wide logs: a column of times, then one column a tag. Read row after row; nothing but the current row is kept.

use super::Row;
use super::cell::Table;
use super::expectation::Expectation;
use super::fault::{LogFault, Problem};
use super::layout::{Layout, TagColumn};
use super::quality::{Sample, sample};
use super::time::Clock;

/// The rows of a wide log, each with its samples or with everything that is wrong with it.
pub(super) struct WideRows<'l> {
    pub(super) table: Box<dyn Table>,
    pub(super) layout: &'l Layout,
    pub(super) time: usize,
    pub(super) tags: &'l [TagColumn],
    pub(super) expectation: &'l Expectation,
    pub(super) clock: Clock<'l>,
    /// Set where the file can't be read on.
    pub(super) broken: bool,
}

impl Iterator for WideRows<'_> {
    type Item = Result<Row, Vec<LogFault>>;

    fn next(&mut self) -> Option<Self::Item> {
        if self.broken {
            return None;
        }
        match self.table.advance() {
            Ok(true) => Some(self.row()),
            Ok(false) => None,
            Err(fault) => {
                self.broken = true;
                Some(Err(vec![fault]))
            }
        }
    }
}

impl WideRows<'_> {
    fn row(&mut self) -> Result<Row, Vec<LogFault>> {
        if let Some(fault) = self.layout.width_fault(&*self.table) {
            return Err(vec![fault]);
        }
        let (line, mark) = (self.table.line(), self.table.decimal_mark());
        let time = self.clock.instant(&self.table.cell(self.time), mark);
        let mut faults = Vec::new();
        let mut samples = vec![Sample::Absent; self.expectation.tags.len()];
        for TagColumn { column, tag } in self.tags {
            let cell = self.table.cell(*column);
            let expected = &self.expectation.tags[*tag];
            match sample(&cell, mark) {
                // An empty cell of a laboratory value says that there is no new one.
                Some(Sample::Bad) if expected.hold.is_some() => {}
                Some(read) => samples[*tag] = expected.within_span(read),
                None => faults.push(LogFault {
                    line,
                    column: self.table.column(*column),
                    problem: Problem::not_a_number(&expected.name, &cell, mark),
                }),
            }
        }
        let time = time.map_err(|error| LogFault {
            line,
            column: self.table.column(self.time),
            problem: Problem::Time(error),
        });
        match time {
            Ok(time) if faults.is_empty() => Ok(Row { time, line, samples }),
            Ok(_) => Err(faults),
            Err(fault) => Err(std::iter::once(fault).chain(faults).collect()),
        }
    }
}
