//! Dimensions, the one table of unit strings, and numbers with a unit.

mod amount;
mod dimension;
mod unit;
mod unit_table;

pub(crate) use amount::number_length;
pub use amount::{Amount, AmountError, split_number};
pub use dimension::Dimension;
pub use unit::{Reference, Unit, UnitError};
