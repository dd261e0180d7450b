//! Long logs: a row a sample, with its time, tag and value. A historian may write tag after tag, so all samples are
//! held, some fifty bytes each, and put in order of time.

use std::collections::{BTreeMap, HashMap};

use jiff::Timestamp;
use meterwright_engine::fault::suggestion;

use super::cell::Table;
use super::expectation::Expectation;
use super::fault::{LogFault, LogFaults, Problem};
use super::layout::{Layout, Note};
use super::quality::{Sample, judged, sample};
use super::time::Clock;
use super::{Row, quality};

/// Columns of a long log, counted from 0.
#[derive(Clone, Copy)]
pub(super) struct LongColumns {
    pub(super) time: usize,
    pub(super) tag: usize,
    pub(super) value: usize,
    pub(super) quality: Option<usize>,
}

/// One sample of a long log.
#[derive(Clone, Copy, Debug)]
pub(super) struct LongSample {
    time: Timestamp,
    line: u64,
    tag: u32,
    sample: Sample,
}

/// Reads a long log whole. The samples are in order of time, those of one time in the order of the plant's tags.
pub(super) fn read(
    table: &mut dyn Table,
    layout: &Layout,
    columns: LongColumns,
    expectation: &Expectation,
) -> Result<(Vec<LongSample>, Vec<Note>), LogFaults> {
    let mut reader = Reader {
        columns,
        expectation,
        places: expectation.names().enumerate().map(|(place, name)| (name, place)).collect(),
        clocks: expectation.tags.iter().map(|_| Clock::new(&expectation.zone)).collect(),
        unknown: BTreeMap::new(),
    };
    let mut faults = LogFaults::default();
    let mut samples = Vec::new();
    loop {
        match table.advance() {
            Ok(false) => break,
            Ok(true) => {
                match layout.width_fault(table).map_or_else(|| reader.sample(table), |fault| Err(vec![fault]))
                {
                    Ok(sample) => samples.extend(sample),
                    Err(found) => faults.extend(found),
                }
            }
            Err(fault) => {
                faults.push(fault);
                break;
            }
        }
    }
    samples.sort_by_key(|sample: &LongSample| (sample.time, sample.tag, sample.line));
    let notes = reader.notes(columns.tag + 1);
    faults.extend(repeated(&samples, columns.time + 1, expectation));
    faults.or((samples, notes))
}

/// Samples as rows: those of one time together.
pub(super) fn rows(samples: &[LongSample], tags: usize) -> impl Iterator<Item = Row> {
    samples.chunk_by(|a, b| a.time == b.time).map(move |at_one_time| {
        let mut row =
            Row { time: at_one_time[0].time, line: at_one_time[0].line, samples: vec![Sample::Absent; tags] };
        for sample in at_one_time {
            row.samples[sample.tag as usize] = sample.sample;
        }
        row
    })
}

/// A tag's name that the plant file does not have: where it stands first and how often.
struct Unknown {
    line: u64,
    count: usize,
}

struct Reader<'e> {
    columns: LongColumns,
    expectation: &'e Expectation,
    places: HashMap<&'e str, usize>,
    /// One a tag: a historian that writes tag after tag starts again at the first time with each.
    clocks: Vec<Clock<'e>>,
    unknown: BTreeMap<String, Unknown>,
}

impl Reader<'_> {
    /// The sample of the current row; none if no tag of the plant file has it, or there is no new laboratory value.
    fn sample(&mut self, table: &dyn Table) -> Result<Option<LongSample>, Vec<LogFault>> {
        let name = table.cell(self.columns.tag);
        let name = name.shown();
        let name = name.trim();
        let Some(&tag) = self.places.get(name) else {
            let unknown = self.unknown.entry(name.to_owned());
            unknown.or_insert(Unknown { line: table.line(), count: 0 }).count += 1;
            return Ok(None);
        };
        let time = self.clocks[tag].instant(&table.cell(self.columns.time), table.decimal_mark());
        let time = time.map_err(|error| fault(table, self.columns.time, error.into()));
        match (time, self.value(table, tag)) {
            (Ok(time), Ok(sample)) => {
                Ok(sample.map(|sample| LongSample { time, line: table.line(), tag: tag as u32, sample }))
            }
            (time, value) => Err(time.err().into_iter().chain(value.err()).collect()),
        }
    }

    fn value(&self, table: &dyn Table, tag: usize) -> Result<Option<Sample>, LogFault> {
        let expected = &self.expectation.tags[tag];
        let cell = table.cell(self.columns.value);
        let Some(read) = sample(&cell, table.decimal_mark()) else {
            let problem = Problem::not_a_number(&expected.name, &cell, table.decimal_mark());
            return Err(fault(table, self.columns.value, problem));
        };
        let read = match self.columns.quality {
            None => read,
            Some(column) => {
                let word = table.cell(column);
                judged(read, &word.shown()).ok_or_else(|| {
                    fault(table, column, Problem::UnknownQuality(word.shown().trim().to_owned()))
                })?
            }
        };
        let no_new_value = read == quality::Sample::Bad && expected.hold.is_some();
        Ok((!no_new_value).then(|| expected.within_span(read)))
    }

    fn notes(&self, column: usize) -> Vec<Note> {
        let note = |(name, unknown): (&String, &Unknown)| Note {
            line: unknown.line,
            column,
            message: format!(
                "samples of `{name}` are not read ({} in all): no tag of the plant file has this name{}",
                unknown.count,
                suggestion(name, self.expectation.names())
            ),
        };
        self.unknown.iter().map(note).collect()
    }
}

fn fault(table: &dyn Table, index: usize, problem: Problem) -> LogFault {
    LogFault { line: table.line(), column: table.column(index), problem }
}

/// A tag has one sample at a time.
fn repeated<'s>(
    samples: &'s [LongSample],
    column: usize,
    expectation: &'s Expectation,
) -> impl Iterator<Item = LogFault> + 's {
    samples.windows(2).filter(|pair| pair[0].time == pair[1].time && pair[0].tag == pair[1].tag).map(
        move |pair| {
            let tag = expectation.tags[pair[1].tag as usize].name.clone();
            let problem = Problem::RepeatedSample { tag, first: pair[0].line };
            LogFault { line: pair[1].line, column, problem }
        },
    )
}
