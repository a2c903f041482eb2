//! `data/draws/`: for each point one file of its draws and one of its burn-in; a row a draw, a column a quantity.
//! A group of rows holds whole blocks of one chain. Chains and draws are counted from 1 in the file.

use super::columnar::{Cells, Column, Kind, Table, Writer};
use crate::course::{Phase, Quantity, State};
use crate::engine::{Columns, Ledger, Mark, Reader, Stood};
use std::io;
use std::ops::Range;
use std::path::{Path, PathBuf};
use std::sync::Arc;

/// Rows of a group at most, and bytes of all its columns; a group holds at least one block.
const GROUP_ROWS: u64 = 1 << 17;
const GROUP_BYTES: u64 = 1 << 25;

/// Where the draws of a point (from 0) lie in a record.
pub fn name(point: usize, phase: Phase) -> String {
    let part = match phase {
        Phase::BurnIn => "-burn-in",
        Phase::Draws => "",
    };
    format!("data/draws/point-{}{part}.parquet", point + 1)
}

fn columns(quantities: &[Quantity]) -> Vec<Column> {
    let own = |name: &str| {
        // Outside readers want every column to have a name of its own.
        let taken = name == "chain" || name == "draw";
        let name = if taken {
            format!("{name} (quantity)")
        } else {
            name.to_owned()
        };
        (name, Kind::Real)
    };
    let mut columns = vec![("chain".into(), Kind::Short), ("draw".into(), Kind::Long)];
    columns.extend(quantities.iter().map(|quantity| own(&quantity.name)));
    columns
}

/// The blocks of one chain that make up each group of rows.
fn groups(blocks: &[Stood], quantities: usize) -> Vec<Range<usize>> {
    let most = (GROUP_BYTES / (8 * quantities.max(1) as u64)).clamp(1, GROUP_ROWS);
    let mut groups: Vec<Range<usize>> = Vec::new();
    let mut rows = 0;
    for (at, block) in blocks.iter().enumerate() {
        let draws = block.draws as u64;
        match groups.last_mut() {
            Some(last) if rows + draws <= most => {
                last.end = at + 1;
                rows += draws;
            }
            _ => {
                groups.push(at..at + 1);
                rows = draws;
            }
        }
    }
    groups
}

/// Writes the blocks of every chain of a point in one phase.
pub fn write(
    path: &Path,
    quantities: &[Quantity],
    chains: &[Vec<Stood>],
    reader: &dyn Reader,
) -> io::Result<()> {
    let mut writer = Writer::create(path, &columns(quantities))?;
    for (chain, blocks) in chains.iter().enumerate() {
        let mut first: u64 = 1;
        for group in groups(blocks, quantities.len()) {
            let blocks = &blocks[group];
            let rows: u64 = blocks.iter().map(|block| block.draws as u64).sum();
            let chain = i32::try_from(chain + 1).map_err(io::Error::other)?;
            writer.group(|column| match column {
                0 => Ok(Cells::Short(vec![chain; rows as usize])),
                1 => Ok(Cells::Long(
                    (first..first + rows).map(|i| i as i64).collect(),
                )),
                quantity => {
                    let mut cells = Vec::with_capacity(rows as usize);
                    for block in blocks {
                        let read = reader.column(block.mark, quantity - 2, &mut cells);
                        read.map_err(io::Error::other)?;
                    }
                    Ok(Cells::Real(cells))
                }
            })?;
            first += rows;
        }
    }
    writer.finish()
}

/// The draws of one phase of a point in a sealed record.
pub struct DrawsFile {
    path: PathBuf,
    table: Table,
    quantities: usize,
    ledgers: Vec<Ledger>,
    /// Draws of each chain.
    draws: u64,
}

