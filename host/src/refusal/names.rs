//! The valid name that a misspelt one most likely meant.

/// The valid name nearest to `given`, if one is near enough to be a likely meaning.
///
/// Near enough is an edit distance (with swaps of neighbours) of about a third of the longer name; capitals do not
/// count, and a name that `given` begins is near as well.
pub fn nearest<'a>(given: &str, valid: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let given = given.to_lowercase();
    valid
        .into_iter()
        .filter_map(|name| {
            let lower = name.to_lowercase();
            let distance = strsim::damerau_levenshtein(&given, &lower);
            let longest = given.chars().count().max(lower.chars().count());
            let begins = given.chars().count() >= 3 && lower.starts_with(&given);
            let allowed = if longest >= 3 { (longest + 1) / 3 } else { 0 };
            (distance <= allowed || begins).then_some((distance, name))
        })
        .min_by_key(|(distance, _)| *distance)
        .map(|(_, name)| name)
}

/// Names in one line: `a, b or c`.
pub fn list<'a>(names: impl IntoIterator<Item = &'a str>) -> String {
    let names: Vec<&str> = names.into_iter().collect();
    match names.as_slice() {
        [] => "nothing".to_owned(),
        [only] => (*only).to_owned(),
        [first @ .., last] => format!("{} or {last}", first.join(", ")),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_slip_finds_its_name_and_a_stranger_finds_none() {
        let keys = ["mode", "lower_rate", "refractory", "blanking", "VVI", "AAI"];
        for (given, meant) in [
            ("lower_rat", Some("lower_rate")),
            ("loewr_rate", Some("lower_rate")),
            ("refactory", Some("refractory")),
            ("Mode", Some("mode")),
            ("vvi", Some("VVI")),
            ("VVJ", Some("VVI")),
            ("black", None),
            ("x", None),
            ("", None),
        ] {
            assert_eq!(nearest(given, keys), meant, "{given}");
        }
    }

    #[test]
    fn a_list_reads_as_a_sentence() {
        assert_eq!(list(["a"]), "a");
        assert_eq!(list(["a", "b", "c"]), "a, b or c");
    }
}
