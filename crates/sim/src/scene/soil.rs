use super::array::read_array;
use super::error::SceneError;
use super::friction::read_friction;
use super::raw::Node;
use super::section::{Entry, Section};
use super::spheres::read_spheres;
use super::unit::Kind;
use super::{Soil, SoilGrading};
use bedswell_geometry::{Cell, Sphere, Vector};
use std::path::Path;

const KNOWN: [&str; 13] = [
    "density",
    "friction",
    "rolling_friction",
    "angle_of_repose",
    "sieves",
    "median",
    "spread",
    "fines_cutoff",
    "array",
    "spheres",
    "spheres_unit",
    "cell",
    "periodic",
];

/// Those that beads alone can have too.
const FRICTION: [&str; 3] = ["friction", "rolling_friction", "angle_of_repose"];

/// Reads `[soil]` where the bed has no grains: what is left of it is how dry beads rub.
pub(super) fn read_no_soil(document: &Node) -> Result<Soil, SceneError> {
    let section = Section::new(document, "soil", &KNOWN)?;
    let of_grains = KNOWN.iter().filter(|key| !FRICTION.contains(key));
    if let Some(entry) = of_grains.filter_map(|key| section.get(key)).next() {
        return Err(entry.refuse("the bed has no grains; leave this key out, or give bed.grains"));
    }
    let (friction, rolling_friction) = read_friction(&section)?;
    Ok(Soil { grading: SoilGrading::Absent, density: 0.0, friction, rolling_friction })
}

/// Reads `[soil]`; also where the lower corner of listed spheres was before they
/// were shifted to the origin.
pub(crate) fn read_soil(document: &Node, scene_path: &Path) -> Result<(Soil, Vector), SceneError> {
    let section = Section::new(document, "soil", &KNOWN)?;
    let density = section.need("density", "density = \"2650 kg/m3\"")?.positive(Kind::Density)?;
    let (friction, rolling_friction) = read_friction(&section)?;
    let fines_cutoff = section.get("fines_cutoff").map(|entry| entry.positive(Kind::Length)).transpose()?;

    let mut corner = Vector::zeros();
    let ways = ["sieves", "median", "spheres", "array"].map(|key| section.get(key));
    let grading = match ways {
        [Some(sieves), None, None, None] => read_sieves(&sieves, fines_cutoff)?,
        [None, Some(median), None, None] => SoilGrading::Lognormal {
            median: median.positive(Kind::Length)?,
            spread: section.need("spread", "spread = 1.4")?.number(1.0..=5.0)?,
            fines_cutoff,
        },
        [None, None, Some(spheres), None] => {
            let (grading, lower) = read_listed(&section, &spheres, scene_path)?;
            corner = lower;
            grading
        }
        [None, None, None, Some(array)] => {
            let read = read_array(document)?;
            let (grading, lower) = read.ok_or_else(|| array.refuse("must be a table, [soil.array]"))?;
            corner = lower;
            grading
        }
        [None, None, None, None] => {
            let mend = "write one of sieves = [[\"0.5 mm\", 0.0], [\"2 mm\", 100.0]], median = \"1.2 mm\" with \
                        spread = 1.4, spheres = \"bed.csv\", or a table [soil.array] with diameter and gap";
            return Err(section.missing("sieves", mend.into()));
        }
        several => {
            let twice: Vec<Entry<'_>> = several.into_iter().rev().flatten().collect();
            return Err(twice[0].refuse(
                "the grain sizes are given twice; keep one of sieves, median, spheres and [soil.array]",
            ));
        }
    };
    let soil = Soil { grading, density, friction, rolling_friction };
    // What the sieves and the spread alone can get wrong was refused above, with its own line.
    match (soil.grading(), section.get("fines_cutoff")) {
        (Err(error), Some(cutoff)) => Err(cutoff.refuse(error.to_string())),
        (Err(error), None) => Err(section.missing("fines_cutoff", error.to_string())),
        (Ok(_), _) => Ok((soil, corner)),
    }
}

fn read_sieves(sieves: &Entry<'_>, fines_cutoff: Option<f64>) -> Result<SoilGrading, SceneError> {
    let (mut openings, mut percent_passing) = (Vec::<f64>::new(), Vec::<f64>::new());
    let rows = sieves.list()?;
    for row in &rows {
        let [opening, passing] =
            row.list_of("an opening and its percent passing, such as [\"1 mm\", 40.0]")?;
        let diameter = opening.positive(Kind::Length)?;
        let percent = passing.number(0.0..=100.0)?;
        if let Some(&previous) = openings.last()
            && diameter <= previous
        {
            return Err(row.refuse(format!("openings must increase; the row above has {previous} m")));
        }
        if let Some(&previous) = percent_passing.last()
            && percent < previous
        {
            return Err(row.refuse(format!("percent passing must not fall; the row above has {previous}")));
        }
        openings.push(diameter);
        percent_passing.push(percent);
    }
    let [.., last] = rows.as_slice() else {
        return Err(sieves.refuse("needs at least two sieves"));
    };
    if rows.len() < 2 {
        return Err(sieves.refuse("needs at least two sieves"));
    }
    if percent_passing.last() != Some(&100.0) {
        return Err(last.refuse("the coarsest sieve must pass 100; add one that everything passes"));
    }
    if percent_passing[0] > 0.0 && fines_cutoff.is_none_or(|cutoff| cutoff < openings[0]) {
        return Err(rows[0].refuse(format!(
            "{} % is finer than the finest sieve; add a sieve that nothing passes, or leave the fines out with \
             fines_cutoff = \"{} m\"",
            percent_passing[0], openings[0]
        )));
    }
    Ok(SoilGrading::Sieves { openings, percent_passing, fines_cutoff })
}

fn read_listed(
    section: &Section<'_>,
    spheres: &Entry<'_>,
    scene_path: &Path,
) -> Result<(SoilGrading, Vector), SceneError> {
    let unit = section.get("spheres_unit").map(|entry| entry.text()).transpose()?;
    let path = scene_path.parent().unwrap_or(Path::new("")).join(spheres.text()?);
    let mut table = read_spheres(&path, unit).map_err(|error| match error {
        SceneError::Unreadable { path, cause } => {
            spheres.refuse(format!("cannot read {}: {cause}", path.display()))
        }
        other => other,
    })?;
    // With a cell the spheres already lie in it; without, their own box is the cell.
    let (corner, size) = match section.get("cell") {
        Some(cell) => (Vector::zeros(), to_vector(&cell)?),
        None => table.bounding_box(),
    };
    if let Some(cell) = section.get("cell").filter(|_| size.min() <= 0.0) {
        return Err(cell.refuse("every edge must be above zero"));
    }
    for sphere in &mut table.spheres {
        *sphere = Sphere { centre: sphere.centre - corner, ..*sphere };
    }
    let periodic = section.get("periodic").map_or(Ok(false), |entry| entry.flag())?;
    table.check(&Cell { size, periodic: [periodic, periodic, false] })?;
    Ok((SoilGrading::Spheres { spheres: table.spheres, size: size.into(), periodic }, corner))
}

/// Three lengths.
pub(crate) fn to_vector(entry: &Entry<'_>) -> Result<Vector, SceneError> {
    let [x, y, z] = entry.list_of("three lengths, such as [\"0 mm\", \"0 mm\", \"0 mm\"]")?;
    let any = f64::NEG_INFINITY..=f64::INFINITY;
    Ok(Vector::new(
        x.quantity(Kind::Length, any.clone())?,
        y.quantity(Kind::Length, any.clone())?,
        z.quantity(Kind::Length, any)?,
    ))
}
