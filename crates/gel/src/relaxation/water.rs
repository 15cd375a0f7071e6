//! A bead that comes to rest at the water it holds.

use super::{Relaxation, Standing};
use crate::contact::{Contacts, Pair, skin_position};
use crate::elastic::{Elastic, Holding};
use crate::obstacle::Obstacle;
use crate::thermodynamics::Gel;

/// Stiffness of a voxel against a change of its volume, in shear moduli of its gel: what a
/// bead at rest has more or less than its water is a small share of what it would have taken
/// in or given off if water moved freely, and the next step in time makes it good.
pub(crate) const STIFFNESS: f64 = 8.0;

/// What holds a bead at its water, and chains that lag behind.
#[derive(Clone, Debug, Default)]
pub(crate) struct HeldWater {
    /// Slopes and stiffness are over `stiffening`.
    pub(crate) holding: Holding,
    /// How much stiffer the chains are against motion than at rest.
    pub(crate) stiffening: f64,
    /// Forces of chains that lag behind, beyond the stiffer chains' (N), as the gradient of
    /// an energy.
    pub(crate) lag: Vec<f64>,
}

/// The way of a bead over a step in time, to be followed in small moves.
#[derive(Clone, Debug)]
pub struct Lead {
    /// From start to end (m).
    pub(crate) way: Vec<f64>,
    /// Slopes and water at the start; slopes are over the stiffening at the end.
    pub(crate) start: Holding,
    pub(crate) end: HeldWater,
}

impl HeldWater {
    /// Adds the net forces of the gel, where nothing else was added before.
    pub(super) fn add_gradient(&self, elastic: &Elastic, positions: &[f64], out: &mut [f64]) {
        elastic.add_held_gradient(positions, &self.holding, out);
        let lag = self.lag.iter();
        out.iter_mut().zip(lag).for_each(|(force, lag)| *force = *force * self.stiffening + lag);
    }

    /// Mean pressure in the gel (Pa) if each voxel were swollen alike in all directions.
    pub(super) fn pressure(&self, elastic: &Elastic) -> f64 {
        let Elastic { lattice, gel, .. } = elastic;
        let Holding { slopes, water, .. } = &self.holding;
        let of = |slot: usize| {
            let slope = slopes[slot] * self.stiffening;
            -(slope + gel.numbers().crosslinks / water[slot].cbrt()) * lattice.volume[slot]
        };
        let sum: f64 = (0..water.len()).map(of).sum();
        sum / lattice.volume.iter().sum::<f64>() * gel.energy_density()
    }

    /// Smallest volume ratio to dry that a voxel's water gives it.
    pub(super) fn driest(&self, slots: &[u32]) -> f64 {
        slots.iter().map(|&slot| self.holding.water[slot as usize]).fold(f64::INFINITY, f64::min)
    }
}

impl Relaxation {
    /// Holds every voxel at its water from now on.
    pub(crate) fn hold(&mut self, water: HeldWater) {
        self.water = Some(water);
        self.weighed = Standing::default();
    }

    /// Follows a lead by one of `of` equal moves, number `step` from 1.
    pub fn follow(&mut self, lead: &Lead, step: usize, of: usize) {
        let (share, stride) = (1.0 / of as f64, lead.way.len() / 3);
        let mut furthest = 0.0_f64;
        for node in 0..self.bead.lattice().node_count() {
            let places = [node, stride + node, 2 * stride + node];
            let square: f64 = places.iter().map(|&place| (share * lead.way[place]).powi(2)).sum();
            furthest = furthest.max(square);
            places.iter().for_each(|&place| self.bead.positions[place] += share * lead.way[place]);
        }
        self.under_way += furthest.sqrt();
        let mut water = lead.end.clone();
        let left = 1.0 - step as f64 * share;
        if step < of {
            let back = |end: &mut [f64], start: &[f64]| {
                end.iter_mut().zip(start).for_each(|(end, start)| *end += left * (start - *end));
            };
            back(&mut water.holding.slopes, &lead.start.slopes);
            back(&mut water.holding.water, &lead.start.water);
        }
        self.water = Some(water);
        if step == 1 {
            self.weighed = Standing::default();
        }
    }

    /// Lets the bead press as contacts say that were found elsewhere, and computes its
    /// forces.
    pub(crate) fn press_as(&mut self, contacts: Contacts, gel: &Gel, obstacles: &[Obstacle]) {
        self.contacts = contacts;
        self.fold_penalty = self.soft_penalty(gel);
        let law = self.fold_law();
        self.folds.renew(&self.bead, law, 0.0);
        self.compute_forces(gel, obstacles);
    }

    /// The contacts of the skin, each with all of its pressure as a multiplier.
    pub(crate) fn skin_contacts(&self, obstacles: &[Obstacle]) -> Contacts {
        let skin = &self.bead.lattice().skin;
        let pressing = self.contacts.pairs.iter().filter_map(|pair| {
            let place = skin_position(skin, &self.bead.positions, pair.point as usize);
            let distance = obstacles[pair.obstacle as usize].gap(&place).distance;
            let pressure = pair.multiplier - self.contacts.penalty * distance;
            (pressure > 0.0 && (pair.point as usize) < skin.len())
                .then(|| Pair::new(pair.point, pair.obstacle, pressure))
        });
        Contacts { pairs: pressing.collect(), ..self.contacts.clone() }
    }

    /// Forces on the nodes that are neither the gel's own nor those of obstacles on its skin
    /// (N), as the gradient of an energy: weight, other beads, folds, and obstacles that
    /// points inside the gel keep out.
    pub(crate) fn other_forces(&self, gel: &Gel, obstacles: &[Obstacle]) -> Vec<f64> {
        let lattice = self.bead.shared_lattice();
        let elastic = Elastic { lattice: &lattice, gel, edge: self.bead.voxel_edge() };
        let mut own = vec![0.0; self.gradient.len()];
        if let Some(water) = &self.water {
            water.add_gradient(&elastic, &self.bead.positions, &mut own);
        }
        let mut contacts = self.contacts.clone();
        contacts.pairs.retain(|pair| (pair.point as usize) < lattice.skin.len());
        contacts.add_gradient(&lattice.skin, &self.bead.positions, obstacles, &mut own);
        self.gradient.iter().zip(&own).map(|(all, own)| all - own).collect()
    }

    /// What the voxel in a slot bears in place of φ' at a volume ratio to dry, over kT/Ω.
    pub(crate) fn held_slope(&self, slot: usize, ratio: f64) -> Option<f64> {
        let HeldWater { holding, stiffening, .. } = self.water.as_ref()?;
        let excess = ratio - holding.water[slot];
        Some(stiffening * (holding.slopes[slot] + holding.stiffness[slot] * excess))
    }
}
