//! Reading, a column of a group of rows at a time.

use super::write::schema;
use super::{Cells, Column, Kind, cells, guard};
use parquet::basic::Compression;
use parquet::file::metadata::{ColumnChunkMetaData, ParquetMetaData, ParquetMetaDataReader};
use std::fs::{self, File};
use std::os::unix::fs::FileExt;
use std::path::Path;

/// The last bytes of a file: length of the footer and the magic word.
const TAIL: u64 = 8;
/// A footer longer than this is refused.
const LONGEST_FOOTER: u64 = 1 << 28;
/// Bytes of page headers and frames beside the packed cells of a column, at most.
const SPARE: u64 = 1 << 20;
/// Rows of a group at most: of draws, trail and states we write no more.
const MOST_ROWS: i64 = 1 << 17;
/// Bytes of a text at most, on average over a group: what we write are words.
const LONGEST_TEXT: u64 = 64;
/// Bytes of one column of one group, unpacked, where nothing tells how long its cells may be.
const LARGEST_COLUMN: u64 = 1 << 28;

/// An open file, its footer read and its columns those expected.
pub struct Table {
    file: File,
    columns: Vec<Column>,
    about: ParquetMetaData,
    most_bytes: u64,
}

impl Table {
    /// Opens a file that must have exactly these columns. Fails with what is wrong with it.
    pub fn open(path: &Path, columns: &[Column]) -> Result<Table, String> {
        let (file, about) = footer(path)?;
        let wanted = schema(columns).map_err(|fault| fault.to_string())?;
        let found = about.file_metadata().schema();
        if found.get_fields() != wanted.get_fields() {
            return Err("its columns are not those that it should have".into());
        }
        let mut rows: i64 = 0;
        for group in about.row_groups() {
            let count = group.num_rows();
            if !(0..=MOST_ROWS).contains(&count) {
                return Err("a group of rows has an impossible length".into());
            }
            if group.columns().len() != columns.len() {
                return Err("a group of rows lacks columns".into());
            }
            if group.sorting_columns().is_some() || !group.columns().iter().all(plain) {
                return Err("it says more of its columns than records do".into());
            }
            rows += count;
        }
        // What stands beside the cells could tell another reader something else than the cells do.
        if about.file_metadata().key_value_metadata().is_some() {
            return Err("it has notes beside its columns".into());
        }
        if rows != about.file_metadata().num_rows() {
            return Err("its groups do not make up its rows".into());
        }
        Ok(Table {
            file,
            columns: columns.to_vec(),
            about,
            most_bytes: LARGEST_COLUMN,
        })
    }

    /// With cells of any length held to so many bytes, a column of a group.
    pub fn within(mut self, most_bytes: u64) -> Table {
        self.most_bytes = most_bytes;
        self
    }

    /// Groups of rows.
    pub fn groups(&self) -> usize {
        self.about.num_row_groups()
    }

    /// Rows of a group.
    pub fn rows(&self, group: usize) -> usize {
        // Held within 31 bits when the file was opened.
        self.about.row_group(group).num_rows() as usize
    }

    /// The cells of a column of a group.
    pub fn cells(&self, group: usize, column: usize) -> Result<Cells, String> {
        let (name, kind) = &self.columns[column];
        let wrong = |what: &str| format!("column {name:?} of group {} {what}", group + 1);
        let rows = self.rows(group);
        let about = self.about.row_group(group).column(column);
        let (bytes, most) = self.bytes(about, *kind, rows).map_err(wrong)?;
        let pages = guard::pages(&bytes, most)
            .ok_or_else(|| wrong("has pages that are not what records store"))?;
        let mut cells = cells::none(*kind, rows);
        for page in pages {
            let plain = zstd::bulk::decompress(page.packed, page.unpacked)
                .ok()
                .filter(|plain| plain.len() == page.unpacked)
                .ok_or_else(|| wrong("has a page that cannot be unpacked"))?;
            cells::add(&mut cells, &plain, page.cells)
                .ok_or_else(|| wrong("has a page without the cells it claims"))?;
        }
        if cells.len() == rows {
            Ok(cells)
        } else {
            Err(wrong("does not have the cells it claims"))
        }
    }

    /// The bytes of a column of a group, and how many they may unpack to.
    fn bytes(
        &self,
        about: &ColumnChunkMetaData,
        kind: Kind,
        rows: usize,
    ) -> Result<(Vec<u8>, u64), &'static str> {
        let length = self.file.metadata().map_err(|_| "is out of reach")?.len();
        let (Ok(from), Ok(size)) = (
            u64::try_from(about.data_page_offset()),
            u64::try_from(about.compressed_size()),
        ) else {
            return Err("lies at an impossible place");
        };
        if from.checked_add(size).is_none_or(|end| end > length) {
            return Err("reaches past the end of the file");
        }
        let rows = rows as u64;
        let unpacked = match kind {
            Kind::Short => rows * 4,
            Kind::Long | Kind::Real => rows * 8,
            Kind::Digest => rows * 32,
            Kind::Text => rows * LONGEST_TEXT,
            Kind::Bytes => self.most_bytes,
        };
        let alike = about.num_values() == rows as i64
            && about.dictionary_page_offset().is_none()
            && matches!(about.compression(), Compression::ZSTD(_));
        // Packed, incompressible bytes may be a little longer than they are.
        if !alike || size > unpacked + unpacked / 64 + SPARE {
            return Err("is not stored as records store it");
        }
        let mut bytes = vec![0; size as usize];
        self.file
            .read_exact_at(&mut bytes, from)
            .map_err(|_| "cannot be read from the disk")?;
        Ok((bytes, unpacked))
    }
}

/// Whether a column is told of as records tell of theirs: no statistics or indices, nothing in another file.
fn plain(about: &ColumnChunkMetaData) -> bool {
    about.statistics().is_none()
        && about.file_path().is_none()
        && about.index_page_offset().is_none()
        && about.column_index_offset().is_none()
        && about.offset_index_offset().is_none()
        && about.bloom_filter_offset().is_none()
}

fn footer(path: &Path) -> Result<(File, ParquetMetaData), String> {
    let said = |fault: std::io::Error| format!("it cannot be read: {fault}");
    // Opening a pipe would wait for a writer.
    if !fs::metadata(path).map_err(said)?.is_file() {
        return Err("it is no file".into());
    }
    let file = File::open(path).map_err(said)?;
    let length = file.metadata().map_err(said)?.len();
    let mut tail = [0; TAIL as usize];
    let no_table = || "it is not a Parquet file".to_owned();
    let tail_at = length.checked_sub(TAIL).ok_or_else(no_table)?;
    file.read_exact_at(&mut tail, tail_at).map_err(said)?;
    if tail[4..] != *b"PAR1" {
        return Err(no_table());
    }
    let size = u64::from(u32::from_le_bytes(tail[..4].try_into().expect("4 bytes")));
    let from = tail_at.checked_sub(size).ok_or_else(no_table)?;
    if size > LONGEST_FOOTER {
        return Err("its footer is longer than any record's".into());
    }
    let mut bytes = vec![0; size as usize];
    file.read_exact_at(&mut bytes, from).map_err(said)?;
    if !guard::footer(&bytes) {
        return Err("its footer is not whole".into());
    }
    let about = ParquetMetaDataReader::decode_metadata(&bytes)
        .map_err(|fault| format!("its footer cannot be read: {fault}"))?;
    Ok((file, about))
}
