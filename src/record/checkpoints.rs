//! `data/checkpoints/`: for each point the exact states of its chains after some of their blocks, from which
//! blocks can be drawn again.

use super::columnar::{Cells, Column, Kind, Table, Writer};
use crate::course::{Phase, State};
use crate::engine::{Reader, Stood};
use std::collections::BTreeMap;
use std::io;
use std::path::Path;

/// Bytes of a group of rows, about.
const GROUP: usize = 1 << 22;
/// Room beside that and the last state in it: the lengths of the cells, and a state larger than was estimated.
const ROOM: usize = 1 << 20;

/// Where the checkpoints of a point (from 0) lie in a record.
pub fn name(point: usize) -> String {
    format!("data/checkpoints/point-{}.parquet", point + 1)
}

fn columns() -> Vec<Column> {
    [
        ("chain", Kind::Short),
        ("block", Kind::Long),
        ("frozen_here", Kind::Short),
        ("frozen", Kind::Bytes),
        ("moving", Kind::Bytes),
    ]
    .map(|(name, kind)| (name.to_owned(), kind))
    .to_vec()
}

/// The blocks (from 1) after which the states of every chain are kept: every 1st, 2nd, 4th … of each phase,
/// as many as `bound` bytes hold, and in any case the last of each phase. `blocks` has the phase of each block, and
/// whether the states after it are at hand.
pub fn kept(blocks: &[(Phase, bool)], state: usize, chains: usize, bound: u64) -> Vec<u64> {
    let phases: Vec<Phase> = blocks.iter().map(|(phase, _)| *phase).collect();
    let at_hand = |at: usize| blocks[at].1;
    let last_of = |at: usize| phases.get(at + 1) != Some(&phases[at]);
    let burn_in = phases
        .iter()
        .take_while(|phase| **phase == Phase::BurnIn)
        .count();
    let within = |at: usize| {
        if at < burn_in {
            at + 1
        } else {
            at + 1 - burn_in
        }
    };
    let chosen = |stride: usize| -> Vec<u64> {
        let blocks = 0..phases.len();
        let blocks =
            blocks.filter(|&at| (within(at).is_multiple_of(stride) && at_hand(at)) || last_of(at));
        blocks.map(|at| at as u64 + 1).collect()
    };
    let mut stride = 1;
    loop {
        let blocks = chosen(stride);
        let bytes = (blocks.len() as u64) * (chains as u64) * (state as u64);
        if bytes <= bound || stride >= phases.len() {
            return blocks;
        }
        stride *= 2;
    }
}

/// Writes the states after the blocks `kept`, of every chain of a point.
pub fn write(
    path: &Path,
    chains: &[Vec<Stood>],
    kept: &[u64],
    reader: &dyn Reader,
) -> io::Result<()> {
    let mut writer = Writer::create(path, &columns())?;
    let mut rows: Vec<(i32, i64, bool, State)> = Vec::new();
    let mut bytes = 0;
    let mut flush = |rows: &mut Vec<(i32, i64, bool, State)>| {
        let done = writer.group(|column| {
            Ok(match column {
                0 => Cells::Short(rows.iter().map(|row| row.0).collect()),
                1 => Cells::Long(rows.iter().map(|row| row.1).collect()),
                2 => Cells::Short(rows.iter().map(|row| row.2.into()).collect()),
                3 => Cells::Bytes(rows.iter().map(|row| row.3.frozen.clone()).collect()),
                _ => Cells::Bytes(rows.iter().map(|row| row.3.moving.clone()).collect()),
            })
        });
        rows.clear();
        done
    };
    for (chain, blocks) in chains.iter().enumerate() {
        let mut frozen = None;
        for &block in kept {
            let stood = &blocks[block as usize - 1];
            let mut state = reader.state(stood).map_err(io::Error::other)?;
            let here = frozen != Some(stood.state_hash.frozen);
            frozen = Some(stood.state_hash.frozen);
            if !here {
                state.frozen = Vec::new();
            }
            bytes += state.frozen.len() + state.moving.len();
            let chain = i32::try_from(chain + 1).map_err(io::Error::other)?;
            rows.push((chain, block as i64, here, state));
            if bytes > GROUP {
                flush(&mut rows)?;
                bytes = 0;
            }
        }
    }
    if !rows.is_empty() {
        flush(&mut rows)?;
    }
    writer.finish()
}

/// The parts of the state that was read last, so that states read in order are unpacked once a group.
#[derive(Default)]
pub struct Cursor {
    moving: Option<(usize, Vec<Vec<u8>>)>,
    frozen: Option<((usize, usize), Vec<u8>)>,
}

