//! The parts of a verification, in order.

use super::account::{Account, Part};
use super::draws::Trails;
use super::lot::Audit;
use super::opened::{self, Opened, Stated};
use super::{again, bag, blocks, difference, draws, figures};
use crate::canon::{self, Json};
use crate::course::Family;
use crate::plan::Keep;
use crate::record;
use crate::report::{Outcome, crate_metadata};
use std::fs;
use std::path::Path;
use std::sync::atomic::AtomicBool;

/// How a record is verified.
pub struct Request<'a> {
    pub registry: &'a [&'a dyn Family],
    pub threads: usize,
    pub audit: Audit,
    /// Set by a signal.
    pub stop: &'a AtomicBool,
    /// Told what is being done.
    pub progress: &'a (dyn Fn(&str) + Sync),
}

/// Verifies a record: (a) to (e) in full, (f) as asked.
pub fn verify(folder: &Path, request: &Request<'_>) -> Account {
    let pool = rayon::ThreadPoolBuilder::new()
        .num_threads(request.threads.max(1))
        .build();
    match pool {
        Ok(pool) => pool.install(|| parts(folder, request)),
        Err(fault) => {
            let mut account = Account::default();
            account.leave(Part::Bag, format!("threads could not be started: {fault}"));
            account
        }
    }
}

fn parts(folder: &Path, request: &Request<'_>) -> Account {
    let mut account = Account::default();
    let tell = request.progress;
    tell("files");
    let pitfalls = bag::pitfalls(folder);
    if !pitfalls.is_empty() {
        account.enter(Part::Bag, pitfalls, String::new());
        return rest(
            account,
            Part::Plan,
            "what is neither a file nor a folder is not looked into",
        );
    }
    let mut of_bag = bag::check(folder);
    let stated = match opened::stated(folder) {
        Ok(stated) => stated,
        Err(words) => {
            of_bag.push(words);
            account.enter(Part::Bag, of_bag, String::new());
            return rest(account, Part::Plan, "there is no plan to be read");
        }
    };
    account.title.clone_from(&stated.title);
    if !stated.draws_alike() {
        account.enter(Part::Bag, of_bag, "every file is as it was sealed".into());
        let why = bag::other_numerics(folder, &stated);
        account.leave(Part::Plan, why.clone());
        let links = draws::own_links(folder);
        if links.is_empty() {
            account.leave(
                Part::Draws,
                format!("every link of the trail follows from the first; {why}"),
            );
        } else {
            account.enter(Part::Draws, links, String::new());
        }
        return rest(account, Part::Figures, &why);
    }
    tell("plan");
    let opened = match opened::open(folder, &stated, request.registry) {
        Ok(opened) => opened,
        Err(words) => {
            account.enter(Part::Bag, of_bag, "every file is as it was sealed".into());
            account.enter(Part::Plan, words, String::new());
            return rest(account, Part::Draws, "the plan could not be made");
        }
    };
    of_bag.extend(bag::strangers(folder, &opened, &Outcome::FILES));
    account.enter(
        Part::Bag,
        of_bag,
        "every file is as it was sealed, and none is missing or has come in".into(),
    );
    let differences = opened.differences.clone();
    account.enter(
        Part::Plan,
        differences,
        "the study and its inputs give the plan, field by field".into(),
    );
    tell("draws");
    let trails = match draws::trails(folder, &opened) {
        Ok(trails) => trails,
        Err(words) => {
            account.enter(Part::Draws, words, String::new());
            return rest(account, Part::Figures, "the trail does not hold");
        }
    };
    let hashed = draws::hash_draws(&trails);
    account.enter(Part::Draws, hashed, draws_looked_at(&opened));
    tell("figures");
    made(folder, request, &opened, &stated, &trails, &mut account);
    tell("blocks");
    let began = again::Watch::start();
    let (found, drawn, all, chance) =
        blocks::replay(folder, &opened, &trails, request.audit, request.stop);
    account.replay_seconds = began.seconds();
    account.chance = chance;
    account.enter(Part::Blocks, found, blocks::looked_at(drawn, all));
    account
}

fn draws_looked_at(opened: &Opened) -> String {
    match opened.plan.keep {
        Keep::Draws => "every draw has its digest in the trail, and every link follows".into(),
        Keep::Summary => "every link follows; the record keeps no draws".into(),
    }
}

