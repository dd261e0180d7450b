//! Sparse linear algebra under the weighted least squares with equality constraints.
//!
//! At one linearisation the problem is: minimise `1/2 sum w_j (dx_j - r_j)^2` subject to `C dx = -c`. Its conditions are
//! `K [dx; lambda] = [W r; -c]` with `K = [W + D, C'; C, -E]`, where `D` damps a step and `E` softens equations; both
//! are zero for the answer that counts.
//!
//! [`Analysis`] is made once for a set of measured variables: what is unobservable, what is dependent, the pivot
//! sequence and the places of all numbers. [`Factor`] is the numeric work of one linearisation: a block LDL' without
//! search, solves, and by Takahashi's recursion the variances ([`SelectedInverse`]). The numeric parts are generic in
//! the scalar: with dual weights `w + e d` the derivative of the inverse's diagonal is `-diag(Z diag(d) Z)`, which
//! for a measured part `d` of the weights is how much of each variance comes from it.

mod analysis;
mod factor;
mod inverse;
mod ordering;
mod pattern;
mod postorder;
mod rank;
mod scaling;
mod solve;
mod tape;
#[cfg(test)]
mod tests;

pub use analysis::{Analysis, AnalysisError};
pub use factor::{Diagonal, Factor, FactorError, PivotPlace};
pub use inverse::SelectedInverse;
pub use pattern::{Column, Pattern, PatternError};
pub use rank::NullVector;
pub use solve::{Residual, Vectors};
