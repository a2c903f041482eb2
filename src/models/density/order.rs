//! The order in which unknowns and definitions are taken: by dependency, then by name, never by the order
//! of the file.

use std::collections::{BTreeMap, BTreeSet};

/// Sorts names so that each stands after the names it uses; among those that could stand next, the first
/// in alphabetical order does. Names that are not keys of `uses` are ignored.
///
/// # Errors
/// The names of one cycle, in its order, when there is one.
pub fn by_dependency(
    uses: &BTreeMap<String, BTreeSet<String>>,
) -> Result<Vec<String>, Vec<String>> {
    let mut waiting: BTreeMap<&str, BTreeSet<&str>> = uses
        .iter()
        .map(|(name, used)| {
            let known = used
                .iter()
                .map(String::as_str)
                .filter(|u| uses.contains_key(*u))
                .collect();
            (name.as_str(), known)
        })
        .collect();
    let mut order = Vec::with_capacity(uses.len());
    while !waiting.is_empty() {
        let Some(next) = waiting
            .iter()
            .find(|(_, used)| used.is_empty())
            .map(|(name, _)| *name)
        else {
            return Err(a_cycle(&waiting));
        };
        waiting.remove(next);
        for used in waiting.values_mut() {
            used.remove(next);
        }
        order.push(next.to_string());
    }
    Ok(order)
}

/// Follows uses from the first waiting name until one comes back. Every waiting name uses a waiting name.
fn a_cycle(waiting: &BTreeMap<&str, BTreeSet<&str>>) -> Vec<String> {
    let mut path: Vec<&str> = Vec::new();
    let mut name = *waiting.keys().next().expect("a cycle has members");
    loop {
        if let Some(first) = path.iter().position(|p| *p == name) {
            return path[first..].iter().map(|p| p.to_string()).collect();
        }
        path.push(name);
        name = waiting[name]
            .iter()
            .next()
            .expect("no name is free in a cycle");
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn uses(pairs: &[(&str, &[&str])]) -> BTreeMap<String, BTreeSet<String>> {
        pairs
            .iter()
            .map(|(n, u)| (n.to_string(), u.iter().map(|s| s.to_string()).collect()))
            .collect()
    }

    #[test]
    fn dependency_comes_before_name() {
        let order = by_dependency(&uses(&[("a", &["z"]), ("z", &[]), ("b", &["elsewhere"])]));
        assert_eq!(order.unwrap(), ["b", "z", "a"]);
    }

    #[test]
    fn a_cycle_is_named_in_its_order() {
        let cycle = by_dependency(&uses(&[
            ("a", &["b"]),
            ("b", &["c"]),
            ("c", &["b"]),
            ("d", &[]),
        ]));
        assert_eq!(cycle.unwrap_err(), ["b", "c"]);
    }

    #[test]
    fn a_name_that_uses_itself_is_a_cycle() {
        assert_eq!(by_dependency(&uses(&[("a", &["a"])])).unwrap_err(), ["a"]);
    }
}