/// Figures and pages: made anew from the draws, or from the whole run where no draws are kept.
fn made(
    folder: &Path,
    request: &Request<'_>,
    opened: &Opened,
    stated: &Stated,
    trails: &Trails,
    account: &mut Account,
) {
    if !stated.estimates_alike() {
        let words = bag::other_numerics(folder, stated);
        account.leave(Part::Figures, words.clone());
        account.leave(Part::Pages, words);
        return;
    }
    let outcome = match figures::outcome(opened, trails, request.threads, request.stop) {
        Err(None) if request.audit == Audit::All => match again::outcome(opened, trails, request) {
            Ok(outcome) => outcome,
            Err(words) => {
                account.enter(Part::Figures, vec![words], String::new());
                account.leave(Part::Pages, "the figures could not be made");
                return;
            }
        },
        Err(None) => {
            let words =
                "the record keeps no draws: only verified in full can its figures be checked";
            account.leave(Part::Figures, words);
            account.leave(Part::Pages, words);
            return;
        }
        Err(Some(words)) => {
            account.enter(Part::Figures, words, String::new());
            account.leave(Part::Pages, "the figures could not be made");
            return;
        }
        Ok(outcome) => outcome,
    };
    account.result_digest = canon::hex(&outcome.digest());
    let (mut of_figures, mut of_pages) = (Vec::new(), Vec::new());
    for (name, bytes) in outcome.files() {
        match name {
            "data/plan.json" => {}
            "data/summary.json" | "data/grounds.json" | "data/failed.json" => {
                of_figures.extend(differing_json(folder, name, &bytes, "the draws give"));
            }
            _ => of_pages.extend(differing_text(folder, name, &bytes)),
        }
    }
    if outcome.failed.is_empty() && folder.join("data/failed.json").exists() {
        of_figures.push("data/failed.json: no point failed".into());
    }
    of_pages.extend(crate_differs(folder, &outcome, &account.result_digest));
    let digest = &account.result_digest;
    of_pages.extend(record::label_differences(
        folder,
        &opened.plan.title,
        digest,
    ));
    let looked_at = format!("every figure and standing comes out the same; result digest {digest}");
    account.enter(Part::Figures, of_figures, looked_at);
    let looked_at = "tables, page and crate come out the same".into();
    account.enter(Part::Pages, of_pages, looked_at);
}

/// The metadata made anew from the plan, the circumstances and the files that are there.
fn crate_differs(folder: &Path, outcome: &Outcome<'_>, result_digest: &str) -> Vec<String> {
    let circumstances = match opened::json(folder, record::CIRCUMSTANCES) {
        Ok(circumstances) => circumstances,
        Err(words) => return vec![words],
    };
    let files = match record::payload(folder) {
        Ok(files) => files,
        Err(fault) => return vec![fault.to_string()],
    };
    let made = crate_metadata(outcome.plan, result_digest, &circumstances, &files);
    differing_json(
        folder,
        record::CRATE_METADATA,
        made.pretty().as_bytes(),
        "plan, circumstances and files give",
    )
}

fn differing_json(folder: &Path, name: &str, made: &[u8], given: &str) -> Vec<String> {
    let made = std::str::from_utf8(made).expect("we write UTF-8");
    let made = Json::read(made).expect("we write JSON");
    let named = |words: String| format!("{name}: {words}");
    match opened::json(folder, name) {
        Err(words) => vec![words],
        Ok(stored) => {
            let found = difference::json(&stored, &made, given);
            let mut found: Vec<String> = found.into_iter().map(named).collect();
            if found.is_empty() {
                found.extend(differing_text(folder, name, made.pretty().as_bytes()));
            }
            found
        }
    }
}

fn differing_text(folder: &Path, name: &str, made: &[u8]) -> Option<String> {
    let path = folder.join(name);
    let same_size = fs::metadata(&path).map(|found| found.len() <= opened::LARGEST_JSON);
    match same_size.and_then(|small| {
        if small {
            fs::read(&path)
        } else {
            Ok(Vec::new())
        }
    }) {
        Err(_) => Some(format!("{name} is not there")),
        Ok(stored) => difference::text(&stored, made, "the figures give")
            .map(|words| format!("{name}: {words}")),
    }
}

/// Leaves this part and all after it.
fn rest(mut account: Account, from: Part, why: &str) -> Account {
    for part in Part::ALL.into_iter().filter(|part| *part >= from) {
        account.leave(part, why);
    }
    account
}
