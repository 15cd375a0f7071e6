//! Grains that push, rub and roll on each other between a floor and a lid.

mod account;
mod boundary;
mod contact_list;
mod contacts;
mod error;
mod memory;
mod motion;
mod pairs;
mod rest;
mod spring;
mod surface;

pub use account::WorkAccount;
pub use boundary::Boundary;
pub use error::AssemblyError;
pub use memory::GrainMemory;
pub use rest::{Contact, Partner, Rest};

use crate::contact_law::ContactLaw;
use account::Ledger;
use bedswell_geometry::{Cell, Sphere, Vector, volume_of_radius};
use contact_list::ContactList;

/// A set of grains in a cell, marched towards rest by
/// [`compute_contacts`](Self::compute_contacts), loads from elsewhere, and
/// [`advance`](Self::advance), in this order, once per step.
///
/// Sides of the cell that are not periodic are open, except the floor (z = 0), the
/// lid (z = `cell.size.z`) and the wall of a pot, if there is one: they are as rough
/// as the grains and touch them as flat plates do. In a cell periodic in all three
/// directions there is no plate: a [`Lid::Stress`] is then a pressure on all sides,
/// and the box shrinks or grows as one.
///
/// The unit of time is the step, and masses are fictitious: the final rest is
/// real, the way to it is only quasi-static.
#[derive(Clone, Debug)]
pub struct Assembly {
    /// The box; `size.z` is the height of the lid.
    pub cell: Cell,
    /// Centres (m). They may leave the box a little along periodic axes and are
    /// wrapped back from time to time.
    pub centres: Vec<Vector>,
    /// Radii (m).
    pub radii: Vec<f64>,
    /// Velocities (m per step).
    pub velocities: Vec<Vector>,
    /// Angular velocities (rad per step).
    pub spins: Vec<Vector>,
    /// Net force on each grain (N) since the last `compute_contacts`.
    pub forces: Vec<Vector>,
    /// Net torque about each grain's centre (N m).
    pub torques: Vec<Vector>,
    /// Sum of the stiffnesses that touch each grain (N/m).
    pub stiffnesses: Vec<f64>,
    /// Constant force on each grain (N), such as its weight less its buoyancy; zero
    /// at first.
    pub weights: Vec<Vector>,
    /// Grains that stay where they are while others move (a rough floor, a glued
    /// layer); none at first.
    pub pinned: Vec<bool>,
    /// How grains push and rub.
    pub law: ContactLaw,
    /// What holds or loads the lid.
    pub lid: Lid,
    /// Radius (m) of an upright pot around the middle of the cell's floor; set by
    /// [`with_wall`](Self::with_wall).
    pub wall: Option<f64>,
    /// Force per closing speed of a contact, over its stiffness (steps): a dashpot beside the
    /// spring (Cundall & Strack 1979, from memory), none at first. Grains that creep shake each
    /// other, and the damping of [`advance`](Self::advance) does not see what rides on a
    /// creep. Stable up to 0.4 with a damping of 0.2 there.
    pub contact_damping: f64,
    /// Share of its velocity and spin that each grain loses per step, none at first: brings what
    /// swings slowly to its end, and holds up what creeps.
    pub drag: f64,
    /// Grains and lid stay where they are (bench arrays); contacts and loads are
    /// still computed.
    pub held: bool,
    lid_state: LidState,
    boundary: Boundary,
    ledger: Option<Box<Ledger>>,
    contacts: ContactList,
}

/// What holds or loads the lid.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Lid {
    /// The lid stays.
    Fixed,
    /// The lid moves in z under this stress (Pa), positive when it presses.
    Stress(f64),
    /// There is no lid: `cell.size.z` is a nominal height, and grains may lie above.
    Open,
}

/// Load and motion of the lid. Between floor and lid these are forces (N) and m
/// per step along z; in a fully periodic cell energies (J) and strain per step.
#[derive(Clone, Copy, Debug, Default)]
struct LidState {
    velocity: f64,
    force: f64,
    stiffness: f64,
    /// The one that set its mass in the last step (N/m).
    last_stiffness: f64,
}

