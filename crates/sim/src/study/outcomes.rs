use super::Study;
use super::journal::PackEnd;
use super::plan::Plan;
use super::tables::factor_columns;
use crate::PackOutcome;
use crate::folder::{Column, Table, Values, bead_columns, quality_columns, tear_columns, timing_columns};
use std::sync::Arc;

/// One row per bead of every pack, in order; a failed pack has one row that says why.
pub(crate) fn outcomes_table(study: &Study, plan: &Plan) -> Table {
    let rows: Vec<TableRow<'_>> = plan.rows().flat_map(table_rows).collect();
    let finished: Arc<[bool]> = rows.iter().map(|row| row.outcome.is_ok()).collect();
    let failed: Arc<[bool]> = finished.iter().map(|finished| !finished).collect();
    let ended = rows.iter().filter_map(|row| row.outcome.as_ref().ok());

    let if_finished = |column: Column| Column { present: Some(Arc::clone(&finished)), ..column };
    let pack_number = |name, value: fn(&PackOutcome) -> f64| {
        Column::new(name, Values::Number(ended.clone().map(|(pack, _)| value(pack)).collect()))
    };
    let pack_count = |name, values: Vec<usize>| {
        Column::new(name, Values::Count(values.into_iter().map(|value| value as i64).collect()))
    };
    let mut columns =
        vec![Column::new("level", Values::Count(rows.iter().map(|row| row.level as i64).collect()))];
    columns.extend(factor_columns(study, rows.iter().map(|row| row.level)));
    columns.extend([
        Column::new("pack", Values::Count(rows.iter().map(|row| row.pack as i64).collect())),
        if_finished(pack_count("bead", ended.clone().map(|(_, bead)| *bead).collect())),
    ]);
    columns.extend(
        bead_columns(ended.clone().map(|(pack, bead)| &pack.beads[*bead])).into_iter().map(if_finished),
    );
    columns.extend(
        timing_columns(ended.clone().map(|(pack, bead)| &pack.beads[*bead])).into_iter().map(if_finished),
    );
    columns.extend(
        tear_columns(ended.clone().map(|(pack, bead)| &pack.beads[*bead])).into_iter().map(if_finished),
    );
    columns.extend(
        [
            pack_count("grains", ended.clone().map(|(pack, _)| pack.grains).collect()),
            pack_number("porosity", |pack| pack.porosity),
            pack_number("fines_left_out", |pack| pack.fines_left_out),
            pack_number("heave_m", |pack| pack.heave_m),
            pack_number("heave_strain", |pack| pack.heave_strain),
            pack_count("beads_out", ended.clone().map(|(pack, _)| pack.beads_out).collect()),
            pack_number("water_l_per_m3", |pack| pack.water_l_per_m3),
            pack_number("porosity_left", |pack| pack.porosity_left),
            pack_number("overburden_pa", |pack| pack.overburden_pa),
            pack_number("lid_stress_pa", |pack| pack.lid_stress_pa),
            pack_count("across", ended.clone().map(|(pack, _)| pack.across).collect()),
            pack_count("across_asked", ended.clone().map(|(pack, _)| pack.across_asked).collect()),
            pack_number("chosen_overlap", |pack| pack.chosen_overlap),
            pack_number("contact_number", |pack| pack.contact_number),
            pack_number("mean_force_before_n", |pack| pack.forces_before.mean_force_n),
            pack_number("mean_force_after_n", |pack| pack.forces_after.mean_force_n),
            pack_count("chains_before", ended.clone().map(|(pack, _)| pack.forces_before.chains).collect()),
            pack_count("chains_after", ended.clone().map(|(pack, _)| pack.forces_after.chains).collect()),
        ]
        .into_iter()
        .chain(quality_columns(ended.clone().map(|(pack, _)| &pack.quality)))
        .map(if_finished),
    );
    let reasons = rows.iter().filter_map(|row| row.outcome.as_ref().err().map(|reason| (*reason).to_owned()));
    columns.push(Column {
        name: "failure".into(),
        values: Values::Text(reasons.collect()),
        present: Some(failed),
    });
    Table { columns }
}

struct TableRow<'a> {
    level: usize,
    pack: u64,
    outcome: Result<(&'a PackOutcome, usize), &'a str>,
}

fn table_rows<'a>((level, pack, end): (usize, u64, &'a PackEnd)) -> Vec<TableRow<'a>> {
    let row = |outcome| TableRow { level, pack, outcome };
    match end {
        PackEnd::Finished(outcome) => (0..outcome.beads.len()).map(|bead| row(Ok((outcome, bead)))).collect(),
        PackEnd::Failed(reason) => vec![row(Err(reason))],
    }
}
