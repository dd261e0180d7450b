//! What the tests of this module share.

/// Asserts that a value, rounded to the printed number of significant digits, is the printed one.
#[track_caller]
pub(super) fn same_digits(value: f64, printed: f64, digits: usize) {
    let (value, printed) = (format!("{value:.*e}", digits - 1), format!("{printed:.*e}", digits - 1));
    assert_eq!(value, printed);
}
