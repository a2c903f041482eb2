//! The nearest known name to one that is not known.

/// The candidate most like `name`, if one is close enough to be worth a "did you mean".
pub fn nearest<'a>(name: &str, candidates: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let mut best: Option<(usize, &str)> = None;
    for candidate in candidates {
        let distance = strsim::damerau_levenshtein(&name.to_lowercase(), &candidate.to_lowercase());
        let allowed = 1 + name.chars().count().max(candidate.chars().count()) / 4;
        if distance <= allowed && best.is_none_or(|(d, _)| distance < d) {
            best = Some((distance, candidate));
        }
    }
    best.map(|(_, candidate)| candidate)
}
