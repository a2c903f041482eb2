//! A CSV file to a table: two passes, one to learn what each column holds, one to take the cells.

use crate::place::{Fault, Faults, Place, Source, Text, nearest};
use crate::reading::column::{Builder, Kind, Tally};
use crate::reading::csv::{Cell, Misquoted, Rows};
use crate::reading::table::{Cells, Column, Matrix, RowNames, Table};
use crate::reading::value::listed;
use std::collections::BTreeMap;
use std::ops::Range;
use std::sync::Arc;

/// What an empty cell means.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Missing {
    #[default]
    Fault,
    DropRows,
    Unknown,
}

/// What a study says about a data file.
#[derive(Debug, Clone, Default)]
pub struct How {
    /// The column that names the rows.
    pub names: Option<Text>,
    /// The only columns to be read; all when left out.
    pub columns: Option<Vec<Text>>,
    /// Columns of labels even though their cells look like numbers.
    pub labels: Vec<Text>,
    pub missing: Missing,
    /// Unit of a column.
    pub units: Vec<(Text, Text)>,
    /// Name of a matrix, and the patterns of its columns.
    pub matrices: Vec<(Text, Vec<Text>)>,
}

/// Faults of one kind shown of a column or of the rows; the rest is counted.
const SHOWN: usize = 3;

/// Reads a table from the text of its file. `None` only with a fault recorded; a table may be given beside
/// faults of units and matrices.
pub fn load(
    name: &str,
    source: Arc<Source>,
    sha256: String,
    how: &How,
    faults: &mut Faults,
) -> Option<Table> {
    let loader = Loader::open(name, &source, how, faults)?;
    let tallies = loader.tally(faults)?;
    let mut table = loader.take(&tallies, sha256, faults)?;
    loader.units(&mut table, faults);
    loader.matrices(&mut table, faults);
    Some(table)
}

struct Loader<'a> {
    name: &'a str,
    source: &'a Arc<Source>,
    how: &'a How,
    /// Cells of the header.
    header: Vec<Cell<'a>>,
    /// Positions in a row of the columns that are read.
    read: Vec<usize>,
    /// Where the first row begins.
    body: usize,
}

impl<'a> Loader<'a> {
    fn place(&self, span: Range<usize>) -> Place {
        Place {
            source: self.source.clone(),
            span,
        }
    }

    fn misquoted(&self, fault: Misquoted) -> Fault {
        let what = format!("{} has {}", self.source.name, fault.what);
        Fault::at(self.place(fault.span), what)
            .label("this quote")
            .help(fault.help)
    }

