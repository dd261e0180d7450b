//! The pivot sequence: one trial factorisation with dynamic minimum degree.
//!
//! Nodes are the variables and the equations that take part. The symmetric matrix is kept as explicit sparse rows and
//! eliminated numerically, so that every choice sees both the true fill and the true size of its pivot. Two kinds of
//! pivots are taken (the 1x1 and 2x2 pivots of I. S. Duff and J. K. Reid, "The multifrontal solution of indefinite
//! sparse symmetric linear equations", ACM TOMS 9, 1983, in the only combination that needs no search later):
//!
//! - a variable outside of the basis alone. Its pivot is at least its own weight: the Schur complement of the variables
//!   is the Hessian of what is left after a partial minimisation, so it is the weight plus something that isn't
//!   negative;
//! - a variable of the basis with an equation. `[h, c; c, -e]` with `h >= 0` and `e >= 0` has the determinant
//!   `-(h e + c^2)`, again without cancellation. A pair qualifies when the root of that is at least [`THRESHOLD`] times
//!   either the largest that the variable could have with any of its equations or the largest coefficient of the
//!   equation (both equilibrated): as in an unsymmetric LU, either bounds the growth within the basis. Pairs that
//!   fail are delayed simply by not being chosen;
//! - an equation alone, once the uncertainty it has taken over from readings outweighs every coefficient it has left. The
//!   basis is one of the equations as they stand; when uncertain readings have been eliminated, cancellation can leave an
//!   equation nothing but rounding of its pair, and the uncertainty is then the sound pivot.
//!
//! The next pivot is the one with the smallest front. Zeros that arise stay in the pattern: it must hold for other values.

use std::cmp::Reverse;
use std::collections::BinaryHeap;

/// A pair may be this much weaker than the best pair of its variable.
const THRESHOLD: f64 = 0.1;

/// A later factorisation may see a pair shrink by this against the best pair of its variable in the trial.
const COLLAPSE: f64 = 1e-10;

/// What it costs, in halves of a front's node, that a pivot makes two equations share the uncertainty of a reading.
/// Combining them later must then take differences of what has already been squared, which costs digits; three keeps
/// two digits more than zero and makes the factor a sixth longer.
const COUPLING: u32 = 3;

/// How a node may be eliminated.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Role {
    /// Alone: a variable outside of the basis, or a softened equation that follows from others.
    Single,
    /// A variable of the basis, together with an equation.
    Lead,
    /// An equation, together with a variable of the basis.
    Partner,
}

/// One entry of a sparse row.
#[derive(Clone, Copy, Debug)]
pub(super) struct Entry {
    pub(super) node: u32,
    pub(super) value: f64,
}

/// One step of the elimination.
#[derive(Clone, Debug)]
pub(super) struct Pivot {
    pub(super) first: u32,
    pub(super) second: Option<u32>,
    /// The front: nodes that are eliminated later and that this pivot touches, by node number.
    pub(super) front: Vec<u32>,
    /// The determinant of a pair must be at least this large in the scale of the graph.
    pub(super) floor: f64,
}

/// The matrix on its way through the elimination.
pub(super) struct Graph {
    /// Off-diagonal entries of each row, ascending by node.
    adjacency: Vec<Vec<Entry>>,
    diagonal: Vec<f64>,
    /// The diagonal as it was: in exact arithmetic that of a variable never falls below it, nor rises that of an
    /// equation above it, so what does is rounding.
    own: Vec<f64>,
    role: Vec<Role>,
    alive: Vec<bool>,
    /// Raised whenever a node is put into the queue anew: older places there are void.
    stamp: Vec<u32>,
    queue: BinaryHeap<Reverse<(u32, u32, u32)>>,
    merged: Vec<Entry>,
}

/// What a pivot does to one node of its front: its entries, and the same times the inverse of the pivot block.
struct Touched {
    node: u32,
    left: [f64; 2],
    right: [f64; 2],
}

/// A node's best pivot.
#[derive(Clone, Copy)]
struct Choice {
    cost: u32,
    partner: Option<u32>,
    floor: f64,
}

impl Graph {
    /// Takes a matrix with its sparse rows sorted by node, without diagonal and symmetric.
    pub(super) fn new(adjacency: Vec<Vec<Entry>>, diagonal: Vec<f64>, role: Vec<Role>) -> Self {
        let count = diagonal.len();
        Self {
            adjacency,
            own: diagonal.clone(),
            diagonal,
            role,
            alive: vec![true; count],
            stamp: vec![0; count],
            queue: BinaryHeap::new(),
            merged: Vec::new(),
        }
    }

