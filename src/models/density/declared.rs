//! The sections of a density model as they stand in the study: parsed, not yet given a meaning.

use crate::formula::{Expr, parse};
use crate::place::{Fault, Faults, Text, nearest};
use crate::reading::{Content, Section, Value};
use std::collections::BTreeSet;

/// How many values an unknown or a prediction has.
#[derive(Debug, Clone)]
pub enum Per {
    /// One value for each row of a table.
    Rows(Text),
    /// One value for each level of a column, for each pair of levels of two, or for each column of a matrix.
    Levels(Vec<Text>),
    Count(usize),
}

/// An entry of `[model.unknown]` or of `[predict]`.
#[derive(Debug)]
pub struct LawEntry {
    pub name: Text,
    pub law: Expr,
    pub per: Option<Per>,
    pub unit: Option<String>,
}

/// An entry of `[model.define]` or `[model.term]`.
#[derive(Debug)]
pub struct FormulaEntry {
    pub name: Text,
    pub formula: Expr,
}

/// An entry of `[model.observed]`.
#[derive(Debug)]
pub struct ObservedEntry {
    pub name: Text,
    pub of: Expr,
    pub law: Expr,
    pub right: Option<Expr>,
    pub left: Option<Expr>,
    pub interval: Option<Expr>,
    pub upper: Option<Expr>,
    pub entered: Option<Expr>,
    pub weight: Option<Expr>,
}

/// `[model]` and `[predict]`.
#[derive(Debug, Default)]
pub struct Declared {
    pub constants: Vec<(Text, f64)>,
    pub unknowns: Vec<LawEntry>,
    /// [model.unknown] has no entry at all, not even one at fault.
    pub none_named: bool,
    /// Names whose own entry could not be read: what uses them is not looked at.
    pub broken: BTreeSet<String>,
    pub definitions: Vec<FormulaEntry>,
    pub observed: Vec<ObservedEntry>,
    pub terms: Vec<FormulaEntry>,
    pub predictions: Vec<LawEntry>,
}

/// Most values that one unknown may have: more is taken for a slip.
const MOST_ELEMENTS: u64 = 1_000_000;

impl Declared {
    /// Reads both sections; everything that could be read is there, with a fault for everything else.
    pub fn read(model: &Section, predict: Option<&Section>, faults: &mut Faults) -> Declared {
        let mut declared = Declared::default();
        let broken = &mut declared.broken;
        for (name, value) in entries(model, "constant", faults) {
            let number = value.number(faults).filter(|_| named_well(&name, faults));
            let entry = number.map(|number| (name.clone(), number));
            declared.constants.extend(kept(name, entry, broken));
        }
        let unknowns = entries(model, "unknown", faults);
        declared.none_named = unknowns.is_empty();
        for (name, value) in unknowns {
            let entry = law_entry(&name, &value, faults);
            declared.unknowns.extend(kept(name, entry, broken));
        }
        for (name, value) in entries(model, "define", faults) {
            let entry = formula_entry(&name, &value, faults);
            declared.definitions.extend(kept(name, entry, broken));
        }
        for (name, value) in entries(model, "observed", faults) {
            declared
                .observed
                .extend(observed_entry(name, &value, faults));
        }
        for (name, value) in entries(model, "term", faults) {
            declared.terms.extend(formula_entry(&name, &value, faults));
        }
        model.finish(faults);
        declared.misspelt(model);
        for (name, value) in predict.map(Section::entries).unwrap_or_default() {
            declared
                .predictions
                .extend(law_entry(&name, &value, faults));
        }
        declared
    }
}

/// The sections of a model whose entries formulas can use.
const NAMING: [&str; 5] = ["constant", "unknown", "define", "observed", "term"];

impl Declared {
    /// The names declared in sections that a slip has given another name, such as [model.unknowns]: that
    /// fault is told, and what uses the names is not looked at.
    fn misspelt(&mut self, model: &Section) {
        for entry in &model.tree().entries {
            let key = entry.key.text.as_str();
            let Content::Tree(tree) = &entry.value.content else {
                continue;
            };
            let Some(meant) = nearest(key, NAMING).filter(|_| !NAMING.contains(&key)) else {
                continue;
            };
            let names = tree.entries.iter().map(|entry| entry.key.text.clone());
            self.broken.extend(names);
            self.none_named &= meant != "unknown";
        }
    }
}

/// What could be read of an entry; of one that could not, the name is kept among the broken ones.
fn kept<E>(name: Text, entry: Option<E>, broken: &mut BTreeSet<String>) -> Option<E> {
    if entry.is_none() {
        broken.insert(name.text);
    }
    entry
}

fn entries(model: &Section, key: &str, faults: &mut Faults) -> Vec<(Text, Value)> {
    model
        .section(key, faults)
        .map(|section| section.entries())
        .unwrap_or_default()
}

/// Names that formulas give another meaning.
const RESERVED: [&str; 4] = ["and", "or", "not", "if"];

