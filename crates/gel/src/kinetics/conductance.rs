//! Conductance of a deformed bead's gel for water, from voxel to voxel and from the skin.

use super::permeability::Permeability;
use super::stencil::{Cell, FACES, SKIN};
use crate::elastic::Linearisation;
use bedswell_geometry::Matrix;

/// The symmetric matrix L of ½ Σ V g·M g + ½ Σ s (δ - g·r)² over all voxels, whose
/// derivative by a potential is the water that leaves its voxel. M = J F⁻¹ F⁻ᵀ k/k_ref
/// carries the flow in the current geometry back to the dry one. Lengths in dry voxel
/// edges.
#[derive(Clone, Debug, Default)]
pub(super) struct Conductance {
    /// Per cell the matrix on the differences of potential over its faces.
    links: Vec<[[f64; FACES]; FACES]>,
    /// Own entry of each slot.
    pub(super) diagonal: Vec<f64>,
    /// Entries of each slot with the skin, and the skin's own.
    skin: Vec<f64>,
    skin_own: f64,
    /// What the skin takes in where its supply is limited, in units of L's potential.
    limit: Option<f64>,
}

impl Conductance {
    /// That of gel with mean deformation gradients and volume ratios by slot.
    pub(super) fn renew(
        &mut self,
        (cells, slots): (&[Cell], &[u32]),
        state: &Linearisation,
        ratios: &[f64],
        permeability: &Permeability,
    ) {
        self.links.resize(cells.len(), [[0.0; FACES]; FACES]);
        for column in [&mut self.diagonal, &mut self.skin] {
            column.clear();
            column.resize(ratios.len(), 0.0);
        }
        self.skin_own = 0.0;
        for ((links, cell), &slot) in self.links.iter_mut().zip(cells).zip(slots) {
            let slot = slot as usize;
            *links = cell.links(&mobility(&state.gradient_of(slot), permeability.relative(ratios[slot])));
            for k in 0..cell.count {
                let sum: f64 = links[k][..cell.count].iter().sum();
                self.diagonal[slot] += sum;
                if cell.others[k] != SKIN {
                    self.diagonal[cell.others[k] as usize] += links[k][k];
                }
                for skin in (0..cell.count).filter(|&l| cell.others[l] == SKIN) {
                    self.skin[slot] -= links[k][skin];
                    match cell.others[k] {
                        SKIN => self.skin_own += links[k][skin],
                        other => self.skin[other as usize] += links[k][skin],
                    }
                }
            }
        }
    }

    /// Limits what the skin takes in, where it would otherwise take in more; `limited` tells
    /// whether it was limited before. Returns whether it is.
    pub(super) fn limit(&mut self, limit: Option<f64>, limited: bool, potentials: &[f64]) -> bool {
        self.limit = limit.filter(|_| limited);
        let Some(most) = limit else { return false };
        let is_limited =
            if limited { self.skin_potential(potentials) <= 0.0 } else { self.intake(potentials) > most };
        self.limit = limit.filter(|_| is_limited);
        is_limited
    }

    /// The potential at the skin: that outside, 0, unless a limited supply draws it down.
    pub(super) fn skin_potential(&self, potentials: &[f64]) -> f64 {
        match self.limit {
            Some(limit) if self.skin_own > 0.0 => (limit - self.seen_by_skin(potentials)) / self.skin_own,
            _ => 0.0,
        }
    }

    /// What the skin takes in.
    pub(super) fn intake(&self, potentials: &[f64]) -> f64 {
        self.skin_own * self.skin_potential(potentials) + self.seen_by_skin(potentials)
    }

    /// Writes what leaves every voxel.
    pub(super) fn outflow(&self, cells: &[Cell], slots: &[u32], potentials: &[f64], out: &mut [f64]) {
        self.times(cells, slots, (potentials, self.skin_potential(potentials)), out);
    }

