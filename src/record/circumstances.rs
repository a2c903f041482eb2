//! Who worked on a run, when, where and with what: one entry a start. Outside every digest.

use super::bag::CIRCUMSTANCES as NAME;
use super::fault::RecordFault;
use super::folder::Open;
use super::moment;
use crate::canon::Json;
use std::fs;
use std::io;

/// The starts of a run, this one last.
#[derive(Debug, Clone, PartialEq)]
pub struct Circumstances {
    earlier: Vec<Json>,
    this: Vec<(String, Json)>,
}

impl Circumstances {
    /// Enters this start in the folder, after those before.
    pub fn begin(open: &Open, threads: usize) -> Result<Circumstances, RecordFault> {
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
        let text = |name: &str, value: String| (name.to_owned(), Json::text(value));
        let count = |name: &str, value: u64| (name.to_owned(), Json::Count(value));
        let cut = open.journal.cut;
        let this = vec![
            text("began", moment::now()),
            text("host", moment::host()),
            text("version", env!("CARGO_PKG_VERSION").to_owned()),
            text("system", std::env::consts::OS.to_owned()),
            text("processor", std::env::consts::ARCH.to_owned()),
            count("process", std::process::id().into()),
            count("threads", threads as u64),
            count("blocks_found", open.journal.stood),
            count("bytes_cut", cut.map_or(0, |cut| cut.bytes)),
            count("whole_blocks_cut", cut.map_or(0, |cut| cut.behind)),
        ];
        let circumstances = Circumstances { earlier, this };
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

    /// Enters how this start ended.
    pub fn end(mut self, open: &Open, outcome: &str) -> Result<(), RecordFault> {
        self.this.push(("ended".into(), Json::text(moment::now())));
        self.this.push(("outcome".into(), Json::text(outcome)));
        self.save(open)
    }

    fn save(&self, open: &Open) -> Result<(), RecordFault> {
        let mut starts = self.earlier.clone();
        starts.push(Json::object(self.this.clone()));
        let all = Json::object([("starts", Json::Array(starts))]);
        open.write(NAME, all.pretty().as_bytes())
    }
}