    fn open(
        name: &'a str,
        source: &'a Arc<Source>,
        how: &'a How,
        faults: &mut Faults,
    ) -> Option<Loader<'a>> {
        let mut rows = Rows::new(&source.text);
        let mut loader = Loader {
            name,
            source,
            how,
            header: Vec::new(),
            read: Vec::new(),
            body: 0,
        };
        if rows.ended() {
            faults.push(
                Fault::at(loader.place(0..0), format!("{} is empty", source.name))
                    .help("the first line holds the names of the columns, each further line a row"),
            );
            return None;
        }
        let mut header = Vec::new();
        if let Err(fault) = rows.next(&mut header) {
            faults.push(loader.misquoted(fault));
            return None;
        }
        loader.body = rows.offset();
        loader.header = header;
        loader.check_header(faults)?;
        loader.choose(faults)?;
        Some(loader)
    }

    /// Every column has a name of its own.
    fn check_header(&self, faults: &mut Faults) -> Option<()> {
        let mut sound = true;
        let mut seen: BTreeMap<&str, &Cell<'_>> = BTreeMap::new();
        for (position, cell) in self.header.iter().enumerate() {
            let place = self.place(cell.span.clone());
            if cell.text.is_empty() {
                sound = false;
                let number = position + 1;
                faults.push(
                    Fault::at(
                        place,
                        format!("column {number} of {} has no name", self.source.name),
                    )
                    .label("an empty cell in the first line")
                    .help("the first line holds the names of the columns"),
                );
            } else if let Some(first) = seen.insert(&cell.text, cell) {
                sound = false;
                faults.push(
                    Fault::at(
                        place,
                        format!(
                            "{} has two columns called `{}`",
                            self.source.name, cell.text
                        ),
                    )
                    .label("the second")
                    .related(self.place(first.span.clone()), "the first"),
                );
            }
        }
        if let [only] = &self.header[..]
            && let Some(other) = only.text.find([';', '\t', '|'])
        {
            sound = false;
            let at = only.span.start + other;
            faults.push(
                Fault::at(
                    self.place(at..at + 1),
                    format!(
                        "the columns of {} are not separated by commas",
                        self.source.name
                    ),
                )
                .label("separated by this?")
                .help("save the file with commas between the columns, and points in the numbers"),
            );
        }
        sound.then_some(())
    }

    /// The columns to be read, and those that the study names but the file has not.
    fn choose(&mut self, faults: &mut Faults) -> Option<()> {
        let mut sound = true;
        let mut wanted: Vec<&Text> = self.how.names.iter().collect();
        wanted.extend(self.how.labels.iter());
        wanted.extend(self.how.units.iter().map(|(column, _)| column));
        wanted.extend(self.how.columns.iter().flatten());
        for text in wanted {
            sound &= self.position(text, faults).is_some();
        }
        self.read = match &self.how.columns {
            None => (0..self.header.len()).collect(),
            Some(chosen) => (0..self.header.len())
                .filter(|&at| {
                    let name = &self.header[at].text;
                    let is = |text: &Text| text.text == **name;
                    chosen.iter().any(is) || self.how.names.as_ref().is_some_and(is)
                })
                .collect(),
        };
        sound.then_some(())
    }

    fn position(&self, column: &Text, faults: &mut Faults) -> Option<usize> {
        let names = || self.header.iter().map(|cell| &*cell.text);
        let found = names().position(|name| name == column.text);
        if found.is_none() {
            let what = format!("{} has no column `{}`", self.source.name, column.text);
            let fault = Fault::at(column.place.clone(), what).label("no such column");
            let known: Vec<&str> = names().collect();
            faults.push(match nearest(&column.text, names()) {
                Some(near) => fault.help(format!("did you mean `{near}`?")),
                None => fault.help(format!("its columns are {}", listed(&known, "and"))),
            });
        }
        found
    }

    /// Runs over the rows below the header: number of the row from 1, where it begins, its cells.
    fn rows(&self, mut each: impl FnMut(usize, usize, &[Cell<'a>])) -> Result<(), Misquoted> {
        let mut rows = Rows::starting(&self.source.text, self.body);
        let mut cells = Vec::new();
        let mut number = 0;
        while !rows.ended() {
            let start = rows.offset();
            rows.next(&mut cells)?;
            let blank = cells.len() == 1 && cells[0].span.is_empty();
            if blank && self.header.len() > 1 {
                continue;
            }
            number += 1;
            each(number, start, &cells);
        }
        Ok(())
    }

    /// First pass: rows of the right length, and what each column holds.
    fn tally(&self, faults: &mut Faults) -> Option<Vec<Tally>> {
        let mut tallies = vec![Tally::default(); self.read.len()];
        let width = self.header.len();
        let mut ragged = Vec::new();
        let mut rows = 0;
        let done = self.rows(|number, _, cells| {
            rows = number;
            if cells.len() != width {
                let end = cells[cells.len() - 1].span.end;
                ragged.push((number, cells[0].span.start..end, cells.len()));
                return;
            }
            for (tally, &at) in tallies.iter_mut().zip(&self.read) {
                tally.add(&cells[at].text);
            }
        });
        if let Err(fault) = done {
            faults.push(self.misquoted(fault));
            return None;
        }
        let more = ragged.len().saturating_sub(SHOWN);
        for (i, (number, span, cells)) in ragged.iter().take(SHOWN).enumerate() {
            let mut what = format!(
                "row {number} of {} has {cells} cells where the first line has {width}",
                self.source.name
            );
            if i + 1 == SHOWN && more > 0 {
                what.push_str(&format!(", and so {more} more"));
            }
            let mut fault =
                Fault::at(self.place(span.clone()), what).label(format!("{cells} cells"));
            if *cells > width {
                fault = fault
                    .help("put a cell that holds a comma in quotes; write decimals with a point");
            }
            faults.push(fault);
        }
        if rows == 0 {
            faults.push(Fault::at(
                self.place(self.header[0].span.clone()),
                format!("{} has no rows below its first line", self.source.name),
            ));
        }
        (ragged.is_empty() && rows > 0).then_some(tallies)
    }

    /// Second pass: the cells themselves.
    fn take(&self, tallies: &[Tally], sha256: String, faults: &mut Faults) -> Option<Table> {
        let mut builders: Vec<Builder> = Vec::new();
        for (tally, &at) in tallies.iter().zip(&self.read) {
            let forced = |text: &Text| text.text == *self.header[at].text;
            let kind = match self.how.labels.iter().any(forced) {
                true => Kind::Labels,
                false => tally.kind(),
            };
            builders.push(Builder::new(kind));
        }
        let position = |text: &Text| self.header.iter().position(|cell| *cell.text == text.text);
        let names_at = self.how.names.as_ref().and_then(position);
        let mut names: Vec<String> = Vec::new();
        let mut named: BTreeMap<String, Range<usize>> = BTreeMap::new();
        let mut again = Vec::new();
        let mut starts = Vec::new();
        let mut dropped = Vec::new();
        let mut missing = 0;
        let mut found: Vec<Fault> = Vec::new();
        let mut shown = vec![0; builders.len()];
        let done = self.rows(|number, start, cells| {
            let empty = self
                .read
                .iter()
                .filter(|&&at| cells[at].text.is_empty())
                .count();
            missing += empty;
            if empty > 0 && self.how.missing == Missing::DropRows {
                dropped.push(number);
                return;
            }
            for (column, (builder, &at)) in builders.iter_mut().zip(&self.read).enumerate() {
                let cell = &cells[at];
                let name_cell = names_at == Some(at);
                let Err(wrong) = builder.take(&cell.text, self.how.missing, name_cell) else {
                    continue;
                };
                shown[column] += 1;
                if shown[column] <= SHOWN {
                    let column = &self.header[at].text;
                    let what = format!(
                        "row {number} of `{column}` in {} {}",
                        self.source.name, wrong.what
                    );
                    let fault = Fault::at(self.place(cell.span.clone()), what).label(wrong.label);
                    found.push(fault.help(wrong.help));
                }
            }
            if let Some(at) = names_at {
                let cell = &cells[at];
                let name = cell.text.to_string();
                if let Some(first) = named.get(&name).filter(|_| !name.is_empty()) {
                    again.push((number, name.clone(), cell.span.clone(), first.clone()));
                } else {
                    named.insert(name.clone(), cell.span.clone());
                }
                names.push(name);
            }
            starts.push(start);
        });
        if let Err(fault) = done {
            faults.push(self.misquoted(fault));
            return None;
        }
        found.extend(self.named_twice(&again));
        for (column, &count) in shown.iter().enumerate() {
            if count > SHOWN {
                let cell = &self.header[self.read[column]];
                let more = count - SHOWN;
                let what = format!(
                    "`{}` in {} has {more} more such cells",
                    cell.text, self.source.name
                );
                found.push(Fault::at(self.place(cell.span.clone()), what));
            }
        }
        if starts.is_empty() {
            found.push(Fault::at(
                self.place(self.header[0].span.clone()),
                format!(
                    "every row of {} has an empty cell and was dropped",
                    self.source.name
                ),
            ));
        }
        let sound = found.is_empty();
        found.into_iter().for_each(|fault| faults.push(fault));
        if !sound {
            return None;
        }
        let columns = builders
            .into_iter()
            .zip(&self.read)
            .map(|(builder, &at)| Column {
                name: self.header[at].text.to_string(),
                unit: None,
                place: self.place(self.header[at].span.clone()),
                position: at,
                cells: builder.finish(),
            });
        Some(Table {
            name: self.name.to_string(),
            rows: starts.len(),
            names: self.how.names.as_ref().map(|column| RowNames {
                column: column.text.clone(),
                values: names,
            }),
            columns: columns.collect(),
            matrices: Vec::new(),
            sha256,
            missing,
            dropped,
            source: self.source.clone(),
            starts,
        })
    }

    /// One fault for all rows whose names stand before: number, name, its place, and where it stands first.
    fn named_twice(&self, again: &[(usize, String, Range<usize>, Range<usize>)]) -> Option<Fault> {
        let (_, name, span, first) = again.first()?;
        let what = match again {
            [_] => format!("two rows of {} are called `{name}`", self.source.name),
            [a, b, more @ ..] => {
                let more = match more.len() {
                    0 => String::new(),
                    more => format!(", and so {more} more"),
                };
                format!(
                    "rows of {} are called like rows before them: row {} `{}`, row {} `{}`{more}",
                    self.source.name, a.0, a.1, b.0, b.1
                )
            }
            [] => return None,
        };
        let fault = Fault::at(self.place(span.clone()), what)
            .label("the second")
            .help("the column of `names` must hold another name in each row")
            .related(self.place(first.clone()), "the first");
        Some(fault)
    }

    fn units(&self, table: &mut Table, faults: &mut Faults) {
        for (column, unit) in &self.how.units {
            match table.columns.iter_mut().find(|c| c.name == column.text) {
                Some(found) => found.unit = Some(unit.text.clone()),
                None => faults.push(not_read(column)),
            }
        }
    }

    fn matrices(&self, table: &mut Table, faults: &mut Faults) {
        for (name, patterns) in &self.how.matrices {
            if let Some(column) = table.column(&name.text) {
                faults.push(
                    Fault::at(
                        name.place.clone(),
                        format!(
                            "`{}` is a column of {} already",
                            name.text, self.source.name
                        ),
                    )
                    .label("give the matrix a name of its own")
                    .related(column.place.clone(), "the column"),
                );
            }
            let mut columns = Vec::new();
            for pattern in patterns {
                self.matching(table, pattern, &mut columns, faults);
            }
            columns.sort_unstable();
            columns.dedup();
            table.matrices.push(Matrix {
                name: name.text.clone(),
                columns,
            });
        }
    }

    /// Adds the columns that a pattern of a matrix stands for.
    fn matching(&self, table: &Table, pattern: &Text, into: &mut Vec<usize>, faults: &mut Faults) {
        let mut any = false;
        for (at, column) in table.columns.iter().enumerate() {
            if !glob(&pattern.text, &column.name) {
                continue;
            }
            any = true;
            let wrong = match &column.cells {
                Cells::Labels { .. } => "holds labels, not numbers",
                Cells::Numbers { missing, .. } if !missing.is_empty() => "has empty cells",
                Cells::Numbers { .. } => {
                    into.push(at);
                    continue;
                }
            };
            faults.push(
                Fault::at(
                    pattern.place.clone(),
                    format!(
                        "`{}` takes in the column `{}`, which {wrong}",
                        pattern.text, column.name
                    ),
                )
                .label("a matrix has numbers only")
                .related(column.place.clone(), "this column"),
            );
        }
        if !any {
            let names: Vec<&str> = table.columns.iter().map(|c| c.name.as_str()).collect();
            faults.push(
                Fault::at(
                    pattern.place.clone(),
                    format!("no column of {} fits `{}`", self.source.name, pattern.text),
                )
                .label("`*` stands for any characters")
                .help(format!("its columns are {}", listed(&names, "and"))),
            );
        }
    }
}

fn not_read(column: &Text) -> Fault {
    let what = format!(
        "the column `{}` is not among those that are read",
        column.text
    );
    Fault::at(column.place.clone(), what).help("add it to `columns`")
}

/// `*` stands for any characters, none included; everything else for itself.
fn glob(pattern: &str, name: &str) -> bool {
    let mut pieces = pattern.split('*');
    let first = pieces.next().unwrap_or("");
    let Some(mut rest) = name.strip_prefix(first) else {
        return false;
    };
    let pieces: Vec<&str> = pieces.collect();
    let Some((last, middle)) = pieces.split_last() else {
        return rest.is_empty();
    };
    for piece in middle {
        let Some(at) = rest.find(piece) else {
            return false;
        };
        rest = &rest[at + piece.len()..];
    }
    rest.ends_with(last)
}

#[cfg(test)]
mod tests;