    /// Writes how what leaves every voxel changes with the potentials.
    pub(super) fn outflow_change(&self, cells: &[Cell], slots: &[u32], changes: &[f64], out: &mut [f64]) {
        let skin = match self.limit {
            Some(_) if self.skin_own > 0.0 => -self.seen_by_skin(changes) / self.skin_own,
            _ => 0.0,
        };
        self.times(cells, slots, (changes, skin), out);
    }

    fn seen_by_skin(&self, potentials: &[f64]) -> f64 {
        self.skin.iter().zip(potentials).map(|(skin, potential)| skin * potential).sum()
    }

    fn times(&self, cells: &[Cell], slots: &[u32], (potentials, skin): (&[f64], f64), out: &mut [f64]) {
        out.fill(0.0);
        for ((links, cell), &slot) in self.links.iter().zip(cells).zip(slots) {
            let own = potentials[slot as usize];
            let mut differences = [0.0; FACES];
            for (difference, &other) in differences.iter_mut().zip(&cell.others[..cell.count]) {
                *difference = if other == SKIN { skin - own } else { potentials[other as usize] - own };
            }
            let mut left = 0.0;
            for (row, &other) in links.iter().zip(&cell.others[..cell.count]) {
                let flow: f64 =
                    row.iter().zip(&differences).map(|(link, difference)| link * difference).sum();
                left += flow;
                if other != SKIN {
                    out[other as usize] += flow;
                }
            }
            out[slot as usize] -= left;
        }
    }
}

impl Cell {
    /// The cell's matrix on the differences of potential to the other sides of its faces.
    fn links(&self, mobility: &Matrix) -> [[f64; FACES]; FACES] {
        let mut links = [[0.0; FACES]; FACES];
        let carried: [_; FACES] = std::array::from_fn(|k| mobility * self.gradient[k]);
        let springs: [f64; FACES] =
            std::array::from_fn(|k| self.widths[k] * self.normals[k].dot(&(mobility * self.normals[k])));
        for k in 0..self.count {
            for l in 0..=k {
                let mut link = self.volume * self.gradient[k].dot(&carried[l]);
                for f in 0..self.count {
                    link += self.beyond[f][k] * springs[f] * self.beyond[f][l];
                }
                links[k][l] = link * self.shares[k] * self.shares[l];
                links[l][k] = links[k][l];
            }
        }
        links
    }
}

/// J F⁻¹ F⁻ᵀ = cof(F)ᵀ cof(F) / J, times the relative permeability.
fn mobility(f: &Matrix, permeability: f64) -> Matrix {
    let columns = [0, 1, 2].map(|d| f.column(d).into_owned());
    let cofactors = Matrix::from_columns(&[
        columns[1].cross(&columns[2]),
        columns[2].cross(&columns[0]),
        columns[0].cross(&columns[1]),
    ]);
    cofactors.transpose() * cofactors * (permeability / f.determinant())
}

#[cfg(test)]
mod tests {
    use super::super::stencil::cells;
    use super::*;
    use crate::bead::Bead;
    use crate::elastic::Elastic;
    use crate::lattice::{Face, Lattice};
    use crate::thermodynamics::{Gel, GelNumbers, Surroundings};
    use bedswell_geometry::Vector;
    use std::sync::Arc;

    /// A ball of 8 across, stretched and sheared alike everywhere: its cells, and their
    /// conductance.
    fn sheared(lattice: &Arc<Lattice>) -> (Vec<Cell>, Conductance) {
        let gel = Gel::new(GelNumbers { crosslinks: 1e-3, chi: 0.2, charges: 0.0 }, Surroundings::default());
        let mut bead = Bead::new(Arc::clone(lattice), 4.0, Vector::zeros(), 3.0);
        let stride = lattice.stride();
        for node in 0..lattice.node_count() {
            bead.positions[node] +=
                1.5 * bead.positions[stride + node] - 0.4 * bead.positions[2 * stride + node];
        }
        let (elastic, positions) = bead.elastic_and_positions(&gel);
        let mut state = Linearisation::default();
        elastic.linearise_mixed(positions, &vec![0.0; lattice.volume.len()], &mut state);
        let (cells, ratios) = (cells(lattice, |_| true), vec![27.0; lattice.volume.len()]);
        let mut conductance = Conductance::default();
        let permeability = Permeability::new(&gel, 1e-10, 1.5).unwrap();
        let Elastic { lattice, .. } = elastic;
        conductance.renew((&cells, &lattice.slots), &state, &ratios, &permeability);
        (cells, conductance)
    }

