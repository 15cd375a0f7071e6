use super::error::SceneError;
use super::overburden::read_lid_stress;
use super::raw::{Node, Value};
use super::section::{Entry, Section};
use super::unit::Kind;
use super::{Bed, Soil};

const KNOWN: [&str; 10] = [
    "grains",
    "porosity",
    "pot",
    "top",
    "flooded",
    "lid_stress",
    "depth",
    "bulk_density",
    "lid_held",
    "fixed_grains",
];

/// Whether the scene asks for a bed of beads alone.
pub(super) fn is_without_grains(document: &Node) -> bool {
    document.find("bed.grains").is_some_and(|node| matches!(node.value, Value::Integer(0)))
}

/// Reads `[bed]`; `listed` is the number of spheres that the soil lists, if it does.
pub(super) fn read_bed(document: &Node, soil: &Soil, listed: Option<usize>) -> Result<Bed, SceneError> {
    let section = Section::new(document, "bed", &KNOWN)?;
    let grains = match (section.get("grains"), listed) {
        (Some(grains), None) => grains.whole(0..=1_000_000)? as usize,
        (Some(grains), Some(_)) => {
            return Err(
                grains.refuse("the soil lists its spheres, so their number is known; leave this key out")
            );
        }
        (None, Some(listed)) => listed,
        (None, None) => return Err(section.missing("grains", "write grains = 600 under [bed]".into())),
    };
    let pot = section.get("pot").map(|entry| entry.positive(Kind::Length)).transpose()?;
    if let Some(entry) = section.get("pot").filter(|_| listed.is_some()) {
        return Err(entry.refuse("the soil lists its spheres in a cell; leave this key out"));
    }
    if let Some(entry) = section.get("grains").filter(|_| grains == 0 && pot.is_none()) {
        return Err(entry.refuse(
            "beads alone need a pot, such as pot = \"10 mm\" under [bed]; a cell needs at least one grain",
        ));
    }
    let flag = |entry: Option<&Entry<'_>>| entry.map_or(Ok(false), |entry| entry.flag());
    let top = section.get("top");
    let open = top.as_ref().map_or(Ok(false), is_open)?;
    if let Some(entry) = top.filter(|_| open && (pot.is_none() || grains == 0)) {
        return Err(entry.refuse(if grains == 0 {
            "beads alone need a lid, whose rise is measured; leave this key out"
        } else {
            "a cell lies at a depth, under what is above it; only a pot is open: give pot = \"60 mm\" too"
        }));
    }
    let flooded = section.get("flooded");
    let wet = flag(flooded.as_ref())?;
    if let Some(entry) = flooded.filter(|_| wet && pot.is_none() && section.get("depth").is_none()) {
        return Err(entry.refuse(
            "lid_stress is what the grains themselves bear, in water or not; flooded goes with depth or with pot",
        ));
    }
    let porosity = section.get("porosity").map(|entry| entry.number(0.05..=0.9)).transpose()?;
    let lid_stress = read_lid_stress(&section, open, wet.then_some(soil.density))?;
    let lid_held = section.get("lid_held");
    let held = flag(lid_held.as_ref())?;
    if let Some(entry) = lid_held.filter(|_| held && open) {
        return Err(entry.refuse("an open top has no lid to hold; leave one of the two keys out"));
    }
    let fixed_grains = flag(section.get("fixed_grains").as_ref())?;
    // In a cell the overburden has buoyancy in it already.
    let flooded = wet && pot.is_some();
    Ok(Bed { grains, porosity, pot, open, flooded, lid_stress, lid_held: held, fixed_grains })
}

fn is_open(top: &Entry<'_>) -> Result<bool, SceneError> {
    match top.text()? {
        "open" => Ok(true),
        "lid" => Ok(false),
        _ => Err(top.refuse("must be \"open\" or \"lid\"")),
    }
}
