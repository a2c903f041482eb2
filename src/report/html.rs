//! Text and tables as HTML.

use super::layout::{Column, Side, cell};

/// Text that stands as it is in HTML, between tags and within quoted attributes.
pub(super) fn escape(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in cell(text).chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            '\'' => out.push_str("&#39;"),
            c => out.push(c),
        }
    }
    out
}

/// An element around text that is escaped.
pub(super) fn element(tag: &str, text: &str) -> String {
    format!("<{tag}>{}</{tag}>\n", escape(text))
}

/// The columns as a table, those without any entry left out. The first column names its rows.
pub(super) fn table(columns: &[Column]) -> String {
    let shown: Vec<&Column> = columns
        .iter()
        .enumerate()
        .filter(|(index, column)| *index == 0 || !column.is_empty())
        .map(|(_, column)| column)
        .collect();
    let Some(first) = shown.first() else {
        return String::new();
    };
    let class = |column: &Column| match column.side {
        Side::Left => "",
        Side::Right => " class=\"n\"",
    };
    let mut out = String::from("<div class=\"wide\"><table>\n<thead><tr>");
    for column in &shown {
        let lines: Vec<String> = column.heading.iter().map(|line| escape(line)).collect();
        let heading = lines.join("<br>");
        out.push_str(&format!(
            "<th scope=\"col\"{}>{heading}</th>",
            class(column)
        ));
    }
    out.push_str("</tr></thead>\n<tbody>\n");
    for (row, name) in first.cells.iter().enumerate() {
        let name = escape(name);
        out.push_str(&format!(
            "<tr><th scope=\"row\"{}>{name}</th>",
            class(first)
        ));
        for column in &shown[1..] {
            let text = column.cells.get(row).map_or(String::new(), |c| escape(c));
            out.push_str(&format!("<td{}>{text}</td>", class(column)));
        }
        out.push_str("</tr>\n");
    }
    out.push_str("</tbody></table></div>\n");
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn nothing_in_a_text_is_a_tag() {
        assert_eq!(
            escape("<a href=\"x\" id='y'>&\u{1b}"),
            "&lt;a href=&quot;x&quot; id=&#39;y&#39;&gt;&amp;\u{fffd}"
        );
    }

    #[test]
    fn empty_columns_are_left_out() {
        let column = |heading: &str, side, cells: [&str; 2]| {
            let mut column = Column::new(heading, side);
            column.cells = cells.map(String::from).into();
            column
        };
        let columns = [
            column("quantity", Side::Left, ["a<b", "c"]),
            column("unit", Side::Left, ["", ""]),
            column("value\n(error)", Side::Right, ["1", "2"]),
        ];
        let text = table(&columns);
        assert!(!text.contains("unit"), "{text}");
        assert!(
            text.contains("<th scope=\"row\">a&lt;b</th><td class=\"n\">1</td>"),
            "{text}"
        );
        assert!(text.contains("value<br>(error)"), "{text}");
    }
}
