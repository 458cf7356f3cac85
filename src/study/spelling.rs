//! The name that may have been meant.

/// The name nearest in spelling, if it is near enough to have been meant: at most one edit in three letters
/// (insertions, deletions, substitutions and swaps of neighbours; Damerau 1964), capitals and dashes aside.
pub fn nearest<'a>(read: &str, names: impl IntoIterator<Item = &'a str>) -> Option<String> {
    /// Longer texts are no slips of the pen.
    const LONGEST: usize = 40;
    let plain = |text: &str| -> Vec<char> {
        let lower = text.to_lowercase().replace(['-', ' '], "_");
        lower.chars().take(LONGEST + 1).collect()
    };
    let read = plain(read);
    let distances = names
        .into_iter()
        .map(|name| (edits(&read, &plain(name)), name));
    let (distance, name) = distances.min()?;
    let close = distance <= (read.len() / 3).max(1) && distance < read.len();
    (close && read.len() <= LONGEST).then(|| name.to_owned())
}

fn edits(one: &[char], other: &[char]) -> usize {
    let mut rows = vec![(0..=other.len()).collect::<Vec<usize>>()];
    for i in 1..=one.len() {
        let mut row = vec![i];
        for j in 1..=other.len() {
            let change = usize::from(one[i - 1] != other[j - 1]);
            let mut best = (rows[i - 1][j] + 1)
                .min(row[j - 1] + 1)
                .min(rows[i - 1][j - 1] + change);
            if i > 1 && j > 1 && one[i - 1] == other[j - 2] && one[i - 2] == other[j - 1] {
                best = best.min(rows[i - 2][j - 2] + 1);
            }
            row.push(best);
        }
        rows.push(row);
    }
    rows[one.len()][other.len()]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn law_the_nearest_name_is_one_that_may_have_been_meant() {
        let keys = ["legs", "stack", "device", "network"];
        for (read, found) in [
            ("leg", Some("legs")),
            ("lesg", Some("legs")),
            ("Network", Some("network")),
            ("divice", Some("device")),
            ("colour", None),
            ("x", None),
            ("", None),
        ] {
            assert_eq!(nearest(read, keys).as_deref(), found, "{read}");
        }
        assert_eq!(nearest("legs", []), None);
    }
}
