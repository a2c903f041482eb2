//! The journal of a run: one append-only file a writer, framed blocks, forced to the disk every few seconds
//! and at reviews.

use super::fault::RecordFault;
use super::frame::{self, HEAD, HEADER, Header};
use super::scan::{Broken, Cut, Frozen, Scan, Shelf, cut, scan};
use super::sync::Syncer;
use crate::course::State;
use crate::engine::trail::{self, Digest};
use crate::engine::{Finished, Journal, Mark, Reader, Stood};
use std::fs::{File, OpenOptions};
use std::io;
use std::os::unix::fs::FileExt;
use std::path::{Path, PathBuf};
use std::sync::Arc;

/// An open journal. Its one writer holds the lock of the folder it lies in.
pub struct JournalFile {
    path: PathBuf,
    file: Arc<File>,
    syncer: Syncer,
    shelf: Shelf,
    frozen: Frozen,
    end: u64,
    /// What was cut off when it was opened.
    pub cut: Option<Cut>,
    /// Blocks that stood when it was opened.
    pub stood: u64,
}

impl JournalFile {
    /// Opens the journal of a plan, or begins it; cuts off what follows the first block that is not whole.
    pub fn open(path: &Path, plan: &Digest) -> Result<JournalFile, RecordFault> {
        let io = |fault| RecordFault::disk("open", path, &fault);
        let file = OpenOptions::new()
            .read(true)
            .write(true)
            .create(true)
            .truncate(false)
            .open(path)
            .map_err(io)?;
        let length = file.metadata().map_err(io)?.len();
        let head = frame::head(plan);
        let scanned = if length < HEAD as u64 {
            file.set_len(0).map_err(io)?;
            file.write_all_at(&head, 0).map_err(io)?;
            Scan {
                end: HEAD as u64,
                ..Scan::default()
            }
        } else {
            let mut found = [0; HEAD];
            file.read_exact_at(&mut found, 0).map_err(io)?;
            if found != head {
                let words = "it is not the journal of this plan";
                return Err(RecordFault::foreign(path, words));
            }
            scan(&file, length).map_err(|broken| match broken {
                Broken::Io(fault) => io(fault),
                Broken::Order(words) => RecordFault::foreign(path, &words),
            })?
        };
        let cut = cut(&file, scanned.end, length).map_err(io)?;
        if cut.is_some() {
            file.set_len(scanned.end).map_err(io)?;
            file.sync_all().map_err(io)?;
        }
        let file = Arc::new(file);
        Ok(JournalFile {
            path: path.to_owned(),
            syncer: Syncer::new(file.clone()),
            file,
            stood: scanned
                .shelf
                .values()
                .map(|blocks| blocks.len() as u64)
                .sum(),
            shelf: scanned.shelf,
            frozen: scanned.frozen,
            end: scanned.end,
            cut,
        })
    }

    /// Bytes written so far.
    pub fn length(&self) -> u64 {
        self.end
    }

    /// The blocks that stood when it was opened, by point and chain, less those asked for since.
    pub fn standing_blocks(&self) -> &Shelf {
        &self.shelf
    }

    /// Every block that stands by now, each byte of it read and held against its digests.
    pub(super) fn rescan(&mut self) -> Result<Shelf, RecordFault> {
        let scanned = scan(&self.file, self.end).map_err(|broken| match broken {
            Broken::Io(fault) => RecordFault::disk("read", &self.path, &fault),
            Broken::Order(words) => RecordFault::foreign(&self.path, &words),
        })?;
        if scanned.end < self.end {
            return Err(self.lacking());
        }
        Ok(scanned.shelf)
    }

    /// The fault of a journal that no longer holds what was written to it.
    pub(super) fn lacking(&self) -> RecordFault {
        let changed = io::Error::other("blocks are no longer what was written");
        RecordFault::disk("read", &self.path, &changed)
    }

    /// Appends a block that an earlier run drew, as one that stands.
    pub fn take(&mut self, block: &Finished) -> Result<(), String> {
        let mark = self.append(block)?;
        let frozen = self.frozen.get(&(block.point, block.chain));
        let stood = Stood {
            phase: block.phase,
            draws: block.draws,
            draws_digest: block.draws_digest,
            state_hash: block.state_hash,
            link: block.link,
            mark,
            kept: block.state.is_some(),
            frozen: frozen.map_or(mark, |(_, mark)| *mark),
        };
        let key = (block.point, block.chain);
        self.shelf.entry(key).or_default().push(stood);
        Ok(())
    }

    /// Throws all blocks away.
    pub fn clear(&mut self) -> Result<(), String> {
        let cleared = self.file.set_len(HEAD as u64);
        cleared.map_err(|fault| self.words("write", &fault))?;
        self.end = HEAD as u64;
        self.shelf.clear();
        self.frozen.clear();
        Ok(())
    }

