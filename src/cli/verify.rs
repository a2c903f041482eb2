//! `verify`: a record held against its own study, trusting nothing that can be made again.

use super::output::{say, tell};
use super::registry::FAMILIES;
use super::run::all_threads;
use super::signals;
use super::status::Status;
use crate::canon::{self, Json};
use crate::replay::{self, Account, Audit, Part, Request, Standing};
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

/// Verifies a record and says what was checked, and what that shows.
pub fn verify(
    record: &Path,
    blocks: Option<f64>,
    seed: Option<&str>,
    threads: Option<u16>,
    json: bool,
) -> Status {
    if !record.is_dir() {
        tell(&format!("{} is no folder of a record", record.display()));
        return Status::Fault;
    }
    let audit = match blocks {
        None => Audit::All,
        Some(part) => match seed_of(seed) {
            Ok(seed) => Audit::Part { part, seed },
            Err(words) => {
                tell(&words);
                return Status::Interrupted;
            }
        },
    };
    signals::watch();
    let account = replay::verify(
        record,
        &Request {
            registry: &FAMILIES,
            threads: threads.map_or_else(all_threads, usize::from),
            audit,
            stop: &signals::STOP,
            progress: &|part| tell(&format!("checking {part}")),
        },
    );
    let text = if json {
        account_json(&account).pretty()
    } else {
        account_text(record, &account)
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
             probability {:.3}, ten anywhere with {:.3}, one in a hundred ({one}) with {:.3}.",
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

fn account_json(account: &Account) -> Json {
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
