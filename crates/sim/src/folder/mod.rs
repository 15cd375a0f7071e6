mod atomic;
mod checkpoint;
mod error;
mod fingerprint;
mod read_run;
mod recorder;
mod run_folder;
mod states;
mod table;
mod tables;
mod tear_tables;

pub use error::FolderError;
pub use read_run::{ReadError, RunFolder, read_run_folder};
pub use recorder::StateRecorder;
pub use run_folder::{RunSummary, prepare_run_folder, remove_run_files, write_run_folder};

pub(crate) use atomic::write_atomically;
pub(crate) use fingerprint::{checksum, fingerprint};
pub(crate) use run_folder::{write_json, write_scene};
pub(crate) use table::{Column, Table, Values};
pub(crate) use tables::{bead_columns, quality_columns, timing_columns};
pub(crate) use tear_tables::tear_columns;
