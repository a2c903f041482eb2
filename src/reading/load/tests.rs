//! Data files, whole and broken, as a section `[data.t]` reads them.

use crate::place::{Fault, Faults, Source};
use crate::reading::{Cells, Files, Section, Table, data, parse};
use proptest::prelude::*;
use std::fs;
use std::sync::Arc;

/// The table that `[data.t]` with these further lines reads from these bytes.
fn read(section: &str, bytes: &[u8]) -> Result<Table, Vec<Fault>> {
    let folder = tempfile::tempdir().expect("a temporary folder");
    fs::write(folder.path().join("t.csv"), bytes).expect("writable");
    let source = Arc::new(Source {
        name: "study.toml".into(),
        text: format!("[data.t]\nfile = \"t.csv\"\n{section}"),
    });
    let mut faults = Faults::default();
    let root = parse(&source, &mut faults);
    let named = root.section("data", &mut faults).expect("a table");
    let section: Section = named.section("t", &mut faults).expect("a table");
    let files = Files::Folder(folder.path().into());
    let table = data("t", &section, &files, &mut faults);
    match table {
        Some(table) if faults.is_empty() => Ok(table),
        _ => Err(faults.sorted()),
    }
}

fn good(section: &str, text: &str) -> Table {
    read(section, text.as_bytes()).unwrap_or_else(|faults| panic!("{faults:#?}"))
}

/// What each fault says (without the folder), at which line and column, under which mark.
fn told(section: &str, bytes: &[u8]) -> Vec<(String, usize, usize)> {
    let faults = read(section, bytes).expect_err("a faulty file");
    faults
        .into_iter()
        .map(|fault| {
            let place = fault.place.expect("a place");
            let (line, column) = place.line_column();
            let words = fault.what.split(' ').map(|word| match word.rfind('/') {
                Some(at) if word.ends_with("t.csv") => &word[at + 1..],
                _ => word,
            });
            let what: Vec<&str> = words.collect();
            (what.join(" "), line, column)
        })
        .collect()
}

fn numbers(table: &Table, column: &str) -> (Vec<f64>, Vec<usize>) {
    match &table.column(column).expect("a column").cells {
        Cells::Numbers { values, missing } => (values.to_vec(), missing.clone()),
        Cells::Labels { .. } => panic!("labels"),
    }
}

fn labels(table: &Table, column: &str) -> (Vec<String>, Vec<usize>) {
    match &table.column(column).expect("a column").cells {
        Cells::Labels { levels, index } => (levels.clone(), index.clone()),
        Cells::Numbers { .. } => panic!("numbers"),
    }
}

#[test]
fn numbers_labels_names_units_and_matrices() {
    let table = good(
        "names = \"station\"\nunit.hours = \"h\"\nmatrix.x = \"x*\"\nmatrix.y = [\"x2\", \"hours\"]\n",
        "\u{feff}station,site,hours,x1,x2\r\nCawdle,b,1e3,1,-2\r\n\"Marl, End\",a,.5,+3,4.\r\n\r\nTye,b,7,5,6",
    );
    assert_eq!(table.rows, 3);
    assert_eq!(
        table.names.as_ref().expect("names").values,
        ["Cawdle", "Marl, End", "Tye"]
    );
    assert_eq!(table.row("Tye"), Some(2));
    // Levels stand in the order of their first appearance.
    assert_eq!(
        labels(&table, "site"),
        (vec!["b".into(), "a".into()], vec![0, 1, 0])
    );
    assert_eq!(numbers(&table, "hours"), (vec![1000.0, 0.5, 7.0], vec![]));
    assert_eq!(
        table.column("hours").expect("a column").unit.as_deref(),
        Some("h")
    );
    let columns = |name: &str| table.matrix_columns(table.matrix(name).expect("a matrix"));
    assert_eq!(columns("x"), ["x1", "x2"]);
    assert_eq!(columns("y"), ["hours", "x2"]);
    let cell = table.cell(1, table.column("x1").expect("a column"));
    assert_eq!(&table.source.text[cell.span.clone()], "+3");
    assert_eq!(cell.line_column(), (3, 18));
}

