//! Tables of ruptures, where the scene gives the gel a toughness.

use super::{Column, Table, Values};
use crate::{BeadOutcome, BeadTears, CoursePoint, Cracks, CyclePoint, FirstRupture, RuptureEvent};

/// The columns that say how each bead tore; none where no bead may.
pub(crate) fn tear_columns<'a>(beads: impl Iterator<Item = &'a BeadOutcome> + Clone) -> Vec<Column> {
    if beads.clone().all(|bead| bead.tears.is_none()) {
        return Vec::new();
    }
    let number = |name: &str, value: fn(&BeadTears) -> Option<f64>| {
        let value = |bead: &BeadOutcome| bead.tears.as_ref().and_then(value).unwrap_or(f64::NAN);
        Column::new(name, Values::Number(beads.clone().map(value).collect()))
    };
    let count = |name: &str, value: fn(&BeadTears) -> usize| {
        let value = |bead: &BeadOutcome| bead.tears.as_ref().map_or(0, value) as i64;
        Column::new(name, Values::Count(beads.clone().map(value).collect()))
    };
    let region = |bead: &BeadOutcome| {
        let first = bead.tears.as_ref().and_then(|tears| tears.first.as_ref());
        first.map_or("", |first| first.region.word()).to_owned()
    };
    vec![
        count("ruptures", |tears| tears.ruptures),
        number("crack_area_m2", |tears| Some(tears.cracks.area_m2)),
        number("crack_share", |tears| Some(tears.crack_share)),
        count("fragments", |tears| tears.cracks.fragments),
        number("split_off", |tears| Some(tears.cracks.split_off)),
        number("wetted_m2", |tears| Some(tears.cracks.wetted_m2)),
        number("first_rupture_free_stretch", |tears| Some(tears.first?.at.free_stretch)),
        number("first_rupture_time_s", |tears| Some(tears.first?.at.time_s)),
        number("first_rupture_depth_m", |tears| Some(tears.first?.depth_m)),
        number("first_rupture_to_contact_m", |tears| tears.first?.to_contact_m),
        number("first_rupture_off_axis_deg", |tears| tears.first?.off_axis_deg),
        Column::new("first_rupture_region", Values::Text(beads.clone().map(region).collect())),
        number("torn_free_stretch", |tears| Some(tears.torn_at?.free_stretch)),
        number("torn_time_s", |tears| Some(tears.torn_at?.time_s)),
    ]
}

/// One row per rupture.
pub(super) fn events_table(events: &[RuptureEvent]) -> Table {
    let number = |name, value: fn(&RuptureEvent) -> f64| {
        Column::new(name, Values::Number(events.iter().map(value).collect()))
    };
    let count = |name, value: fn(&RuptureEvent) -> usize| {
        Column::new(name, Values::Count(events.iter().map(|event| value(event) as i64).collect()))
    };
    let region = events.iter().map(|event| FirstRupture::from(event).region.word().to_owned());
    let columns = vec![
        count("bead", |event| event.bead),
        count("increment", |event| event.at.increment),
        number("free_stretch", |event| event.at.free_stretch),
        number("time_s", |event| event.at.time_s),
        number("place_x_m", |event| event.place_m[0]),
        number("place_y_m", |event| event.place_m[1]),
        number("place_z_m", |event| event.place_m[2]),
        number("depth_m", |event| event.depth_m),
        number("to_contact_m", |event| event.to_contact_m.unwrap_or(f64::NAN)),
        number("off_axis_deg", |event| event.off_axis_deg.unwrap_or(f64::NAN)),
        Column::new("region", Values::Text(region.collect())),
        number("area_m2", |event| event.area_m2),
        number("ratio", |event| event.ratio),
        number("crack_area_m2", |event| event.crack_area_m2),
    ];
    Table { columns }
}

/// One row per bead and turn of its water.
pub(super) fn cycles_table(cycles: &[CyclePoint]) -> Table {
    let number = |name, value: fn(&CyclePoint) -> f64| {
        Column::new(name, Values::Number(cycles.iter().map(value).collect()))
    };
    let count = |name, value: fn(&CyclePoint) -> usize| {
        Column::new(name, Values::Count(cycles.iter().map(|turn| value(turn) as i64).collect()))
    };
    let end = cycles.iter().map(|turn| if turn.is_most { "most" } else { "least" }.to_owned());
    let columns = vec![
        count("bead", |turn| turn.bead),
        count("cycle", |turn| turn.cycle),
        Column::new("uptake_is", Values::Text(end.collect())),
        number("time_s", |turn| turn.time_s),
        number("uptake_g_per_g", |turn| turn.uptake_g_per_g),
        number("wetted_m2", |turn| turn.cracks.wetted_m2),
        number("crack_area_m2", |turn| turn.cracks.area_m2),
        count("fragments", |turn| turn.cracks.fragments),
    ];
    Table { columns }
}

/// The columns of the beads' cracks after each step in time; none where none may have any.
pub(super) fn course_columns(course: &[CoursePoint]) -> Vec<Column> {
    if course.iter().all(|point| point.cracks.is_none()) {
        return Vec::new();
    }
    crack_columns(course.iter().map(|point| point.cracks.unwrap_or_default()).collect())
}

/// The columns of the cracks of all beads of a pack after each increment: areas add up.
pub(super) fn pack_columns(cracks: &[Vec<Cracks>]) -> Vec<Column> {
    let sum = |beads: &Vec<Cracks>| {
        beads.iter().fold(Cracks::default(), |sum, bead| Cracks {
            area_m2: sum.area_m2 + bead.area_m2,
            fragments: sum.fragments + bead.fragments,
            split_off: sum.split_off.max(bead.split_off),
            wetted_m2: sum.wetted_m2 + bead.wetted_m2,
        })
    };
    crack_columns(cracks.iter().map(sum).collect())
}

fn crack_columns(cracks: Vec<Cracks>) -> Vec<Column> {
    let number = |name, value: fn(&Cracks) -> f64| {
        Column::new(name, Values::Number(cracks.iter().map(value).collect()))
    };
    let fragments = cracks.iter().map(|cracks| cracks.fragments as i64).collect();
    vec![
        number("crack_area_m2", |cracks| cracks.area_m2),
        Column::new("fragments", Values::Count(fragments)),
        number("split_off", |cracks| cracks.split_off),
        number("wetted_m2", |cracks| cracks.wetted_m2),
    ]
}
