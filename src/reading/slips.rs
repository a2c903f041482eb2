//! The slips in a TOML text that a parser meets with many words: text without quotes, a brace left open.
//! Looked for by a scan of the text, only where the parser found it at fault.

use std::ops::Range;

/// A value on a line that is text without quotes.
#[derive(Debug, PartialEq)]
pub(super) struct Unquoted {
    pub key: String,
    pub value: Range<usize>,
}

/// Where the string at the start of a text ends: behind its closing quote, or at the end of its line.
fn string_end(text: &str) -> usize {
    for quotes in ["\"\"\"", "'''"] {
        if let Some(rest) = text.strip_prefix(quotes) {
            return rest.find(quotes).map_or(text.len(), |at| at + 6);
        }
    }
    let quote = text.as_bytes()[0];
    let mut escaped = false;
    for (at, byte) in text.bytes().enumerate().skip(1) {
        match byte {
            b'\n' => return at,
            _ if escaped => escaped = false,
            b'\\' if quote == b'"' => escaped = true,
            _ if byte == quote => return at + 1,
            _ => {}
        }
    }
    text.len()
}

fn line_end(text: &str, from: usize) -> usize {
    text[from..].find('\n').map_or(text.len(), |at| from + at)
}

/// The first value on the line of `from..to` that begins with a letter but is no word of TOML.
pub(super) fn unquoted(text: &str, line: Range<usize>) -> Option<Unquoted> {
    let mut at = line.start;
    while at < line.end {
        match text.as_bytes()[at] {
            b'"' | b'\'' => at += string_end(&text[at..line.end]),
            b'#' => return None,
            b'=' => {
                let begins = text[at + 1..line.end].trim_start().chars().next();
                if !begins.is_some_and(char::is_alphabetic) {
                    at += 1;
                    continue;
                }
                let value = value_after(text, at + 1..line.end);
                let written = text.get(value.clone())?;
                let word = ["true", "false", "inf", "nan"].contains(&written);
                if !word {
                    let before = text.get(line.start..at)?.trim_end();
                    let start = before
                        .rfind(|c: char| !(c.is_ascii_alphanumeric() || c == '_' || c == '-'))
                        .map_or(0, |at| at + 1);
                    let key = before.get(start..).unwrap_or("").to_string();
                    return (!key.is_empty()).then_some(Unquoted { key, value });
                }
                at += 1;
            }
            _ => at += 1,
        }
    }
    None
}

/// What stands behind `=`, up to a comma, a closing brace, a comment or the end of the line, not counting
/// what stands in brackets.
fn value_after(text: &str, range: Range<usize>) -> Range<usize> {
    let mut open = 0_usize;
    let mut end = range.start;
    while end < range.end {
        match text.as_bytes()[end] {
            b'(' | b'[' => open += 1,
            b')' | b']' => open = open.saturating_sub(1),
            b'"' | b'\'' => {
                end += string_end(&text[end..range.end]);
                continue;
            }
            b',' | b'}' if open == 0 => break,
            b'#' => break,
            _ => {}
        }
        end += 1;
    }
    let written = &text[range.start..end];
    let start = range.start + (written.len() - written.trim_start().len());
    start..(range.start + written.trim_end().len()).max(start)
}

/// The place of the first `{` that no `}` closes.
pub(super) fn open_brace(text: &str) -> Option<usize> {
    let mut open = Vec::new();
    let mut at = 0;
    while at < text.len() {
        match text.as_bytes()[at] {
            b'"' | b'\'' => {
                at += string_end(&text[at..]);
                continue;
            }
            b'#' => {
                at = line_end(text, at);
                continue;
            }
            b'{' => open.push(at),
            b'}' => {
                open.pop();
            }
            _ => {}
        }
        at += 1;
    }
    open.first().copied()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn text_without_quotes_is_found_on_its_line() {
        let found = |line: &str| {
            unquoted(line, 0..line.len()).map(|slip| (slip.key, line[slip.value].to_string()))
        };
        let some = |key: &str, value: &str| Some((key.to_string(), value.to_string()));
        let table = "a = { law = normal(mean = 0, sd = 10), per = 4 }";
        assert_eq!(found(table), some("law", "normal(mean = 0, sd = 10)"));
        assert_eq!(found("b = rate[t.x] # why"), some("b", "rate[t.x]"));
        assert_eq!(found("t = \"a = b\"\t# c = d"), None);
        assert_eq!(found("t = 'it''s = x', u = é"), some("u", "é"));
        assert_eq!(found("a = true"), None);
        assert_eq!(found("a = 3"), None);
        assert_eq!(found("a ="), None);
        assert_eq!(found("= b"), None);
    }

    #[test]
    fn open_braces_outside_of_texts_and_comments() {
        assert_eq!(open_brace("a = { b = 1 }\nc = { d = { e = 1 }\n"), Some(18));
        assert_eq!(open_brace("a = \"{\" # {\nb = '''\n{'''\n"), None);
        assert_eq!(open_brace("a = \"\\\"{\"\n"), None);
        assert_eq!(open_brace("a = \"{\nb = {"), Some(11));
    }
}