impl Assembly {
    /// Grains at rest at the given places, which may overlap.
    ///
    /// # Errors
    /// A sphere or a law with unusable numbers, or a grain wider than a periodic
    /// direction of the cell.
    pub fn new(cell: Cell, spheres: &[Sphere], law: ContactLaw, lid: Lid) -> Result<Self, AssemblyError> {
        law.check()?;
        for (index, sphere) in spheres.iter().enumerate() {
            let Sphere { centre, radius } = *sphere;
            if !(radius.is_finite() && radius > 0.0 && centre.iter().all(|x| x.is_finite())) {
                return Err(AssemblyError::Sphere { index, radius, centre: centre.into() });
            }
            let diameter = 2.0 * radius;
            let narrow = (0..3).find(|&axis| cell.periodic[axis] && cell.size[axis] < diameter);
            if let Some(axis) = narrow {
                return Err(AssemblyError::WiderThanCell { index, diameter, length: cell.size[axis] });
            }
        }
        let count = spheres.len();
        let radii: Vec<f64> = spheres.iter().map(|sphere| sphere.radius).collect();
        Ok(Self {
            cell,
            centres: spheres.iter().map(|sphere| sphere.centre).collect(),
            velocities: vec![Vector::zeros(); count],
            spins: vec![Vector::zeros(); count],
            forces: vec![Vector::zeros(); count],
            torques: vec![Vector::zeros(); count],
            stiffnesses: vec![0.0; count],
            weights: vec![Vector::zeros(); count],
            pinned: vec![false; count],
            law,
            lid,
            wall: None,
            contact_damping: 0.0,
            drag: 0.0,
            held: false,
            lid_state: LidState::default(),
            boundary: Boundary::default(),
            ledger: None,
            contacts: ContactList::new(&radii),
            radii,
        })
    }

    /// The same grains in an upright pot of the given radius (m), whose axis stands on
    /// the middle of the floor.
    ///
    /// # Errors
    /// A radius that is no size, a cell that is periodic in x or y, or a grain wider
    /// than the pot.
    pub fn with_wall(mut self, radius: f64) -> Result<Self, AssemblyError> {
        if !(radius.is_finite() && radius > 0.0) {
            return Err(AssemblyError::WallRadius(radius));
        }
        if self.cell.periodic[0] || self.cell.periodic[1] {
            return Err(AssemblyError::WallInPeriodicCell);
        }
        if let Some(index) = self.radii.iter().position(|&grain| grain > radius) {
            let (diameter, pot) = (2.0 * self.radii[index], 2.0 * radius);
            return Err(AssemblyError::WiderThanPot { index, diameter, pot });
        }
        self.wall = Some(radius);
        Ok(self)
    }

    /// Adds a load from elsewhere (the gel) on a grain until the next
    /// `compute_contacts`: force (N), torque about its centre (N m), and the
    /// stiffness (N/m) with which the load answers the grain's motion.
    #[inline]
    pub fn add_load(&mut self, grain: usize, force: Vector, torque: Vector, stiffness: f64) {
        self.forces[grain] += force;
        self.torques[grain] += torque;
        self.stiffnesses[grain] += stiffness;
        if let Some(ledger) = &mut self.ledger {
            ledger.forces[grain] += force;
            ledger.torques[grain] += torque;
        }
    }

    /// The grains as spheres, with their centres inside the box.
    pub fn spheres(&self) -> Vec<Sphere> {
        self.centres
            .iter()
            .zip(&self.radii)
            .map(|(centre, &radius)| Sphere { centre: self.cell.wrap(centre), radius })
            .collect()
    }

    /// Area (m²) of floor and lid: the pot's disc, or the whole cell.
    pub fn section(&self) -> f64 {
        match self.wall {
            Some(radius) => std::f64::consts::PI * radius * radius,
            None => self.cell.size.x * self.cell.size.y,
        }
    }

    /// Volume of the grains over the volume of the whole cell or pot, floor to lid;
    /// overlaps count twice.
    pub fn solid_fraction(&self) -> f64 {
        self.solid_volume() / (self.section() * self.cell.size.z)
    }

    /// Volume of the grains (m³); overlaps count twice.
    pub fn solid_volume(&self) -> f64 {
        self.radii.iter().map(|&radius| volume_of_radius(radius)).sum()
    }

    /// Keeps the first `count` grains, with the contacts among them, and takes the
    /// others out; an account of work ends.
    pub fn truncate(&mut self, count: usize) {
        self.centres.truncate(count);
        self.radii.truncate(count);
        self.velocities.truncate(count);
        self.spins.truncate(count);
        self.forces.truncate(count);
        self.torques.truncate(count);
        self.stiffnesses.truncate(count);
        self.weights.truncate(count);
        self.pinned.truncate(count);
        self.contacts.truncate(count);
        self.ledger = None;
    }

    /// Stops all motion; contact history stays.
    pub fn stop(&mut self) {
        self.velocities.fill(Vector::zeros());
        self.spins.fill(Vector::zeros());
        self.lid_state.velocity = 0.0;
    }
}
