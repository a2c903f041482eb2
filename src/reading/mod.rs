//! Files: spanned sections of TOML, and data files (CSV).

mod column;
mod csv;
mod data;
mod file;
mod files;
mod load;
mod parse;
mod section;
mod slips;
mod string;
mod table;
mod value;

#[cfg(test)]
mod tests;

pub use data::{data, table};
pub use file::{Bytes, LARGEST_DATA, LARGEST_STUDY, read, text};
pub use files::Files;
pub use load::{How, Missing, load};
pub use parse::parse;
pub use section::Section;
pub use table::{Cells, Column, Matrix, RowNames, Table};
pub use value::{Content, Entry, Tree, Value};
