//! `[data.NAME]`: which file, and how it is to be read.

use crate::place::{Fault, Faults, Text};
use crate::reading::Files;
use crate::reading::file::{self, LARGEST_DATA};
use crate::reading::load::{How, Missing, load};
use crate::reading::{Section, Table};
use std::path::Path;

/// Reads a section `[data.NAME]` and the file it names; the file is one of `files`. A table is given
/// even where faults were recorded, if its cells are sound: what else a study says of it can then be looked at.
pub fn data(name: &str, section: &Section, files: &Files, faults: &mut Faults) -> Option<Table> {
    let path = section
        .need(
            "file",
            "the path of a CSV file, relative to the study",
            faults,
        )
        .and_then(|value| value.text(faults));
    let pinned = section.text("sha256", faults);
    let how = how(section, faults);
    section.finish(faults);
    table(name, &path?, files, pinned.as_ref(), &how, faults)
}

/// Reads a data file by its path; a fault of the file as a whole is shown at the path.
pub fn table(
    name: &str,
    path: &Text,
    files: &Files,
    pinned: Option<&Text>,
    how: &How,
    faults: &mut Faults,
) -> Option<Table> {
    let found = files.find(&path.text);
    let read = found.and_then(|at| Ok((file::read(&at, LARGEST_DATA)?, at)));
    let (read, at) = match read {
        Ok(read) => read,
        Err(what) => {
            faults.push(
                Fault::at(path.place.clone(), what)
                    .label("this file")
                    .help("paths are relative to the folder of the study"),
            );
            return None;
        }
    };
    if let Some(pinned) = pinned {
        check(pinned, &read.sha256, &at, faults);
    }
    match file::text(read.bytes, &at.display().to_string()) {
        Ok(source) => load(name, source, read.sha256, how, faults),
        Err(fault) => {
            faults.push(fault);
            None
        }
    }
}

fn check(pinned: &Text, found: &str, at: &Path, faults: &mut Faults) {
    let wanted = pinned.text.trim().to_ascii_lowercase();
    if wanted.len() != 64 || !wanted.bytes().all(|b| b.is_ascii_hexdigit()) {
        faults.push(
            Fault::at(
                pinned.place.clone(),
                "`sha256` must be 64 hexadecimal digits",
            )
            .label("not a SHA-256"),
        );
    } else if wanted != found {
        faults.push(
            Fault::at(
                pinned.place.clone(),
                format!(
                    "{} is not the file that the study was written for",
                    at.display()
                ),
            )
            .label("the SHA-256 wanted")
            .help(format!(
                "its SHA-256 is {found}: put that here only if the change is meant"
            )),
        );
    }
}

fn how(section: &Section, faults: &mut Faults) -> How {
    let missing = match section.word("missing", &["fault", "drop rows", "unknown"], faults) {
        Some("drop rows") => Missing::DropRows,
        Some("unknown") => Missing::Unknown,
        Some(_) => Missing::Fault,
        // A word at fault: no complaint of cells that it was meant for.
        None if section.has("missing") => Missing::Unknown,
        None => Missing::Fault,
    };
    let mut units = Vec::new();
    if let Some(unit) = section.section("unit", faults) {
        for (column, value) in unit.entries() {
            units.extend(value.text(faults).map(|text| (column, text)));
        }
    }
    let mut matrices = Vec::new();
    if let Some(matrix) = section.section("matrix", faults) {
        for (name, value) in matrix.entries() {
            let patterns = if value.is_list() {
                value.texts(faults)
            } else {
                value.text(faults).map(|pattern| vec![pattern])
            };
            matrices.extend(patterns.map(|patterns| (name, patterns)));
        }
    }
    How {
        names: section.text("names", faults),
        columns: section.texts("columns", faults),
        labels: section.texts("labels", faults).unwrap_or_default(),
        missing,
        units,
        matrices,
    }
}
