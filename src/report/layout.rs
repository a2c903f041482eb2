//! Cells, columns and wrapped lines of plain text, by the width that characters take on a terminal.

use unicode_width::{UnicodeWidthChar, UnicodeWidthStr};

/// Text for one cell: control characters, which would break the line, are shown as a replacement mark.
pub(super) fn cell(text: &str) -> String {
    text.chars()
        .map(|c| if c.is_control() { '\u{fffd}' } else { c })
        .collect()
}

pub(super) fn width(text: &str) -> usize {
    text.width()
}

#[derive(Clone, Copy, PartialEq, Eq)]
pub(super) enum Side {
    Left,
    Right,
}

/// Filled up with blanks on the other side.
pub(super) fn pad(text: &str, to: usize, side: Side) -> String {
    let blank = " ".repeat(to.saturating_sub(width(text)));
    match side {
        Side::Left => format!("{text}{blank}"),
        Side::Right => format!("{blank}{text}"),
    }
}

/// One column of a table.
pub(super) struct Column {
    /// Lines of the heading; shorter headings stand at the bottom.
    pub(super) heading: Vec<String>,
    pub(super) side: Side,
    pub(super) cells: Vec<String>,
}

impl Column {
    pub(super) fn new(heading: &str, side: Side) -> Column {
        Column {
            heading: heading.split('\n').map(String::from).collect(),
            side,
            cells: Vec::new(),
        }
    }

    pub(super) fn is_empty(&self) -> bool {
        self.cells.iter().all(String::is_empty)
    }

    pub(super) fn wide(&self) -> usize {
        self.heading
            .iter()
            .chain(&self.cells)
            .map(|c| width(c))
            .max()
            .unwrap_or(0)
    }
}

const GAP: usize = 2;

/// The columns side by side, those without any entry left out. Names too long for the page stand on a line of
/// their own, above the rest of their row.
pub(super) fn table(columns: &[Column], page: usize) -> String {
    let (first, rest) = match columns.split_first() {
        Some((first, rest)) => (
            first,
            rest.iter().filter(|c| !c.is_empty()).collect::<Vec<_>>(),
        ),
        None => return String::new(),
    };
    let rest: Vec<(&Column, usize)> = rest.into_iter().map(|c| (c, c.wide())).collect();
    let others: usize = rest.iter().map(|(_, wide)| wide + GAP).sum();
    let room = page.saturating_sub(others).max(12);
    // As wide as the longest name that fits.
    let fits = |c: &&String| width(c) <= room;
    let names = first
        .heading
        .iter()
        .chain(&first.cells)
        .filter(fits)
        .map(|c| width(c))
        .max()
        .unwrap_or(0);
    let mut out = String::new();
    let height = columns.iter().map(|c| c.heading.len()).max().unwrap_or(0);
    for line in 0..height {
        let head = |c: &Column| {
            let blank = height - c.heading.len();
            line.checked_sub(blank)
                .map_or(String::new(), |i| c.heading[i].clone())
        };
        push(&mut out, &head(first), names, &rest, head);
    }
    for (row, name) in first.cells.iter().enumerate() {
        let mut name = name.as_str();
        if width(name) > names {
            for line in wrap(name, page, 0, 4).lines() {
                out.push_str(line);
                out.push('\n');
            }
            name = "";
        }
        push(&mut out, name, names, &rest, |c| c.cells[row].clone());
    }
    out
}

fn push(
    out: &mut String,
    name: &str,
    names: usize,
    rest: &[(&Column, usize)],
    of: impl Fn(&Column) -> String,
) {
    let mut line = pad(name, names, Side::Left);
    for (column, wide) in rest {
        line.push_str(&" ".repeat(GAP));
        line.push_str(&pad(&of(column), *wide, column.side));
    }
    out.push_str(line.trim_end());
    out.push('\n');
}

/// Text broken at blanks to a page width: the first line indented by `first`, the others by `later`. Words
/// longer than a line are cut.
pub(super) fn wrap(text: &str, page: usize, first: usize, later: usize) -> String {
    let mut out = " ".repeat(first);
    let mut at = first;
    let mut fresh = true;
    // A per cent sign stays with its number.
    let text = text.replace(" %", "\u{a0}%");
    for word in text
        .split([' ', '\n', '\t'])
        .filter(|word| !word.is_empty())
    {
        if !fresh && at + 1 + width(word) > page {
            out.push('\n');
            out.push_str(&" ".repeat(later));
            at = later;
            fresh = true;
        }
        if !fresh {
            out.push(' ');
            at += 1;
        }
        for c in word.chars() {
            let wide = c.width().unwrap_or(0);
            if at + wide > page && at > later {
                out.push('\n');
                out.push_str(&" ".repeat(later));
                at = later;
            }
            out.push(if c == '\u{a0}' { ' ' } else { c });
            at += wide;
        }
        fresh = false;
    }
    out.push('\n');
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn wide_and_combining_characters_keep_columns_straight() {
        let mut name = Column::new("quantity", Side::Left);
        name.cells = ["rate[\"泵站\"]", "rate[\"e\u{301}\"]", "b"]
            .map(String::from)
            .into();
        let mut value = Column::new("value", Side::Right);
        value.cells = ["1.0", "22.0", "3"].map(String::from).into();
        assert_eq!(
            table(&[name, value], 40),
            "quantity      value\nrate[\"泵站\"]    1.0\nrate[\"e\u{301}\"]      22.0\nb                 3\n"
        );
    }

    #[test]
    fn long_names_stand_alone() {
        let mut name = Column::new("quantity", Side::Left);
        name.cells = vec![
            "a".into(),
            "a_very_long_name_that_does_not_fit_beside_its_value".into(),
        ];
        let mut value = Column::new("value", Side::Right);
        value.cells = ["1.0", "2.0"].map(String::from).into();
        assert_eq!(
            table(&[name, value], 30),
            "quantity  value\na           1.0\na_very_long_name_that_does_not\n    _fit_beside_its_value\n            2.0\n"
        );
    }

    #[test]
    fn control_characters_do_not_break_lines() {
        assert_eq!(cell("a\nb\u{1b}[0m"), "a\u{fffd}b\u{fffd}[0m");
    }

    #[test]
    fn wrapping() {
        assert_eq!(wrap("at 97.5 % now", 8, 0, 0), "at\n97.5 %\nnow\n");
        assert_eq!(wrap("one two three", 9, 2, 4), "  one two\n    three\n");
    }
}
