//! Sections and their values, with the places of what is wrong.

use super::{Content, Section, Value, parse};
use crate::place::{Fault, Faults, Place, Source};
use proptest::prelude::*;
use std::sync::Arc;

fn read(text: &str) -> (Section, Faults) {
    let source = Arc::new(Source {
        name: "study.toml".into(),
        text: text.into(),
    });
    let mut faults = Faults::default();
    let section = parse(&source, &mut faults);
    (section, faults)
}

fn written(place: &Place) -> &str {
    &place.source.text[place.span.clone()]
}

/// What each fault says, and the text it marks.
fn told(faults: Faults) -> Vec<(String, String)> {
    let told = |fault: Fault| {
        let marked = fault.place.as_ref().map(|place| written(place).to_string());
        (fault.what, marked.unwrap_or_default())
    };
    faults.sorted().into_iter().map(told).collect()
}

fn pair(what: &str, marked: &str) -> (String, String) {
    (what.into(), marked.into())
}

#[test]
fn getters_read_what_is_there() {
    let (root, mut faults) = read(
        "text = \"a\\u00e4b\"\nwhole = 1_000\nreal = 2.5e3\nyes = true\nlist = [1, 2.5]\n\
         [table.inner]\nword = 'own'\n[[many]]\nx = 0x10\n[[many]]\nx = -3\n",
    );
    let faults = &mut faults;
    assert_eq!(root.text("text", faults).expect("text").text, "aäb");
    assert_eq!(root.number("whole", faults), Some(1000.0));
    assert_eq!(root.count("whole", 0..=1000, faults), Some(1000));
    assert_eq!(root.count("real", 0..=3000, faults), Some(2500));
    assert_eq!(root.positive("real", faults), Some(2500.0));
    assert_eq!(root.boolean("yes", faults), Some(true));
    let list = root.value("list").expect("a list");
    assert_eq!(list.numbers(faults), Some(vec![1.0, 2.5]));
    let table = root.section("table", faults).expect("a table");
    let inner = table.section("inner", faults).expect("a table");
    assert_eq!(inner.path(), "table.inner");
    assert_eq!(inner.word("word", &["own", "shared"], faults), Some("own"));
    let many = root.sections("many", faults);
    let xs: Vec<_> = many.iter().map(|m| m.number("x", faults)).collect();
    assert_eq!(xs, [Some(16.0), Some(-3.0)]);
    assert_eq!(many[1].called(), "[[many]]");
    assert_eq!(root.text("absent", faults), None);
    root.finish(faults);
    assert!(faults.is_empty(), "{faults:?}");
}

#[test]
fn wrong_values_are_told_with_their_places() {
    let (root, mut faults) = read(
        "a = 1\nb = \"x\"\nc = nan\nd = 99999999999999999999\ne = 1e999\nf = 2020-01-01\n\
         g = [1, \"x\"]\nh = { i = 0 }\nj = -0.5\n",
    );
    let list = &mut faults;
    root.text("a", list);
    root.number("b", list);
    root.number("c", list);
    root.number("d", list);
    root.number("e", list);
    root.text("f", list);
    root.value("g").expect("there").numbers(list);
    root.sections("h", list);
    root.positive("j", list);
    root.count("j", 1..=5, list);
    root.finish(list);
    assert_eq!(
        told(faults),
        [
            pair("`a` must be text in quotes, not a number", "1"),
            pair("`b` must be a number, not text", "\"x\""),
            pair("`c` must be a finite number", "nan"),
            pair(
                "`d` does not fit into 64 bits with a sign",
                "99999999999999999999"
            ),
            pair("`e` is beyond the largest double", "1e999"),
            pair(
                "`f` must be text in quotes, not a date or time",
                "2020-01-01"
            ),
            pair("`g[2]` must be a number, not text", "\"x\""),
            pair("`h` must be an array of tables", "{ i = 0 }"),
            pair("`j` must be above 0", "-0.5"),
            pair("`j` must be a whole number, not -0.5", "-0.5"),
        ]
    );
}

#[test]
fn keys_nobody_asked_for_are_faults() {
    let (root, mut faults) = read("[sampler]\nscael = 1\nmethod = \"slice\"\nzzz = 1\n");
    let sampler = root.section("sampler", &mut faults).expect("a table");
    sampler.number("scale", &mut faults);
    sampler.text("method", &mut faults);
    sampler.finish(&mut faults);
    let help: Vec<_> = faults.0.iter().map(|fault| fault.help.clone()).collect();
    assert_eq!(
        help,
        [
            Some("did you mean `scale`?".into()),
            Some("keys known here: `method` and `scale`".into())
        ]
    );
    assert_eq!(
        told(faults),
        [
            pair("`scael` is not a key of [sampler]", "scael"),
            pair("`zzz` is not a key of [sampler]", "zzz")
        ]
    );
}

#[test]
fn every_fault_of_syntax_and_no_want_of_lost_keys() {
    let (root, mut faults) = read("a = = 1\n[b\nc = 'x\n");
    // Of the two on the first line one is told.
    assert_eq!(faults.0.len(), 2, "{faults:?}");
    let before = faults.0.len();
    root.need("d", "a key", &mut faults);
    assert_eq!(faults.0.len(), before);
}

