//! Writing, a group of rows at a time and in it a column at a time.

use super::{Cells, Column, Kind};
use parquet::basic::{Compression, LogicalType, Repetition, Type as Physical, ZstdLevel};
use parquet::column::writer::ColumnWriter;
use parquet::data_type::{ByteArray, FixedLenByteArray};
use parquet::errors::ParquetError;
use parquet::file::properties::{EnabledStatistics, WriterProperties, WriterVersion};
use parquet::file::writer::SerializedFileWriter;
use parquet::schema::types::{Type, TypePtr};
use std::fs::File;
use std::io;
use std::path::Path;
use std::sync::Arc;

/// Bytes of a page before compression, about.
const PAGE: usize = 1 << 20;

/// A file being written.
pub struct Writer {
    file: SerializedFileWriter<File>,
    columns: usize,
}

impl Writer {
    /// Begins a file of these columns.
    pub fn create(path: &Path, columns: &[Column]) -> io::Result<Writer> {
        let properties = WriterProperties::builder()
            .set_writer_version(WriterVersion::PARQUET_1_0)
            .set_compression(Compression::ZSTD(ZstdLevel::default()))
            .set_dictionary_enabled(false)
            .set_statistics_enabled(EnabledStatistics::None)
            .set_offset_index_disabled(true)
            .set_data_page_size_limit(PAGE)
            .set_created_by("odograph".into())
            .build();
        let schema = schema(columns).map_err(said)?;
        let file = File::create(path)?;
        let file = SerializedFileWriter::new(file, schema, Arc::new(properties)).map_err(said)?;
        Ok(Writer {
            file,
            columns: columns.len(),
        })
    }

    /// Writes a group of rows; `cells` gives each column in turn, by its index.
    pub fn group(&mut self, mut cells: impl FnMut(usize) -> io::Result<Cells>) -> io::Result<()> {
        let mut group = self.file.next_row_group().map_err(said)?;
        for index in 0..self.columns {
            let cells = cells(index)?;
            let column = group.next_column().map_err(said)?;
            let mut column = column.ok_or_else(|| io::Error::other("a column too many"))?;
            put(column.untyped(), cells).map_err(said)?;
            column.close().map_err(said)?;
        }
        group.close().map_err(said)?;
        Ok(())
    }

    /// Ends the file and forces it to the disk.
    pub fn finish(self) -> io::Result<()> {
        self.file.into_inner().map_err(said)?.sync_all()
    }
}

fn put(column: &mut ColumnWriter<'_>, cells: Cells) -> Result<(), ParquetError> {
    match (column, cells) {
        (ColumnWriter::Int32ColumnWriter(column), Cells::Short(cells)) => {
            column.write_batch(&cells, None, None)
        }
        (ColumnWriter::Int64ColumnWriter(column), Cells::Long(cells)) => {
            column.write_batch(&cells, None, None)
        }
        (ColumnWriter::DoubleColumnWriter(column), Cells::Real(cells)) => {
            column.write_batch(&cells, None, None)
        }
        (ColumnWriter::ByteArrayColumnWriter(column), Cells::Text(cells)) => {
            let cells: Vec<ByteArray> = cells.iter().map(|cell| cell.as_str().into()).collect();
            column.write_batch(&cells, None, None)
        }
        (ColumnWriter::ByteArrayColumnWriter(column), Cells::Bytes(cells)) => {
            let cells: Vec<ByteArray> = cells.into_iter().map(ByteArray::from).collect();
            column.write_batch(&cells, None, None)
        }
        (ColumnWriter::FixedLenByteArrayColumnWriter(column), Cells::Digest(cells)) => {
            let cells: Vec<FixedLenByteArray> = cells
                .iter()
                .map(|cell| ByteArray::from(cell.to_vec()).into())
                .collect();
            column.write_batch(&cells, None, None)
        }
        _ => Err(ParquetError::General("cells of another kind".into())),
    }
    .map(|_| ())
}

/// The schema of these columns.
pub(super) fn schema(columns: &[Column]) -> Result<TypePtr, ParquetError> {
    let fields = columns.iter().map(|(name, kind)| {
        let (physical, length, logical) = match kind {
            Kind::Short => (Physical::INT32, -1, None),
            Kind::Long => (Physical::INT64, -1, None),
            Kind::Real => (Physical::DOUBLE, -1, None),
            Kind::Text => (Physical::BYTE_ARRAY, -1, Some(LogicalType::String)),
            Kind::Digest => (Physical::FIXED_LEN_BYTE_ARRAY, 32, None),
            Kind::Bytes => (Physical::BYTE_ARRAY, -1, None),
        };
        let field = Type::primitive_type_builder(name, physical)
            .with_repetition(Repetition::REQUIRED)
            .with_length(length)
            .with_logical_type(logical);
        field.build().map(Arc::new)
    });
    let fields: Result<Vec<TypePtr>, ParquetError> = fields.collect();
    Type::group_type_builder("record")
        .with_fields(fields?)
        .build()
        .map(Arc::new)
}

/// The library's failure as one of the disk, which it is where we write.
fn said(fault: ParquetError) -> io::Error {
    match fault {
        ParquetError::External(inner) => match inner.downcast::<io::Error>() {
            Ok(io) => *io,
            Err(other) => io::Error::other(other),
        },
        other => io::Error::other(other),
    }
}
