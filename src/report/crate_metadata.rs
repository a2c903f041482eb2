//! `ro-crate-metadata.json`: the files of a record, and the run that made them, for archives (RO-Crate 1.3,
//! Process Run Crate 0.5).

use crate::canon::{Json, hex};
use crate::plan::Plan;

const CONTEXT: &str = "https://w3id.org/ro/crate/1.3/context";
/// The profile was written for crates of version 1.1, and asks that they say so.
const VERSIONS: [&str; 2] = [
    "https://w3id.org/ro/crate/1.1",
    "https://w3id.org/ro/crate/1.3",
];
const PROFILE: &str = "https://w3id.org/ro/wfrun/process/0.5";
/// The metadata's own name, in the folder that is the crate.
const SELF: &str = "ro-crate-metadata.json";
const RUN: &str = "#run";
const LICENCE: &str = "#licence";
const DIGESTS: [&str; 2] = ["#plan-digest", "#result-digest"];

/// The metadata of a record: from its plan and result digest (hexadecimal), its circumstances, and the path under
/// `data/` and the length of every file there, sorted. The metadata's own is left out.
pub fn crate_metadata(
    plan: &Plan,
    result_digest: &str,
    circumstances: &Json,
    files: &[(String, u64)],
) -> Json {
    let files: Vec<&(String, u64)> = files.iter().filter(|(name, _)| name != SELF).collect();
    let taken = |used: bool| {
        let of_kind = files.iter().filter(move |(name, _)| is_used(name) == used);
        references(of_kind.map(|(name, _)| encoded(name)))
    };
    let starts = circumstances.get("starts").map_or(&[][..], Json::items);
    let began = starts.first().and_then(|start| text(start, "began"));
    let last = starts.last();
    let ended = last.and_then(|start| text(start, "ended"));
    let said = |name: &str| last.and_then(|start| text(start, name));
    let executable = said("executable_sha256");
    let program = executable.map_or("#odograph".to_owned(), |sha256| {
        // RFC 6920, section 7: a name that is the digest of what it names.
        format!("nih:sha-256;{sha256}")
    });
    let title = match plan.title.trim() {
        "" => "Untitled study",
        title => title,
    };
    let question = match plan.question.trim() {
        "" => title,
        question => question,
    };

    let mut root = vec![
        ("@id", Json::text("./")),
        ("@type", Json::text("Dataset")),
        ("conformsTo", reference(PROFILE)),
        ("name", Json::text(title)),
        ("description", Json::text(question)),
        ("license", reference(LICENCE)),
        ("identifier", references(DIGESTS.map(String::from))),
        (
            "hasPart",
            references(files.iter().map(|(name, _)| encoded(name))),
        ),
        ("mentions", reference(RUN)),
    ];
    root.extend(ended.map(|ended| ("datePublished", Json::text(ended))));

    let mut software = vec![
        ("@id", Json::text(&*program)),
        ("@type", Json::text("SoftwareApplication")),
        ("name", Json::text("Odograph")),
        (
            "description",
            Json::text("Runs Markov chain Monte Carlo studies from a text file."),
        ),
    ];
    software.extend(said("version").map(|version| ("version", Json::text(version))));
    software.extend(executable.map(|_| ("url", Json::text(&*program))));

    let mut run = vec![
        ("@id", Json::text(RUN)),
        ("@type", Json::text("CreateAction")),
        ("name", Json::text("Run of the study")),
        (
            "description",
            Json::text(how(starts.len(), said("outcome"))),
        ),
        ("instrument", reference(&program)),
        ("object", taken(true)),
        ("result", taken(false)),
        ("identifier", references(DIGESTS.map(String::from))),
        (
            "actionStatus",
            Json::text("http://schema.org/CompletedActionStatus"),
        ),
    ];
    run.extend(began.map(|began| ("startTime", Json::text(offset(began)))));
    run.extend(ended.map(|ended| ("endTime", Json::text(offset(ended)))));

    let mut graph = vec![
        Json::object([
            ("@id", Json::text(SELF)),
            ("@type", Json::text("CreativeWork")),
            ("about", reference("./")),
            ("conformsTo", references(VERSIONS.map(String::from))),
        ]),
        Json::object(root),
        Json::object([
            ("@id", Json::text(PROFILE)),
            (
                "@type",
                Json::array(["CreativeWork", "Profile"].map(Json::text)),
            ),
            ("name", Json::text("Process Run Crate")),
            ("version", Json::text("0.5")),
        ]),
        Json::object([
            ("@id", Json::text(LICENCE)),
            ("@type", Json::text("CreativeWork")),
            ("name", Json::text("No licence stated")),
            (
                "description",
                Json::text(
                    "The study states no licence for itself, its data or its results: ask its author.",
                ),
            ),
        ]),
        digest(DIGESTS[0], "plan digest", &hex(&plan.digest())),
        digest(DIGESTS[1], "result digest", result_digest),
        Json::object(software),
        Json::object(run),
    ];
    graph.extend(files.into_iter().map(|(name, size)| file(name, *size)));
    Json::object([
        ("@context", Json::text(CONTEXT)),
        ("@graph", Json::Array(graph)),
    ])
}

