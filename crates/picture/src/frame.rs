use crate::Run;
use crate::field::Field;
use crate::model::BeadModel;
use bedswell_gel::MaterialPoint;
use bedswell_painter::Point;
use bedswell_sim::{BeadContact, BeadState, GrainContact, State, Step, Touched};
use nalgebra::Matrix3;
use std::sync::Arc;

/// What there is to see of a run at one time.
pub struct Frame {
    /// The time, in increments.
    pub time: f64,
    /// The figures of that time; number and quality are those of the increment before.
    pub step: Step,
    /// Low corner of the cell as drawn (m).
    pub corner: Point,
    /// Edges of the cell (m).
    pub cell: Point,
    /// Every grain, in the image nearest to the beads; images that touch a bead across a
    /// periodic side come behind the others.
    pub grains: Vec<GrainView>,
    /// Contacts between grains.
    pub contacts: Vec<GrainContact>,
    /// Every bead.
    pub beads: Vec<BeadView>,
    /// Inner radius of the pot round the middle of the cell (m), if the bed is in one.
    pub wall: Option<f32>,
    /// The pot has no lid.
    pub open: bool,
    periodic: [bool; 3],
}

/// A grain at one time.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct GrainView {
    /// Its number.
    pub grain: usize,
    /// Centre (m).
    pub centre: Point,
    /// Radius (m).
    pub radius: f32,
    /// Distance from its place in the dry bed (m).
    pub displacement: f32,
    /// Largest force at one of its contacts (N).
    pub force: f32,
}

/// A bead at one time.
pub struct BeadView {
    pub(crate) model: Arc<BeadModel>,
    /// Places of the nodes (m).
    pub nodes: Vec<Point>,
    /// Middles of the voxels (m).
    pub middles: Vec<Point>,
    /// Stress in every voxel (Pa).
    pub stress: Vec<Matrix3<f32>>,
    /// Principal stresses (Pa), largest first.
    pub principal: Vec<[f32; 3]>,
    /// Volume over dry volume in every voxel.
    pub swelling: Vec<f32>,
    /// Tension of every bond (Pa).
    pub bonds: Vec<f32>,
    /// What the bead presses on.
    pub touches: Vec<BeadContact>,
    /// Share of the bead's tear probability in every voxel.
    pub tear_share: Vec<f32>,
    dry_volume: f32,
    dry_density: f32,
}

impl Frame {
    pub(crate) fn between(run: &Run, before: &State, after: &State, share: f32, time: f64) -> Self {
        let nearest = if share < 0.5 { before } else { after };
        let cell = mix(&Point::from(before.cell), &Point::from(after.cell), share);
        let mut frame = Self {
            time,
            step: mix_steps(&before.step, &after.step, f64::from(share)),
            corner: Point::zeros(),
            cell,
            grains: Vec::new(),
            contacts: nearest.contacts.clone(),
            beads: Vec::new(),
            wall: before.wall,
            open: before.open,
            periodic: before.periodic,
        };
        frame.beads = (0..before.beads.len().min(after.beads.len()))
            .filter_map(|bead| {
                // Where a bead tore in between, its nodes are others: cracks come at once.
                let tore = before.ruptured.get(bead) != after.ruptured.get(bead);
                let [one, other] = if tore { [nearest; 2] } else { [before, after] };
                let model = Arc::clone(run.model(nearest, bead)?);
                let near = &nearest.beads[bead];
                BeadView::between(run, model, &one.beads[bead], &other.beads[bead], near, share)
            })
            .collect();
        let middle = frame.beads.first().map_or(0.5 * cell, |bead| bead.centre());
        let single = frame.beads.len() == 1;
        for axis in 0..3 {
            // A bed round one bead is drawn with the bead in its middle.
            if frame.periodic[axis] && single {
                frame.corner[axis] = middle[axis] - 0.5 * cell[axis];
            }
        }
        frame.centre_beads();
        frame.add_grains(run, before, after, nearest, share);
        frame
    }

    /// Moves beads that left the cell through a periodic side back into it.
    fn centre_beads(&mut self) {
        let middle = self.corner + 0.5 * self.cell;
        for index in 0..self.beads.len() {
            let centre = self.beads[index].centre();
            let shift = self.image(&middle, &centre) - centre;
            let bead = &mut self.beads[index];
            bead.nodes.iter_mut().chain(&mut bead.middles).for_each(|place| *place += shift);
        }
    }

