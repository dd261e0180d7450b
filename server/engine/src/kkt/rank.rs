//! What the equations determine: the unobservable directions, the dependent equations and a basis of weak variables.
//!
//! The scaled coefficients are eliminated by sparse Gauss steps with Markowitz ordering (H. M. Markowitz, "The
//! elimination form of the inverse and its application to linear programming", Management Science 3, 1957) and
//! threshold pivoting, in two phases:
//!
//! 1. Pivots among the free columns only. A pivot must be at least [`THRESHOLD`] times the largest entry of its column
//!    and of its row within the free block, so that both factors stay well conditioned and the step in pivot size at
//!    the rank is seen. Free columns left over are the unobservable directions. With the pivot columns `B` and a column
//!    `d` left over, the null vector is `n_d = 1`, `n_B = -U_BB^-1 u_d`.
//! 2. The rows left over are completed from the weighted columns, weakest first: columns are measured in standard
//!    deviations (divided by the root of their weight) and a pivot must be near the largest entry of its row. What isn't in
//!    the basis is then determined at least as well by its own reading as anything in the basis, which is what keeps
//!    the pivots outside of the basis free of cancellation. Rows left over now are dependent equations.
//!
//! Only the free block decides observability: the second phase can't change it.

use std::collections::{BTreeSet, BinaryHeap};

use super::pattern::{Column, Pattern};
use super::scaling::{NEGLIGIBLE, Scaling};

/// A pivot may be this much smaller than the largest candidate.
const THRESHOLD: f64 = 0.1;

/// In the second phase a column may be this much better measured than the weakest of its row.
const WEAKNESS: f64 = 0.5;

/// A difference this much smaller than what was subtracted is rounding and counts as an exact zero.
const CANCELLED: f64 = 1e-15;

/// Parts of a scaled null vector below this size are rounding.
const NULL_PART: f64 = 1e-9;

/// A column that a null vector moves by this much against its held one is held instead.
const FAR_MORE: f64 = 3.0;

/// How many columns or rows with a permissible pivot are looked at before the sparsest pivot among them is taken.
const CANDIDATES: usize = 4;

/// One unobservable direction: moving the free variables along it changes no equation to first order.
#[derive(Clone, Debug, PartialEq)]
pub struct NullVector {
    /// The dependent column, which is held at its value.
    pub column: u32,
    /// All columns that move and by how much, in ascending order, the dependent column with one among them.
    pub parts: Vec<(u32, f64)>,
}

/// The outcome of the elimination.
pub(super) struct Rank {
    /// Whether each column belongs to the basis.
    pub(super) basis: Vec<bool>,
    pub(super) null_vectors: Vec<NullVector>,
    /// Rows that follow from others, ascending.
    pub(super) dropped_rows: Vec<u32>,
}

#[derive(Clone, Copy)]
struct Entry {
    column: u32,
    value: f64,
}

/// A pivot row as it stood when it was used.
struct Pivot {
    column: u32,
    value: f64,
    others: Vec<Entry>,
}

struct Elimination<'a> {
    scaling: &'a Scaling,
    /// Per column, what turns a scaled coefficient into standard deviations; zero for a free column.
    deviation: Vec<f64>,
    free: Vec<bool>,
    /// Rows not yet used, columns ascending.
    rows: Vec<Vec<Entry>>,
    used: Vec<bool>,
    /// The unused rows in which each column stands.
    members: Vec<Vec<u32>>,
    /// Free columns still to be tried, by number of rows.
    queue: BTreeSet<(usize, u32)>,
    /// Free columns that had no permissible pivot; they return to the queue when one of their rows changes.
    blocked: Vec<bool>,
    merged: Vec<Entry>,
}

impl Rank {
    pub(super) fn new(pattern: &Pattern, values: &[f64], columns: &[Column], scaling: &Scaling) -> Self {
        let mut elimination = Elimination::new(pattern, values, columns, scaling);
        let mut basis = vec![false; columns.len()];
        let mut pivots = Vec::new();
        while let Some((row, column)) = elimination.free_pivot() {
            basis[column as usize] = true;
            pivots.push(elimination.eliminate(row, column));
        }
        let mut null_vectors = elimination.null_vectors(&pivots, &basis);
        hold_what_moves_most(&mut null_vectors, &mut basis);
        let dropped_rows = elimination.complete(&mut basis);
        Self { basis, null_vectors, dropped_rows }
    }
}

