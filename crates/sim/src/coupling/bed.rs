use super::march::FIRST_STRETCH;
use super::pot::Pot;
use crate::{BeadAmount, Bed, RunError, Scene, SoilGrading};
use bedswell_geometry::{Cell, Sphere, Stream, Vector, stream, volume_of_radius};
use bedswell_grains::{Assembly, ContactLaw, Lid, PackRequest, Sides, pack};
use rand::RngExt;

/// Stretch from dry at which a bead starts among grains that stay where they are.
const HELD_STRETCH: f64 = 1.05;
/// Growths of the hard beads, and the steps after each.
const HARD_GROWTHS: usize = 5;
const HARD_STEPS: usize = 400;
/// Damping of grains among growing hard beads.
const HARD_DAMPING: f64 = 0.2;
/// Purposes of a pack's random streams.
const PACKING: u64 = 0;

/// A bed before its beads swell: the grains, and where the dry beads lie.
pub(crate) struct DryBed {
    /// Height of the mixed dry bed (m): that of the lid, or of the grains' surface.
    pub(crate) height: f64,
    /// The grains of the mixed dry bed.
    pub(crate) spheres: Vec<Sphere>,
    /// The grains alone, as they lie when the march starts.
    pub(crate) grains: Assembly,
    /// Stretch of the beads from dry where the march starts.
    pub(crate) stretch: f64,
    /// Centres of the beads at the stretch where the march starts (m).
    pub(crate) beads: Vec<Vector>,
    /// Pore fraction, the dry beads counted as solid.
    pub(crate) porosity: f64,
    /// Mass fraction of the grading left out as fines.
    pub(crate) fines_left_out: f64,
}

impl DryBed {
    /// Builds pack number `number` of a scene. `stress` (Pa) is the largest that the
    /// grains will typically bear; their stiffness follows from it.
    pub(crate) fn build(scene: &Scene, number: u64, stress: f64) -> Result<Self, RunError> {
        let mut random = stream(scene.seed, &[number, PACKING]);
        let (cell, spheres, beads, porosity, fines_left_out) = match &scene.soil.grading {
            SoilGrading::Spheres { spheres, size, periodic } => {
                let cell = Cell { size: Vector::from(*size), periodic: [*periodic, *periodic, false] };
                let beads = place_beads(scene, &cell, spheres, &mut random)?;
                let solid = spheres.iter().map(Sphere::volume).sum::<f64>()
                    + beads.len() as f64 * volume_of_radius(0.5 * scene.beads.dry_diameter);
                (cell, spheres.clone(), beads, 1.0 - solid / cell.volume(), 0.0)
            }
            _ => random_bed(scene, &mut random)?,
        };
        let pot = Pot::of(scene);
        let lid = match scene.bed {
            Bed { open: true, .. } => Lid::Open,
            Bed { fixed_grains: true, .. } | Bed { lid_held: true, .. } => Lid::Fixed,
            Bed { lid_stress, .. } => Lid::Stress(lid_stress),
        };
        let solid: f64 = spheres.iter().map(Sphere::volume).sum();
        let stress = stress.max(scene.bed.lid_stress + pot.map_or(0.0, |pot| pot.own_stress(solid)));
        let law = ContactLaw::for_stress(stress, scene.march.overlap, scene.soil.friction)
            .with_rolling(scene.soil.rolling_friction);
        let frame = Frame { pot, law, lid, beads: scene.beads.dry_diameter };
        let mut grains = frame.assemble(cell, &spheres, spheres.len())?;
        grains.held = scene.bed.fixed_grains;
        let height = grains.filled_height();
        let (beads, stretch) = if grains.held {
            (beads, HELD_STRETCH)
        } else {
            (frame.grow_hard(&mut grains, &beads)?, FIRST_STRETCH)
        };
        Ok(Self { height, spheres, grains, stretch, beads, porosity, fines_left_out })
    }
}

type Parts = (Cell, Vec<Sphere>, Vec<Vector>, f64, f64);

