//! `[[estimand]]`: which quantities, under which names, and which figures of each.

use crate::course::{EstimandSpec, Quantity};
use crate::formula;
use crate::place::{Fault, Faults, Text};
use crate::plan::{Estimand, Give};
use crate::reading::{Content, Section, Value};
use crate::study::goal;

/// What is given of an estimand that does not say.
const GIVE: [Give; 4] = [
    Give::Value,
    Give::Uncertainty,
    Give::Quantile(0.5),
    Give::Interval(0.95),
];

/// The estimands of a study, for the family and for the plan, in the order of the file.
pub(super) fn read(root: &Section, faults: &mut Faults) -> Vec<(EstimandSpec, Estimand)> {
    let mut estimands: Vec<(EstimandSpec, Estimand)> = Vec::new();
    for section in root.sections("estimand", faults) {
        let Some((spec, estimand)) = one(&section, faults) else {
            continue;
        };
        let name = &spec.name;
        if let Some((first, _)) = estimands.iter().find(|(s, _)| s.name.text == name.text) {
            faults.push(
                Fault::at(
                    name.place.clone(),
                    format!("two estimands are called `{}`", name.text),
                )
                .label("the second")
                .related(first.name.place.clone(), "the first"),
            );
            continue;
        }
        estimands.push((spec, estimand));
    }
    estimands
}

fn one(section: &Section, faults: &mut Faults) -> Option<(EstimandSpec, Estimand)> {
    let name = section
        .need("name", "what the figure is called", faults)
        .and_then(|value| value.text(faults))
        .and_then(|text| identifier(text, "estimand", faults));
    let of = section.text("of", faults);
    let unit = section.text("unit", faults);
    let give = match section.list("give", faults) {
        Some(list) => {
            if let (true, Some(place)) = (list.is_empty(), section.key_place("give")) {
                faults.push(
                    Fault::at(place, "`give` asks for no figure")
                        .label("an empty list")
                        .help(
                            "name some of \"value\", \"uncertainty\", \"median\", \"interval\"; leave `give` out for all of \
                             them, or leave the estimand out",
                        ),
                );
            }
            give(&list, faults)
        }
        None => GIVE.to_vec(),
    };
    let goal = section
        .value("goal")
        .and_then(|value| goal::of_estimand(&value, faults));
    section.finish(faults);
    if let (Some(place), false) = (section.key_place("goal"), give.contains(&Give::Value)) {
        faults.push(
            Fault::at(place, "a goal is for the value, which `give` leaves out")
                .label("could never be looked at")
                .help("add \"value\" to `give`, or leave the goal out"),
        );
    }
    let name = name?;
    let estimand = Estimand {
        name: name.text.clone(),
        of: printed(of.as_ref().unwrap_or(&name)),
        unit: unit.as_ref().map(|unit| unit.text.clone()),
        give,
        goal,
    };
    Some((EstimandSpec { name, of, unit }, estimand))
}

/// A name that formulas, figures and tables can use: a small letter, then small letters, digits and `_`.
pub(super) fn identifier(text: Text, what: &str, faults: &mut Faults) -> Option<Text> {
    let name = &text.text;
    let good = name.starts_with(|c: char| c.is_ascii_lowercase())
        && name
            .chars()
            .all(|c| c.is_ascii_lowercase() || c.is_ascii_digit() || c == '_');
    if good {
        return Some(text);
    }
    faults.push(
        Fault::at(
            text.place.clone(),
            format!("`{name}` cannot be the name of a {what}").replace(" a e", " an e"),
        )
        .label("not a name")
        .help("a name begins with a small letter and goes on with small letters, digits and `_`"),
    );
    None
}

/// A formula as printed from its parsed tree; as it stands if it is not one, which its family will say.
pub(super) fn printed(text: &Text) -> String {
    match formula::parse(text, &mut Faults::default()) {
        Some(expression) => expression.to_string(),
        None => text.text.clone(),
    }
}

fn give(list: &[Value], faults: &mut Faults) -> Vec<Give> {
    let mut give = Vec::new();
    for value in list {
        let figure = match &value.content {
            Content::Text(text) if ["mean", "average"].contains(&text.text.as_str()) => {
                faults.push(
                    Fault::at(
                        value.place.clone(),
                        format!("`{}` cannot be `{}`", value.path, text.text),
                    )
                    .label("not known here")
                    .help(format!(
                        "write \"value\": it is the mean; beside it can stand {}",
                        "\"uncertainty\", \"median\" and \"interval\""
                    )),
                );
                None
            }
            Content::Tree(_) => fraction(value, faults),
            _ => value
                .word(&["value", "uncertainty", "median", "interval"], faults)
                .map(|word| match word {
                    "value" => Give::Value,
                    "uncertainty" => Give::Uncertainty,
                    "median" => Give::Quantile(0.5),
                    _ => Give::Interval(0.95),
                }),
        };
        give.extend(figure.filter(|figure| !give.contains(figure)));
    }
    give
}

/// `{ quantile = 0.9 }` or `{ interval = 0.9 }`
fn fraction(value: &Value, faults: &mut Faults) -> Option<Give> {
    let section = value.section(faults)?;
    let quantile = section.value("quantile");
    let interval = section.value("interval");
    section.finish(faults);
    let (given, make): (Value, fn(f64) -> Give) = match (quantile, interval) {
        (Some(given), None) => (given, Give::Quantile),
        (None, Some(given)) => (given, Give::Interval),
        _ => {
            faults.push(
                Fault::at(value.place.clone(), "this does not say what to give")
                    .label("one of { quantile = … } and { interval = … } is needed"),
            );
            return None;
        }
    };
    let part = given.number(faults)?;
    if 0.0 < part && part < 1.0 {
        return Some(make(part));
    }
    faults.push(
        Fault::at(
            given.place.clone(),
            format!("`{}` must be between 0 and 1", given.path),
        )
        .label("a probability, neither 0 nor 1"),
    );
    None
}

/// The estimands of a study that names none: every unknown, as the family records it.
pub(super) fn of_quantities(quantities: &[Quantity]) -> Vec<Estimand> {
    let mut estimands: Vec<Estimand> = Vec::new();
    for quantity in quantities {
        if quantity.estimand < estimands.len() {
            continue;
        }
        let name = quantity.name.split('[').next().unwrap_or_default();
        estimands.push(Estimand {
            name: name.to_string(),
            of: name.to_string(),
            unit: quantity.unit.clone(),
            give: GIVE.to_vec(),
            goal: None,
        });
    }
    estimands
}