    /// Eliminates everything and tells in which order.
    pub(super) fn eliminate_all(mut self) -> Vec<Pivot> {
        let mut pivots = Vec::with_capacity(self.role.len());
        for node in 0..self.role.len() as u32 {
            self.enqueue(node);
        }
        loop {
            while let Some(Reverse((cost, node, stamp))) = self.queue.pop() {
                let stale = !self.alive[node as usize] || stamp != self.stamp[node as usize];
                if stale || self.role[node as usize] == Role::Partner && !self.stands_alone(node) {
                    continue;
                }
                let choice = self.choice(node);
                if choice.cost > cost {
                    self.queue.push(Reverse((choice.cost, node, stamp)));
                    continue;
                }
                pivots.push(self.eliminate(node, choice));
            }
            // Equations without a variable of the basis beside them are what is left: rounding has taken their pair.
            let Some(node) = self.alive.iter().position(|alive| *alive) else { break };
            self.role[node] = Role::Single;
            self.enqueue(node as u32);
        }
        pivots
    }

    fn enqueue(&mut self, node: u32) {
        if self.role[node as usize] != Role::Partner || self.stands_alone(node) {
            let cost = self.choice(node).cost;
            self.stamp[node as usize] += 1;
            self.queue.push(Reverse((cost, node, self.stamp[node as usize])));
        }
    }

    /// Whether an equation's own uncertainty outweighs what couples it to variables.
    fn stands_alone(&self, row: u32) -> bool {
        let own = -self.bounded_equation(row);
        self.role[row as usize] == Role::Partner && own > 0.0 && own >= self.largest_in_row(row)
    }

    /// The best pivot that a node leads. Its cost is twice the size of its front, one less for a pair, because a pair
    /// takes two nodes out with one front; and [`COUPLING`] for every equation that comes to share an uncertainty.
    fn choice(&self, node: u32) -> Choice {
        let own = &self.adjacency[node as usize];
        let partners = own.iter().filter(|entry| self.role[entry.node as usize] == Role::Partner);
        let rows = partners.clone().count() as u32;
        let cost = 2 * own.len() as u32 + COUPLING * rows.saturating_sub(1);
        let alone = Choice { cost, partner: None, floor: 0.0 };
        if self.role[node as usize] != Role::Lead {
            return alone;
        }
        let paired = partners.filter(|entry| !self.stands_alone(entry.node));
        let sized = paired.map(|entry| (entry.node, self.strength(node, entry)));
        let strongest = sized.clone().fold(0.0_f64, |most, (_, strength)| most.max(strength));
        let permitted = sized.filter(|(row, strength)| {
            let enough = |largest: f64| largest > 0.0 && *strength >= THRESHOLD * largest;
            enough(strongest) || enough(self.largest_in_row(*row))
        });
        let cost = |row: u32| {
            let coupled = if self.diagonal[row as usize] == 0.0 { 0 } else { rows.saturating_sub(2) };
            (2 * self.front_of_pair(node, row) + COUPLING * coupled).saturating_sub(1)
        };
        let best = permitted.map(|(row, _)| (cost(row), row)).min();
        let floor = (COLLAPSE * strongest).powi(2);
        match best {
            Some((cost, row)) => Choice { cost, partner: Some(row), floor },
            None if rows == 0 => alone,
            // Equations that stand alone go first and leave their weight to it.
            None => Choice { cost: u32::MAX, ..alone },
        }
    }

    /// The largest coefficient of an equation.
    fn largest_in_row(&self, row: u32) -> f64 {
        let entries = self.adjacency[row as usize].iter();
        let coefficients = entries.filter(|entry| self.role[entry.node as usize] != Role::Partner);
        coefficients.fold(0.0, |most, entry| most.max(entry.value.abs()))
    }

    /// The root of the determinant's magnitude.
    fn strength(&self, node: u32, entry: &Entry) -> f64 {
        let (h, e) = (self.bounded_variable(node), self.bounded_equation(entry.node));
        (entry.value * entry.value - h * e).sqrt()
    }

    fn bounded_variable(&self, node: u32) -> f64 {
        self.diagonal[node as usize].max(self.own[node as usize])
    }

    fn bounded_equation(&self, node: u32) -> f64 {
        self.diagonal[node as usize].min(self.own[node as usize])
    }

    /// How many nodes besides the two are adjacent to either.
    fn front_of_pair(&self, first: u32, second: u32) -> u32 {
        let (a, b) = (&self.adjacency[first as usize], &self.adjacency[second as usize]);
        let mut b_rest = b.iter().peekable();
        let mut shared = 0;
        for entry in a {
            while b_rest.next_if(|other| other.node < entry.node).is_some() {}
            shared += u32::from(b_rest.next_if(|other| other.node == entry.node).is_some());
        }
        (a.len() + b.len()) as u32 - 2 - shared
    }

