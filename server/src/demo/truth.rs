//! What was put into the logs, to be held against what is found in them.

use serde::Serialize;

use super::scenario::{BIAS, BIASED, DRIFT, DRIFTING, FOULED, FOULING, LEAK, Month, SHIFTS, WEAR, months};

/// Everything that is wrong in the invented logs, and how the unit wears.
#[derive(Clone, Debug, Serialize)]
pub struct Truth {
    /// What is wrong, and when.
    pub errors: Vec<Wrong>,
    /// The unit's wear, month by month.
    pub months: Vec<Wear>,
}

/// Something wrong in some logs.
#[derive(Clone, Debug, Serialize)]
pub struct Wrong {
    /// The tag or the machine.
    pub at: &'static str,
    /// What it is, in words.
    pub what: &'static str,
    /// How large it is where it is largest.
    pub size: f64,
    /// Unit of the size.
    pub unit: &'static str,
    /// Names of the logs that it is in, without their endings.
    pub logs: Vec<String>,
}

/// How far wear has come at the end of a month.
#[derive(Clone, Debug, Serialize)]
pub struct Wear {
    /// The month.
    pub month: String,
    /// Points of efficiency that the high-pressure section has lost.
    pub high_pressure_points: f64,
    /// What the fouled element reads too high, %.
    pub fouling_percent: f64,
}

/// What was put into the logs.
pub fn truth() -> Truth {
    let shifts = |range: std::ops::Range<usize>| -> Vec<String> {
        SHIFTS[range].iter().map(|(name, _)| format!("2026-11-02-{name}")).collect()
    };
    let wear = |month: Month| Wear {
        month: month.to_string(),
        high_pressure_points: 100.0 * WEAR * month.share_passed(),
        fouling_percent: 100.0 * FOULING * month.share_passed(),
    };
    Truth {
        months: months().map(wear).collect(),
        errors: vec![
            Wrong { at: BIASED, what: "reads too low", size: BIAS, unit: "t/h", logs: shifts(0..3) },
            Wrong {
                at: DRIFTING,
                what: "drifts from 07:30 on, evenly until the end of the shift",
                size: DRIFT,
                unit: "K",
                logs: shifts(0..1),
            },
            Wrong { at: "boiler", what: "a tube leaks", size: LEAK, unit: "t/h", logs: shifts(0..2) },
            Wrong {
                at: FOULED,
                what: "its element fouls evenly over all months; it is cleaned on the first of November",
                size: 100.0 * FOULING,
                unit: "% of the reading",
                logs: months().map(|month| month.to_string()).collect(),
            },
        ],
    }
}

impl Truth {
    /// As JSON.
    pub fn to_json(&self) -> String {
        // A plain structure with text keys becomes text without fail.
        serde_json::to_string_pretty(self).unwrap_or_default()
    }
}
