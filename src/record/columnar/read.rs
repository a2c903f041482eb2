//! Reading, a column of a group of rows at a time.

use super::write::schema;
use super::{Cells, Column, Kind, guard};
use bytes::Bytes;
use parquet::basic::Compression;
use parquet::column::reader::ColumnReader;
use parquet::data_type::{ByteArray, FixedLenByteArray};
use parquet::errors::ParquetError;
use parquet::file::metadata::{ColumnChunkMetaData, ParquetMetaData, ParquetMetaDataReader};
use parquet::file::serialized_reader::SerializedPageReader;
use std::fs::File;
use std::os::unix::fs::FileExt;
use std::path::Path;
use std::sync::Arc;

/// The last bytes of a file: length of the footer and the magic word.
const TAIL: u64 = 8;
/// A footer longer than this is refused.
const LONGEST_FOOTER: u64 = 1 << 28;
/// Bytes of one column of one group, unpacked, at most. We write far smaller ones.
const LARGEST_COLUMN: u64 = 1 << 30;

/// An open file, its footer read and its columns those expected.
pub struct Table {
    file: File,
    columns: Vec<Column>,
    about: ParquetMetaData,
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
            if count < 0 || count > i64::from(i32::MAX) {
                return Err("a group of rows has an impossible length".into());
            }
            rows += count;
        }
        if rows != about.file_metadata().num_rows() {
            return Err("its groups do not make up its rows".into());
        }
        Ok(Table {
            file,
            columns: columns.to_vec(),
            about,
        })
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
        let bytes = self.bytes(about, *kind, rows).map_err(wrong)?;
        let unread = |fault: ParquetError| wrong(&format!("cannot be read: {fault}"));
        let pages = SerializedPageReader::new(Arc::new(bytes), &placed(about), rows, None);
        let pages = Box::new(pages.map_err(unread)?);
        let reader = parquet::column::reader::get_column_reader(about.column_descr_ptr(), pages);
        let cells = take(reader, *kind, rows).map_err(unread)?;
        match cells {
            Some(cells) if cells.len() == rows => Ok(cells),
            _ => Err(wrong("does not have the cells it claims")),
        }
    }

    /// The bytes of a column of a group, walked.
    fn bytes(
        &self,
        about: &ColumnChunkMetaData,
        kind: Kind,
        rows: usize,
    ) -> Result<Bytes, &'static str> {
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
            Kind::Text | Kind::Bytes => LARGEST_COLUMN,
        };
        let alike = about.num_values() == rows as i64
            && about.dictionary_page_offset().is_none()
            && matches!(about.compression(), Compression::ZSTD(_));
        if !alike || unpacked > LARGEST_COLUMN {
            return Err("is not stored as records store it");
        }
        let mut bytes = vec![0; size as usize];
        self.file
            .read_exact_at(&mut bytes, from)
            .map_err(|_| "cannot be read from the disk")?;
        if !guard::pages(&bytes, unpacked, unpacked) {
            return Err("has pages that are not what records store");
        }
        Ok(bytes.into())
    }
}

/// The same column where it lies in its own bytes.
fn placed(about: &ColumnChunkMetaData) -> ColumnChunkMetaData {
    let moved = about.clone().into_builder().set_data_page_offset(0);
    moved.build().expect("only its place was changed")
}

fn footer(path: &Path) -> Result<(File, ParquetMetaData), String> {
    let said = |fault: std::io::Error| format!("it cannot be read: {fault}");
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

fn take(reader: ColumnReader, kind: Kind, rows: usize) -> Result<Option<Cells>, ParquetError> {
    macro_rules! all {
        ($column:expr) => {{
            let mut column = $column;
            let mut cells = Vec::new();
            while cells.len() < rows {
                let (_, values, _) =
                    column.read_records(rows - cells.len(), None, None, &mut cells)?;
                if values == 0 {
                    break;
                }
            }
            cells
        }};
    }
    Ok(match (reader, kind) {
        (ColumnReader::Int32ColumnReader(column), Kind::Short) => Some(Cells::Short(all!(column))),
        (ColumnReader::Int64ColumnReader(column), Kind::Long) => Some(Cells::Long(all!(column))),
        (ColumnReader::DoubleColumnReader(column), Kind::Real) => Some(Cells::Real(all!(column))),
        (ColumnReader::ByteArrayColumnReader(column), Kind::Text) => {
            let cells: Vec<ByteArray> = all!(column);
            let texts = cells.iter().map(|cell| cell.as_utf8().map(str::to_owned));
            Some(Cells::Text(texts.collect::<Result<_, _>>()?))
        }
        (ColumnReader::ByteArrayColumnReader(column), Kind::Bytes) => {
            let cells: Vec<ByteArray> = all!(column);
            Some(Cells::Bytes(
                cells.iter().map(|c| c.data().to_vec()).collect(),
            ))
        }
        (ColumnReader::FixedLenByteArrayColumnReader(column), Kind::Digest) => {
            let cells: Vec<FixedLenByteArray> = all!(column);
            let digests = cells.iter().map(|cell| cell.data().try_into().ok());
            digests
                .collect::<Option<Vec<[u8; 32]>>>()
                .map(Cells::Digest)
        }
        _ => None,
    })
}
