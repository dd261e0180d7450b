//! The engine held against problems published elsewhere, each with its source beside it.

mod networks;
mod nonlinear;
