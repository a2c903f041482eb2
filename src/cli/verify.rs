//! `verify`: a record held against its own study, trusting nothing that can be made again.

use super::output::{say, tell};
use super::registry::FAMILIES;
use super::run::all_threads;
use super::signals;
use super::status::Status;
use crate::canon::{self, Json};
use crate::estimates::figure;
use crate::replay::{self, Account, Audit, Beside, Fresh, LEVEL, Part, Request, Standing};
use std::fmt::Write as _;
use std::path::Path;

/// The part of the blocks that `--blocks` asks for: `5%` or `0.05`.
pub fn part(text: &str) -> Result<f64, String> {
    let number = |text: &str| text.trim().parse::<f64>().ok();
    let part = match text.trim().strip_suffix('%') {
        Some(percent) => number(percent).map(|percent| percent / 100.0),
        None => number(text),
    };
    part.filter(|part| *part > 0.0 && *part <= 1.0)
        .ok_or_else(|| "a part of the blocks such as 5% or 0.05, above 0 and at most 1".into())
}

/// What is asked of a verification.
pub struct Ask<'a> {
    pub blocks: Option<f64>,
    pub fresh: Option<u32>,
    pub seed: Option<&'a str>,
    pub threads: Option<u16>,
    pub json: bool,
}

/// Verifies a record and says what was checked, and what that shows.
pub fn verify(record: &Path, ask: &Ask<'_>) -> Status {
    if !record.is_dir() {
        tell(&format!("{} is no folder of a record", record.display()));
        return Status::Fault;
    }
    let seed = match seed_of(ask.seed) {
        Ok(seed) => seed,
        Err(words) => {
            tell(&words);
            return Status::Interrupted;
        }
    };
    signals::watch();
    let request = Request {
        registry: &FAMILIES,
        threads: ask.threads.map_or_else(all_threads, usize::from),
        audit: ask
            .blocks
            .map_or(Audit::All, |part| Audit::Part { part, seed }),
        stop: &signals::STOP,
        progress: &|part| tell(&format!("checking {part}")),
    };
    let account = replay::verify(record, &request);
    let fresh = match ask.fresh {
        // Figures that do not follow from their own study need no comparison.
        Some(runs) if account.agrees() => {
            match replay::fresh(record, &request, replay::roots(&seed, runs)) {
                Ok(fresh) => Some(fresh),
                Err(words) => {
                    tell(&format!("no fresh run: {words}"));
                    return Status::Interrupted;
                }
            }
        }
        _ => None,
    };
    let text = if ask.json {
        account_json(&account, fresh.as_ref()).pretty()
    } else {
        let fresh = fresh.as_ref().map_or(String::new(), fresh_text);
        account_text(record, &account) + &fresh
    };
    if let Err(fault) = say(&text) {
        tell(&format!("the account cannot be written: {fault}"));
        return Status::Interrupted;
    }
    if signals::stopped() {
        Status::Interrupted
    } else if !account.agrees() {
        Status::Broken
    } else if account.unchecked() {
        Status::Unchecked
    } else if fresh.is_some_and(|fresh| fresh.differs()) {
        Status::Found
    } else {
        Status::Done
    }
}

/// The seed of a lot: of the words given, or from the operating system.
fn seed_of(words: Option<&str>) -> Result<[u8; 32], String> {
    if let Some(words) = words {
        return Ok(canon::tagged("odograph audit seed", &Json::text(words)));
    }
    let mut seed = [0; 32];
    match rustix::rand::getrandom(&mut seed, rustix::rand::GetRandomFlags::empty()) {
        Ok(32) => Ok(seed),
        _ => Err("the operating system gives no randomness; give a --seed".into()),
    }
}

fn account_text(record: &Path, account: &Account) -> String {
    let mut text = format!("{}\n{}\n", account.title, record.display());
    for (part, standing) in &account.parts {
        let stands = match standing {
            Standing::Agrees(words) => format!("yes: {words}"),
            Standing::Differs => "NO".into(),
            Standing::Unchecked(words) => format!("not checked: {words}"),
        };
        let _ = writeln!(
            text,
            "\n({}) {}\n    {stands}",
            part.letter(),
            part.question()
        );
        for finding in account
            .findings
            .iter()
            .filter(|finding| finding.part == *part)
        {
            for line in finding.words.lines() {
                let _ = writeln!(text, "    {line}");
            }
        }
    }
    if let Some(chance) = &account.chance {
        let one = chance.one_in_a_hundred();
        let _ = writeln!(
            text,
            "\nOf {} blocks {} were chosen by lot. So chosen, one altered block would have been found with \
             probability {:.3}, ten with {:.3} or more, one in a hundred ({one}) with {:.3} or more, the less the \
             closer together they stand.",
            chance.all,
            chance.chosen,
            chance.of(1),
            chance.of(10),
            chance.of(one),
        );
    }
    text.push_str(&conclusion(account));
    text
}

