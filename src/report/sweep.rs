//! A sweep as plain text: one line a point, the swept values, then value and Monte Carlo error of each
//! quantity; where points share their streams, then the differences from the first.

use super::layout::{Column, Side, cell, table, wrap};
use crate::canon::Json;
use crate::estimates::{Figure, GoalState, Summary, count, figure};
use crate::plan::Give;

/// Names are broken at this width when they head a column.
const HEADING: usize = 24;

/// Tables over the first `rows` points, as many quantities at a time as the page holds.
pub fn sweep_text(points: &[Summary], rows: usize, page: usize) -> String {
    let mut out = tables(points, rows, page, value);
    if out.contains("(?)") {
        out.push_str("(?) no error; the reasons stand in summary.csv\n");
    }
    out
}

/// The columns of the same tables, so many characters of text a table.
pub(super) fn sweep_columns(points: &[Summary], rows: usize, page: usize) -> Vec<Vec<Column>> {
    blocks(points, rows, page, value)
}

fn value(_: &Summary, _: usize, f: &Figure) -> String {
    figure(f.estimate.value, f.estimate.mcse)
}

/// The columns of the differences from the first point; none where streams are not shared.
pub(super) fn difference_columns(points: &[Summary], rows: usize, page: usize) -> Vec<Vec<Column>> {
    match points.split_first() {
        Some((_, others)) if others.iter().any(|p| p.paired.is_some()) => {
            blocks(others, rows, page, difference)
        }
        _ => Vec::new(),
    }
}

/// The differences from the first point, which is left out; nothing where streams are not shared.
pub fn differences_text(points: &[Summary], rows: usize, page: usize) -> String {
    let Some((_, others)) = points.split_first() else {
        return String::new();
    };
    if others.iter().all(|p| p.paired.is_none()) {
        return String::new();
    }
    let mut out =
        String::from("\ndifference from the first point (Monte Carlo error of the difference)\n");
    let body = tables(others, rows, page, difference);
    out.push_str(&body);
    if body.contains("(?)") || body.contains(&figure(None, None)) {
        let text = "(?) no error, \u{2013} no difference; the reasons stand in summary.csv";
        out.push_str(&wrap(text, page, 0, 0));
    }
    out.push_str(&wrap(SHARED, page, 0, 0));
    out
}

/// Stands under differences of points that share their streams.
pub(super) const SHARED: &str = "The points share their random numbers. These errors are those of chains taken in pairs, in which the \
                                 noise that both have in common cancels, and are not to be had from the errors above.";

fn difference(p: &Summary, index: usize, _: &Figure) -> String {
    let none = || figure(None, None);
    match &p.paired {
        Some(paired) => match &paired.differences {
            Ok(all) => all[index]
                .as_ref()
                .map_or_else(none, |d| figure(d.value, d.mcse)),
            Err(_) => none(),
        },
        None => none(),
    }
}

/// The tables, then how many points they leave out.
fn tables(
    points: &[Summary],
    rows: usize,
    page: usize,
    text: impl Fn(&Summary, usize, &Figure) -> String,
) -> String {
    let blocks = blocks(points, rows, page, text);
    let tables: Vec<String> = blocks.iter().map(|block| table(block, page)).collect();
    let mut out = tables.join("\n");
    if rows < points.len() {
        out.push_str(&format!(
            "... and {} more points\n",
            count((points.len() - rows) as u64)
        ));
    }
    out
}

/// A column a quantity, its cells from the point, the index of the figure and the figure; as many columns a table as
/// the page holds, the swept values before them.
fn blocks(
    points: &[Summary],
    rows: usize,
    page: usize,
    text: impl Fn(&Summary, usize, &Figure) -> String,
) -> Vec<Vec<Column>> {
    let shown = &points[..if rows < points.len() {
        rows
    } else {
        points.len()
    }];
    let mut columns: Vec<Column> = Vec::new();
    for (name, unit) in quantities(points) {
        let unit = unit.map_or(String::new(), |u| format!("\n{u}"));
        let heading = wrap(&name, HEADING, 0, 0);
        let mut column = Column::new(&format!("{}{unit}", heading.trim_end()), Side::Right);
        column.cells = shown
            .iter()
            .map(|p| {
                let mut figures = p.figures.iter().enumerate();
                let found = figures.find(|(_, f)| cell(&f.name) == name);
                found.map_or(String::new(), |(index, f)| text(p, index, f))
            })
            .collect();
        columns.push(column);
    }
    let mut blocks = Vec::new();
    let mut left = columns.into_iter().peekable();
    while left.peek().is_some() {
        let mut block = axes(shown);
        let mut wide: usize = block.iter().map(|c| c.wide() + 2).sum();
        let narrow = block.len();
        while let Some(next) = left.peek() {
            wide += next.wide() + 2;
            if wide > page + 2 && block.len() > narrow {
                break;
            }
            block.extend(left.next());
        }
        blocks.push(block);
    }
    blocks
}

/// Quantities whose value is asked for, in the order of their first appearance.
fn quantities(points: &[Summary]) -> Vec<(String, Option<String>)> {
    let mut out: Vec<(String, Option<String>)> = Vec::new();
    for f in points
        .iter()
        .flat_map(|p| &p.figures)
        .filter(|f| f.give.contains(&Give::Value))
    {
        let name = cell(&f.name);
        if out.iter().all(|(n, _)| *n != name) {
            out.push((name, f.unit.as_deref().map(cell)));
        }
    }
    out
}

/// The swept values, by the last part of their paths where that is enough; and the goal, where one was missed.
fn axes(points: &[Summary]) -> Vec<Column> {
    let paths: Vec<&str> = points.first().map_or(Vec::new(), |p| {
        p.values.iter().map(|(k, _)| k.as_str()).collect()
    });
    let last = |path: &str| path.rsplit('.').next().unwrap_or(path).to_string();
    let mut columns: Vec<Column> = paths
        .iter()
        .enumerate()
        .map(|(axis, path)| {
            let short = last(path);
            let unique = paths.iter().filter(|p| last(p) == short).count() == 1;
            let mut column = Column::new(&cell(if unique { &short } else { path }), Side::Left);
            column.cells = points
                .iter()
                .map(|p| {
                    p.values
                        .get(axis)
                        .map_or(String::new(), |(_, v)| value_text(v))
                })
                .collect();
            column
        })
        .collect();
    if points.iter().any(|p| p.goal == GoalState::Missed) {
        let mut column = Column::new("goal", Side::Left);
        column.cells = points.iter().map(|p| p.goal.word().into()).collect();
        columns.push(column);
    }
    columns
}

pub(super) fn value_text(value: &Json) -> String {
    match value {
        Json::Text(text) => cell(text),
        other => other.canonical(),
    }
}