#[test]
fn empty_cells_as_the_study_says() {
    let text = "a,b,s\n1,2,u\n,3,v\n4,,u\n5,6,u\n";
    assert_eq!(
        told("", text.as_bytes()),
        [
            ("row 2 of `a` in t.csv is empty".into(), 3, 1),
            ("row 3 of `b` in t.csv is empty".into(), 4, 3)
        ]
    );
    let table = good("missing = \"drop rows\"\n", text);
    assert_eq!(numbers(&table, "a"), (vec![1.0, 5.0], vec![]));
    assert_eq!((table.missing, table.dropped.as_slice()), (2, &[2, 3][..]));
    let cell = table.cell(1, table.column("b").expect("a column"));
    assert_eq!(&table.source.text[cell.span], "6");
    let table = good("missing = \"unknown\"\n", text);
    assert_eq!(numbers(&table, "a"), (vec![1.0, 0.0, 4.0, 5.0], vec![1]));
    assert_eq!((table.missing, table.dropped.len()), (2, 0));
    // A column that is not read may be as it likes.
    let table = good("columns = [\"s\"]\n", text);
    assert_eq!(table.columns.len(), 1);
    let faults = told("missing = \"unknown\"\n", b"s,a\nx,1\n,2\n");
    assert_eq!(
        faults[0].0,
        "row 2 of `s` in t.csv is empty, and a label cannot be an unknown"
    );
    let faults = told("missing = \"drop rows\"\n", b"a,b\n,1\n2,\n");
    assert_eq!(
        faults[0].0,
        "every row of t.csv has an empty cell and was dropped"
    );
}

#[test]
fn a_single_column_has_empty_lines_for_empty_cells() {
    assert_eq!(
        told("", b"a\n1\n\n2\n\n\n"),
        [("row 2 of `a` in t.csv is empty".into(), 3, 1)]
    );
}

#[test]
fn what_is_not_a_number_is_shown_at_its_cell() {
    assert_eq!(
        told("", "a,b\n1,1\nNA,2\n3,inf\nnan,1e999\n5,\"6\"\n".as_bytes()),
        [
            ("row 2 of `a` in t.csv is not a number: `NA`".into(), 3, 1),
            (
                "row 3 of `b` in t.csv is not a finite number: `inf`".into(),
                4,
                3
            ),
            (
                "row 4 of `a` in t.csv is not a finite number: `nan`".into(),
                5,
                1
            ),
            (
                "row 4 of `b` in t.csv is not a finite number: `1e999`".into(),
                5,
                5
            ),
        ]
    );
    // Many are counted.
    let text = format!("a\n{}{}", "1\n".repeat(10), "x\n".repeat(9));
    let faults = told("", text.as_bytes());
    assert_eq!(faults.len(), 4);
    assert_eq!(faults[0].0, "`a` in t.csv has 6 more such cells");
}

#[test]
fn labels_that_look_like_numbers_are_named() {
    let table = good("labels = [\"batch\"]\n", "batch,y\n2,1\n1,2\n2,3\n");
    assert_eq!(
        labels(&table, "batch"),
        (vec!["2".into(), "1".into()], vec![0, 1, 0])
    );
    // Most cells decide.
    let table = good("", "code\nA1\n12\nB7\n");
    assert_eq!(labels(&table, "code").0, ["A1", "12", "B7"]);
}

