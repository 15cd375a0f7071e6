//! The columns of factors, and the table of combinations.

use super::quantity::number_and_unit;
use super::response::responses;
use super::{Factor, LevelSummary, Study};
use crate::Estimate;
use crate::folder::{Column, Table, Values};
use std::sync::Arc;

/// One row per combination: its values, and what its packs come to.
pub(super) fn levels_table(study: &Study, levels: &[LevelSummary]) -> Table {
    let mut columns = factor_columns(study, 0..levels.len());
    for response in responses(study.levels.iter().map(|level| &level.scene)) {
        let column = |end: &str, side: fn(Estimate) -> Option<f64>| {
            let values: Vec<Option<f64>> =
                levels.iter().map(|level| level.figure(response).and_then(side)).collect();
            some_numbers(format!("{}{end}", response.name), &values)
        };
        columns.extend([
            column("", |at| Some(at.mean)),
            column("_low", |at| at.low),
            column("_high", |at| at.high),
        ]);
    }
    let count = |name: &str, value: fn(&LevelSummary) -> u64| {
        Column::new(name, Values::Count(levels.iter().map(|level| value(level) as i64).collect()))
    };
    columns.extend([
        count("packs", |level| level.packs),
        count("failed", |level| level.failed.len() as u64),
        Column::new("level", Values::Count((0..levels.len() as i64).collect())),
    ]);
    Table { columns }
}

/// The columns of the factors, in rows of these levels. Plain numbers are numbers; a
/// quantity is text as written, and where all its values share a unit, its number stands
/// beside it in that unit.
pub(super) fn factor_columns(study: &Study, rows: impl Iterator<Item = usize> + Clone) -> Vec<Column> {
    let columns = study.factors.iter().enumerate().flat_map(|(factor, Factor { key, .. })| {
        let value = |level: usize| study.levels[level].values[factor].as_str();
        let text = || Values::Text(rows.clone().map(|level| value(level).to_owned()).collect());
        let numbers: Option<Vec<(f64, &str)>> =
            (0..study.levels.len()).map(|level| number_and_unit(value(level))).collect();
        let shared = numbers.filter(|numbers| numbers.windows(2).all(|pair| pair[0].1 == pair[1].1));
        match shared {
            None => vec![Column::new(key, text())],
            Some(numbers) => {
                let unit = numbers[0].1;
                let values = Values::Number(rows.clone().map(|level| numbers[level].0).collect());
                if unit.is_empty() {
                    vec![Column::new(key, values)]
                } else {
                    vec![Column::new(key, text()), Column::new(format!("{key} [{unit}]"), values)]
                }
            }
        }
    });
    columns.collect()
}

fn some_numbers(name: String, values: &[Option<f64>]) -> Column {
    let present: Arc<[bool]> = values.iter().map(Option::is_some).collect();
    let known = values.iter().copied().flatten().collect();
    Column { name, values: Values::Number(known), present: Some(present) }
}
