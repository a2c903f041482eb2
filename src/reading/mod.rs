//! Files: spanned sections of TOML, and data files (CSV).

mod parse;
mod section;
mod string;
mod table;
mod value;

pub use parse::parse;
pub use section::Section;
pub use table::{Cells, Column, Matrix, RowNames, Table};
pub use value::{Content, Entry, Tree, Value};