    fn add_grains(&mut self, run: &Run, before: &State, after: &State, nearest: &State, share: f32) {
        let mut forces = vec![0.0_f32; nearest.radii.len()];
        let mut note = |grain: usize, force: f32| forces[grain] = forces[grain].max(force);
        for contact in &nearest.contacts {
            note(contact.grain as usize, contact.force);
            if let Touched::Grain(other) = contact.on {
                note(other as usize, contact.force);
            }
        }
        for touch in nearest.beads.iter().flat_map(|bead| &bead.touches) {
            if let Touched::Grain(grain) = touch.on {
                note(grain as usize, Point::from(touch.force).norm());
            }
        }
        let dry = run.states.first().map_or(before, |state| &**state);
        let middle = self.corner + 0.5 * self.cell;
        for grain in 0..before.radii.len() {
            let from = Point::from(before.centres[grain]);
            let place = mix(&from, &self.image(&from, &Point::from(after.centres[grain])), share);
            let start = Point::from(dry.centres[grain]);
            self.grains.push(GrainView {
                grain,
                centre: self.image(&middle, &place),
                radius: before.radii[grain],
                displacement: (self.image(&start, &place) - start).norm(),
                force: forces[grain],
            });
        }
        self.add_touching_images();
    }

    /// Adds the periodic images of grains that touch a bead from across a side.
    fn add_touching_images(&mut self) {
        let mut images = Vec::new();
        for bead in &self.beads {
            let centre = bead.centre();
            for touch in &bead.touches {
                let Touched::Grain(grain) = touch.on else { continue };
                let seen = self.grains[grain as usize];
                let image = GrainView { centre: self.image(&centre, &seen.centre), ..seen };
                if (image.centre - seen.centre).norm() > seen.radius && !images.contains(&image) {
                    images.push(image);
                }
            }
        }
        self.grains.append(&mut images);
    }

    /// The periodic image of `place` nearest to `from`.
    pub(crate) fn image(&self, from: &Point, place: &Point) -> Point {
        let mut image = *place;
        for axis in 0..3 {
            if self.periodic[axis] {
                image[axis] -= self.cell[axis] * ((place[axis] - from[axis]) / self.cell[axis]).round();
            }
        }
        image
    }

    /// Which grains a bead presses on, by number.
    pub(crate) fn pressed(&self) -> Vec<bool> {
        let mut pressed = vec![false; self.grains.iter().map(|grain| grain.grain + 1).max().unwrap_or(0)];
        for touch in self.beads.iter().flat_map(|bead| &bead.touches) {
            if let Touched::Grain(grain) = touch.on {
                pressed[grain as usize] = true;
            }
        }
        pressed
    }

    /// Middle of the beads (m), or of the bed without any.
    pub fn middle(&self) -> Point {
        if self.beads.is_empty() {
            return self.corner + 0.5 * self.cell;
        }
        self.beads.iter().map(BeadView::centre).sum::<Point>() / self.beads.len() as f32
    }

    /// A ball (centre, radius) that holds the bed.
    pub fn bed_bounds(&self) -> (Point, f32) {
        (self.corner + 0.5 * self.cell, 0.5 * self.cell.norm())
    }

    /// A ball (centre, radius) that holds the beads, or the bed without any.
    pub fn bead_bounds(&self) -> (Point, f32) {
        if self.beads.is_empty() {
            return self.bed_bounds();
        }
        let middle = self.middle();
        let nodes = self.beads.iter().flat_map(|bead| &bead.nodes);
        (middle, nodes.map(|node| (node - middle).norm()).fold(0.0, f32::max))
    }
}

impl BeadView {
    fn between(
        run: &Run,
        model: Arc<BeadModel>,
        before: &BeadState,
        after: &BeadState,
        near: &BeadState,
        share: f32,
    ) -> Option<Self> {
        let fits = |bead: &BeadState| {
            bead.nodes.len() == model.lattice.node_count()
                && bead.stress.len() == model.gel.len()
                && bead.bonds.len() == model.bonds.len()
        };
        if !fits(before) || !fits(after) {
            return None;
        }
        let nodes: Vec<Point> = (before.nodes.iter().zip(&after.nodes))
            .map(|(one, other)| mix(&Point::from(*one), &Point::from(*other), share))
            .collect();
        let middles = (model.corners.iter())
            .map(|corners| corners.iter().map(|&node| nodes[node as usize]).sum::<Point>() / 8.0)
            .collect();
        let level = |one: f32, other: f32| one + share * (other - one);
        let stress: Vec<Matrix3<f32>> = (before.stress.iter().zip(&after.stress))
            .map(|(one, other)| tensor(std::array::from_fn(|k| level(one[k], other[k]))))
            .collect();
        let principal: Vec<[f32; 3]> = stress.iter().map(principal).collect();
        let all = |one: &[f32], other: &[f32]| one.iter().zip(other).map(|(a, b)| level(*a, *b)).collect();
        let radius = before.dry_radius;
        Some(Self {
            tear_share: tear_shares(&model, &principal, run.scene.strength.modulus as f32),
            nodes,
            middles,
            stress,
            principal,
            swelling: all(&before.swelling, &after.swelling),
            bonds: all(&before.bonds, &after.bonds),
            touches: near.touches.clone(),
            dry_volume: 4.0 / 3.0 * std::f32::consts::PI * radius.powi(3),
            dry_density: run.scene.gel.dry_density as f32,
            model,
        })
    }

    /// Mean of the nodes (m).
    pub fn centre(&self) -> Point {
        self.nodes.iter().sum::<Point>() / self.nodes.len().max(1) as f32
    }

