//! Water and steam by the industrial formulation IAPWS-IF97: release IAPWS R7-97(2012).
//!
//! The equations are explicit in (p,T); what is asked for in other variables is found by Newton's method from the
//! release's backward equations and carries the derivatives of the implicit function theorem, never those of an
//! iteration. Everything agrees with the (p,T) equations to rounding.
//!
//! Where two regions meet the formulation itself has small steps (up to 0.2 kJ/kg in enthalpy, 0.06 K between regions
//! 2 and 5), and so does everything here. A solver avoids them by holding a [`Region`] while it iterates.
//!
//! Metastable states are those of the region's own equation continued past saturation. The release's separate
//! equation (18) for metastable vapour isn't used, as it doesn't join region 2's exactly; up to 8 megapascal the two
//! differ by less than 0.5 kJ/kg within 5 K of saturation, at 10 megapascal by 1.5 kJ/kg.

mod backward1;
mod backward1_table;
mod backward2;
mod backward2_table;
mod backward3;
mod backward3_table;
mod boundary;
mod error;
mod gibbs;
mod inverse;
mod polynomial;
mod region;
mod region1;
mod region1_table;
mod region2;
mod region2_table;
mod region3;
mod region3_table;
mod region5;
mod region5_table;
pub mod saturation;
mod state;
#[cfg(test)]
mod test_support;

pub use crate::property::{Partial, PartialByEnthalpy, PartialByEntropy, Properties};
pub use error::WaterError;
pub use region::{Phase, Region};
pub use state::{Slope, State, enthalpy_ps, entropy_ph, temperature_ph, temperature_ps, volume_ph};

/// Specific gas constant of water, J/(kg K): equation (1) of IAPWS R7-97(2012).
pub const GAS_CONSTANT: f64 = 461.526;
/// Critical temperature, K: equation (2).
pub const CRITICAL_TEMPERATURE: f64 = 647.096;
/// Critical pressure, Pa: equation (3).
pub const CRITICAL_PRESSURE: f64 = 22.064e6;
/// Critical density, kg/m3: equation (4).
pub const CRITICAL_DENSITY: f64 = 322.0;
/// Lowest temperature of the formulation, K.
pub const LOWEST_TEMPERATURE: f64 = 273.15;
/// Saturation pressure at the lowest temperature, Pa; below it water would be ice or very thin vapour.
pub const LOWEST_PRESSURE: f64 = 611.212677;
/// Highest pressure of the formulation, Pa.
pub const HIGHEST_PRESSURE: f64 = 100e6;
/// Highest temperature of the formulation up to 50 megapascal, K.
pub const HIGHEST_TEMPERATURE: f64 = 2273.15;

const REGION_1_HIGHEST_TEMPERATURE: f64 = 623.15;
const REGION_2_HIGHEST_TEMPERATURE: f64 = 1073.15;
const REGION_5_HIGHEST_PRESSURE: f64 = 50e6;
const BOUNDARY_23_HIGHEST_TEMPERATURE: f64 = 863.15;
/// Saturation pressure at 623.15 K, where regions 1, 2 and 3 meet, Pa.
const REGION_3_LOWEST_PRESSURE: f64 = 16.5291642526045e6;
