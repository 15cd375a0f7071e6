//! A study: its packs, and how their outcomes are spread.

mod histogram;
mod read;
mod table;

pub use read::StudyReadError;
pub(crate) use read::{PackFigures, Packs, read_packs};
pub(crate) use table::{Table, table};