/// Where a checkpoint stands in its file.
#[derive(Debug, Clone, Copy)]
struct Seat {
    group: usize,
    row: usize,
    /// Where the frozen part stands.
    frozen: (usize, usize),
}

/// The checkpoints of a point in a sealed record.
pub struct Checkpoints {
    table: Table,
    /// By chain and block.
    seats: BTreeMap<(usize, u64), Seat>,
}

impl Checkpoints {
    /// Opens the file, which may hold at most so many states, of about `size` bytes each.
    pub fn open(path: &Path, most: u64, size: usize) -> Result<Checkpoints, String> {
        let largest = (GROUP + ROOM) as u64 + 4 * size as u64;
        let table = Table::open(path, &columns())?.within(largest);
        let rows: u64 = (0..table.groups())
            .map(|group| table.rows(group) as u64)
            .sum();
        if rows > most {
            return Err(format!(
                "it has {rows} states, and the trail has only {most}"
            ));
        }
        let mut seats = BTreeMap::new();
        let mut frozen: BTreeMap<i32, (usize, usize)> = BTreeMap::new();
        for group in 0..table.groups() {
            let cells = [0, 1, 2].map(|column| table.cells(group, column));
            let [
                Ok(Cells::Short(chains)),
                Ok(Cells::Long(blocks)),
                Ok(Cells::Short(here)),
            ] = cells
            else {
                return Err("its first columns cannot be read".into());
            };
            for row in 0..chains.len() {
                if here[row] == 1 {
                    frozen.insert(chains[row], (group, row));
                }
                let (Some(&frozen), 1.., 1..) =
                    (frozen.get(&chains[row]), chains[row], blocks[row])
                else {
                    return Err(format!(
                        "state {} of group {} is impossible",
                        row + 1,
                        group + 1
                    ));
                };
                let key = (chains[row] as usize - 1, blocks[row] as u64);
                seats.insert(key, Seat { group, row, frozen });
            }
        }
        Ok(Checkpoints { table, seats })
    }

    /// The blocks of a chain after which its state is kept, rising.
    pub fn blocks(&self, chain: usize) -> impl Iterator<Item = u64> + '_ {
        let all = self.seats.range((chain, 0)..(chain + 1, 0));
        all.map(|((_, block), _)| *block)
    }

    /// The state of a chain after a block; `None` where it is not kept.
    pub fn state(&self, chain: usize, block: u64) -> Result<Option<State>, String> {
        self.next_state(chain, block, &mut Cursor::default())
    }

    /// [`Checkpoints::state`] of one block after another.
    pub fn next_state(
        &self,
        chain: usize,
        block: u64,
        cursor: &mut Cursor,
    ) -> Result<Option<State>, String> {
        let Some(seat) = self.seats.get(&(chain, block)) else {
            return Ok(None);
        };
        let moving = match cursor.moving.take() {
            Some((group, cells)) if group == seat.group => cells,
            _ => self.bytes(seat.group, 4)?,
        };
        let frozen = match cursor.frozen.take() {
            Some((place, frozen)) if place == seat.frozen => frozen,
            _ => std::mem::take(&mut self.bytes(seat.frozen.0, 3)?[seat.frozen.1]),
        };
        let state = State {
            frozen: frozen.clone(),
            moving: moving[seat.row].clone(),
        };
        cursor.moving = Some((seat.group, moving));
        cursor.frozen = Some((seat.frozen, frozen));
        Ok(Some(state))
    }

    fn bytes(&self, group: usize, column: usize) -> Result<Vec<Vec<u8>>, String> {
        match self.table.cells(group, column)? {
            Cells::Bytes(cells) => Ok(cells),
            _ => Err("a state is not bytes".into()),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn checkpoints_are_thinned_to_the_bound() {
        use Phase::{BurnIn, Draws};
        let mut phases = [[(BurnIn, true); 5], [(Draws, true); 5]].concat();
        let all: Vec<u64> = (1..=10).collect();
        assert_eq!(kept(&phases, 10, 2, 200), all);
        assert_eq!(kept(&phases, 10, 2, 199), [2, 4, 5, 7, 9, 10]);
        assert_eq!(kept(&phases, 10, 2, 80), [4, 5, 9, 10]);
        assert_eq!(kept(&phases, 1000, 2, 1), [5, 10]);
        assert!(kept(&[], 1000, 2, 1).is_empty());
        for at in [0, 1, 7] {
            phases[at].1 = false;
        }
        assert_eq!(kept(&phases, 10, 2, 200), [3, 4, 5, 6, 7, 9, 10]);
    }
}