/// Exchanges the held column of each null vector for the one that it moves most, if that moves far more: held there,
/// the others need only move a little to satisfy the equations. (Held at a guess, the temperature of a liquid would send
/// an unread pressure to absurd values; held at a guess, the pressure moves the temperature by next to nothing.)
fn hold_what_moves_most(vectors: &mut [NullVector], basis: &mut [bool]) {
    for place in 0..vectors.len() {
        let Some((column, largest)) =
            vectors[place].parts.iter().copied().max_by(|a, b| a.1.abs().total_cmp(&b.1.abs()))
        else {
            continue;
        };
        if largest.abs() < FAR_MORE {
            continue;
        }
        basis[vectors[place].column as usize] = true;
        basis[column as usize] = false;
        vectors[place].column = column;
        vectors[place].parts.iter_mut().for_each(|(_, part)| *part /= largest);
        let chosen = vectors[place].parts.clone();
        for (_, other) in vectors.iter_mut().enumerate().filter(|(other, _)| *other != place) {
            if let Ok(at) = other.parts.binary_search_by_key(&column, |(column, _)| *column) {
                let share = other.parts[at].1;
                other.subtract(&chosen, share);
            }
        }
    }
}

impl NullVector {
    /// Subtracts a multiple of other parts.
    fn subtract(&mut self, parts: &[(u32, f64)], share: f64) {
        for (column, part) in parts {
            match self.parts.binary_search_by_key(column, |(column, _)| *column) {
                Ok(at) => self.parts[at].1 -= share * part,
                Err(at) => self.parts.insert(at, (*column, -share * part)),
            }
        }
        self.parts.retain(|(_, part)| part.abs() > NULL_PART);
    }
}

impl<'a> Elimination<'a> {
    fn new(pattern: &Pattern, values: &[f64], columns: &[Column], scaling: &'a Scaling) -> Self {
        let mut rows = Vec::with_capacity(pattern.rows());
        let mut members = vec![Vec::new(); columns.len()];
        for row in 0..pattern.rows() {
            let mut entries: Vec<Entry> = Vec::with_capacity(pattern.row(row).len());
            for (&column, value) in pattern.row(row).iter().zip(&values[pattern.range(row)]) {
                if columns[column as usize] != Column::Fixed && *value != 0.0 {
                    let value = value * scaling.row[row] * scaling.column[column as usize];
                    entries.push(Entry { column, value });
                    members[column as usize].push(row as u32);
                }
            }
            entries.sort_unstable_by_key(|entry| entry.column);
            rows.push(entries);
        }
        let free: Vec<bool> = columns.iter().map(|column| *column == Column::Free).collect();
        let deviation = columns.iter().zip(&scaling.column).map(|(column, scale)| match column {
            Column::Weighted(weight) => 1.0 / (scale * weight.sqrt()),
            Column::Free | Column::Fixed => 0.0,
        });
        let queue = (0u32..).zip(&free).filter(|(_, free)| **free);
        let queue = queue.map(|(column, _)| (members[column as usize].len(), column)).collect();
        Self {
            scaling,
            deviation: deviation.collect(),
            free,
            used: vec![false; rows.len()],
            rows,
            members,
            queue,
            blocked: vec![false; columns.len()],
            merged: Vec::new(),
        }
    }

    fn entry(&self, row: u32, column: u32) -> f64 {
        let entries = &self.rows[row as usize];
        entries.binary_search_by_key(&column, |entry| entry.column).map_or(0.0, |at| entries[at].value)
    }

    /// The sparsest permissible pivot of the free block, or none when what is left of it is zero: the largest entry
    /// of the block is always permissible.
    fn free_pivot(&mut self) -> Option<(u32, u32)> {
        let mut best: Option<(usize, u32, u32)> = None;
        let mut without = Vec::new();
        let mut looked_at = 0;
        for &(count, column) in &self.queue {
            let Some((cost, row)) = self.sparsest_row(column) else {
                without.push((count, column));
                continue;
            };
            let candidate = (cost, row, column);
            best = Some(best.map_or(candidate, |best| best.min(candidate)));
            looked_at += 1;
            if looked_at == CANDIDATES || cost == 0 {
                break;
            }
        }
        for key in without {
            self.queue.remove(&key);
            self.blocked[key.1 as usize] = true;
        }
        best.map(|(_, row, column)| (row, column))
    }

