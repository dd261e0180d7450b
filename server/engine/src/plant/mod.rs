//! The plant as text and as plain data; knows no equipment kind.

mod model;
mod parse;

pub use model::*;
pub use parse::{parse, parse_leniently, revision};