/// What the run was made from; the rest is what it made.
fn is_used(name: &str) -> bool {
    name == "study.toml" || name == "inputs.json" || name.starts_with("inputs/")
}

fn how(starts: usize, outcome: Option<&str>) -> String {
    let times = match starts {
        1 => "in one go".to_owned(),
        count => format!("in {count} starts"),
    };
    let outcome = outcome.unwrap_or("not known");
    format!(
        "Drawn {times}; outcome: {outcome}. Machine, threads and versions stand in circumstances.json of the record."
    )
}

fn digest(id: &str, name: &str, value: &str) -> Json {
    Json::object([
        ("@id", Json::text(id)),
        ("@type", Json::text("PropertyValue")),
        ("name", Json::text(name)),
        ("propertyID", Json::text(name)),
        ("value", Json::text(value)),
    ])
}

fn file(name: &str, size: u64) -> Json {
    let mut members = vec![
        ("@id", Json::text(encoded(name))),
        ("@type", Json::text("File")),
        ("name", Json::text(name)),
        ("description", Json::text(description(name))),
        ("contentSize", Json::text(size.to_string())),
    ];
    members.extend(format_of(name).map(|format| ("encodingFormat", Json::text(format))));
    Json::object(members)
}

fn description(name: &str) -> &'static str {
    match name {
        "study.toml" => "The study, byte for byte.",
        "inputs.json" => "Which copy each path of the study means.",
        "plan.json" => "The study resolved: no default left unsaid.",
        "trail.parquet" => "Draws, digest of the draws, state hash and link of every block.",
        "summary.json" | "summary.csv" => {
            "Every figure with its Monte Carlo error, R-hat, effective sizes and notes."
        }
        "summary.txt" => "The figures and their grounds as plain text.",
        "grounds.json" => "The claims made for the figures, and the conditions they rest on.",
        "report.html" => "The figures and their grounds as a page to read and print.",
        "failed.json" => "Points of the sweep at which no start was found.",
        _ if name.starts_with("inputs/") => "A file that the study names, byte for byte.",
        _ if name.starts_with("draws/") => "Draws: chain, draw, then a column a recorded quantity.",
        _ if name.starts_with("checkpoints/") => {
            "States of the chains between blocks, from which draws can be drawn again."
        }
        _ => "A file of the record.",
    }
}

fn format_of(name: &str) -> Option<&'static str> {
    let (_, ending) = name.rsplit_once('.')?;
    Some(match ending {
        "json" => "application/json",
        "csv" => "text/csv",
        "toml" => "application/toml",
        "html" => "text/html",
        "txt" => "text/plain",
        "parquet" => "application/vnd.apache.parquet",
        _ => return None,
    })
}

