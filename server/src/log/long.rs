//! Long logs: a row a sample, with its time, tag and value.
//!
//! Where times never fall from row to row, samples are read row after row and only those of one time are kept at once. A
//! historian may as well write tag after tag, or the newest first: then all samples are held, some forty bytes each, and
//! put in order of time.

use std::collections::{BTreeMap, HashMap};
use std::iter::Peekable;

use jiff::Timestamp;
use meterwright_engine::fault::suggestion;

use super::cell::Table;
use super::expectation::Expectation;
use super::fault::{LogFault, LogFaults, Problem};
use super::layout::{Layout, Note};
use super::quality::{Sample, judged, sample};
use super::time::Clock;
use super::{Row, Survey, quality};

/// Columns of a long log, counted from 0.
#[derive(Clone, Copy, Debug)]
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
    sample: Sample,
    tag: u32,
    /// Line of the file; more than four thousand million lines are not told apart.
    line: u32,
}

/// What the first reading of a long log finds, and its samples where they must be held.
pub(super) struct Surveyed {
    pub(super) survey: Survey,
    pub(super) notes: Vec<Note>,
    /// In order of time, those of one time in the order of the plant's tags; none where the log itself is in order.
    pub(super) held: Option<Vec<LongSample>>,
}

/// Reads a long log once, and where its times fall, once more to hold its samples. `open` opens it behind its head.
pub(super) fn survey<'l>(
    open: impl Fn() -> Result<LongSamples<'l>, LogFaults>,
) -> Result<Surveyed, LogFaults> {
    let mut samples = open()?;
    let (column, expectation) = (samples.reader.columns.time + 1, samples.reader.expectation);
    let mut survey = Survey { rows: 0, samples: vec![0; expectation.tags.len()] };
    let mut faults = LogFaults::default();
    let mut repeats = Vec::new();
    // One a tag: its sample before.
    let mut latest: Vec<Option<LongSample>> = vec![None; expectation.tags.len()];
    let mut previous = Timestamp::MIN;
    let mut in_order = true;
    for read in samples.by_ref() {
        match read {
            Ok(sample) => {
                survey.rows += usize::from(sample.time != previous || survey.rows == 0);
                in_order &= sample.time >= previous;
                previous = sample.time;
                let tag = sample.tag as usize;
                survey.samples[tag] += 1;
                let before = latest[tag].replace(sample);
                if in_order && before.is_some_and(|before| before.time == sample.time) {
                    repeats.extend(before.map(|before| repeated(before, sample, column, expectation)));
                }
            }
            Err(found) => faults.extend(found),
        }
    }
    let notes = samples.reader.notes();
    let held = if in_order {
        faults.extend(repeats);
        None
    } else {
        let held = held(open()?, survey.samples.iter().sum());
        let same = held.windows(2).filter(|pair| pair[0].time == pair[1].time && pair[0].tag == pair[1].tag);
        faults.extend(same.map(|pair| repeated(pair[0], pair[1], column, expectation)));
        survey.rows = held.chunk_by(|a, b| a.time == b.time).count();
        Some(held)
    };
    if survey.rows == 0 && faults.first.is_empty() {
        faults.push(LogFault::of_file(Problem::NoSamples));
    }
    faults.in_order().or(Surveyed { survey, notes, held })
}

/// All samples in order of time; what is wrong with others has been said.
fn held(samples: LongSamples<'_>, count: usize) -> Vec<LongSample> {
    let mut held = Vec::with_capacity(count);
    held.extend(samples.filter_map(Result::ok));
    held.sort_unstable_by_key(|sample: &LongSample| (sample.time, sample.tag, sample.line));
    held
}

/// A tag has one sample at a time.
fn repeated(first: LongSample, again: LongSample, column: usize, expectation: &Expectation) -> LogFault {
    let tag = expectation.tags[again.tag as usize].name.clone();
    let problem = Problem::RepeatedSample { tag, first: first.line.into() };
    LogFault { line: again.line.into(), column, problem }
}

/// Samples in order of time as rows: those of one time together.
pub(super) struct LongRows<S: Iterator> {
    samples: Peekable<S>,
    tags: usize,
}

impl<S: Iterator<Item = Result<LongSample, Vec<LogFault>>>> LongRows<S> {
    pub(super) fn new(samples: S, tags: usize) -> Self {
        Self { samples: samples.peekable(), tags }
    }
}

impl<S: Iterator<Item = Result<LongSample, Vec<LogFault>>>> Iterator for LongRows<S> {
    type Item = Result<Row, Vec<LogFault>>;

    fn next(&mut self) -> Option<Self::Item> {
        let first = match self.samples.next()? {
            Ok(first) => first,
            Err(faults) => return Some(Err(faults)),
        };
        let mut row =
            Row { time: first.time, line: first.line.into(), samples: vec![Sample::Absent; self.tags] };
        row.samples[first.tag as usize] = first.sample;
        let at_its_time = |read: &S::Item| read.as_ref().is_ok_and(|sample| sample.time == first.time);
        while let Some(Ok(sample)) = self.samples.next_if(at_its_time) {
            row.samples[sample.tag as usize] = sample.sample;
        }
        Some(Ok(row))
    }
}

/// The samples of a long log in the order of the file, each or everything that is wrong with its row.
pub(super) struct LongSamples<'l> {
    table: Box<dyn Table>,
    layout: &'l Layout,
    reader: Reader<'l>,
    /// Set where the file can't be read on.
    broken: bool,
}

impl<'l> LongSamples<'l> {
    /// Reads on from a table that is behind its head.
    pub(super) fn new(
        table: Box<dyn Table>,
        layout: &'l Layout,
        columns: LongColumns,
        expectation: &'l Expectation,
    ) -> Self {
        Self { table, layout, reader: Reader::new(columns, expectation), broken: false }
    }
}

impl Iterator for LongSamples<'_> {
    type Item = Result<LongSample, Vec<LogFault>>;

    fn next(&mut self) -> Option<Self::Item> {
        while !self.broken {
            match self.table.advance() {
                Ok(false) => return None,
                Ok(true) => {
                    let width_fault = self.layout.width_fault(&*self.table);
                    let read = width_fault
                        .map_or_else(|| self.reader.sample(&*self.table), |fault| Err(vec![fault]));
                    if let Some(sample) = read.transpose() {
                        return Some(sample);
                    }
                }
                Err(fault) => {
                    self.broken = true;
                    return Some(Err(vec![fault]));
                }
            }
        }
        None
    }
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

impl<'e> Reader<'e> {
    fn new(columns: LongColumns, expectation: &'e Expectation) -> Self {
        Self {
            columns,
            expectation,
            places: expectation.names().enumerate().map(|(place, name)| (name, place)).collect(),
            clocks: expectation.tags.iter().map(|_| Clock::new(&expectation.zone)).collect(),
            unknown: BTreeMap::new(),
        }
    }

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
                let line = u32::try_from(table.line()).unwrap_or(u32::MAX);
                Ok(sample.map(|sample| LongSample { time, line, tag: tag as u32, sample }))
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

    fn notes(&self) -> Vec<Note> {
        let note = |(name, unknown): (&String, &Unknown)| Note {
            line: unknown.line,
            column: self.columns.tag + 1,
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
