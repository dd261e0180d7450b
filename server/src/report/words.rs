//! Pieces of sentences.

/// Things named one after another: `a`, `a and b`, `a, b and c`; of many the first ones, and how many there are beyond.
pub(super) fn listed(names: &[String], last: &str, most: usize) -> String {
    if names.len() > most {
        let (told, beyond) = names.split_at(most - 1);
        return format!("{} {last} {} more", told.join(", "), beyond.len());
    }
    match names {
        [] => String::new(),
        [one] => one.clone(),
        [rest @ .., end] => format!("{} {last} {end}", rest.join(", ")),
    }
}

/// A probability with two decimals, and never as if it were certain.
pub(super) fn probability(value: f64) -> String {
    match value {
        value if value >= 0.995 => "above 0.99".to_owned(),
        value if value < 0.005 => "below 0.01".to_owned(),
        value => format!("{value:.2}"),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lists_read_as_people_say_them() {
        let names: Vec<String> = ["a", "b", "c", "d"].map(String::from).into();
        let listed = |count: usize| listed(&names[..count], "and", 3);
        assert_eq!([listed(0), listed(1), listed(2)], ["", "a", "a and b"]);
        assert_eq!([listed(3), listed(4)], ["a, b and c", "a, b and 2 more"]);
    }

    #[test]
    fn nothing_is_certain() {
        assert_eq!([1.0, 0.93, 0.001].map(probability), ["above 0.99", "0.93", "below 0.01"]);
    }
}
