//! What a column holds: numbers or labels.
//!
//! A column is of numbers if at least half of its cells that are not empty read as numbers; a cell of text in
//! it is then a fault. Else it is of labels. So one slip of the pen cannot turn a measured column into names.

use crate::reading::load::Missing;
use crate::reading::table::Cells;
use std::collections::BTreeMap;

#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Kind {
    Numbers,
    Labels,
}

/// What one cell holds.
#[derive(Debug, Clone, Copy, PartialEq)]
enum Read {
    Empty,
    Number(f64),
    /// NaN, an infinity, or beyond the largest double.
    NotFinite,
    Text,
}

fn read(cell: &str) -> Read {
    let cell = cell.trim();
    if cell.is_empty() {
        return Read::Empty;
    }
    match cell.parse::<f64>() {
        // No second zero: -0 in a file is 0.
        Ok(x) if x.is_finite() => Read::Number(x + 0.0),
        Ok(_) => Read::NotFinite,
        Err(_) => Read::Text,
    }
}

/// Counts of what the cells of a column hold.
#[derive(Debug, Clone, Default)]
pub(super) struct Tally {
    numbers: usize,
    texts: usize,
}

impl Tally {
    pub fn add(&mut self, cell: &str) {
        match read(cell) {
            Read::Empty => (),
            Read::Number(_) | Read::NotFinite => self.numbers += 1,
            Read::Text => self.texts += 1,
        }
    }

    pub fn kind(&self) -> Kind {
        if self.numbers >= self.texts {
            Kind::Numbers
        } else {
            Kind::Labels
        }
    }
}

/// Why a cell cannot be taken: `what` goes on after "row 3 of `x` in data.csv".
pub(super) struct Wrong {
    pub what: String,
    pub label: &'static str,
    pub help: &'static str,
}

/// Takes the cells of one column.
pub(super) enum Builder {
    Numbers {
        values: Vec<f64>,
        missing: Vec<usize>,
    },
    Labels {
        levels: BTreeMap<String, usize>,
        index: Vec<usize>,
    },
}

impl Builder {
    pub fn new(kind: Kind) -> Builder {
        match kind {
            Kind::Numbers => Builder::Numbers {
                values: Vec::new(),
                missing: Vec::new(),
            },
            Kind::Labels => Builder::Labels {
                levels: BTreeMap::new(),
                index: Vec::new(),
            },
        }
    }

    /// `names`: the column names the rows.
    pub fn take(&mut self, cell: &str, missing: Missing, names: bool) -> Result<(), Wrong> {
        match self {
            Builder::Numbers {
                values,
                missing: rows,
            } => match read(cell) {
                Read::Number(x) => values.push(x),
                Read::Empty if missing == Missing::Unknown && !names => {
                    rows.push(values.len());
                    values.push(0.0);
                }
                Read::Empty => return Err(empty(names)),
                Read::NotFinite => {
                    return Err(Wrong {
                        what: format!("is not a finite number: `{cell}`"),
                        label: "not finite",
                        help: "leave the cell empty where the value is missing",
                    });
                }
                Read::Text => {
                    return Err(Wrong {
                        what: format!("is not a number: `{cell}`"),
                        label: "text among numbers",
                        help: "leave the cell empty where the value is missing; write decimals with a point; \
                               name the column in `labels` if its cells are labels",
                    });
                }
            },
            Builder::Labels { levels, index } => {
                if cell.is_empty() {
                    return Err(match missing {
                        Missing::Unknown if !names => Wrong {
                            what: "is empty, and a label cannot be an unknown".into(),
                            label: "a label is missing",
                            help: "give it a label of its own, such as `none`, or say `missing = \"drop rows\"`",
                        },
                        _ => empty(names),
                    });
                }
                let next = levels.len();
                index.push(*levels.entry(cell.to_string()).or_insert(next));
            }
        }
        Ok(())
    }

    pub fn finish(self) -> Cells {
        match self {
            Builder::Numbers { values, missing } => Cells::Numbers {
                values: values.into(),
                missing,
            },
            Builder::Labels { levels, index } => {
                let mut ordered = vec![String::new(); levels.len()];
                for (level, at) in levels {
                    ordered[at] = level;
                }
                Cells::Labels {
                    levels: ordered,
                    index,
                }
            }
        }
    }
}

fn empty(names: bool) -> Wrong {
    if names {
        return Wrong {
            what: "is empty, and this column names the rows".into(),
            label: "a name is missing",
            help: "give every row a name",
        };
    }
    Wrong {
        what: "is empty".into(),
        label: "a value is missing",
        help: "fill it in, or say what an empty cell means: `missing = \"drop rows\"` or `\"unknown\"`; \
               list the only columns to read in `columns` if this one is not used",
    }
}
