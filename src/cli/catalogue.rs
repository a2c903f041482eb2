//! `catalogue`: what a study may use, from the tables of the rooms.

use super::arguments::List;
use super::output::{say, tell};
use super::registry::FAMILIES;
use super::status::Status;
use crate::{formula, laws, methods};

/// Prints one list, or all.
pub fn catalogue(list: Option<List>) -> Status {
    let text = match list {
        Some(List::Laws) => laws_text(),
        Some(List::Functions) => functions_text(),
        Some(List::Methods) => methods_text(),
        None => {
            let parts = [
                families_text(),
                methods_text(),
                laws_text(),
                functions_text(),
            ];
            parts.join("\n")
        }
    };
    match say(&text) {
        Ok(()) => Status::Done,
        Err(fault) => {
            tell(&format!("cannot write to stdout: {fault}"));
            Status::Interrupted
        }
    }
}

fn families_text() -> String {
    let mut text = String::from("Families of models ([model] family)\n");
    for family in FAMILIES {
        text.push_str(&format!("  {}\n      {}\n", family.name(), family.about()));
    }
    text
}

fn methods_text() -> String {
    let mut text = String::from("Methods ([sampler] method)\n");
    for method in methods::table() {
        text.push_str(&format!(
            "  {}\n      {} ({})\n      {}\n",
            method.name, method.about, method.reference, method.limits
        ));
        for option in method.options {
            text.push_str(&format!(
                "      {}: {}; left out: {}\n",
                option.name, option.meaning, option.default
            ));
        }
    }
    text
}

fn laws_text() -> String {
    let mut text = String::from("Laws\n");
    for law in laws::table() {
        let parameters: Vec<&str> = law.parameters().iter().map(|p| p.name).collect();
        text.push_str(&format!(
            "  {}({})\n      {}\n",
            law.name(),
            parameters.join(", "),
            law.about()
        ));
        for parameter in law.parameters() {
            text.push_str(&format!("      {}: {}\n", parameter.name, parameter.about));
        }
    }
    text
}

fn functions_text() -> String {
    let mut text = String::from("Functions\n");
    for function in formula::functions() {
        text.push_str(&format!("  {}\n      {}\n", function.usage, function.about));
    }
    text
}
