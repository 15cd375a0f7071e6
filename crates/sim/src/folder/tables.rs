use super::tear_tables::{course_columns, pack_columns, tear_columns};
use super::{Column, Table, Values};
use crate::{BeadOutcome, BeadTiming, CoursePoint, GrainRecord, PackOutcome, Quality, Step};

/// The columns that say what became of each bead.
pub(crate) fn bead_columns<'a>(beads: impl Iterator<Item = &'a BeadOutcome> + Clone) -> Vec<Column> {
    let number = |name, value: fn(&BeadOutcome) -> f64| {
        Column::new(name, Values::Number(beads.clone().map(value).collect()))
    };
    vec![
        number("uptake_g_per_g", |bead| bead.uptake_g_per_g),
        number("volume_ratio", |bead| bead.volume_ratio),
        number("mean_pressure_pa", |bead| bead.mean_pressure_pa),
        number("largest_tension_pa", |bead| bead.largest_tension_pa),
        number("largest_tension_x", |bead| bead.largest_tension_at[0]),
        number("largest_tension_y", |bead| bead.largest_tension_at[1]),
        number("largest_tension_z", |bead| bead.largest_tension_at[2]),
        number("tension_q99_pa", |bead| bead.tension_q99_pa),
        number("compression_q999_pa", |bead| bead.compression_q999_pa),
        number("largest_contact_force_n", |bead| bead.largest_contact_force_n),
        Column::new("contacts", Values::Count(beads.clone().map(|bead| bead.contacts as i64).collect())),
        number("asphericity", |bead| bead.asphericity),
        number("tear_probability", |bead| bead.tear_probability),
        Column::new("torn", Values::Flag(beads.clone().map(|bead| bead.torn).collect())),
    ]
}

/// The columns that say how well each state is at rest.
pub(crate) fn quality_columns<'a>(states: impl Iterator<Item = &'a Quality> + Clone) -> Vec<Column> {
    let number = |name, value: fn(&Quality) -> f64| {
        Column::new(name, Values::Number(states.clone().map(value).collect()))
    };
    vec![
        number("grain_residual", |state| state.grain_residual),
        number("gel_residual", |state| state.gel_residual),
        number("bead_balance", |state| state.bead_balance),
        number("swallowed", |state| state.swallowed),
        number("overlap", |state| state.overlap),
    ]
}

/// One row per bead of a run.
pub(super) fn beads_table(beads: &[BeadOutcome]) -> Table {
    let mut columns = vec![Column::new("bead", Values::Count((0..beads.len() as i64).collect()))];
    columns.extend(bead_columns(beads.iter()));
    columns.extend(timing_columns(beads.iter()));
    columns.extend(tear_columns(beads.iter()));
    Table { columns }
}

/// The columns that say when things happened to each bead; none where no bead tells.
pub(crate) fn timing_columns<'a>(beads: impl Iterator<Item = &'a BeadOutcome> + Clone) -> Vec<Column> {
    let number = |name, value: fn(&BeadTiming) -> f64| {
        let values = beads.clone().map(|bead| bead.timing.as_ref().map_or(f64::NAN, value));
        Column::new(name, Values::Number(values.collect()))
    };
    if beads.clone().all(|bead| bead.timing.is_none()) {
        return Vec::new();
    }
    vec![
        number("half_time_s", |timing| timing.half_time_s),
        number("ninety_time_s", |timing| timing.ninety_time_s),
        number("most_tension_q99_pa", |timing| timing.most_tension_q99_pa),
        number("most_tension_time_s", |timing| timing.most_tension_time_s),
    ]
}

/// One row per bead and step in time of a run.
pub(super) fn course_table(course: &[CoursePoint]) -> Table {
    let number = |name, value: fn(&CoursePoint) -> f64| {
        Column::new(name, Values::Number(course.iter().map(value).collect()))
    };
    let mut columns = vec![
        number("time_s", |point| point.time_s),
        Column::new("bead", Values::Count(course.iter().map(|point| point.bead as i64).collect())),
        number("uptake_g_per_g", |point| point.uptake_g_per_g),
        number("tension_q99_pa", |point| point.tension_q99_pa),
        number("largest_tension_pa", |point| point.largest_tension_pa),
    ];
    columns.extend(course_columns(course));
    Table { columns }
}

/// One row per increment of a run.
pub(super) fn history_table(outcome: &PackOutcome) -> Table {
    let history = &outcome.history;
    let number = |name, value: fn(&Step) -> f64| {
        Column::new(name, Values::Number(history.iter().map(value).collect()))
    };
    let mut columns = vec![
        Column::new("increment", Values::Count(history.iter().map(|step| step.increment as i64).collect())),
        number("free_stretch", |step| step.free_stretch),
    ];
    let seconds = outcome.timing.iter().map(|timing| timing.seconds.clone());
    columns.extend(seconds.map(|seconds| Column::new("time_s", Values::Number(seconds))));
    columns.extend([
        number("uptake_g_per_g", |step| step.uptake_g_per_g),
        number("heave_m", |step| step.heave_m),
        number("tension_q99_pa", |step| step.tension_q99_pa),
        number("tear_probability", |step| step.tear_probability),
    ]);
    columns.extend(outcome.tears.iter().flat_map(|tears| pack_columns(&tears.cracks)));
    columns.extend(quality_columns(history.iter().map(|step| &step.quality)));
    Table { columns }
}

/// One row per grain of a run, before and after.
pub(super) fn grains_table(grains: &[GrainRecord]) -> Table {
    let number = |name, value: fn(&GrainRecord) -> f64| {
        Column::new(name, Values::Number(grains.iter().map(value).collect()))
    };
    let columns = vec![
        Column::new("grain", Values::Count((0..grains.len() as i64).collect())),
        number("diameter_m", |grain| grain.diameter_m),
        number("before_x_m", |grain| grain.before_m[0]),
        number("before_y_m", |grain| grain.before_m[1]),
        number("before_z_m", |grain| grain.before_m[2]),
        number("after_x_m", |grain| grain.after_m[0]),
        number("after_y_m", |grain| grain.after_m[1]),
        number("after_z_m", |grain| grain.after_m[2]),
    ];
    Table { columns }
}
