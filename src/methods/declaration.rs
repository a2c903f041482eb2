//! The table of methods: what a study may write after `method`, read by the sampler's reader and the catalogue.

/// One method, as a study names it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Method {
    /// As written after `method`.
    pub name: &'static str,
    /// One sentence.
    pub about: &'static str,
    /// What it can't do or does badly.
    pub limits: &'static str,
    /// Where it was published (author, year).
    pub reference: &'static str,
    /// Moves continuous unknowns.
    pub real: bool,
    /// Moves integer unknowns.
    pub integer: bool,
    pub options: &'static [Choice],
}

/// A key beside `method`.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Choice {
    pub name: &'static str,
    pub meaning: &'static str,
    /// What holds when it is left out, in words.
    pub default: &'static str,
}

/// The option of every method.
pub const TIMES: Choice = Choice {
    name: "times",
    meaning: "how often the step is made for one draw",
    default: "1",
};

/// All methods, in order of name.
pub fn table() -> &'static [Method] {
    const TABLE: &[Method] = &[
        super::conditional::DECLARATION,
        super::random_walk::DECLARATION,
        super::slice::DECLARATION,
    ];
    TABLE
}

/// The method of a name.
pub fn find(name: &str) -> Option<&'static Method> {
    table().iter().find(|method| method.name == name)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_entry_is_complete_and_in_order() {
        let names: Vec<&str> = table().iter().map(|method| method.name).collect();
        let mut sorted = names.clone();
        sorted.sort_unstable();
        sorted.dedup();
        assert_eq!(names, sorted);
        for method in table() {
            assert_eq!(find(method.name), Some(method));
            assert!(
                method.real || method.integer,
                "{} moves nothing",
                method.name
            );
            for text in [method.about, method.limits, method.reference] {
                assert!(
                    text.len() >= 10 && text.ends_with('.'),
                    "{}: {text:?}",
                    method.name
                );
            }
            assert!(method.reference.chars().any(|c| c.is_ascii_digit()));
            for option in method.options {
                assert!(!option.meaning.is_empty() && !option.default.is_empty());
            }
        }
    }
}