    /// The permissible pivot of a free column with the smallest Markowitz cost.
    fn sparsest_row(&self, column: u32) -> Option<(usize, u32)> {
        let members = &self.members[column as usize];
        let sizes = members.iter().map(|row| (*row, self.entry(*row, column).abs()));
        let largest = sizes.clone().fold(0.0_f64, |most, (_, size)| most.max(size));
        let floor = THRESHOLD * largest;
        let permissible = sizes.filter(|(row, size)| {
            *size > NEGLIGIBLE && *size >= floor && *size >= THRESHOLD * self.largest_free(*row)
        });
        permissible.map(|(row, _)| ((members.len() - 1) * (self.rows[row as usize].len() - 1), row)).min()
    }

    fn largest_free(&self, row: u32) -> f64 {
        let free = self.rows[row as usize].iter().filter(|entry| self.free[entry.column as usize]);
        free.fold(0.0, |most, entry| most.max(entry.value.abs()))
    }

    /// Subtracts the pivot row from every other row in which the pivot column stands.
    fn eliminate(&mut self, row: u32, column: u32) -> Pivot {
        self.used[row as usize] = true;
        let pivot_row = std::mem::take(&mut self.rows[row as usize]);
        for entry in &pivot_row {
            self.leave(row, entry.column);
        }
        self.queue.remove(&(self.members[column as usize].len(), column));
        let at = pivot_row.partition_point(|entry| entry.column < column);
        let value = pivot_row[at].value;
        let mut others = pivot_row;
        others.remove(at);
        for target in std::mem::take(&mut self.members[column as usize]) {
            let multiplier = self.entry(target, column) / value;
            self.subtract(target, column, multiplier, &others);
            for at in 0..self.rows[target as usize].len() {
                self.unblock(self.rows[target as usize][at].column);
            }
        }
        for entry in &others {
            self.unblock(entry.column);
        }
        Pivot { column, value, others }
    }

    /// `target -= multiplier * others`, and the entry of the pivot column goes.
    fn subtract(&mut self, target: u32, pivot_column: u32, multiplier: f64, others: &[Entry]) {
        let old = std::mem::take(&mut self.rows[target as usize]);
        let mut merged = std::mem::take(&mut self.merged);
        merged.clear();
        let mut others = others.iter().peekable();
        for entry in &old {
            while let Some(other) = others.next_if(|other| other.column < entry.column) {
                merged.push(Entry { column: other.column, value: -multiplier * other.value });
                self.join(target, other.column);
            }
            if entry.column == pivot_column {
                continue;
            }
            let Some(other) = others.next_if(|other| other.column == entry.column) else {
                merged.push(*entry);
                continue;
            };
            let value = entry.value - multiplier * other.value;
            if value.abs() > CANCELLED * entry.value.abs() {
                merged.push(Entry { column: entry.column, value });
            } else {
                self.leave(target, entry.column);
            }
        }
        for other in others {
            merged.push(Entry { column: other.column, value: -multiplier * other.value });
            self.join(target, other.column);
        }
        self.rows[target as usize] = merged;
        self.merged = old;
    }

    fn join(&mut self, row: u32, column: u32) {
        let count = self.members[column as usize].len();
        self.members[column as usize].push(row);
        self.requeue(count, count + 1, column);
    }

    fn leave(&mut self, row: u32, column: u32) {
        let members = &mut self.members[column as usize];
        let count = members.len();
        if let Some(at) = members.iter().position(|member| *member == row) {
            members.remove(at);
            self.requeue(count, count - 1, column);
        }
    }

    fn unblock(&mut self, column: u32) {
        if std::mem::take(&mut self.blocked[column as usize]) {
            self.queue.insert((self.members[column as usize].len(), column));
        }
    }

    /// Moves a free column in the queue; one that is blocked or used isn't there and stays out.
    fn requeue(&mut self, old: usize, new: usize, column: u32) {
        if self.free[column as usize] && self.queue.remove(&(old, column)) {
            self.queue.insert((new, column));
        }
    }

