//! Where two texts or two JSON values differ.

use crate::canon::Json;

/// Every place where two values differ, the first first: `points[0].goal`, then both sides.
/// `given` names what gives the second value: "the draws give".
pub fn json(stored: &Json, made: &Json, given: &str) -> Vec<String> {
    let mut found = Vec::new();
    walk("", stored, made, given, &mut found);
    found
}

fn walk(path: &str, stored: &Json, made: &Json, given: &str, found: &mut Vec<String>) {
    match (stored, made) {
        (Json::Object(a), Json::Object(b)) => {
            let mut keys: Vec<&String> = a.keys().chain(b.keys()).collect();
            keys.sort();
            keys.dedup();
            for key in keys {
                let inner = if path.is_empty() {
                    key.clone()
                } else {
                    format!("{path}.{key}")
                };
                match (a.get(key), b.get(key)) {
                    (Some(a), Some(b)) => walk(&inner, a, b, given, found),
                    (Some(_), None) => found.push(format!("{inner}: {given} no such thing")),
                    _ => found.push(format!("{inner}: the record does not have it")),
                }
            }
        }
        (Json::Array(a), Json::Array(b)) => {
            for (index, (a, b)) in a.iter().zip(b).enumerate() {
                walk(&format!("{path}[{index}]"), a, b, given, found);
            }
            if a.len() != b.len() {
                found.push(format!(
                    "{path}: the record has {} items, {given} {}",
                    a.len(),
                    b.len()
                ));
            }
        }
        // A count and a real of one value are written alike.
        _ if stored.canonical() == made.canonical() => {}
        _ => found.push(format!(
            "{path}: the record has {}, {given} {}",
            short(&stored.canonical()),
            short(&made.canonical())
        )),
    }
}

/// The first line where two texts differ; `None` when they are the same.
pub fn text(stored: &[u8], made: &[u8], given: &str) -> Option<String> {
    if stored == made {
        return None;
    }
    let same = stored.iter().zip(made).take_while(|(a, b)| a == b).count();
    let from = made[..same]
        .iter()
        .rposition(|byte| *byte == b'\n')
        .map_or(0, |end| end + 1);
    let before = made[..from].iter().filter(|byte| **byte == b'\n').count();
    // Where one text ends with the line before, the other's goes on with its end.
    let (from, before) = match (stored.get(same), made.get(same)) {
        (None, Some(b'\n')) | (Some(b'\n'), None) => (same + 1, before + 1),
        _ => (from, before),
    };
    let line = |bytes: &[u8]| match bytes.get(from..) {
        None => "nothing".into(),
        Some(rest) => {
            let end = rest
                .iter()
                .take(LONGEST_LINE)
                .position(|byte| *byte == b'\n');
            let end = end.unwrap_or(rest.len().min(LONGEST_LINE));
            short(&String::from_utf8_lossy(&rest[..end]))
        }
    };
    Some(format!(
        "line {}: the record has {}, {given} {}",
        before + 1,
        line(stored),
        line(made)
    ))
}

/// Bytes of a line that are looked at.
const LONGEST_LINE: usize = 1 << 12;
/// At most so many characters are shown.
const SHOWN: usize = 160;

fn short(text: &str) -> String {
    let clean: String = text
        .chars()
        .map(|c| if c.is_control() { ' ' } else { c })
        .take(SHOWN)
        .collect();
    if text.chars().nth(SHOWN).is_some() {
        format!("{clean}…")
    } else {
        clean
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn differences_are_named_by_their_place() {
        let a = Json::read("{\"a\": [1, 2.5], \"b\": {\"c\": \"x\"}, \"d\": 1}").unwrap();
        let b = Json::read("{\"a\": [1, 2.25, 3], \"b\": {\"c\": \"x\", \"e\": null}}").unwrap();
        assert_eq!(
            json(&a, &b, "the draws give"),
            [
                "a[1]: the record has 2.5, the draws give 2.25",
                "a: the record has 2 items, the draws give 3",
                "b.e: the record does not have it",
                "d: the draws give no such thing",
            ]
        );
        assert_eq!(json(&a, &a, ""), Vec::<String>::new());
        assert_eq!(text(b"a\nb", b"a\nb", ""), None);
        let told = text(b"a\nb\nc", b"a\nx\nc", "they give").unwrap();
        assert_eq!(told, "line 2: the record has b, they give x");
        let told = text(b"a", b"a\nx", "they give").unwrap();
        assert_eq!(told, "line 2: the record has nothing, they give x");
    }
}
