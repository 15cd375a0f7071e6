use crate::contact::skin_position;
use crate::relaxation::Relaxation;
use bedswell_geometry::Vector;
use kiddo::{ImmutableKdTree, SquaredEuclidean};

/// Where the skins of two beads are near each other: skin points of either, each
/// with the nearest skin point of the other and the normal there.
///
/// Pressure is a penalty on penetration; action and reaction are equal by
/// construction. Both skins are probed, each with half the pressure.
#[derive(Clone, Debug, Default)]
pub struct BeadContact {
    facing: Vec<Facing>,
}

#[derive(Clone, Copy, Debug)]
struct Facing {
    /// The probing point is on the second bead.
    from_second: bool,
    probe: u32,
    surface: u32,
    /// Outward normal of the surface.
    normal: Vector,
}

impl BeadContact {
    /// Finds the places within `reach` (m); the second bead is seen `shift` (m) from
    /// where its coordinates say (a periodic image).
    pub fn find(first: &mut Relaxation, second: &mut Relaxation, shift: Vector, reach: f64) -> Self {
        let mut facing = Vec::new();
        let apart = (second.bead().centre() + shift - first.bead().centre()).norm();
        if apart < first.bead().extent() + second.bead().extent() + reach {
            look(first, second, -shift, reach, false, &mut facing);
            look(second, first, shift, reach, true, &mut facing);
        }
        for Facing { from_second, probe, surface, .. } in &facing {
            let (probing, faced) =
                if *from_second { (&mut *second, &mut *first) } else { (&mut *first, &mut *second) };
            probing.weigh(*probe);
            faced.weigh(*surface);
        }
        Self { facing }
    }

    /// Whether the beads are out of reach of each other.
    pub fn is_empty(&self) -> bool {
        self.facing.is_empty()
    }

    /// Adds the forces of the two beads on each other. Returns the force (N) on the
    /// first.
    pub fn press(&self, first: &mut Relaxation, second: &mut Relaxation, shift: Vector) -> Vector {
        let mut total = Vector::zeros();
        for facing in &self.facing {
            let (probing, surface, seen) = if facing.from_second {
                (&mut *second, &mut *first, shift)
            } else {
                (&mut *first, &mut *second, -shift)
            };
            let apart = probing.skin_place(facing.probe) + seen - surface.skin_place(facing.surface);
            let stiffness = 0.5 * probing.point_stiffness();
            let depth = -apart.dot(&facing.normal);
            if depth > 0.0 {
                let force = facing.normal * (stiffness * depth);
                probing.pull(facing.probe, force, stiffness);
                surface.pull(facing.surface, -force, stiffness);
                total += if facing.from_second { -force } else { force };
            }
        }
        first.note_contact(total);
        second.note_contact(-total);
        total
    }
}

/// The points of `probing` near the skin of `surface`.
fn look(
    probing: &Relaxation,
    surface: &Relaxation,
    seen: Vector,
    reach: f64,
    from_second: bool,
    facing: &mut Vec<Facing>,
) {
    let bead = surface.bead();
    let skin = &bead.lattice().skin;
    let places: Vec<[f64; 3]> =
        (0..skin.len()).map(|point| skin_position(skin, &bead.positions, point).into()).collect();
    let Ok(tree) = ImmutableKdTree::<f64, 3>::new_from_slice(&places) else { return };
    let normals = bead.skin_normals();
    for probe in 0..probing.bead().lattice().skin.len() as u32 {
        let place = probing.skin_place(probe) + seen;
        let near = tree.query(&place.into()).nearest_one::<SquaredEuclidean<f64>>().execute();
        if near.distance < reach * reach {
            let normal = normals[near.item as usize];
            facing.push(Facing { from_second, probe, surface: near.item, normal });
        }
    }
}
