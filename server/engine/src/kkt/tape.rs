//! Where every number of the factor stands, and the destination of every update.
//!
//! Pivots are stored one after the other: first the pivot block (one number, or three for a pair: `d00, d10, d11`),
//! then for every node of its front one number (two for a pair). The update that a pivot makes to the entry of its
//! front's nodes `j <= i` lands in the block of the pivot that eliminates `j`, always later in the store. The tape lists
//! those places in the order in which the update runs (`j` outside, `i >= j` inside), counted from the end of the
//! pivot's own storage. The factorisation walks it forwards; Takahashi's recursion reads from the same places, pivots
//! backwards: nothing is searched for in either.

use super::ordering::Pivot;

/// One pivot of the sequence, as places in the arrays.
#[derive(Clone, Copy, Debug)]
pub(super) struct Step {
    /// Position of the pivot's first node in the order of elimination.
    pub(super) position: u32,
    /// Where its storage begins.
    pub(super) storage: u32,
    /// The size of its front.
    pub(super) front: u32,
    /// What kind of pivot, and thus which test it must pass.
    pub(super) kind: Kind,
}

/// The kinds of pivots.
#[derive(Clone, Copy, Debug)]
pub(super) enum Kind {
    /// One variable: positive.
    Variable,
    /// One equation: negative.
    Equation,
    /// A variable and an equation: the determinant is negative and its magnitude not below this floor.
    Pair(f64),
}

impl Step {
    /// How many numbers the pivot block takes.
    pub(super) fn head(&self) -> usize {
        match self.kind {
            Kind::Pair(_) => 3,
            Kind::Variable | Kind::Equation => 1,
        }
    }

    /// How many nodes the pivot eliminates.
    pub(super) fn width(&self) -> usize {
        match self.kind {
            Kind::Pair(_) => 2,
            Kind::Variable | Kind::Equation => 1,
        }
    }

    /// How many numbers the pivot stores.
    pub(super) fn stored(&self) -> usize {
        self.head() + self.width() * self.front as usize
    }

    /// How many updates it makes.
    pub(super) fn updates(&self) -> usize {
        let front = self.front as usize;
        front * (front + 1) / 2
    }
}

/// The whole sequence.
#[derive(Clone, Debug, Default)]
pub(super) struct Tape {
    pub(super) steps: Vec<Step>,
    /// Positions of the fronts' nodes, ascending, one pivot after the other.
    pub(super) front: Vec<u32>,
    /// Where each step's front begins.
    pub(super) front_start: Vec<u32>,
    /// Destinations of the updates, one pivot after the other.
    pub(super) destination: Vec<u32>,
    /// The step that eliminates each position.
    pub(super) step_of: Vec<u32>,
    /// How many numbers the factor stores.
    pub(super) stored: usize,
}

impl Tape {
    /// Lays out the pivots; `position` gives the place of each node in the order of elimination and `kind` the
    /// kind of each pivot.
    pub(super) fn new(pivots: &[Pivot], position: &[u32], kind: impl Fn(&Pivot) -> Kind) -> Self {
        let mut tape = Self::default();
        for pivot in pivots {
            let step = Step {
                position: tape.step_of.len() as u32,
                storage: tape.stored as u32,
                front: pivot.front.len() as u32,
                kind: kind(pivot),
            };
            let start = tape.front.len();
            tape.front_start.push(start as u32);
            tape.front.extend(pivot.front.iter().map(|node| position[*node as usize]));
            tape.front[start..].sort_unstable();
            tape.step_of.extend(std::iter::repeat_n(tape.steps.len() as u32, step.width()));
            tape.stored += step.stored();
            tape.steps.push(step);
        }
        for step in 0..tape.steps.len() {
            tape.record(step);
        }
        tape
    }

    /// The positions of a step's front.
    pub(super) fn front(&self, step: usize) -> &[u32] {
        let start = self.front_start[step] as usize;
        &self.front[start..start + self.steps[step].front as usize]
    }

    /// Writes down the destinations of one step. Both fronts ascend, so each is walked once for each target.
    fn record(&mut self, number: usize) {
        let step = self.steps[number];
        let end = step.storage + step.stored() as u32;
        let start = self.front_start[number] as usize;
        let length = step.front as usize;
        for j in 0..length {
            let column = self.front[start + j];
            let target_number = self.step_of[column as usize] as usize;
            let target = self.steps[target_number];
            let mut walk = 0;
            for i in j..length {
                let row = self.front[start + i];
                let place = if self.step_of[row as usize] as usize == target_number {
                    (row - target.position) + (column - target.position)
                } else {
                    let targets = self.front(target_number);
                    while targets[walk] < row {
                        walk += 1;
                    }
                    target.head() as u32 + (walk * target.width()) as u32 + (column - target.position)
                };
                self.destination.push(target.storage + place - end);
            }
        }
    }

    /// Where the entry of two positions stands, if it is on the pattern.
    pub(super) fn locate(&self, a: u32, b: u32) -> Option<usize> {
        let (column, row) = (a.min(b), a.max(b));
        let number = self.step_of[column as usize] as usize;
        let step = self.steps[number];
        let place = if self.step_of[row as usize] as usize == number {
            ((row - step.position) + (column - step.position)) as usize
        } else {
            let at = self.front(number).binary_search(&row).ok()?;
            step.head() + at * step.width() + (column - step.position) as usize
        };
        Some(step.storage as usize + place)
    }
}