/// A path as a relative reference (RFC 3986, section 4.2).
fn encoded(path: &str) -> String {
    let mut out = String::new();
    for byte in path.bytes() {
        if byte.is_ascii_alphanumeric() || b"-._~/".contains(&byte) {
            out.push(char::from(byte));
        } else {
            out.push_str(&format!("%{byte:02X}"));
        }
    }
    out
}

/// `…Z` with the offset in digits, as the profile's readers want it.
fn offset(moment: &str) -> String {
    match moment.strip_suffix('Z') {
        Some(moment) => format!("{moment}+00:00"),
        None => moment.to_owned(),
    }
}

fn text<'a>(of: &'a Json, name: &str) -> Option<&'a str> {
    of.get(name).and_then(Json::as_text)
}

fn reference(id: &str) -> Json {
    Json::object([("@id", Json::text(id))])
}

fn references(ids: impl IntoIterator<Item = String>) -> Json {
    Json::array(ids.into_iter().map(|id| reference(&id)))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn references_are_encoded_and_times_have_an_offset() {
        assert_eq!(encoded("inputs/50 ü.csv"), "inputs/50%20%C3%BC.csv");
        assert_eq!(offset("2026-12-01T13:44:10Z"), "2026-12-01T13:44:10+00:00");
        assert_eq!(offset("then"), "then");
        assert!(is_used("inputs/a.csv") && is_used("study.toml") && !is_used("plan.json"));
    }

    #[test]
    fn every_file_is_used_or_made_and_told_once() {
        let plan = crate::plan::sample();
        let start = |began: &str, ended: &str| {
            Json::object([
                ("began", Json::text(began)),
                ("ended", Json::text(ended)),
                ("outcome", Json::text("sealed")),
                ("version", Json::text("0.1.0")),
                ("executable_sha256", Json::text("ab")),
            ])
        };
        let starts = [
            start("2026-12-01T13:00:00Z", "2026-12-01T13:10:00Z"),
            start("2026-12-01T14:00:00Z", "2026-12-01T14:30:00Z"),
        ];
        let circumstances = Json::object([("starts", Json::array(starts))]);
        let files = ["inputs/a b.csv", "plan.json", SELF, "study.toml"];
        let files = files.map(|name| (name.to_owned(), 7));
        let made = crate_metadata(&plan, "cd", &circumstances, &files);
        let read: serde_json::Value = serde_json::from_str(&made.canonical()).expect("JSON");
        let graph = read["@graph"].as_array().expect("entities");
        let find = |id: &str| {
            let mut found = graph.iter().filter(|entity| entity["@id"] == id);
            let one = found.next().unwrap_or_else(|| panic!("no {id}"));
            assert!(found.next().is_none(), "{id} is told twice");
            one
        };
        let run = find(RUN);
        assert_eq!(run["object"][0]["@id"], "inputs/a%20b.csv");
        assert_eq!(run["object"][1]["@id"], "study.toml");
        assert_eq!(run["result"][0]["@id"], "plan.json");
        assert_eq!(run["startTime"], "2026-12-01T13:00:00+00:00");
        assert_eq!(run["endTime"], "2026-12-01T14:30:00+00:00");
        assert_eq!(run["instrument"]["@id"], "nih:sha-256;ab");
        assert_eq!(find("nih:sha-256;ab")["version"], "0.1.0");
        assert_eq!(find("./")["hasPart"].as_array().map(Vec::len), Some(3));
        assert_eq!(find("#result-digest")["value"], "cd");
        assert_eq!(find("inputs/a%20b.csv")["name"], "inputs/a b.csv");
        // A stranger's circumstances may say nothing at all.
        let made = crate_metadata(&plan, "cd", &Json::Null, &files);
        assert!(made.canonical().contains("#odograph"));
    }
}