    #[test]
    fn a_uniform_gradient_flows_through_sheared_gel_and_leaves_nothing_inside() {
        let lattice = Arc::new(Lattice::new(8));
        let (cells, conductance) = sheared(&lattice);
        let gradient = Vector::new(1.0, -2.0, 0.5);
        let mut potentials = vec![0.0; lattice.volume.len()];
        for voxel in 0..lattice.voxel_count() {
            let (centre, slot) = (lattice.voxel_offset(voxel), lattice.slots[voxel] as usize);
            let middle = Vector::from_fn(|axis, _| centre[axis] - 0.5 + lattice.first[axis][slot]);
            potentials[slot] = gradient.dot(&middle);
        }
        let mut out = vec![0.0; potentials.len()];
        conductance.outflow(&cells, &lattice.slots, &potentials, &mut out);
        let deep: Vec<usize> = (0..lattice.voxel_count())
            .filter(|&voxel| lattice.voxel_offset(voxel).iter().all(|x| x.abs() < 1.0))
            .collect();
        assert_eq!(deep.len(), 8);
        let through = conductance.diagonal[lattice.slots[deep[0]] as usize];
        for voxel in deep {
            let left = out[lattice.slots[voxel] as usize];
            assert!(left.abs() < 1e-10 * through, "voxel {voxel}: {left} of {through}");
        }
    }

    #[test]
    fn what_the_skin_takes_in_is_what_the_voxels_gain_limited_or_not() {
        check_intake(&Arc::new(Lattice::new(8)));
    }

    #[test]
    fn so_it_is_with_cracks_that_cross_and_no_water_flows_across_them() {
        let whole = Lattice::new(8);
        let near =
            |&&(low, _, axis): &&(usize, usize, usize)| axis != 2 && whole.voxel_offset(low)[axis] == -0.5;
        let bonds = whole.bonds();
        let faces: Vec<Face> = (bonds.iter().filter(near))
            .map(|&(low, _, axis)| Face { low: low as u32, axis: axis as u8 })
            .collect();
        let torn = Arc::new(whole.split(&faces));
        assert_eq!(torn.bodies().len(), 4);
        check_intake(&torn);
        // Water that is added to one body stays there, where no skin is open.
        let closed = Arc::new(whole.split(&faces));
        let mut body_of = vec![0; closed.voxel_count()];
        for (body, voxels) in closed.bodies().iter().enumerate() {
            voxels.iter().for_each(|&voxel| body_of[voxel] = body);
        }
        for (voxel, cell) in cells(&closed, |_| true).iter().enumerate() {
            for other in cell.others[..cell.count].iter().filter(|&&other| other != SKIN) {
                let there = closed.slots.iter().position(|slot| slot == other).unwrap();
                assert_eq!(body_of[voxel], body_of[there]);
            }
        }
    }

    fn check_intake(lattice: &Arc<Lattice>) {
        let (cells, mut conductance) = sheared(lattice);
        let mut potentials = vec![0.0; lattice.volume.len()];
        lattice.slots.iter().for_each(|&slot| potentials[slot as usize] = -1.0 - f64::from(slot % 7));
        let mut out = vec![0.0; potentials.len()];
        conductance.outflow(&cells, &lattice.slots, &potentials, &mut out);
        let free = conductance.intake(&potentials);
        assert!((out.iter().sum::<f64>() / -free - 1.0).abs() < 1e-12);
        assert!(conductance.limit(Some(0.25 * free), false, &potentials));
        conductance.outflow(&cells, &lattice.slots, &potentials, &mut out);
        assert!((out.iter().sum::<f64>() / (-0.25 * free) - 1.0).abs() < 1e-12);
        assert!(!conductance.limit(Some(2.0 * free), false, &potentials));
    }
}