fn random_bed(scene: &Scene, random: &mut Stream) -> Result<Parts, RunError> {
    let count = match scene.beads.amount {
        BeadAmount::Count(_) | BeadAmount::Dose(_) => scene.bead_count().map_err(packing)?,
        BeadAmount::At(_) => {
            return Err(RunError::Packing(
                "bead centres can only be given among listed spheres; give a count or a dose".into(),
            ));
        }
    };
    let grains = scene.soil.grain_diameters(scene.bed.grains).map_err(packing)?;
    let left_out = if grains.is_empty() { 0.0 } else { scene.soil.grading().map_err(packing)?.left_out };
    let pot = Pot::of(scene);
    let mean_diameter = grains.iter().sum::<f64>() / grains.len().max(1) as f64;
    let request = PackRequest {
        grains,
        beads: count,
        bead_diameter: scene.beads.dry_diameter,
        porosity: scene.bed.porosity,
        accept_loose: false,
        lid_stress: match pot {
            Some(pot) if scene.bed.open => pot.levelling_stress(mean_diameter),
            _ => scene.bed.lid_stress,
        },
        friction: scene.soil.friction,
        rolling: scene.soil.rolling_friction,
        sides: pot.map_or(Sides::FloorAndLid, |pot| pot.sides()),
    };
    let packed = pack(&request, random).map_err(packing)?;
    let beads = packed.beads().iter().map(|bead| bead.centre).collect();
    Ok((packed.assembly.cell, packed.grains(), beads, packed.report.porosity, left_out))
}

/// What surrounds the grains and how they touch.
struct Frame {
    pot: Option<Pot>,
    law: ContactLaw,
    lid: Lid,
    /// Diameter of the dry beads (m).
    beads: f64,
}

impl Frame {
    /// Spheres in their cell or pot; those from number `grains` on are beads.
    fn assemble(&self, cell: Cell, spheres: &[Sphere], grains: usize) -> Result<Assembly, RunError> {
        let assembly = Assembly::new(cell, spheres, self.law, self.lid).map_err(packing)?;
        match self.pot {
            Some(pot) => pot.enclose(assembly, grains, volume_of_radius(0.5 * self.beads)).map_err(packing),
            None => Ok(assembly),
        }
    }

    /// Grows the dry beads to the stretch at which the gel takes over. Up to there a
    /// bead is about as hard as a grain and moves like one.
    fn grow_hard(&self, grains: &mut Assembly, beads: &[Vector]) -> Result<Vec<Vector>, RunError> {
        let count = grains.radii.len();
        let mut mixed = grains.spheres();
        mixed.extend(beads.iter().map(|&centre| Sphere { centre, radius: 0.0 }));
        let mut cell = grains.cell;
        for growth in 1..=HARD_GROWTHS {
            let stretch = 1.0 + (FIRST_STRETCH - 1.0) * growth as f64 / HARD_GROWTHS as f64;
            for bead in &mut mixed[count..] {
                bead.radius = 0.5 * self.beads * stretch;
            }
            let mut together = self.assemble(cell, &mixed, count)?;
            for _ in 0..HARD_STEPS {
                together.compute_contacts();
                together.advance(HARD_DAMPING);
            }
            mixed = together.spheres();
            cell = together.cell;
        }
        let beads = mixed.split_off(count);
        *grains = self.assemble(cell, &mixed, count)?;
        Ok(beads.into_iter().map(|bead| bead.centre).collect())
    }
}

/// Beads at their given places, or at random where they fit among listed spheres.
fn place_beads(
    scene: &Scene,
    cell: &Cell,
    spheres: &[Sphere],
    random: &mut Stream,
) -> Result<Vec<Vector>, RunError> {
    const TRIES: usize = 100_000;
    let radius = 0.5 * scene.beads.dry_diameter;
    if let BeadAmount::At(centres) = &scene.beads.amount {
        return Ok(centres.iter().map(|centre| Vector::from(*centre)).collect());
    }
    let count = scene.bead_count().map_err(packing)?;
    let mut beads: Vec<Vector> = Vec::new();
    for _ in 0..TRIES {
        if beads.len() == count {
            break;
        }
        let place = Vector::from_fn(|axis, _| random.random_range(radius..cell.size[axis] - radius));
        let clear = |centre: &Vector, reach: f64| cell.separation(&place, centre).norm() > reach;
        if spheres.iter().all(|sphere| clear(&sphere.centre, sphere.radius + radius))
            && beads.iter().all(|bead| clear(bead, 2.0 * radius))
        {
            beads.push(place);
        }
    }
    if beads.len() < count {
        return Err(RunError::Packing(format!(
            "only {} of {count} beads of {} m found a place among the listed spheres: give fewer or smaller beads, or their centres",
            beads.len(),
            2.0 * radius
        )));
    }
    Ok(beads)
}

fn packing(error: impl std::fmt::Display) -> RunError {
    RunError::Packing(error.to_string())
}