    /// Asks that what is written be on the disk soon.
    pub fn sync_soon(&mut self) {
        self.syncer.ask();
    }

    fn write(&mut self, header: &Header, block: &Finished) -> io::Result<u64> {
        let mut at = self.end;
        let state = block.state.as_ref();
        let moving: &[u8] = state.map_or(&[], |state| &state.moving);
        let frozen: &[u8] = match state {
            Some(state) if header.frozen_here => &state.frozen,
            _ => &[],
        };
        let head = header.bytes();
        for part in [head.as_slice(), &block.payload, frozen, moving] {
            if !part.is_empty() {
                self.file.write_all_at(part, at)?;
                at += part.len() as u64;
            }
        }
        Ok(at)
    }

    fn words(&self, done: &str, fault: &io::Error) -> String {
        RecordFault::disk(done, &self.path, fault).to_string()
    }
}

impl Journal for JournalFile {
    fn standing(&mut self, point: usize, chain: usize) -> Vec<Stood> {
        self.shelf.remove(&(point, chain)).unwrap_or_default()
    }

    fn append(&mut self, block: &Finished) -> Result<Mark, String> {
        if let Some(fault) = self.syncer.fault() {
            return Err(self.words("write", &fault));
        }
        let key = (block.point, block.chain);
        let written = self.frozen.get(&key).map(|(digest, _)| *digest);
        let frozen_here = written != Some(block.state_hash.frozen);
        let header = Header::of(block, frozen_here)
            .map_err(|_| "a block is too long for the journal: its counts pass 2^32".to_owned())?;
        let mark = Mark(self.end);
        match self.write(&header, block) {
            Ok(end) => {
                self.end = end;
                if header.frozen_here {
                    self.frozen.insert(key, (header.state_hash.frozen, mark));
                }
            }
            Err(fault) => {
                // A part of the frame may stand; opening would cut it off as well, should this fail too.
                let _ = self.file.set_len(self.end);
                return Err(self.words("write", &fault));
            }
        }
        self.syncer.tick();
        Ok(mark)
    }

    fn sync(&mut self) -> Result<(), String> {
        let earlier = self.syncer.fault().map_or(Ok(()), Err);
        earlier
            .and_then(|()| self.file.sync_data())
            .map_err(|fault| self.words("write", &fault))
    }

    fn reader(&self) -> Arc<dyn Reader> {
        Arc::new(JournalReader {
            path: self.path.clone(),
            file: self.file.clone(),
        })
    }
}

struct JournalReader {
    path: PathBuf,
    file: Arc<File>,
}

impl JournalReader {
    fn words(&self, fault: &io::Error) -> String {
        RecordFault::disk("read", &self.path, fault).to_string()
    }

    fn header(&self, mark: Mark) -> Result<Header, String> {
        let mut bytes = [0; HEADER];
        self.file
            .read_exact_at(&mut bytes, mark.0)
            .map_err(|fault| self.words(&fault))?;
        Header::read(&bytes).ok_or_else(|| {
            let changed = io::Error::other("a block is no longer what was written");
            self.words(&changed)
        })
    }

    fn bytes(&self, at: u64, size: u32) -> Result<Vec<u8>, String> {
        let mut bytes = vec![0; size as usize];
        self.file
            .read_exact_at(&mut bytes, at)
            .map_err(|fault| self.words(&fault))?;
        Ok(bytes)
    }
}

impl Reader for JournalReader {
    fn column(&self, mark: Mark, quantity: usize, into: &mut Vec<f64>) -> Result<(), String> {
        let header = self.header(mark)?;
        if quantity >= header.quantities as usize {
            let unlike = io::Error::other("a block does not have the quantities of this plan");
            return Err(self.words(&unlike));
        }
        let size = u64::from(header.draws) * 8;
        let at = mark.0 + HEADER as u64 + quantity as u64 * size;
        let mut bytes = vec![0; size as usize];
        self.file
            .read_exact_at(&mut bytes, at)
            .map_err(|fault| self.words(&fault))?;
        into.extend(trail::values(&bytes));
        Ok(())
    }

    fn state(&self, block: &Stood) -> Result<State, String> {
        let last = self.header(block.mark)?;
        if !last.kept {
            return Err("the state after this block is not kept".into());
        }
        let at = block.mark.0 + last.frame().unwrap_or(0) - u64::from(last.moving);
        let moving = self.bytes(at, last.moving)?;
        let keeper = self.header(block.frozen)?;
        let at = block.frozen.0 + HEADER as u64 + keeper.payload().unwrap_or(0);
        let frozen = self.bytes(at, keeper.frozen)?;
        Ok(State { frozen, moving })
    }
}

#[cfg(test)]
mod tests;