#[test]
fn malformed_files() {
    let one = |section: &str, bytes: &[u8]| told(section, bytes).remove(0);
    assert_eq!(one("", b""), ("t.csv is empty".into(), 1, 1));
    assert_eq!(one("", b"\n \n"), ("t.csv is empty".into(), 1, 1));
    assert_eq!(
        one("", b"a,b\n"),
        ("t.csv has no rows below its first line".into(), 1, 1)
    );
    assert_eq!(
        one("", b"a,,b\n1,2,3\n"),
        ("column 2 of t.csv has no name".into(), 1, 3)
    );
    assert_eq!(
        one("", b"a,b,a\n1,2,3\n"),
        ("t.csv has two columns called `a`".into(), 1, 5)
    );
    assert_eq!(
        one("", b"a;b\n1,5;2\n"),
        (
            "the columns of t.csv are not separated by commas".into(),
            1,
            2
        )
    );
    assert_eq!(
        one("", b"a,b\n1,2\n1,2,3\n"),
        (
            "row 2 of t.csv has 3 cells where the first line has 2".into(),
            3,
            1
        )
    );
    assert_eq!(
        one("", b"a,b\n1,\"2\n3,4\n"),
        ("t.csv has a quote that is never closed".into(), 2, 3)
    );
    assert_eq!(
        one("", b"a,b\n1,2\"\n"),
        ("t.csv has a quote in the middle of a cell".into(), 2, 4)
    );
    assert_eq!(
        one("names = \"a\"\n", b"a,b\nx,1\ny,2\nx,3\n"),
        ("two rows of t.csv are called `x`".into(), 4, 1)
    );
    assert_eq!(
        told("names = \"a\"\n", b"a,b\nx,1\ny,2\nx,3\ny,4\nx,4\nx,5\n"),
        [(
            "rows of t.csv are called like rows before them: row 3 `x`, row 4 `y`, and so 2 more"
                .into(),
            4,
            1
        )]
    );
    let latin = one("", b"a,b\n1,\xfc\n");
    assert!(
        latin
            .0
            .ends_with("t.csv is not UTF-8: byte 0xFC at offset 6"),
        "{latin:?}"
    );
    assert_eq!((latin.1, latin.2), (2, 3));
}

#[test]
fn what_the_study_says_of_columns_must_fit() {
    let text = b"hours,site,x1\n1,a,2\n";
    for (section, what) in [
        ("unit.hors = \"h\"", "t.csv has no column `hors`"),
        ("names = \"station\"", "t.csv has no column `station`"),
        ("columns = [\"x\"]", "t.csv has no column `x`"),
        ("labels = [\"y\"]", "t.csv has no column `y`"),
        ("matrix.m = \"z*\"", "no column of t.csv fits `z*`"),
        (
            "matrix.m = \"*\"",
            "`*` takes in the column `site`, which holds labels, not numbers",
        ),
        (
            "matrix.hours = \"x*\"",
            "`hours` is a column of t.csv already",
        ),
        (
            "columns = [\"x1\"]\nunit.hours = \"h\"",
            "the column `hours` is not among those that are read",
        ),
        ("missing = \"drop\"", "`data.t.missing` cannot be `drop`"),
        ("sha256 = \"12\"", "`sha256` must be 64 hexadecimal digits"),
    ] {
        let faults = told(section, text);
        assert_eq!(faults[0].0, what);
        assert!(faults[0].1 >= 3, "shown in the study");
    }
}

#[test]
fn pinned_bytes() {
    let text = "a\n1\n";
    let sha256 = good("", text).sha256;
    assert_eq!(sha256, crate::canon::sha256_hex(text.as_bytes()));
    good(&format!("sha256 = \"{}\"", sha256.to_uppercase()), text);
    let faults = read(&format!("sha256 = \"{sha256}\""), b"a\n2\n").expect_err("other bytes");
    assert!(
        faults[0]
            .what
            .ends_with("is not the file that the study was written for")
    );
}

#[test]
fn globs() {
    for (pattern, name, fits) in [
        ("x*", "x1", true),
        ("x*", "x", true),
        ("x*", "ax", false),
        ("*", "", true),
        ("x", "x", true),
        ("x", "x1", false),
        ("*x*y", "axby", true),
        ("*x*y", "axbyz", false),
        ("a*a", "a", false),
        ("a**b", "ab", true),
    ] {
        assert_eq!(super::glob(pattern, name), fits, "{pattern} {name}");
    }
}

proptest! {
    #[test]
    fn any_bytes_are_read_or_refused(bytes in prop::collection::vec(
        prop::sample::select(b"a1,\"\n\r .-e\xc3\xa4".to_vec()), 0..60
    )) {
        if let Ok(table) = read("missing = \"unknown\"\n", &bytes) {
            for column in &table.columns {
                for row in 0..table.rows {
                    let cell = table.cell(row, column);
                    prop_assert!(cell.span.end <= table.source.text.len());
                }
            }
        }
    }
}
