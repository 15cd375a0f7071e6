use super::{FolderError, write_atomically};
use parquet::basic::{Compression, LogicalType, Repetition, Type as Physical};
use parquet::data_type::{BoolType, ByteArray, ByteArrayType, DoubleType, Int64Type};
use parquet::errors::ParquetError;
use parquet::file::properties::WriterProperties;
use parquet::file::writer::{SerializedColumnWriter, SerializedFileWriter};
use parquet::schema::types::Type;
use std::io::Write;
use std::path::Path;
use std::sync::Arc;

/// A table of named columns, to be written as Parquet or CSV.
pub(crate) struct Table {
    pub(crate) columns: Vec<Column>,
}

/// One column; its name carries its unit.
pub(crate) struct Column {
    pub(crate) name: String,
    /// The values of the rows that have one.
    pub(crate) values: Values,
    /// Which rows have a value; `None`: all.
    pub(crate) present: Option<Arc<[bool]>>,
}

/// The values of a column.
pub(crate) enum Values {
    Number(Vec<f64>),
    Count(Vec<i64>),
    Flag(Vec<bool>),
    Text(Vec<String>),
}

impl Column {
    /// A column with a value in every row.
    pub(crate) fn new(name: impl Into<String>, values: Values) -> Self {
        Self { name: name.into(), values, present: None }
    }

    fn schema_type(&self) -> Result<Type, ParquetError> {
        let (physical, logical) = match self.values {
            Values::Number(_) => (Physical::DOUBLE, None),
            Values::Count(_) => (Physical::INT64, None),
            Values::Flag(_) => (Physical::BOOLEAN, None),
            Values::Text(_) => (Physical::BYTE_ARRAY, Some(LogicalType::String)),
        };
        let repetition = if self.present.is_some() { Repetition::OPTIONAL } else { Repetition::REQUIRED };
        Type::primitive_type_builder(&self.name, physical)
            .with_logical_type(logical)
            .with_repetition(repetition)
            .build()
    }

    fn write(&self, writer: &mut SerializedColumnWriter<'_>) -> Result<(), ParquetError> {
        let levels: Option<Vec<i16>> =
            self.present.as_ref().map(|rows| rows.iter().map(|&row| i16::from(row)).collect());
        let levels = levels.as_deref();
        match &self.values {
            Values::Number(values) => writer.typed::<DoubleType>().write_batch(values, levels, None)?,
            Values::Count(values) => writer.typed::<Int64Type>().write_batch(values, levels, None)?,
            Values::Flag(values) => writer.typed::<BoolType>().write_batch(values, levels, None)?,
            Values::Text(values) => {
                let bytes: Vec<ByteArray> = values.iter().map(|text| text.as_str().into()).collect();
                writer.typed::<ByteArrayType>().write_batch(&bytes, levels, None)?
            }
        };
        Ok(())
    }

    /// Each row as text, empty where there is no value.
    fn cells(&self) -> Vec<String> {
        let mut values: Box<dyn Iterator<Item = String> + '_> = match &self.values {
            Values::Number(values) => Box::new(values.iter().map(|value| format!("{value:e}"))),
            Values::Count(values) => Box::new(values.iter().map(i64::to_string)),
            Values::Flag(values) => Box::new(values.iter().map(bool::to_string)),
            Values::Text(values) => {
                Box::new(values.iter().map(|text| format!("\"{}\"", text.replace('"', "\"\""))))
            }
        };
        match &self.present {
            None => values.collect(),
            Some(rows) => rows
                .iter()
                .map(|&row| if row { values.next().unwrap_or_default() } else { String::new() })
                .collect(),
        }
    }
}

impl Table {
    /// Writes `stem.parquet`, and `stem.csv` as well if asked.
    pub(crate) fn write(&self, folder: &Path, stem: &str, csv: bool) -> Result<(), FolderError> {
        self.write_parquet(&folder.join(format!("{stem}.parquet")))?;
        if csv { self.write_csv(&folder.join(format!("{stem}.csv"))) } else { Ok(()) }
    }

    pub(crate) fn write_parquet(&self, path: &Path) -> Result<(), FolderError> {
        let bytes = self.parquet_bytes().map_err(|error| FolderError::Write {
            path: path.to_owned(),
            cause: std::io::Error::other(error),
        })?;
        write_atomically(path, |writer| writer.write_all(&bytes))
    }

    fn parquet_bytes(&self) -> Result<Vec<u8>, ParquetError> {
        let fields = self.columns.iter().map(|column| column.schema_type().map(Arc::new));
        let schema =
            Type::group_type_builder("table").with_fields(fields.collect::<Result<_, _>>()?).build()?;
        let properties = WriterProperties::builder()
            .set_compression(Compression::SNAPPY)
            .set_created_by(format!("bedswell version {}", env!("CARGO_PKG_VERSION")))
            .build();
        let mut writer = SerializedFileWriter::new(Vec::new(), Arc::new(schema), Arc::new(properties))?;
        let mut rows = writer.next_row_group()?;
        let mut columns = self.columns.iter();
        while let Some(mut column_writer) = rows.next_column()? {
            if let Some(column) = columns.next() {
                column.write(&mut column_writer)?;
            }
            column_writer.close()?;
        }
        rows.close()?;
        writer.into_inner()
    }

    fn write_csv(&self, path: &Path) -> Result<(), FolderError> {
        let columns: Vec<Vec<String>> = self.columns.iter().map(Column::cells).collect();
        let names: Vec<&str> = self.columns.iter().map(|column| column.name.as_str()).collect();
        write_atomically(path, |writer| {
            writeln!(writer, "{}", names.join(","))?;
            for row in 0..columns.first().map_or(0, Vec::len) {
                let cells: Vec<&str> = columns.iter().map(|column| column[row].as_str()).collect();
                writeln!(writer, "{}", cells.join(","))?;
            }
            Ok(())
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use parquet::file::reader::{FileReader, SerializedFileReader};
    use parquet::record::Field;

    #[test]
    fn a_table_reads_back_with_its_gaps() {
        let table = Table {
            columns: vec![
                Column::new("pack", Values::Count(vec![0, 1, 2])),
                Column {
                    name: "uptake_g_per_g".into(),
                    values: Values::Number(vec![0.1, 1.0 / 3.0]),
                    present: Some([true, false, true].into()),
                },
                Column {
                    name: "failure".into(),
                    values: Values::Text(vec!["stuck".into()]),
                    present: Some([false, true, false].into()),
                },
            ],
        };
        let bytes = bytes_of(table.parquet_bytes().unwrap());
        let rows: Vec<Vec<Field>> = SerializedFileReader::new(bytes)
            .unwrap()
            .get_row_iter(None)
            .unwrap()
            .map(|row| row.unwrap().into_columns().into_iter().map(|(_, field)| field).collect())
            .collect();
        assert_eq!(rows[0], [Field::Long(0), Field::Double(0.1), Field::Null]);
        assert_eq!(rows[1], [Field::Long(1), Field::Null, Field::Str("stuck".into())]);
        assert_eq!(rows[2], [Field::Long(2), Field::Double(1.0 / 3.0), Field::Null]);
    }

    fn bytes_of(bytes: Vec<u8>) -> std::fs::File {
        use std::io::Seek;
        let path = std::env::temp_dir().join(format!("bedswell-table-{}.parquet", std::process::id()));
        std::fs::write(&path, bytes).unwrap();
        let mut file = std::fs::File::open(&path).unwrap();
        std::fs::remove_file(&path).unwrap();
        file.rewind().unwrap();
        file
    }
}
