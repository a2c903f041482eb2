//! Cells out of the bytes of a page: plain encoding, little-endian, texts and bytes of any length behind a 32-bit
//! length. The library's own reading panics where a page is shorter than its header says.

use super::{Cells, Kind};

/// No cells yet, with room for so many.
pub fn none(kind: Kind, rows: usize) -> Cells {
    match kind {
        Kind::Short => Cells::Short(Vec::with_capacity(rows)),
        Kind::Long => Cells::Long(Vec::with_capacity(rows)),
        Kind::Real => Cells::Real(Vec::with_capacity(rows)),
        Kind::Text => Cells::Text(Vec::with_capacity(rows)),
        Kind::Digest => Cells::Digest(Vec::with_capacity(rows)),
        Kind::Bytes => Cells::Bytes(Vec::with_capacity(rows)),
    }
}

/// Adds the cells of a page; `None` where it does not hold exactly `count`.
pub fn add(cells: &mut Cells, page: &[u8], count: usize) -> Option<()> {
    match cells {
        Cells::Short(cells) => words(page, count, cells, i32::from_le_bytes),
        Cells::Long(cells) => words(page, count, cells, i64::from_le_bytes),
        Cells::Real(cells) => words(page, count, cells, f64::from_le_bytes),
        Cells::Digest(cells) => words(page, count, cells, |bytes| bytes),
        Cells::Text(cells) => pieces(page, count, |bytes| {
            cells.push(std::str::from_utf8(bytes).ok()?.to_owned());
            Some(())
        }),
        Cells::Bytes(cells) => pieces(page, count, |bytes| {
            cells.push(bytes.to_vec());
            Some(())
        }),
    }
}

fn words<T, const N: usize>(
    page: &[u8],
    count: usize,
    into: &mut Vec<T>,
    of: impl Fn([u8; N]) -> T,
) -> Option<()> {
    let (words, rest) = page.as_chunks::<N>();
    if !rest.is_empty() || words.len() != count {
        return None;
    }
    into.extend(words.iter().map(|word| of(*word)));
    Some(())
}

fn pieces(mut page: &[u8], count: usize, mut each: impl FnMut(&[u8]) -> Option<()>) -> Option<()> {
    for _ in 0..count {
        let (length, rest) = page.split_first_chunk::<4>()?;
        let (piece, rest) = rest.split_at_checked(u32::from_le_bytes(*length) as usize)?;
        each(piece)?;
        page = rest;
    }
    page.is_empty().then_some(())
}
