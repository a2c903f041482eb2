//! Who worked on a run, when, where and with what: one entry a start; and the runs begun before it under the same
//! name. Outside every digest.

use super::bag::CIRCUMSTANCES as NAME;
use super::begun::Begun;
use super::fault::RecordFault;
use super::folder::Open;
use super::{moment, program};
use crate::canon::{Json, hex};
use crate::plan::Plan;
use std::fs;
use std::io;

/// The starts of a run, this one last.
#[derive(Debug, Clone, PartialEq)]
pub struct Circumstances {
    earlier: Vec<Json>,
    this: Vec<(String, Json)>,
    begun: Begun,
    /// What is wrong with the list of runs begun, in words for the reader.
    pub warning: Option<String>,
}

impl Circumstances {
    /// Enters this start in the folder, after those before; the first of a plan also in the list of runs begun.
    pub fn begin(open: &Open, plan: &Plan, threads: usize) -> Result<Circumstances, RecordFault> {
        let path = open.path().join(NAME);
        let earlier = match fs::read_to_string(&path) {
            // What a power cut left of it before it was forced to the disk.
            Ok(text) if text.trim_matches(['\0', ' ', '\n']).is_empty() => Vec::new(),
            Ok(text) => Json::read(&text)
                .map_err(|words| RecordFault::foreign(&path, &words))?
                .get("starts")
                .map_or(Vec::new(), |starts| starts.items().to_vec()),
            Err(fault) if fault.kind() == io::ErrorKind::NotFound => Vec::new(),
            Err(fault) => return Err(RecordFault::disk("read", &path, &fault)),
        };
        let cut = open.journal.cut;
        let counts = [
            ("threads", threads as u64),
            ("blocks_found", open.journal.stood),
            ("bytes_cut", cut.map_or(0, |cut| cut.bytes)),
            ("whole_blocks_cut", cut.map_or(0, |cut| cut.behind)),
        ];
        let mut this = vec![("began", Json::text(moment::now()))];
        this.extend(program::members());
        this.extend(counts.map(|(name, count)| (name, Json::Count(count))));
        let folder = open.path().parent().unwrap_or(open.path());
        let begun = Begun::of(folder, &hex(&plan.digest()), &plan.root);
        let warning = begun.begins().err().or_else(|| begun.earlier().fault);
        let this = this.into_iter();
        let circumstances = Circumstances {
            earlier,
            this: this.map(|(name, what)| (name.to_owned(), what)).collect(),
            begun,
            warning,
        };
        circumstances.save(open)?;
        Ok(circumstances)
    }

    /// Has the starts entered in another folder before those of this one, which has none yet.
    pub fn follow(open: &Open, other: &Open) -> Result<(), RecordFault> {
        let (from, to) = (other.path().join(NAME), open.path().join(NAME));
        match fs::read(&from) {
            Ok(bytes) if !to.exists() => open.write(NAME, &bytes),
            Ok(_) => Ok(()),
            Err(fault) if fault.kind() == io::ErrorKind::NotFound => Ok(()),
            Err(fault) => Err(RecordFault::disk("read", &from, &fault)),
        }
    }

    /// Enters something more about this start.
    pub fn enter(&mut self, name: &str, what: Json) {
        self.this.push((name.into(), what));
    }

    /// Enters how this start ended, and the runs of other plans begun under this name. Gives what stands in the
    /// file.
    pub fn end(mut self, open: &Open, outcome: &str) -> Result<Json, RecordFault> {
        self.this.push(("ended".into(), Json::text(moment::now())));
        self.this.push(("outcome".into(), Json::text(outcome)));
        // What is wrong with that list was told when the run began, and stands in the file.
        let _ = self.begun.ends(outcome);
        self.save(open)
    }

    /// Writes what is entered so far, and gives it.
    pub fn save(&self, open: &Open) -> Result<Json, RecordFault> {
        let mut starts = self.earlier.clone();
        starts.push(Json::object(self.this.clone()));
        let earlier = self.begun.earlier();
        let all = Json::object([
            ("starts", Json::Array(starts)),
            ("earlier_runs", earlier.runs),
            ("earlier_runs_left_out", Json::Count(earlier.left_out)),
            (
                "earlier_runs_fault",
                earlier.fault.map_or(Json::Null, Json::text),
            ),
        ]);
        open.write(NAME, all.pretty().as_bytes())?;
        Ok(all)
    }
}