fn named_well(name: &Text, faults: &mut Faults) -> bool {
    let mut letters = name.text.chars();
    let shaped = letters.next().is_some_and(|c| c.is_ascii_lowercase())
        && letters.all(|c| c.is_ascii_lowercase() || c.is_ascii_digit() || c == '_');
    let fault = Fault::at(
        name.place.clone(),
        format!("`{}` can't be used as a name in formulas", name.text),
    );
    if !shaped {
        faults.push(fault.label("not a name").help(
            "names begin with a small letter a to z and go on with small letters, digits and _",
        ));
    } else if RESERVED.contains(&name.text.as_str()) {
        faults.push(
            fault
                .label("a word of the formula language")
                .help("choose another name"),
        );
    } else {
        return true;
    }
    false
}

fn formula(section: &Section, key: &str, faults: &mut Faults) -> Option<Expr> {
    parse(&section.text(key, faults)?, faults)
}

fn needed_formula(
    section: &Section,
    key: &str,
    meaning: &str,
    faults: &mut Faults,
) -> Option<Expr> {
    let text = section.need(key, meaning, faults)?.text(faults)?;
    parse(&text, faults)
}

/// `"law"` alone, or `{ law = "…", per = …, unit = "…" }`.
fn law_entry(name: &Text, value: &Value, faults: &mut Faults) -> Option<LawEntry> {
    let good_name = named_well(name, faults);
    if let Content::Text(text) = &value.content {
        let law = parse(text, faults)?;
        return good_name.then(|| LawEntry {
            name: name.clone(),
            law,
            per: None,
            unit: None,
        });
    }
    let section = value.section(faults)?;
    let law = needed_formula(
        &section,
        "law",
        "the law it follows, such as \"normal(mean = 0, sd = 1)\"",
        faults,
    );
    let per = section.value("per").map(|value| per(&value, faults));
    let unit = section.text("unit", faults).map(|text| text.text);
    section.finish(faults);
    let per = match per {
        Some(None) => return None,
        Some(Some(per)) => Some(per),
        None => None,
    };
    let law = law?;
    good_name.then(|| LawEntry {
        name: name.clone(),
        law,
        per,
        unit,
    })
}

fn per(value: &Value, faults: &mut Faults) -> Option<Per> {
    match &value.content {
        Content::Text(text) if text.text.contains('.') => Some(Per::Levels(vec![text.clone()])),
        Content::Text(text) if text.text.trim().parse::<u64>().is_ok() => {
            let fault = Fault::at(value.place.clone(), "a count under `per` is a number")
                .label("text")
                .help(format!("write {} without quotes", text.text.trim()));
            faults.push(fault);
            None
        }
        Content::Text(text) => Some(Per::Rows(text.clone())),
        Content::Integer(_) => value
            .count(1..=MOST_ELEMENTS, faults)
            .map(|count| Per::Count(count as usize)),
        Content::List(_) => {
            let texts = value.texts(faults)?;
            if texts.len() == 2 && texts.iter().all(|text| text.text.contains('.')) {
                return Some(Per::Levels(texts));
            }
            let fault = Fault::at(value.place.clone(), "a list under `per` names two columns")
                .label("not two columns")
                .help("write per = [\"table.column\", \"table.other\"] for a value per pair of their levels");
            faults.push(fault);
            None
        }
        _ => {
            value.refuse(
                "a table, a column such as \"table.column\", two columns, or a count",
                faults,
            );
            None
        }
    }
}

fn formula_entry(name: &Text, value: &Value, faults: &mut Faults) -> Option<FormulaEntry> {
    let good_name = named_well(name, faults);
    let formula = parse(&value.text(faults)?, faults)?;
    good_name.then(|| FormulaEntry {
        name: name.clone(),
        formula,
    })
}

fn observed_entry(name: Text, value: &Value, faults: &mut Faults) -> Option<ObservedEntry> {
    let section = value.section(faults)?;
    let of = needed_formula(
        &section,
        "of",
        "what was observed, such as \"table.column\"",
        faults,
    );
    let law = needed_formula(&section, "law", "the law of what was observed", faults);
    let mut optional = |key: &str| formula(&section, key, faults);
    let (right, left) = (optional("right"), optional("left"));
    let (interval, upper) = (optional("interval"), optional("upper"));
    let (entered, weight) = (optional("entered"), optional("weight"));
    section.finish(faults);
    if let (true, false) = (section.has("interval"), section.has("upper")) {
        let place = section.key_place("interval").expect("the key is there");
        let fault = Fault::at(place, "`interval` needs `upper`")
            .label("between `of` and what?")
            .help("add `upper`: where each interval ends, such as upper = \"table.seen\"");
        faults.push(fault);
    }
    Some(ObservedEntry {
        name,
        of: of?,
        law: law?,
        right,
        left,
        interval,
        upper,
        entered,
        weight,
    })
}
