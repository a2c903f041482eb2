//! `[ensemble]`: how many chains, how long, and where they start.

use crate::course::StartSpec;
use crate::place::{Fault, Faults};
use crate::plan::{BurnIn, Ensemble, MOST_DRAWS};
use crate::reading::{self, Files, How, Section, Value};
use std::sync::Arc;

const CHAINS: u64 = 8;
const DRAWS: u64 = 2000;
const EVERY: u64 = 1;
const BURN_IN_FROM: u64 = 1000;
const BURN_IN_AT_MOST: u64 = 20_000;
/// Counts stay exact in a double.
const LONGEST: u64 = 1 << 53;
const MOST_CHAINS: u64 = 100_000;
/// R-hat over the last half of a burn-in needs some draws.
const SHORTEST_CHOSEN: u64 = 20;

/// The start is `None` only if something is at fault in the section.
pub(super) fn read(
    root: &Section,
    files: &Files,
    faults: &mut Faults,
) -> (Ensemble, Option<StartSpec>) {
    let mut ensemble = Ensemble {
        chains: CHAINS,
        burn_in: BurnIn::Chosen {
            from: BURN_IN_FROM,
            at_most: BURN_IN_AT_MOST,
        },
        draws: DRAWS,
        every: EVERY,
    };
    if !root.has("ensemble") {
        return (ensemble, Some(StartSpec::Spread));
    }
    let before = faults.count();
    let Some(section) = root.section("ensemble", faults) else {
        return (ensemble, None);
    };
    let mut count = |key: &str, range, into: &mut u64| {
        if let Some(count) = section.count(key, range, faults) {
            *into = count;
        }
    };
    count("chains", 1..=MOST_CHAINS, &mut ensemble.chains);
    count("draws", 1..=LONGEST - 1, &mut ensemble.draws);
    count("every", 1..=1_000_000_000, &mut ensemble.every);
    let all = ensemble.chains.saturating_mul(ensemble.draws);
    if all > MOST_DRAWS {
        let place = section.key_place("draws").or(section.key_place("chains"));
        faults.push(
            Fault::at(
                place.unwrap_or_else(|| section.place().clone()),
                format!("{all} draws over all chains are too many for one estimate"),
            )
            .label(format!("at most {} a chain", MOST_DRAWS / ensemble.chains))
            .help("raise `every` to record fewer of them"),
        );
    }
    if let Some(value) = section.value("burn_in") {
        ensemble.burn_in = burn_in(&value, faults).unwrap_or(ensemble.burn_in);
    }
    let start = match section.value("start") {
        None => Some(StartSpec::Spread),
        Some(value) => start(&value, files, faults),
    };
    if let Some(StartSpec::File { path, table }) = &start
        && (table.rows as u64) < ensemble.chains
    {
        let (rows, chains) = (table.rows, ensemble.chains);
        let what = format!(
            "{} starts {rows} chains, and there are {chains}",
            table.source.name
        );
        faults.push(Fault::at(path.place.clone(), what).label("a row is needed for each chain"));
    }
    section.finish(faults);
    (ensemble, start.filter(|_| faults.count() == before))
}

/// A number of draws, or `{ from, at_most }`.
fn burn_in(value: &Value, faults: &mut Faults) -> Option<BurnIn> {
    if !value.is_table() {
        if !value.is_number() {
            value.refuse(
                "a whole number, or a table such as { from = 1000, at_most = 20000 }",
                faults,
            );
            return None;
        }
        return value.count(0..=LONGEST - 1, faults).map(BurnIn::Fixed);
    }
    let section = value.section(faults)?;
    let from = section.count("from", SHORTEST_CHOSEN..=LONGEST - 1, faults);
    let most = section.count("at_most", SHORTEST_CHOSEN..=LONGEST - 1, faults);
    section.finish(faults);
    let most_place = section.value("at_most").map(|value| value.place);
    let from = from.unwrap_or(match most {
        Some(most) if most < BURN_IN_FROM => most,
        _ => BURN_IN_FROM,
    });
    let at_most = most.unwrap_or(if from > BURN_IN_AT_MOST {
        from
    } else {
        BURN_IN_AT_MOST
    });
    if at_most < from {
        let place = most_place.unwrap_or_else(|| value.place.clone());
        faults.push(
            Fault::at(
                place,
                format!("`{}.at_most` is less than `from`", value.path),
            )
            .label(format!("must be {from} or more")),
        );
        return None;
    }
    Some(BurnIn::Chosen { from, at_most })
}

/// `"spread"`, `"prior"`, `{ at = {…} }` or `{ file = "…" }`.
fn start(value: &Value, files: &Files, faults: &mut Faults) -> Option<StartSpec> {
    if value.is_text() {
        let word = value.word(&["spread", "prior"], faults)?;
        return Some(match word {
            "prior" => StartSpec::Prior,
            _ => StartSpec::Spread,
        });
    }
    if !value.is_table() {
        value.refuse(
            "\"spread\", \"prior\", { at = {…} } or { file = \"…\" }",
            faults,
        );
        return None;
    }
    let section = value.section(faults)?;
    let at = section.value("at");
    let file = section.value("file");
    section.finish(faults);
    match (at, file) {
        (Some(at), None) => at.section(faults).map(StartSpec::At),
        (None, Some(file)) => {
            let path = file.text(faults)?;
            let how = How::default();
            let table = reading::table("start", &path, files, None, &how, faults)?;
            Some(StartSpec::File {
                path,
                table: Arc::new(table),
            })
        }
        (at, _) => {
            let what = match at {
                Some(_) => format!("`{}` has both `at` and `file`", value.path),
                None => format!("`{}` needs `at` or `file`", value.path),
            };
            faults.push(Fault::at(value.place.clone(), what).label("one of the two is needed"));
            None
        }
    }
}