    /// A ball (centre, radius in m) that holds it.
    pub fn bounds(&self) -> (Point, f32) {
        let centre = self.centre();
        (centre, self.nodes.iter().map(|node| (node - centre).norm()).fold(0.0, f32::max))
    }

    /// Mean edge of a voxel now (m).
    pub fn voxel_edge(&self) -> f32 {
        let volume: f32 = self.swelling.iter().zip(&self.model.gel).map(|(j, gel)| j * gel).sum();
        let across = self.model.lattice.across() as f32;
        (volume * self.dry_volume * 6.0 / std::f32::consts::PI).cbrt() / across
    }

    /// Value of a field in a voxel (SI units; uptake in g/g; share per m³ of swollen gel).
    pub fn value(&self, field: Field, voxel: usize) -> f32 {
        let [largest, _, smallest] = self.principal[voxel];
        match field {
            Field::LargestPrincipal => largest,
            Field::SmallestPrincipal => smallest,
            Field::MeanStress => self.principal[voxel].iter().sum::<f32>() / 3.0,
            Field::LargestShear => 0.5 * (largest - smallest),
            Field::Uptake => {
                bedswell_gel::uptake_of_volume_ratio(self.swelling[voxel].into(), self.dry_density.into())
                    as f32
            }
            Field::TearShare => {
                let volume = self.model.gel[voxel] * self.dry_volume * self.swelling[voxel];
                self.tear_share[voxel] / volume.max(f32::MIN_POSITIVE)
            }
        }
    }

    /// Bonds as pairs of voxels.
    pub fn bond_voxels(&self) -> &[[u32; 2]] {
        &self.model.bonds
    }

    pub(crate) fn place(&self, point: &MaterialPoint) -> Point {
        point.nodes.iter().map(|&(node, weight)| self.nodes[node as usize] * weight).sum()
    }
}

/// Each voxel's share of the bead's hazard: volume times tension to the power of the
/// Weibull modulus (weakest link; Weibull 1939, from memory).
fn tear_shares(model: &BeadModel, principal: &[[f32; 3]], modulus: f32) -> Vec<f32> {
    let largest = principal.iter().map(|p| p[0]).fold(0.0, f32::max);
    if largest <= 0.0 {
        return vec![0.0; principal.len()];
    }
    let hazards: Vec<f32> = (principal.iter().zip(&model.gel))
        .map(|(p, gel)| gel * (p[0].max(0.0) / largest).powf(modulus))
        .collect();
    let all: f32 = hazards.iter().sum();
    hazards.iter().map(|hazard| hazard / all).collect()
}

fn tensor([xx, yy, zz, yz, zx, xy]: [f32; 6]) -> Matrix3<f32> {
    Matrix3::new(xx, xy, zx, xy, yy, yz, zx, yz, zz)
}

/// Eigenvalues of a symmetric tensor, largest first, by the trigonometric solution
/// (Smith 1961, Commun. ACM 4:168, from memory).
fn principal(stress: &Matrix3<f32>) -> [f32; 3] {
    let mean = stress.trace() / 3.0;
    let deviator = stress - Matrix3::identity() * mean;
    let p = (deviator.norm_squared() / 6.0).sqrt();
    if p <= f32::MIN_POSITIVE {
        return [mean; 3];
    }
    let angle = (0.5 * (deviator / p).determinant()).clamp(-1.0, 1.0).acos() / 3.0;
    let largest = mean + 2.0 * p * angle.cos();
    let smallest = mean + 2.0 * p * (angle + 2.0 * std::f32::consts::FRAC_PI_3).cos();
    [largest, 3.0 * mean - largest - smallest, smallest]
}

fn mix(one: &Point, other: &Point, share: f32) -> Point {
    one + (other - one) * share
}

fn mix_steps(one: &Step, other: &Step, share: f64) -> Step {
    let level = |value: fn(&Step) -> f64| value(one) + share * (value(other) - value(one));
    Step {
        free_stretch: level(|step| step.free_stretch),
        uptake_g_per_g: level(|step| step.uptake_g_per_g),
        heave_m: level(|step| step.heave_m),
        tension_q99_pa: level(|step| step.tension_q99_pa),
        tear_probability: level(|step| step.tear_probability),
        ..*one
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use approx::assert_relative_eq;

    #[test]
    fn principal_stresses_are_the_eigenvalues() {
        // Rotating diag(5, 2, -3) changes nothing.
        let turn = nalgebra::Rotation3::from_euler_angles(0.5, 0.0, 0.7);
        let stress =
            turn.matrix() * Matrix3::from_diagonal(&Point::new(5.0, 2.0, -3.0)) * turn.matrix().transpose();
        let found = principal(&stress);
        for (value, expected) in found.iter().zip([5.0, 2.0, -3.0]) {
            assert_relative_eq!(*value, expected, epsilon = 1e-5);
        }
        assert_eq!(principal(&(Matrix3::identity() * 4.0)), [4.0; 3]);
    }
}