fn conclusion(account: &Account) -> String {
    if !account.agrees() {
        return "\nThe record is NOT what its study gives. No figure should be taken from it.\n"
            .into();
    }
    let replayed = account
        .parts
        .iter()
        .any(|(part, standing)| *part == Part::Blocks && matches!(standing, Standing::Agrees(_)));
    let follow = match (&account.chance, account.unchecked(), replayed) {
        (None, false, true) => "Intact: these figures follow from this study, draw for draw.",
        (Some(_), false, true) => {
            "Intact as far as looked at: these figures follow from these draws, and the draws drawn again \
             follow from this study."
        }
        _ => "What could be checked agrees.",
    };
    format!(
        "\n{follow}\nNot shown: that the model is true, that no other study or root was tried before this one, \
         and by whom and when the record was made.\n"
    )
}

/// Estimates shown of a fresh comparison, those furthest apart first.
const SHOWN: usize = 12;

fn fresh_text(fresh: &Fresh) -> String {
    let mut text = format!(
        "\nFresh runs: {} under roots drawn now; {} estimates compared",
        fresh.roots.len(),
        fresh.estimates.len()
    );
    if fresh.without_error > 0 {
        let _ = write!(text, ", {} without an error left out", fresh.without_error);
    }
    text.push_str(".\n");
    let mut order: Vec<&Beside> = fresh.estimates.iter().collect();
    order.sort_by(|a, b| b.z().abs().total_cmp(&a.z().abs()));
    for one in order.iter().take(SHOWN) {
        let point = match fresh.estimates.iter().any(|other| other.point > 0) {
            true => format!("point {}, ", one.point + 1),
            false => String::new(),
        };
        let _ = writeln!(
            text,
            "    {point}{}: record {}, fresh {}; apart by {:.2} of the error of the difference",
            one.name,
            figure(Some(one.recorded.0), Some(one.recorded.1)),
            figure(Some(one.fresh.0), Some(one.fresh.1)),
            one.z()
        );
    }
    let joint = fresh.joint();
    let said = if fresh.differs() {
        "The record differs from fresh runs of its own plan by more than chance should: its root may have been \
         chosen. With more fresh runs (--fresh 20) the difference of a chosen root stays, and that of chance goes."
    } else {
        "The record agrees with fresh runs of its own plan, as far as so many runs can tell."
    };
    let _ = writeln!(
        text,
        "Chance alone sets all of them this far apart with probability {joint:.3} (level {LEVEL}).\n{said}"
    );
    text
}

fn fresh_json(fresh: &Fresh) -> Json {
    let estimate = |one: &Beside| {
        let pair = |(value, error): (f64, f64)| Json::array([Json::real(value), Json::real(error)]);
        Json::object([
            ("point", Json::Count(one.point as u64 + 1)),
            ("name", Json::text(one.name.clone())),
            ("recorded", pair(one.recorded)),
            ("fresh", pair(one.fresh)),
            ("z", Json::real(one.z())),
        ])
    };
    Json::object([
        (
            "roots",
            Json::array(fresh.roots.iter().map(|root| Json::text(root.clone()))),
        ),
        ("joint_probability", Json::real(fresh.joint())),
        ("level", Json::real(LEVEL)),
        ("differs", Json::Bool(fresh.differs())),
        ("without_error", Json::Count(fresh.without_error as u64)),
        (
            "estimates",
            Json::array(fresh.estimates.iter().map(estimate)),
        ),
    ])
}

fn account_json(account: &Account, fresh: Option<&Fresh>) -> Json {
    let part = |(part, standing): &(Part, Standing)| {
        let (word, words) = match standing {
            Standing::Agrees(words) => ("agrees", Json::text(words.clone())),
            Standing::Differs => ("differs", Json::Null),
            Standing::Unchecked(words) => ("unchecked", Json::text(words.clone())),
        };
        let findings = account
            .findings
            .iter()
            .filter(|finding| finding.part == *part);
        Json::object([
            ("part", Json::text(part.letter().to_string())),
            ("question", Json::text(part.question())),
            ("standing", Json::text(word)),
            ("words", words),
            (
                "findings",
                Json::array(findings.map(|finding| Json::text(finding.words.clone()))),
            ),
        ])
    };
    let chance = account.chance.map_or(Json::Null, |chance| {
        Json::object([
            ("blocks", Json::Count(chance.all)),
            ("chosen", Json::Count(chance.chosen)),
            ("finds_one", Json::real(chance.of(1))),
            ("finds_ten", Json::real(chance.of(10))),
            (
                "finds_one_in_a_hundred",
                Json::real(chance.of(chance.one_in_a_hundred())),
            ),
        ])
    });
    Json::object([
        ("schema", Json::Count(1)),
        ("title", Json::text(account.title.clone())),
        ("result_digest", Json::text(account.result_digest.clone())),
        ("parts", Json::array(account.parts.iter().map(part))),
        ("chance", chance),
        ("fresh", fresh.map_or(Json::Null, fresh_json)),
        ("replay_seconds", Json::real(account.replay_seconds)),
    ])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn parts_of_the_blocks_in_per_cent_or_as_numbers() {
        assert_eq!(part("5%"), Ok(0.05));
        assert_eq!(part(" 0.05 "), Ok(0.05));
        assert_eq!(part("100 %"), Ok(1.0));
        for bad in ["0", "-1%", "101%", "five", "", "nan", "inf"] {
            assert!(part(bad).is_err(), "{bad}");
        }
    }
}
