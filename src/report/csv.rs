//! `summary.csv` (RFC 4180): a line a figure and point.

use crate::canon::Json;
use crate::estimates::{Difference, Note, Summary};

/// Columns: the key of the point, a column a swept path, the goal, name and unit, then the figures, then value
/// and Monte Carlo error of every quantile level that any figure has, then the notes; where points share their
/// streams, then the difference from the first point, its error and its notes. An empty cell is a figure that does
/// not exist or was not asked for.
pub fn summary_csv(points: &[Summary]) -> String {
    let mut levels: Vec<f64> = points
        .iter()
        .flat_map(|p| {
            p.figures
                .iter()
                .flat_map(|f| f.estimate.quantiles.iter().map(|q| q.level))
        })
        .collect();
    levels.sort_by(f64::total_cmp);
    levels.dedup();
    let axes: Vec<&str> = points.first().map_or(Vec::new(), |p| {
        p.values.iter().map(|(k, _)| k.as_str()).collect()
    });
    let mut out = String::new();
    let mut header: Vec<String> = vec!["point".into()];
    header.extend(axes.iter().map(|a| a.to_string()));
    let fixed = [
        "draws_per_chain",
        "burn_in",
        "goal",
        "name",
        "unit",
        "value",
        "mcse",
        "sd",
        "r_hat",
        "effective_bulk",
        "effective_tail",
    ];
    header.extend(fixed.map(String::from));
    for level in &levels {
        header.push(format!("q{level}"));
        header.push(format!("q{level}_mcse"));
    }
    header.push("notes".into());
    let paired = points.iter().any(|p| p.paired.is_some());
    if paired {
        header.extend(["difference", "difference_mcse", "difference_notes"].map(String::from));
    }
    line(&mut out, header);
    for p in points {
        for (index, f) in p.figures.iter().enumerate() {
            let e = &f.estimate;
            let mut cells = vec![p.key.clone()];
            cells.extend(
                (0..axes.len())
                    .map(|axis| p.values.get(axis).map_or(String::new(), |(_, v)| plain(v))),
            );
            cells.extend([
                p.draws_per_chain.to_string(),
                p.burn_in.to_string(),
                p.goal.word().into(),
                f.name.clone(),
                f.unit.clone().unwrap_or_default(),
            ]);
            for x in [
                e.value,
                e.mcse,
                e.sd,
                e.r_hat,
                e.effective_bulk,
                e.effective_tail,
            ] {
                cells.push(number(x));
            }
            for level in &levels {
                let q = e.quantiles.iter().find(|q| q.level == *level);
                cells.push(number(q.and_then(|q| q.value)));
                cells.push(number(q.and_then(|q| q.mcse)));
            }
            cells.push(notes(&e.notes));
            if paired {
                cells.extend(difference(p, index));
            }
            line(&mut out, cells);
        }
    }
    out
}

fn notes(notes: &[Note]) -> String {
    let texts: Vec<String> = notes.iter().map(Note::to_string).collect();
    texts.join("; ")
}

/// A difference from the first point, its error and its notes, or why there is none.
fn difference(p: &Summary, figure: usize) -> [String; 3] {
    let nothing = || [String::new(), String::new(), String::new()];
    match p.paired.as_ref().map(|paired| &paired.differences) {
        None => nothing(),
        Some(Err(reason)) => [String::new(), String::new(), reason.clone()],
        Some(Ok(all)) => all[figure].as_ref().map_or_else(nothing, |d: &Difference| {
            [number(d.value), number(d.mcse), notes(&d.notes)]
        }),
    }
}

fn number(x: Option<f64>) -> String {
    x.filter(|x| !x.is_nan())
        .map_or(String::new(), |x| plain(&Json::real(x)))
}

fn plain(value: &Json) -> String {
    match value {
        Json::Text(text) => text.clone(),
        other => other.canonical(),
    }
}

fn line(out: &mut String, cells: Vec<String>) {
    let quoted: Vec<String> = cells
        .iter()
        .map(|c| {
            if c.contains([',', '"', '\n', '\r']) {
                format!("\"{}\"", c.replace('"', "\"\""))
            } else {
                c.clone()
            }
        })
        .collect();
    out.push_str(&quoted.join(","));
    out.push_str("\r\n");
}