    fn eliminate(&mut self, node: u32, choice: Choice) -> Pivot {
        let touched = match choice.partner {
            Some(partner) => self.take_pair(node, partner),
            None => self.take_single(node),
        };
        for target in &touched {
            self.update(target, &touched, (node, choice.partner));
        }
        let front: Vec<u32> = touched.iter().map(|touched| touched.node).collect();
        self.requeue(&front, choice.partner.is_none());
        Pivot { first: node, second: choice.partner, front, floor: choice.floor }
    }

    /// Takes a node out and gives what it touches.
    fn take_single(&mut self, node: u32) -> Vec<Touched> {
        self.alive[node as usize] = false;
        let equation = self.own[node as usize] < 0.0 || self.role[node as usize] == Role::Partner;
        let pivot = if equation { self.bounded_equation(node) } else { self.bounded_variable(node) };
        let inverse = if pivot == 0.0 { 0.0 } else { 1.0 / pivot };
        let row = std::mem::take(&mut self.adjacency[node as usize]);
        let touched = row.iter().map(|&Entry { node, value }| Touched {
            node,
            left: [value, 0.0],
            right: [value * inverse, 0.0],
        });
        touched.collect()
    }

    /// Takes a variable and its equation out and gives what they touch.
    fn take_pair(&mut self, variable: u32, equation: u32) -> Vec<Touched> {
        self.alive[variable as usize] = false;
        self.alive[equation as usize] = false;
        let first = std::mem::take(&mut self.adjacency[variable as usize]);
        let second = std::mem::take(&mut self.adjacency[equation as usize]);
        let coupling = first.iter().find(|entry| entry.node == equation).map_or(0.0, |entry| entry.value);
        let (h, e) = (self.bounded_variable(variable), self.bounded_equation(equation));
        let determinant = h * e - coupling * coupling;
        let touched = union(&first, &second, (variable, equation)).map(|(node, a, b)| Touched {
            node,
            left: [a, b],
            right: [(e * a - coupling * b) / determinant, (h * b - coupling * a) / determinant],
        });
        touched.collect()
    }

    /// Subtracts the outer product in one row of the front.
    fn update(&mut self, target: &Touched, touched: &[Touched], gone: (u32, Option<u32>)) {
        let change = |other: &Touched| target.right[0] * other.left[0] + target.right[1] * other.left[1];
        let row = target.node as usize;
        self.diagonal[row] -= change(target);
        let old = std::mem::take(&mut self.adjacency[row]);
        let mut merged = std::mem::take(&mut self.merged);
        merged.clear();
        let mut others = touched.iter().filter(|other| other.node != target.node).peekable();
        for entry in old.iter().filter(|entry| entry.node != gone.0 && Some(entry.node) != gone.1) {
            while let Some(other) = others.next_if(|other| other.node < entry.node) {
                merged.push(Entry { node: other.node, value: -change(other) });
            }
            let other = others.next_if(|other| other.node == entry.node);
            merged.push(Entry { node: entry.node, value: entry.value - other.map_or(0.0, change) });
        }
        merged.extend(others.map(|other| Entry { node: other.node, value: -change(other) }));
        self.adjacency[row] = merged;
        self.merged = old;
    }

    /// Prices the touched nodes anew. A variable eliminated alone makes its equations shorter, so their other variables
    /// may have become cheaper; otherwise prices of the untouched only rise, which is noticed when their turn comes.
    fn requeue(&mut self, front: &[u32], alone: bool) {
        let mut touched = front.to_vec();
        if alone {
            for &node in front.iter().filter(|node| self.role[**node as usize] == Role::Partner) {
                touched.extend(self.adjacency[node as usize].iter().map(|entry| entry.node));
            }
            touched.sort_unstable();
            touched.dedup();
        }
        for node in touched {
            self.enqueue(node);
        }
    }
}

/// Both values of every node that stands in either row, without the pivots themselves.
fn union<'a>(
    a: &'a [Entry],
    b: &'a [Entry],
    pivots: (u32, u32),
) -> impl Iterator<Item = (u32, f64, f64)> + 'a {
    let (mut a, mut b) = (a.iter().peekable(), b.iter().peekable());
    let merged = std::iter::from_fn(move || {
        let node = match (a.peek(), b.peek()) {
            (Some(x), Some(y)) => x.node.min(y.node),
            (Some(x), None) => x.node,
            (None, y) => y?.node,
        };
        let x = a.next_if(|entry| entry.node == node).map_or(0.0, |entry| entry.value);
        let y = b.next_if(|entry| entry.node == node).map_or(0.0, |entry| entry.value);
        Some((node, x, y))
    });
    merged.filter(move |(node, ..)| *node != pivots.0 && *node != pivots.1)
}
