//! The figures of one point as plain text: values beside uncertainties and intervals, then quantiles with their
//! errors, then the notes.

use super::layout::{Column, Side, cell, table, wrap};
use crate::estimates::{
    Estimate, Figure, Summary, ends, figure, place_for, r_hat_text, rounded, three_digits,
};
use crate::maths::absolute;
use crate::plan::Give;

const DASH: &str = "\u{2013}";

/// The table of figures, a table of quantiles where any are asked for, and the numbered notes.
pub fn figures_text(summary: &Summary, page: usize) -> String {
    let notes = Notes::of(summary);
    let mut out = table(&main_columns(summary, &notes), page);
    for columns in quantile_columns(summary, 4) {
        out.push('\n');
        out.push_str(&table(&columns, page));
    }
    out.push_str(&notes.text(page));
    out
}

/// The columns of the table of figures.
pub(super) fn main_columns(summary: &Summary, notes: &Notes) -> [Column; 9] {
    let interval = common_interval(summary);
    let heading = match interval {
        Some(part) => format!("{} %\ninterval", percent(part)),
        None => "interval".into(),
    };
    let mut columns = [
        Column::new("quantity", Side::Left),
        Column::new("unit", Side::Left),
        Column::new("value\n(Monte Carlo\nerror)", Side::Right),
        Column::new("standard\nuncer-\ntainty", Side::Right),
        Column::new(&heading, Side::Right),
        Column::new("R-hat", Side::Right),
        Column::new("effective\nsize:\nbulk", Side::Right),
        Column::new("tail", Side::Right),
        Column::new("notes", Side::Left),
    ];
    for (index, f) in summary.figures.iter().enumerate() {
        let e = &f.estimate;
        let asked = |wanted: Give, text: String| {
            if f.give.contains(&wanted) {
                text
            } else {
                String::new()
            }
        };
        let cells = [
            cell(&f.name),
            f.unit.as_deref().map(cell).unwrap_or_default(),
            asked(Give::Value, figure(e.value, e.mcse)),
            // The spread of 0 and 1 says nothing that the probability does not.
            if f.condition {
                String::new()
            } else {
                asked(Give::Uncertainty, e.sd.map_or(DASH.into(), three_digits))
            },
            intervals(f, interval.is_none()),
            e.r_hat.map_or(DASH.into(), r_hat_text),
            size(e.effective_bulk),
            size(e.effective_tail),
            notes.numbers(index),
        ];
        for (column, text) in columns.iter_mut().zip(cells) {
            column.cells.push(text);
        }
    }
    columns
}

/// The interval that every figure with one asks for, if it is the same.
fn common_interval(summary: &Summary) -> Option<f64> {
    let mut parts = summary
        .figures
        .iter()
        .flat_map(|f| &f.give)
        .filter_map(|g| match g {
            Give::Interval(part) => Some(*part),
            _ => None,
        });
    let first = parts.next()?;
    parts.all(|p| p == first).then_some(first)
}

fn intervals(f: &Figure, named: bool) -> String {
    let mut texts = Vec::new();
    for wanted in &f.give {
        if let Give::Interval(part) = wanted {
            let text = interval(&f.estimate, *part).unwrap_or(DASH.into());
            texts.push(if named {
                format!("{text} ({} %)", percent(*part))
            } else {
                text
            });
        }
    }
    texts.join("; ")
}

fn interval(e: &Estimate, part: f64) -> Option<String> {
    let at = |level: f64| {
        e.quantiles
            .iter()
            .find(|q| q.level == level)
            .and_then(|q| q.value)
    };
    let [low, high] = ends(part);
    let (low, high) = (at(low)?, at(high)?);
    // Of a quantity that takes whole values.
    if [low, high]
        .iter()
        .all(|x| x.fract() == 0.0 && absolute(*x) < 1e9)
    {
        return Some(format!("{low:.0} to {high:.0}"));
    }
    Some(match place_for(high - low) {
        Some(place) => format!("{} to {}", rounded(low, place), rounded(high, place)),
        None => format!("{} to {}", three_digits(low), three_digits(high)),
    })
}

/// The columns of tables of quantiles with their errors, so many levels a table.
pub(super) fn quantile_columns(summary: &Summary, levels_a_table: usize) -> Vec<Vec<Column>> {
    let mut levels: Vec<f64> = summary
        .figures
        .iter()
        .flat_map(|f| f.estimate.quantiles.iter().map(|q| q.level))
        .collect();
    levels.sort_by(f64::total_cmp);
    levels.dedup();
    let figures: Vec<&Figure> = summary
        .figures
        .iter()
        .filter(|f| !f.estimate.quantiles.is_empty())
        .collect();
    let mut tables = Vec::new();
    for some in levels.chunks(levels_a_table) {
        let mut columns = vec![
            Column::new("quantile (Monte Carlo error)", Side::Left),
            Column::new("unit", Side::Left),
        ];
        columns[0].cells = figures.iter().map(|f| cell(&f.name)).collect();
        columns[1].cells = figures
            .iter()
            .map(|f| f.unit.as_deref().map(cell).unwrap_or_default())
            .collect();
        for level in some {
            let mut column = Column::new(&level_name(*level), Side::Right);
            column.cells = figures
                .iter()
                .map(|f| {
                    let found = f.estimate.quantiles.iter().find(|q| q.level == *level);
                    found.map_or(String::new(), |q| figure(q.value, q.mcse))
                })
                .collect();
            columns.push(column);
        }
        tables.push(columns);
    }
    tables
}

fn level_name(level: f64) -> String {
    if level == 0.5 {
        "median".into()
    } else {
        format!("{} %", percent(level))
    }
}

/// A part in per cent, as short as it can be said.
fn percent(part: f64) -> String {
    let text = format!("{:.10}", part * 100.0);
    text.trim_end_matches('0').trim_end_matches('.').into()
}

/// An effective size, whole, with commas.
pub(super) fn size(x: Option<f64>) -> String {
    x.map_or(DASH.into(), |x| crate::estimates::count(x as u64))
}

/// The notes of a point, each text once, numbered.
pub(super) struct Notes {
    pub(super) texts: Vec<String>,
    /// Of each figure.
    numbers: Vec<Vec<usize>>,
}

impl Notes {
    pub(super) fn of(summary: &Summary) -> Notes {
        let mut texts: Vec<String> = Vec::new();
        let mut numbers = Vec::new();
        for f in &summary.figures {
            let mut own = Vec::new();
            for note in &f.estimate.notes {
                let text = note.to_string();
                let number = texts.iter().position(|t| *t == text).unwrap_or_else(|| {
                    texts.push(text);
                    texts.len() - 1
                });
                own.push(number + 1);
            }
            numbers.push(own);
        }
        Notes { texts, numbers }
    }

    fn numbers(&self, figure: usize) -> String {
        self.numbers[figure]
            .iter()
            .map(usize::to_string)
            .collect::<Vec<_>>()
            .join(" ")
    }

    fn text(&self, page: usize) -> String {
        let mut out = String::new();
        if !self.texts.is_empty() {
            out.push_str("\nNotes\n");
        }
        let deep = self.texts.len().to_string().len();
        for (i, text) in self.texts.iter().enumerate() {
            let line = wrap(text, page, deep + 2, deep + 2);
            out.push_str(&format!("{:>deep$}", i + 1));
            out.push_str(&line[deep..]);
        }
        out
    }
}
