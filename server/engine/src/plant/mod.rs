//! The plant as text and as plain data; knows no equipment kind.

mod model;

pub use model::*;
