use super::march::March;
use super::measure::Seen;
use super::neighbourhood::Thing;
use crate::state::{BeadContact, BeadState, GrainContact, State, Touched};
use crate::{Scene, Step};
use bedswell_gel::Relaxation;
use bedswell_geometry::{Matrix, Vector};
use bedswell_grains::{Lid, Partner};

impl March {
    /// What there is to see of this march at `step`.
    pub(super) fn snapshot(&self, scene: &Scene, pack: u64, beads: &[Seen<'_>], step: Step) -> State {
        let grains = &self.bodies.grains;
        let mut cell = grains.cell;
        cell.size.z = grains.filled_height();
        let contacts = self.bodies.grains.contacts().map(|contact| {
            let on = match contact.partner {
                Partner::Grain(grain) => Touched::Grain(grain as u32),
                Partner::Floor => Touched::Floor,
                Partner::Lid => Touched::Lid,
                Partner::Wall => Touched::Wall,
            };
            GrainContact { grain: contact.grain as u32, on, force: contact.force as f32 }
        });
        State {
            fingerprint: crate::folder::fingerprint([scene].into_iter()),
            pack,
            increments: scene.march.increments,
            step,
            cell: single(&cell.size),
            periodic: cell.periodic,
            centres: self.bodies.grains.spheres().iter().map(|sphere| single(&sphere.centre)).collect(),
            radii: self.bodies.grains.radii.iter().map(|&radius| radius as f32).collect(),
            contacts: contacts.collect(),
            beads: (beads.iter().enumerate()).map(|(index, seen)| self.bead_state(index, seen)).collect(),
            wall: grains.wall.map(|radius| radius as f32),
            open: grains.lid == Lid::Open,
            time_s: None,
            ruptured: match scene.toughness {
                None => Vec::new(),
                Some(_) => beads.iter().map(|seen| seen.bead.bead().lattice().ruptured().collect()).collect(),
            },
        }
    }

    fn bead_state(&self, index: usize, Seen { bead: relaxing, field, .. }: &Seen<'_>) -> BeadState {
        let bead = relaxing.bead();
        let dry = bead.voxel_edge().powi(3);
        BeadState {
            across: bead.lattice().across() as u16,
            dry_radius: bead.dry_radius() as f32,
            nodes: (0..bead.lattice().node_count()).map(|node| single(&bead.node(node))).collect(),
            stress: field.stress.iter().map(components).collect(),
            swelling: (field.volume.iter().enumerate())
                .map(|(voxel, volume)| (volume / (bead.lattice().filled(voxel) * dry)) as f32)
                .collect(),
            bonds: field.bonds(bead).iter().map(|bond| bond.tension as f32).collect(),
            touches: self.touches(index, relaxing),
        }
    }

    fn touches(&self, index: usize, relaxing: &Relaxation) -> Vec<BeadContact> {
        let around = &self.bodies.around[index];
        let pressing = relaxing.loads().iter().enumerate().filter(|(_, load)| load.stiffness > 0.0);
        let on_obstacles = pressing.map(|(obstacle, load)| BeadContact {
            on: match around.thing(obstacle) {
                Thing::Floor => Touched::Floor,
                Thing::Lid => Touched::Lid,
                Thing::Wall => Touched::Wall,
                Thing::Grain(grain) => Touched::Grain(grain as u32),
            },
            force: single(&load.force),
        });
        let on_beads = self.bodies.pairs.iter().filter(|pair| pair.force.norm() > 0.0).filter_map(|pair| {
            let (other, force) = match index {
                first if first == pair.first => (pair.second, -pair.force),
                second if second == pair.second => (pair.first, pair.force),
                _ => return None,
            };
            Some(BeadContact { on: Touched::Bead(other as u32), force: single(&force) })
        });
        on_obstacles.chain(on_beads).collect()
    }
}

fn single(vector: &Vector) -> [f32; 3] {
    vector.map(|x| x as f32).into()
}

fn components(stress: &Matrix) -> [f32; 6] {
    [(0, 0), (1, 1), (2, 2), (1, 2), (2, 0), (0, 1)].map(|place| stress[place] as f32)
}