#[test]
fn forgotten_quotes_are_one_fault_a_line() {
    let (_, faults) = read(
        "a = { law = normal(mean = 0, sd = 10), per = 4 }\nb = t.x\nc = \"x = y(1)\"\nd = x[\"n\"]\n",
    );
    let found: Vec<(&str, Option<&str>)> = faults
        .0
        .iter()
        .map(|fault| (fault.what.as_str(), fault.help.as_deref()))
        .collect();
    let what = "text without quotes";
    assert_eq!(
        found,
        [
            (what, Some("write law = \"normal(mean = 0, sd = 10)\"")),
            (what, Some("write b = \"t.x\"")),
            (what, Some("write d = 'x[\"n\"]'")),
        ]
    );
}

#[test]
fn a_brace_left_open_is_one_fault() {
    let (root, faults) =
        read("a = 1\nb = { law = \"x\", per = 4\nc = \"y\"\n[d]\ne = { f = 1 }\n[[g]]\nh = 1\n");
    assert!(root.damaged());
    assert_eq!(told(faults), [pair("this brace is not closed", "{")]);
}

#[test]
fn entries_come_in_order_of_name() {
    let (root, _) = read("b = 1\na = 2\nc.d = 3\n");
    let names: Vec<String> = root
        .entries()
        .into_iter()
        .map(|(key, _)| key.text)
        .collect();
    assert_eq!(names, ["a", "b", "c"]);
    let order: Vec<&str> = root
        .tree()
        .entries
        .iter()
        .map(|e| e.key.text.as_str())
        .collect();
    assert_eq!(order, ["b", "a", "c"]);
}

/// A piece of a decoded text leads back to the same piece in the file.
#[test]
fn places_inside_texts() {
    for (toml, piece, marked) in [
        ("a = \"1 + bad\"", "bad", "bad"),
        ("a = '1 + bad'", "bad", "bad"),
        ("a = \"ä \\\"x\\\" bad\"", "bad", "bad"),
        ("a = \"\\u00e4 b\\u0061d\"", "bad", "b\\u0061d"),
        ("a = \"\"\"\r\none\r\n  bad\r\n\"\"\"", "bad", "bad"),
        ("a = '''\nx\nbad'''", "bad", "bad"),
        ("a = \"\"\"one \\\n    bad\"\"\"", "bad", "bad"),
        ("a = \"\"\"bad\"\"\"", "bad", "bad"),
        ("a = \"x\\tbad\"", "\t", "\\t"),
    ] {
        let (root, mut faults) = read(toml);
        let text = root.text("a", &mut faults).expect("text");
        let start = text.text.find(piece).expect("the piece");
        let place = text.place_of(start..start + piece.len());
        assert_eq!(written(&place), marked, "{toml}");
    }
}

#[test]
fn texts_left_open_are_faults() {
    for text in [
        "a = \"\"\"\nx\u{1f600}",
        "a = '''\n\u{1f600}",
        "a = \"\u{1f600}",
        "a = \"\"\"",
        "a = '\u{e4}",
    ] {
        let (root, mut faults) = read(text);
        assert!(!faults.is_empty(), "{text}");
        root.text("a", &mut faults);
    }
}

#[test]
fn deep_nesting_is_a_fault() {
    for text in [
        format!("a = {}", "[".repeat(100_000)),
        format!("a = {}", "{a=".repeat(100_000)),
        format!("{}a = 1", "a.".repeat(100_000)),
        format!("[{}a]\nb = 1", "a.".repeat(100_000)),
        format!("a = {}1{}", "[".repeat(100_000), "]".repeat(100_000)),
    ] {
        let (_, faults) = read(&text);
        assert!(!faults.is_empty(), "{}", &text[..20]);
    }
}

/// Asks a value everything.
fn ask(value: &Value, faults: &mut Faults) {
    value.text(faults);
    value.number(faults);
    value.count(1..=10, faults);
    value.boolean(faults);
    value.word(&["a", "b"], faults);
    value.texts(faults);
    if let Content::List(list) = &value.content {
        list.iter().for_each(|item| ask(item, faults));
    }
    if let Some(section) = value.section(faults) {
        for (key, value) in section.entries() {
            section.sections(&key.text, faults);
            ask(&value, faults);
        }
        section.finish(faults);
    }
    assert!(value.place.span.end <= value.source().text.len());
    if let Content::Text(text) = &value.content {
        for at in 0..text.text.len() {
            let place = text.place_of(at..at + 1);
            assert!(place.span.end <= place.source.text.len());
        }
    }
}

proptest! {
    #[test]
    fn any_text_is_read_or_refused(
        text in "(([ab]|\"a b\")(\\.[ab])? ?= ?([0-9.e+-]{1,4}|\"[a\\\\u0{} ]{0,6}\"|'''\n?[a\r\n]*'''|\\[1, \"b\"\\]|\\{a = 1\\}|nan)\r?\n|\\[{1,2}[ab](\\.[ab])?\\]{1,2}\n|.{0,5}\n){0,12}"
    ) {
        let (root, mut faults) = read(&text);
        for (key, value) in root.entries() {
            root.sections(&key.text, &mut faults);
            ask(&value, &mut faults);
        }
        root.finish(&mut faults);
        crate::place::show(&faults.sorted(), crate::place::Look::PLAIN);
    }
}
