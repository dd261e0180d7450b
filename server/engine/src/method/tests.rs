//! Weights of the robust estimators beside their losses.

use super::{contaminated_normal, fair, hampel, robust, welsch};

/// A loss and the weight that is said to be its derivative over the deviation.
type Pair = (&'static str, fn(f64) -> f64, robust::Weight);

/// The losses as they are published.
const LOSSES: &[Pair] = &[
    (
        "fair",
        |e| {
            let c = 1.3998_f64;
            c * c * (e.abs() / c - (1.0 + e.abs() / c).ln())
        },
        fair::weight,
    ),
    (
        "welsch",
        |e| {
            let c = 2.9846_f64;
            0.5 * c * c * (1.0 - (-(e / c).powi(2)).exp())
        },
        welsch::weight,
    ),
    (
        "contaminated normal",
        |e| {
            let (p, b) = (0.235, 10.0_f64);
            -((1.0 - p) * (-0.5 * e * e).exp() + p / b * (-0.5 * (e / b).powi(2)).exp()).ln()
        },
        contaminated_normal::weight,
    ),
    (
        "hampel",
        |e| {
            let (a, b, c, e) = (1.35, 2.70, 5.40, e.abs());
            let fallen =
                |e: f64| a * b - 0.5 * a * a + 0.5 * a * (c - b) * (1.0 - ((c - e) / (c - b)).powi(2));
            if e <= a {
                0.5 * e * e
            } else if e <= b {
                a * e - 0.5 * a * a
            } else {
                fallen(e.min(c))
            }
        },
        hampel::weight,
    ),
];

#[test]
fn weights_are_the_slopes_of_their_losses() {
    let step = 1e-5;
    for (name, loss, weight) in LOSSES {
        for deviation in (1..80).map(|at| 0.1 * f64::from(at) + 0.033) {
            for deviation in [deviation, -deviation] {
                let slope = (loss(deviation + step) - loss(deviation - step)) / (2.0 * step);
                let found = weight(deviation) * deviation;
                assert!((found - slope).abs() < 1e-7, "{name} at {deviation}: {found} instead of {slope}");
            }
        }
    }
}

#[test]
fn no_deviation_is_too_large_to_weigh() {
    for (name, _, weight) in LOSSES {
        let far = weight(1e6);
        assert!((0.0..=0.011).contains(&far), "{name}: {far}");
        assert!((weight(1e-9) - 1.0).abs() < 0.01 || *name == "contaminated normal", "{name}");
    }
}
