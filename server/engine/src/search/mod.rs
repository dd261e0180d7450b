//! The search for errors: which tags, givens and shared errors are wrong, which machines lose something, by how much and
//! with what probability.
//!
//! Every hypothesis is a direction in which the balance could give way. [`hypothesis`] lists them with their priors,
//! [`evidence`] holds what the solution's factor says of each and of every two, [`limit`] how strong the strongest may be
//! by chance, [`posterior`] which sets the readings speak for, and [`naming`] what of that is told.

mod evidence;
mod hypothesis;
mod limit;
mod naming;
mod posterior;
#[cfg(test)]
mod tests;

pub(crate) use evidence::Evidence;
pub(crate) use hypothesis::{Candidate, Parts, Source, candidates};
pub(crate) use limit::{Chance, bound};
pub(crate) use naming::{Named, name};
pub(crate) use posterior::{Posterior, Set, Sizes};
