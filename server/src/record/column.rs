//! One day of balances by columns: what a trend reads.

use serde::{Deserialize, Serialize};

use super::numbers::{RecordError, pack_series, pack_times, packed, rounded_spread, unpack, unpacked};

/// One quantity over the balances of one day; not a number where it can't be known.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct DayColumn {
    /// Balanced values.
    pub values: Vec<f32>,
    /// Their standard uncertainties.
    pub sigmas: Vec<f32>,
    /// The part of it that is drawn anew each period.
    pub repeat_sigmas: Vec<f32>,
    /// Readings; of tags only.
    pub measured: Vec<f32>,
}

/// What one balance of a day is told apart by.
#[derive(Clone, Debug, PartialEq, Eq, Hash, Serialize, Deserialize)]
pub struct Mark {
    /// Number of the plant file's revision.
    pub revision: u32,
    /// What its findings name, in order of name.
    pub findings: Vec<String>,
    /// Tags that took no part, in the order of the plant file.
    pub excluded: Vec<String>,
}

/// The balances of one day in order of time.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct DayMarks {
    /// Beginnings of their periods, ms since 1970.
    pub from: Vec<i64>,
    /// Ends.
    pub to: Vec<i64>,
    /// What they are told apart by, each kind once.
    pub kinds: Vec<Mark>,
    /// Which of them each balance has.
    pub marks: Vec<u16>,
}

#[derive(Serialize, Deserialize)]
struct PackedMarks {
    from: Vec<u8>,
    to: Vec<u8>,
    /// Every set of findings and excluded tags of the day, once.
    kinds: Vec<Mark>,
    /// Which of them each balance has.
    balances: Vec<u16>,
}

impl DayColumn {
    /// The column as bytes that know when they are damaged.
    pub fn pack(&self) -> Vec<u8> {
        let spreads = |spreads: &[f32]| {
            pack_series(&spreads.iter().map(|sigma| rounded_spread(f64::from(*sigma))).collect::<Vec<_>>())
        };
        let columns = [
            pack_series(&self.values),
            spreads(&self.sigmas),
            spreads(&self.repeat_sigmas),
            if self.measured.is_empty() { Vec::new() } else { pack_series(&self.measured) },
        ];
        packed(&columns)
    }

    /// Reads a column of so many balances back.
    ///
    /// # Errors
    /// The bytes are damaged, or not those of a column.
    pub fn unpack(bytes: &[u8], count: usize) -> Result<Self, RecordError> {
        let [values, sigmas, repeat_sigmas, measured]: [Vec<u8>; 4] = unpacked(bytes)?;
        let column = Self {
            values: unpack(&values)?,
            sigmas: unpack(&sigmas)?,
            repeat_sigmas: unpack(&repeat_sigmas)?,
            measured: if measured.is_empty() { Vec::new() } else { unpack(&measured)? },
        };
        let has_all =
            [&column.values, &column.sigmas, &column.repeat_sigmas].iter().all(|c| c.len() == count);
        let fits = has_all && (column.measured.is_empty() || column.measured.len() == count);
        if fits { Ok(column) } else { Err(RecordError::Foreign) }
    }
}

impl DayMarks {
    /// Adds a balance behind all others.
    pub fn push(&mut self, from: i64, to: i64, mark: &Mark) {
        let place = self.kinds.iter().position(|other| other == mark).unwrap_or_else(|| {
            self.kinds.push(mark.clone());
            self.kinds.len() - 1
        });
        self.from.push(from);
        self.to.push(to);
        self.marks.push(place as u16);
    }

    /// The mark of a balance.
    pub fn mark(&self, balance: usize) -> &Mark {
        &self.kinds[usize::from(self.marks[balance])]
    }

    /// The marks as bytes that know when they are damaged.
    pub fn pack(&self) -> Vec<u8> {
        let (from, to) = (pack_times(&self.from), pack_times(&self.to));
        packed(&PackedMarks { from, to, kinds: self.kinds.clone(), balances: self.marks.clone() })
    }

    /// Reads marks back.
    ///
    /// # Errors
    /// The bytes are damaged, or not those of marks.
    pub fn unpack(bytes: &[u8]) -> Result<Self, RecordError> {
        let PackedMarks { from, to, kinds, balances } = unpacked(bytes)?;
        let marks = Self { from: unpack(&from)?, to: unpack(&to)?, kinds, marks: balances };
        let count = marks.marks.len();
        let fits = marks.from.len() == count
            && marks.to.len() == count
            && marks.marks.iter().all(|place| usize::from(*place) < marks.kinds.len());
        if fits { Ok(marks) } else { Err(RecordError::Foreign) }
    }
}
