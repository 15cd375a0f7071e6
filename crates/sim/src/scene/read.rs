use super::bed::{is_without_grains, read_bed};
use super::budget::{MOST_VOXELS, USUAL_VOXELS};
use super::error::SceneError;
use super::gel::read_gel;
use super::limits::check_limits;
use super::raw::{Node, Value, read_document};
use super::section::{Entry, Section, refuse_unknown};
use super::soil::{read_no_soil, read_soil, to_vector};
use super::time::{POTENTIALS, read_time};
use super::toughness::read_toughness;
use super::unit::Kind;
use super::{BeadAmount, Beads, March, Scene, SoilGrading, Strength, Water};
use bedswell_geometry::Vector;
use std::path::Path;

/// The tables of a scene file.
const TABLES: [&str; 10] =
    ["scene", "bed", "soil", "beads", "gel", "water", "strength", "toughness", "march", "time"];
/// Any number at all; what is allowed is checked afterwards.
const ANY: std::ops::RangeInclusive<f64> = f64::NEG_INFINITY..=f64::INFINITY;

/// Reads and checks a scene file; files that it names lie relative to it.
///
/// # Errors
/// When the file cannot be read, is not TOML, or holds a key or value that cannot
/// be used; the error names the key, the value, the line and what is allowed.
pub fn read_scene(path: &Path) -> Result<Scene, SceneError> {
    scene_from(&read_document(path)?, path)
}

/// Checks a scene that was read from `path` and perhaps altered since.
pub(crate) fn scene_from(document: &Node, path: &Path) -> Result<Scene, SceneError> {
    if let Some(node) = document.find("scene").filter(|node| matches!(node.value, Value::Text(_))) {
        let entry = Entry { key: "scene".to_owned(), node };
        return Err(entry.refuse("this is a study, which names a scene, where a scene itself is needed"));
    }
    if let Value::Table(table) = &document.value {
        refuse_unknown("", table, &TABLES)?;
    }
    let section = Section::new(document, "scene", &["name", "seed", "version"])?;
    if let Some(version) = section.get("version") {
        version.text()?;
    }
    let name = match section.get("name") {
        Some(name) => name.text()?.to_owned(),
        None => path.file_stem().map_or(String::new(), |stem| stem.to_string_lossy().into_owned()),
    };
    let seed = section.need("seed", "seed = 1")?.whole(0..=i64::MAX as u64)?;

    let (soil, corner) = if is_without_grains(document) {
        (read_no_soil(document)?, Vector::zeros())
    } else {
        read_soil(document, path)?
    };
    let listed = match &soil.grading {
        SoilGrading::Spheres { spheres, .. } => Some(spheres.len()),
        _ => None,
    };
    let water = read_water(document)?;
    let scene = Scene {
        name,
        seed,
        bed: read_bed(document, &soil, listed)?,
        soil,
        beads: read_beads(document, listed.is_some().then_some(corner))?,
        gel: read_gel(document)?,
        water,
        strength: read_strength(document)?,
        toughness: read_toughness(document)?,
        march: read_march(document)?,
        time: read_time(document, &water)?,
    };
    check_limits(document, &scene)?;
    Ok(scene)
}

