//! The nearest known name to one that is not known.

/// Names longer than this are not compared: the work grows with the product of the lengths.
const LONGEST: usize = 100;

/// The candidate most like `name`, if one is close enough to be worth a "did you mean".
pub fn nearest<'a>(name: &str, candidates: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let mut best: Option<(usize, &str)> = None;
    for candidate in candidates {
        if name.len() > LONGEST || candidate.len() > LONGEST {
            continue;
        }
        let distance = strsim::damerau_levenshtein(&name.to_lowercase(), &candidate.to_lowercase());
        let longer = name.chars().count().max(candidate.chars().count());
        // Of two names of one letter each, neither is like the other.
        let allowed = (1 + longer / 4).min(longer.saturating_sub(1));
        if distance <= allowed && best.is_none_or(|(d, _)| distance < d) {
            best = Some((distance, candidate));
        }
    }
    best.map(|(_, candidate)| candidate)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn near_enough_or_nothing() {
        assert_eq!(nearest("scael", ["scale", "adapt"]), Some("scale"));
        assert_eq!(nearest("SCALE", ["scale", "adapt"]), Some("scale"));
        assert_eq!(nearest("width", ["scale", "adapt"]), None);
        assert_eq!(nearest("", []), None);
        let long = "a".repeat(1_000_000);
        assert_eq!(nearest(&long, [long.as_str()]), None);
    }
}
