//! Where a trend must not be read through: what stands behind its values changes there.

use crate::record::Mark;
use crate::store::TrendData;

/// A change of what stands behind a trend.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Break {
    /// Beginning of the first balance after it, ms since 1970.
    pub at: i64,
    /// What changes, in words.
    pub causes: Vec<String>,
}

/// Where plant file, findings or excluded tags change.
pub fn breaks(trend: &TrendData) -> Vec<Break> {
    let pairs = trend.marks.windows(2);
    pairs.map(|pair| Break { at: trend.from[pair[1].0], causes: causes(&pair[0].1, &pair[1].1) }).collect()
}

fn causes(before: &Mark, after: &Mark) -> Vec<String> {
    let mut causes = Vec::new();
    if before.revision != after.revision {
        causes.push(format!("revision {} of the plant file", after.revision));
    }
    if before.findings != after.findings {
        causes.push(listed("findings", "no findings any more", &after.findings));
    }
    if before.excluded != after.excluded {
        causes.push(listed("excluded", "no tag excluded any more", &after.excluded));
    }
    causes
}

fn listed(what: &str, none: &str, names: &[String]) -> String {
    if names.is_empty() { none.to_owned() } else { format!("{what}: {}", names.join(", ")) }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_change_is_told_with_what_holds_from_then_on() {
        let mark = |revision, findings: &[&str], excluded: &[&str]| Mark {
            revision,
            findings: findings.iter().map(ToString::to_string).collect(),
            excluded: excluded.iter().map(ToString::to_string).collect(),
        };
        let marks = vec![
            (0, mark(1, &[], &[])),
            (2, mark(1, &["FT-1", "condenser"], &[])),
            (3, mark(2, &[], &["TT-7"])),
            (4, mark(2, &[], &[])),
        ];
        let trend = TrendData { from: vec![0, 10, 20, 30, 40], marks, ..TrendData::default() };
        let told: Vec<(i64, String)> =
            breaks(&trend).into_iter().map(|change| (change.at, change.causes.join("; "))).collect();
        assert_eq!(
            told,
            [
                (20, "findings: FT-1, condenser".to_owned()),
                (30, "revision 2 of the plant file; no findings any more; excluded: TT-7".to_owned()),
                (40, "no tag excluded any more".to_owned()),
            ]
        );
        assert_eq!(breaks(&TrendData::default()), []);
    }
}