/// `corner` is where listed spheres had their lower corner; centres shift with them.
fn read_beads(document: &Node, corner: Option<Vector>) -> Result<Beads, SceneError> {
    let known = ["count", "dose", "centres", "dry_diameter", "across", "voxel_budget", "held"];
    let section = Section::new(document, "beads", &known)?;
    let amount = match (section.get("count"), section.get("dose"), section.get("centres")) {
        (Some(count), None, None) => BeadAmount::Count(count.whole(1..=1_000_000)? as usize),
        (None, Some(dose), None) => {
            let ratio = dose.quantity(Kind::MassRatio, ANY)?;
            if ratio <= 0.0 {
                return Err(dose.refuse("must be above zero and below 1000 g/kg"));
            }
            if ratio >= 1.0 {
                return Err(dose.refuse(
                    "leaves no grains to speak of: more dry gel than soil; the dose is dry gel per dry soil and must \
                     be below 1000 g/kg (the trade uses 0.5 to 10 g/kg)",
                ));
            }
            BeadAmount::Dose(ratio)
        }
        (None, None, Some(centres)) => {
            let places: Vec<[f64; 3]> = centres
                .list()?
                .iter()
                .map(|entry| to_vector(entry).map(|centre| (centre - corner.unwrap_or_default()).into()))
                .collect::<Result<_, _>>()?;
            if places.is_empty() {
                return Err(
                    centres.refuse("names no bead; write for example [[\"0 mm\", \"0 mm\", \"0 mm\"]]")
                );
            }
            if corner.is_none() {
                return Err(
                    centres.refuse("beads have given places only among listed spheres; use count or dose")
                );
            }
            BeadAmount::At(places)
        }
        (None, None, None) => {
            let mend =
                "write one of count = 1, dose = \"3 g/kg\" or centres = [[\"0 mm\", \"0 mm\", \"0 mm\"]]";
            return Err(section.missing("count", mend.into()));
        }
        (count, dose, centres) => {
            let twice: Vec<Entry<'_>> = [centres, dose, count].into_iter().flatten().collect();
            return Err(twice[0].refuse("the beads are given twice; keep one of count, dose and centres"));
        }
    };
    let dry_diameter = section.need("dry_diameter", "dry_diameter = \"1 mm\"")?.positive(Kind::Length)?;
    let across = section.get("across").map_or(Ok(12), |entry| entry.whole(4..=1000))? as usize;
    let voxel_budget = section.get("voxel_budget").map_or(Ok(USUAL_VOXELS), |entry| {
        entry.whole(1..=MOST_VOXELS as u64).map(|voxels| voxels as usize)
    })?;
    let held = section.get("held").map_or(Ok(false), |entry| entry.flag())?;
    Ok(Beads { amount, dry_diameter, across, voxel_budget, held })
}

fn read_water(document: &Node) -> Result<Water, SceneError> {
    let section = Section::new(document, "water", &["salt", "potential", "temperature"])?;
    let salt = section.get("salt").map_or(Ok(0.0), |salt| salt.quantity(Kind::Concentration, 0.0..=6.0))?;
    let potential =
        section.get("potential").map_or(Ok(0.0), |value| value.quantity(Kind::Stress, POTENTIALS))?;
    let temperature = section
        .get("temperature")
        .map_or(Ok(298.15), |value| value.quantity(Kind::Temperature, 273.15..=373.15))?;
    Ok(Water { salt, potential, temperature })
}

fn read_strength(document: &Node) -> Result<Strength, SceneError> {
    let section = Section::new(document, "strength", &["scale", "modulus", "volume", "length"])?;
    Ok(Strength {
        scale: section.need("scale", "scale = \"8 kPa\"")?.positive(Kind::Stress)?,
        modulus: section.need("modulus", "modulus = 8")?.number(1.0..=100.0)?,
        volume: section.need("volume", "volume = \"1 mm3\"")?.positive(Kind::Volume)?,
        length: section.get("length").map(|length| length.positive(Kind::Length)).transpose()?,
    })
}

fn read_march(document: &Node) -> Result<March, SceneError> {
    let section = Section::new(document, "march", &["increments", "overlap", "damping"])?;
    let usual = March::default();
    let increments = section
        .get("increments")
        .map_or(Ok(usual.increments), |entry| entry.whole(1..=10_000).map(|count| count as usize))?;
    let overlap = section.get("overlap").map_or(Ok(usual.overlap), |entry| entry.number(1e-5..=3e-3))?;
    let damping = section.get("damping").map_or(Ok(usual.damping), |entry| entry.number(0.05..=0.3))?;
    Ok(March { increments, overlap, damping })
}
