//! CSV as in RFC 4180, each cell with its place: commas, quotes around cells that need them, a quote in a
//! quoted cell doubled. Line ends of any kind; blanks around a cell without quotes do not count. A quote that
//! is out of place is a fault, not a guess.

use std::borrow::Cow;
use std::ops::Range;

/// One cell of a row.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Cell<'a> {
    pub text: Cow<'a, str>,
    /// Bytes in the file, quotes included, blanks around it not.
    pub span: Range<usize>,
}

/// A quote out of place.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Misquoted {
    pub span: Range<usize>,
    pub what: &'static str,
    pub help: &'static str,
}

/// Reads rows one after the other.
pub(super) struct Rows<'a> {
    text: &'a str,
    at: usize,
}

impl<'a> Rows<'a> {
    pub fn new(text: &'a str) -> Rows<'a> {
        Rows { text, at: 0 }
    }

    /// Begins at a byte offset where a row begins.
    pub fn starting(text: &'a str, at: usize) -> Rows<'a> {
        Rows { text, at }
    }

    /// Where the next row begins.
    pub fn offset(&self) -> usize {
        self.at
    }

    /// The rest of the file has nothing but blank lines.
    pub fn ended(&self) -> bool {
        self.text[self.at..].trim().is_empty()
    }

    /// Puts the next row into `row` and gives false at the end of the file. A line of blanks is a row with
    /// one empty cell.
    pub fn next(&mut self, row: &mut Vec<Cell<'a>>) -> Result<bool, Misquoted> {
        row.clear();
        if self.at == self.text.len() {
            return Ok(false);
        }
        loop {
            self.blanks();
            let cell = if self.text[self.at..].starts_with('"') {
                self.quoted()?
            } else {
                self.plain()?
            };
            row.push(cell);
            let rest = &self.text.as_bytes()[self.at..];
            match rest {
                [b',', ..] => self.at += 1,
                [b'\r', b'\n', ..] => {
                    self.at += 2;
                    return Ok(true);
                }
                [b'\r' | b'\n', ..] => {
                    self.at += 1;
                    return Ok(true);
                }
                _ => return Ok(true),
            }
        }
    }

    fn blanks(&mut self) {
        let rest = &self.text[self.at..];
        self.at += rest.len() - rest.trim_start_matches([' ', '\t']).len();
    }

    fn plain(&mut self) -> Result<Cell<'a>, Misquoted> {
        let start = self.at;
        let rest = &self.text[start..];
        let length = rest.find([',', '\r', '\n']).unwrap_or(rest.len());
        self.at = start + length;
        let text = rest[..length].trim_end_matches([' ', '\t']);
        if let Some(quote) = text.find('"') {
            return Err(Misquoted {
                span: start + quote..start + quote + 1,
                what: "a quote in the middle of a cell",
                help: "put the whole cell in quotes and double the quotes inside it",
            });
        }
        Ok(Cell {
            text: Cow::Borrowed(text),
            span: start..start + text.len(),
        })
    }

    fn quoted(&mut self) -> Result<Cell<'a>, Misquoted> {
        let start = self.at;
        let inside = start + 1;
        let mut at = inside;
        let mut doubled = false;
        let end = loop {
            let Some(quote) = self.text[at..].find('"') else {
                return Err(Misquoted {
                    span: start..start + 1,
                    what: "a quote that is never closed",
                    help: "close the cell with another quote",
                });
            };
            at += quote + 1;
            if !self.text[at..].starts_with('"') {
                break at - 1;
            }
            doubled = true;
            at += 1;
        };
        self.at = at;
        self.blanks();
        if !matches!(
            self.text.as_bytes().get(self.at),
            None | Some(b',' | b'\r' | b'\n')
        ) {
            return Err(Misquoted {
                span: end..end + 1,
                what: "a cell that goes on after its closing quote",
                help: "double a quote that belongs to the cell",
            });
        }
        let text = &self.text[inside..end];
        let text = if doubled {
            Cow::Owned(text.replace("\"\"", "\""))
        } else {
            Cow::Borrowed(text)
        };
        Ok(Cell {
            text,
            span: start..end + 1,
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    /// The cells of a row with their places.
    type Placed = Vec<(String, Range<usize>)>;

    fn all(text: &str) -> Result<Vec<Placed>, Misquoted> {
        let mut rows = Rows::new(text);
        let mut row = Vec::new();
        let mut all = Vec::new();
        while rows.next(&mut row)? {
            all.push(
                row.iter()
                    .map(|c| (c.text.to_string(), c.span.clone()))
                    .collect(),
            );
        }
        Ok(all)
    }

    fn texts(text: &str) -> Vec<Vec<String>> {
        let rows = all(text).expect("well quoted");
        rows.into_iter()
            .map(|row| row.into_iter().map(|(text, _)| text).collect())
            .collect()
    }

    #[test]
    fn cells_and_places() {
        assert_eq!(
            all("a, b ,\r\n\"x, \"\"y\"\"\"\t,2").expect("well quoted"),
            vec![
                vec![
                    ("a".into(), 0..1),
                    ("b".into(), 3..4),
                    (String::new(), 6..6)
                ],
                vec![("x, \"y\"".into(), 8..18), ("2".into(), 20..21)],
            ]
        );
    }

    #[test]
    fn line_ends_of_any_kind() {
        for end in ["\n", "\r\n", "\r"] {
            let rows = texts(&format!("a,b{end}1,2{end}"));
            assert_eq!(rows, [["a", "b"], ["1", "2"]]);
            let rows = texts(&format!("a{end}\"1{end}2\""));
            assert_eq!(rows, [["a".to_string()], [format!("1{end}2")]]);
        }
    }

    #[test]
    fn quotes_out_of_place() {
        for (text, span) in [("a\"b", 1..2), ("x\n\"ab", 2..3), ("\"a\"b", 2..3)] {
            assert_eq!(all(text).expect_err("misquoted").span, span);
        }
    }

    proptest! {
        #[test]
        fn what_is_written_is_read(rows in prop::collection::vec(prop::collection::vec(".*", 2..4), 1..5)) {
            let line = |row: &Vec<String>| {
                let cells: Vec<String> = row.iter().map(|c| format!("\"{}\"", c.replace('"', "\"\""))).collect();
                cells.join(",")
            };
            let lines: Vec<String> = rows.iter().map(line).collect();
            prop_assert_eq!(texts(&lines.join("\r\n")), rows);
        }

        #[test]
        fn any_text_ends(text in "[a\",\r\n \u{e4}]{0,40}") {
            let _ = all(&text);
        }
    }
}
