//! `data/trail.parquet`: a row a block of every chain, block 0 being the start; point, chain and block rise.
//! Points and chains are counted from 1 in the file, from 0 here.

use super::columnar::{Cells, Column, Kind, Table, Writer};
use crate::course::Phase;
use crate::engine::trail::{Digest, StateHash};
use std::io;
use std::path::Path;

/// Where it lies in a record.
pub const NAME: &str = "data/trail.parquet";

/// Rows written as one group.
const GROUP: usize = 1 << 16;

/// A block as the trail tells it.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct TrailRow {
    pub point: usize,
    pub chain: usize,
    /// 0 is the start.
    pub block: u64,
    pub phase: Phase,
    pub draws: u64,
    pub draws_digest: Digest,
    pub state_hash: StateHash,
    pub link: Digest,
}

fn columns() -> Vec<Column> {
    [
        ("point", Kind::Short),
        ("chain", Kind::Short),
        ("block", Kind::Long),
        ("phase", Kind::Text),
        ("draws", Kind::Long),
        ("digest_of_draws", Kind::Digest),
        ("frozen_state_hash", Kind::Digest),
        ("moving_state_hash", Kind::Digest),
        ("link", Kind::Digest),
    ]
    .map(|(name, kind)| (name.to_owned(), kind))
    .to_vec()
}

/// A phase in words, as records write it.
pub fn phase_word(phase: Phase) -> &'static str {
    match phase {
        Phase::BurnIn => "burn-in",
        Phase::Draws => "draws",
    }
}

/// Writes the trail of a record.
pub fn write(path: &Path, rows: &[TrailRow]) -> io::Result<()> {
    let mut writer = Writer::create(path, &columns())?;
    for rows in rows.chunks(GROUP) {
        let short = |of: fn(&TrailRow) -> usize| -> io::Result<Cells> {
            let cells = rows.iter().map(|row| i32::try_from(of(row) + 1));
            let cells: Result<Vec<i32>, _> = cells.collect();
            cells.map(Cells::Short).map_err(io::Error::other)
        };
        let long = |of: fn(&TrailRow) -> u64| -> io::Result<Cells> {
            let cells = rows.iter().map(|row| i64::try_from(of(row)));
            let cells: Result<Vec<i64>, _> = cells.collect();
            cells.map(Cells::Long).map_err(io::Error::other)
        };
        let digest = |of: fn(&TrailRow) -> Digest| Ok(Cells::Digest(rows.iter().map(of).collect()));
        writer.group(|column| match column {
            0 => short(|row| row.point),
            1 => short(|row| row.chain),
            2 => long(|row| row.block),
            3 => Ok(Cells::Text(
                rows.iter()
                    .map(|row| phase_word(row.phase).into())
                    .collect(),
            )),
            4 => long(|row| row.draws),
            5 => digest(|row| row.draws_digest),
            6 => digest(|row| row.state_hash.frozen),
            7 => digest(|row| row.state_hash.moving),
            _ => digest(|row| row.link),
        })?;
    }
    writer.finish()
}

/// Reads a trail of at most so many rows. Fails with what is wrong with it.
pub fn read(path: &Path, most: u64) -> Result<Vec<TrailRow>, String> {
    let table = Table::open(path, &columns())?;
    let rows: u64 = (0..table.groups())
        .map(|group| table.rows(group) as u64)
        .sum();
    if rows > most {
        return Err(format!(
            "it has {rows} rows, and the plan allows at most {most}"
        ));
    }
    let mut all = Vec::new();
    for group in 0..table.groups() {
        let cells = |column| table.cells(group, column);
        let cells: Result<Vec<Cells>, String> = (0..9).map(cells).collect();
        let cells: [Cells; 9] = cells?.try_into().expect("nine columns");
        let [
            Cells::Short(points),
            Cells::Short(chains),
            Cells::Long(blocks),
            Cells::Text(phases),
            Cells::Long(draws),
            Cells::Digest(digests),
            Cells::Digest(frozen),
            Cells::Digest(moving),
            Cells::Digest(links),
        ] = cells
        else {
            unreachable!("the kinds were held against the columns");
        };
        for row in 0..points.len() {
            let count = |value: i64, least: i64| {
                let value = value.checked_sub(least).and_then(|v| u64::try_from(v).ok());
                value.ok_or_else(|| "it has a count below its least".to_owned())
            };
            all.push(TrailRow {
                point: count(points[row].into(), 1)? as usize,
                chain: count(chains[row].into(), 1)? as usize,
                block: count(blocks[row], 0)?,
                phase: match &*phases[row] {
                    "burn-in" => Phase::BurnIn,
                    "draws" => Phase::Draws,
                    other => return Err(format!("it has a phase {other:?}")),
                },
                draws: count(draws[row], 0)?,
                draws_digest: digests[row],
                state_hash: StateHash {
                    frozen: frozen[row],
                    moving: moving[row],
                },
                link: links[row],
            });
        }
    }
    Ok(all)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_trail_is_read_as_it_was_written() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("trail.parquet");
        let row = |block: u64| TrailRow {
            point: 2,
            chain: 1,
            block,
            phase: if block < 2 {
                Phase::BurnIn
            } else {
                Phase::Draws
            },
            draws: 100 * block,
            draws_digest: [block as u8; 32],
            state_hash: StateHash {
                frozen: [7; 32],
                moving: [block as u8 + 1; 32],
            },
            link: [block as u8 + 2; 32],
        };
        let rows: Vec<TrailRow> = (0..5).map(row).collect();
        write(&path, &rows).unwrap();
        assert_eq!(read(&path, 5).unwrap(), rows);
        assert!(read(&path, 4).unwrap_err().contains("at most 4"));
    }
}
