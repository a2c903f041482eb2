//! Reading a journal from its head: which blocks stand, and where the torn tail begins.

use super::frame::{HEAD, HEADER, Header, MAGIC};
use crate::course::Phase;
use crate::engine::trail::Digest;
use crate::engine::{Mark, Stood};
use sha2::{Digest as _, Sha256};
use std::collections::BTreeMap;
use std::fs::File;
use std::io;
use std::os::unix::fs::FileExt;

/// Blocks by point and chain.
pub type Shelf = BTreeMap<(usize, usize), Vec<Stood>>;
/// By point and chain, the digest of the frozen part that was written last, and where it is.
pub type Frozen = BTreeMap<(usize, usize), (Digest, Mark)>;

/// What stands in a journal.
#[derive(Default)]
pub struct Scan {
    pub shelf: Shelf,
    pub frozen: Frozen,
    /// Where the last whole frame ends.
    pub end: u64,
}

/// What was cut off a journal when it was opened.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Cut {
    /// Where the first frame begins that is not whole.
    pub at: u64,
    pub bytes: u64,
    /// Frames behind it: none after a kill, which leaves a torn tail.
    pub behind: u64,
}

/// Why frames could not be read.
pub enum Broken {
    Io(io::Error),
    /// Whole frames that no run of this program leaves.
    Order(String),
}

impl From<io::Error> for Broken {
    fn from(fault: io::Error) -> Broken {
        Broken::Io(fault)
    }
}

/// Reads all whole frames after the head. Bytes from the first frame that is not whole are the torn tail:
/// blocks behind it, if any, are computed again. Nothing is allocated by a count that the file holds.
pub fn scan(file: &File, length: u64) -> Result<Scan, Broken> {
    let (mut shelf, mut frozen) = (Shelf::new(), Frozen::new());
    let mut end = HEAD as u64;
    let mut buffer = vec![0; 1 << 18];
    while let Some(header) = frame_at(file, end, length, &mut buffer)? {
        shelve(&mut shelf, &mut frozen, &header, end)?;
        end += header.frame().expect("held against the length of the file");
    }
    Ok(Scan { shelf, frozen, end })
}

/// The header of the whole frame at an offset, all its bytes held against their digests.
fn frame_at(file: &File, at: u64, length: u64, buffer: &mut [u8]) -> io::Result<Option<Header>> {
    if length.saturating_sub(at) < HEADER as u64 {
        return Ok(None);
    }
    let mut bytes = [0; HEADER];
    file.read_exact_at(&mut bytes, at)?;
    let Some(header) = Header::read(&bytes) else {
        return Ok(None);
    };
    let (Some(payload), Some(frame)) = (header.payload(), header.frame()) else {
        return Ok(None);
    };
    if frame > length - at {
        return Ok(None);
    }
    let mut from = at + HEADER as u64;
    let mut parts = vec![(payload, header.draws_digest)];
    if header.frozen_here {
        parts.push((u64::from(header.frozen), header.state_hash.frozen));
    }
    if header.kept {
        parts.push((u64::from(header.moving), header.state_hash.moving));
    }
    for (size, digest) in parts {
        if hash_of(file, from, size, buffer)? != digest {
            return Ok(None);
        }
        from += size;
    }
    Ok(Some(header))
}

/// What is to be cut off from the end of the whole frames on, if anything.
pub fn cut(file: &File, at: u64, length: u64) -> io::Result<Option<Cut>> {
    let bytes = length.saturating_sub(at);
    let cut = |behind| Cut { at, bytes, behind };
    (bytes > 0)
        .then(|| behind(file, at, length).map(cut))
        .transpose()
}

/// Counts the frames behind the one at an offset, which is not whole, by their headers.
fn behind(file: &File, broken: u64, length: u64) -> io::Result<u64> {
    let mut count = 0;
    let mut at = broken;
    let mut window = vec![0; 1 << 18];
    while length.saturating_sub(at) >= HEADER as u64 {
        let piece = (length - at).min(window.len() as u64) as usize;
        file.read_exact_at(&mut window[..piece], at)?;
        let found = window[..piece]
            .windows(HEADER)
            .enumerate()
            .find_map(|(skip, bytes)| {
                let header = bytes
                    .starts_with(MAGIC)
                    .then(|| Header::read(bytes.try_into().ok()?))??;
                let frame = header.frame()?;
                let from = at + skip as u64;
                (frame <= length - from).then_some((from, frame))
            });
        match found {
            Some((from, frame)) => {
                count += u64::from(from > broken);
                at = from + frame;
            }
            // The last bytes of this window may begin a header.
            None => at += (piece - HEADER + 1) as u64,
        }
    }
    Ok(count)
}

fn hash_of(file: &File, mut from: u64, size: u64, buffer: &mut [u8]) -> io::Result<[u8; 32]> {
    let mut hash = Sha256::new();
    let end = from + size;
    while from < end {
        let piece = (end - from).min(buffer.len() as u64) as usize;
        file.read_exact_at(&mut buffer[..piece], from)?;
        hash.update(&buffer[..piece]);
        from += piece as u64;
    }
    Ok(hash.finalize().into())
}

/// Puts the block of a frame on its shelf.
fn shelve(shelf: &mut Shelf, frozen: &mut Frozen, header: &Header, at: u64) -> Result<(), Broken> {
    let key = (header.point as usize, header.chain as usize);
    let blocks = shelf.entry(key).or_default();
    let before = blocks.last();
    let broken = |what: &str| {
        Broken::Order(format!(
            "point {}, chain {}: block {} {what}",
            key.0 + 1,
            key.1 + 1,
            header.number
        ))
    };
    if header.number != blocks.len() as u64 + 1 {
        return Err(broken("does not follow the one before it"));
    }
    if header.phase == Phase::BurnIn && before.is_some_and(|b| b.phase == Phase::Draws) {
        return Err(broken("is burn-in after draws"));
    }
    if header.frozen_here {
        frozen.insert(key, (header.state_hash.frozen, Mark(at)));
    }
    let written = match frozen.get(&key) {
        _ if !header.kept => Mark(at),
        Some((digest, mark)) if *digest == header.state_hash.frozen => *mark,
        _ => return Err(broken("lacks the frozen part of its state")),
    };
    blocks.push(header.stood(Mark(at), written));
    Ok(())
}