    /// The null vectors of the free columns outside of the basis. The unit upper triangle is walked from the dependent
    /// column downwards through the pivots that it reaches, latest first, so the cost is that of the parts.
    fn null_vectors(&self, pivots: &[Pivot], basis: &[bool]) -> Vec<NullVector> {
        let mut used_in: Vec<Vec<(u32, f64)>> = vec![Vec::new(); basis.len()];
        for (number, pivot) in (0u32..).zip(pivots) {
            for entry in pivot.others.iter().filter(|entry| self.free[entry.column as usize]) {
                used_in[entry.column as usize].push((number, entry.value / pivot.value));
            }
        }
        let mut sum = vec![0.0; pivots.len()];
        let mut vectors = Vec::new();
        for dependent in (0..basis.len()).filter(|column| self.free[*column] && !basis[*column]) {
            let mut parts = vec![(dependent as u32, 1.0)];
            let mut reached = BinaryHeap::new();
            let mut moved = Some((dependent, 1.0));
            loop {
                if let Some((column, part)) = moved {
                    for &(number, ratio) in &used_in[column] {
                        sum[number as usize] -= ratio * part;
                        reached.push(number);
                    }
                }
                let Some(number) = reached.pop() else { break };
                while reached.peek() == Some(&number) {
                    reached.pop();
                }
                let part = std::mem::take(&mut sum[number as usize]);
                let column = pivots[number as usize].column as usize;
                moved = (part.abs() > NULL_PART).then_some((column, part));
                if let Some((column, part)) = moved {
                    let scale = self.scaling.column[column] / self.scaling.column[dependent];
                    parts.push((column as u32, part * scale));
                }
            }
            parts.sort_unstable_by_key(|part| part.0);
            vectors.push(NullVector { column: dependent as u32, parts });
        }
        vectors
    }

    /// The second phase: extends the basis by weighted columns; gives the rows that none is left for.
    fn complete(&mut self, basis: &mut [bool]) -> Vec<u32> {
        let open = (0u32..).zip(&self.rows).zip(&self.used).filter(|(_, used)| !**used);
        let mut queue: BTreeSet<(usize, u32)> =
            open.map(|((row, entries), _)| (entries.len(), row)).collect();
        let mut dropped = Vec::new();
        while let Some((row, column)) = self.weighted_pivot(&mut queue, &mut dropped) {
            basis[column as usize] = true;
            let changed = self.members[column as usize].clone();
            for &row in &changed {
                queue.remove(&(self.rows[row as usize].len(), row));
            }
            self.eliminate(row, column);
            for row in changed.into_iter().filter(|changed| *changed != row) {
                queue.insert((self.rows[row as usize].len(), row));
            }
        }
        dropped.sort_unstable();
        dropped
    }

    /// The sparsest permissible pivot among the shortest rows of the queue. Rows without any are moved to `dropped`.
    fn weighted_pivot(
        &self,
        queue: &mut BTreeSet<(usize, u32)>,
        dropped: &mut Vec<u32>,
    ) -> Option<(u32, u32)> {
        let mut best: Option<(usize, u32, u32)> = None;
        let mut dependent = Vec::new();
        let mut looked_at = 0;
        for &(length, row) in queue.iter() {
            let deviations = self.rows[row as usize].iter().filter(|entry| entry.value.abs() > NEGLIGIBLE);
            let deviations = deviations
                .map(|entry| (entry.column, entry.value.abs() * self.deviation[entry.column as usize]));
            let largest = deviations.clone().fold(0.0_f64, |most, (_, size)| most.max(size));
            if largest == 0.0 {
                dependent.push((length, row));
                continue;
            }
            for (column, _) in deviations.filter(|(_, size)| *size >= WEAKNESS * largest) {
                let cost = (length - 1) * (self.members[column as usize].len() - 1);
                let candidate = (cost, row, column);
                best = Some(best.map_or(candidate, |best| best.min(candidate)));
            }
            looked_at += 1;
            if looked_at == CANDIDATES || best.is_some_and(|(cost, ..)| cost == 0) {
                break;
            }
        }
        for key in dependent {
            queue.remove(&key);
            dropped.push(key.1);
        }
        best.map(|(_, row, column)| (row, column))
    }
}
