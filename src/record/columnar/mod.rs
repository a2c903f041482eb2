//! The columnar files of a record: Parquet with plain required columns, one compression, no statistics and no
//! dictionaries, so that equal content has equal bytes and any outside reader can read it.
//!
//! What is read may come from a stranger. The footer is walked by [`guard`] before the library sees it, page headers
//! are walked there alone, and pages are read here: no count may ask for more memory than the table it claims to be
//! can need, and nothing stands beside the cells that another reader would be told.

mod cells;
mod guard;
mod read;
mod write;

pub use read::Table;
pub use write::Writer;

/// What a column holds.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Kind {
    /// 32-bit whole numbers.
    Short,
    /// 64-bit whole numbers.
    Long,
    /// Doubles.
    Real,
    /// UTF-8.
    Text,
    /// 32 bytes.
    Digest,
    /// Bytes of any length.
    Bytes,
}

/// The cells of one column of one group of rows.
#[derive(Debug, Clone, PartialEq)]
pub enum Cells {
    Short(Vec<i32>),
    Long(Vec<i64>),
    Real(Vec<f64>),
    Text(Vec<String>),
    Digest(Vec<[u8; 32]>),
    Bytes(Vec<Vec<u8>>),
}

impl Cells {
    fn len(&self) -> usize {
        match self {
            Cells::Short(cells) => cells.len(),
            Cells::Long(cells) => cells.len(),
            Cells::Real(cells) => cells.len(),
            Cells::Text(cells) => cells.len(),
            Cells::Digest(cells) => cells.len(),
            Cells::Bytes(cells) => cells.len(),
        }
    }
}

/// A column: its name and what it holds.
pub type Column = (String, Kind);

#[cfg(test)]
mod tests;