impl DrawsFile {
    /// Opens the file, which must hold `draws` draws of each of `chains` chains, in order.
    pub fn open(
        path: &Path,
        quantities: &[Quantity],
        chains: usize,
        draws: u64,
    ) -> Result<DrawsFile, String> {
        let table = Table::open(path, &columns(quantities))?;
        let mut ledgers = vec![Ledger::default(); chains];
        let mut chain = 0;
        let mut done = 0;
        for group in 0..table.groups() {
            let rows = table.rows(group) as u64;
            if done == draws {
                chain += 1;
                done = 0;
            }
            if chain == chains || rows == 0 || done + rows > draws {
                return Err("it has draws that the trail does not have".into());
            }
            let Cells::Short(numbers) = table.cells(group, 0)? else {
                unreachable!("the kinds were held against the columns");
            };
            let Cells::Long(places) = table.cells(group, 1)? else {
                unreachable!("the kinds were held against the columns");
            };
            let right = numbers.iter().all(|&number| number as usize == chain + 1)
                && places.iter().zip(done + 1..).all(|(&at, i)| at as u64 == i);
            if !right {
                return Err(format!(
                    "its chains and draws are not counted in order in group {}",
                    group + 1
                ));
            }
            ledgers[chain].push(Phase::Draws, rows as usize, Mark(group as u64));
            done += rows;
        }
        if (chain + 1, done) != (chains, draws) {
            return Err("it lacks draws that the trail has".into());
        }
        Ok(DrawsFile {
            path: path.to_owned(),
            table,
            quantities: quantities.len(),
            ledgers,
            draws,
        })
    }

    /// A span of the draws of all chains.
    pub fn columns(self: &Arc<Self>, span: Range<u64>) -> Columns {
        Columns::new(self.ledgers.clone(), self.clone(), Phase::Draws, span)
    }

    /// A span of the draws of the first chains, and of them the quantities at these places.
    pub fn chosen(
        self: &Arc<Self>,
        chains: usize,
        places: Vec<usize>,
        span: Range<u64>,
    ) -> Columns {
        let file = self.clone();
        let reader = Arc::new(Chosen { file, places });
        Columns::new(self.ledgers[..chains].to_vec(), reader, Phase::Draws, span)
    }

    /// Draws of each chain.
    pub fn draws(&self) -> u64 {
        self.draws
    }

    /// Goes through the draws of one chain a group at a time: `each` is given the first draw of the group
    /// (from 0) and a column a quantity.
    pub fn chain(
        &self,
        chain: usize,
        mut each: impl FnMut(u64, &[Vec<f64>]) -> Result<(), String>,
    ) -> Result<(), String> {
        let mut first = 0;
        for (rows, mark) in self.ledgers[chain].marks(Phase::Draws) {
            let columns: Result<Vec<Vec<f64>>, String> = (0..self.quantities)
                .map(|quantity| {
                    let mut column = Vec::new();
                    self.column(mark, quantity, &mut column).map(|()| column)
                })
                .collect();
            each(first, &columns?)?;
            first += rows;
        }
        Ok(())
    }
}

/// Some quantities of a file, counted anew.
struct Chosen {
    file: Arc<DrawsFile>,
    places: Vec<usize>,
}

impl Reader for Chosen {
    fn column(&self, mark: Mark, quantity: usize, into: &mut Vec<f64>) -> Result<(), String> {
        self.file.column(mark, self.places[quantity], into)
    }

    fn state(&self, block: &Stood) -> Result<State, String> {
        self.file.state(block)
    }
}

impl Reader for DrawsFile {
    fn column(&self, mark: Mark, quantity: usize, into: &mut Vec<f64>) -> Result<(), String> {
        let cells = self.table.cells(mark.0 as usize, quantity + 2);
        match cells.map_err(|words| format!("{}: {words}", self.path.display()))? {
            Cells::Real(cells) if into.is_empty() => *into = cells,
            Cells::Real(cells) => into.extend(cells),
            _ => unreachable!("the kinds were held against the columns"),
        }
        Ok(())
    }

    fn state(&self, _: &Stood) -> Result<State, String> {
        Err("draws hold no states".into())
    }
}
