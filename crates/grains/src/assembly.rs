//! Grains that push, rub and roll on each other between a floor and a lid.

mod contacts;
mod motion;
mod rest;

pub use rest::{Contact, Partner, Rest};

use crate::contact_law::{ContactLaw, ContactLawError};
use bedswell_geometry::{Cell, Sphere, Vector};
use contacts::ContactList;
use thiserror::Error;

/// A set of grains in a cell, marched towards rest by
/// [`compute_contacts`](Self::compute_contacts), loads from elsewhere, and
/// [`advance`](Self::advance), in this order, once per step.
///
/// Sides of the cell that are not periodic are open, except the floor (z = 0) and
/// the lid (z = `cell.size.z`), which are flat and as rough as the grains. In a
/// cell periodic in all three directions there is neither: a [`Lid::Stress`] is
/// then a pressure on all sides, and the box shrinks or grows as one.
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
    /// How grains push and rub.
    pub law: ContactLaw,
    /// What holds or loads the lid.
    pub lid: Lid,
    /// Grains and lid stay where they are (bench arrays); contacts and loads are
    /// still computed.
    pub held: bool,
    lid_state: LidState,
    contacts: ContactList,
}

/// What holds or loads the lid.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Lid {
    /// The lid stays.
    Fixed,
    /// The lid moves in z under this stress (Pa), positive when it presses.
    Stress(f64),
}

/// Load and motion of the lid. Between floor and lid these are forces (N) and m
/// per step along z; in a fully periodic cell energies (J) and strain per step.
#[derive(Clone, Copy, Debug, Default)]
struct LidState {
    velocity: f64,
    force: f64,
    stiffness: f64,
}

/// Why grains cannot be put into a cell.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum AssemblyError {
    /// A radius or centre is not a usable number.
    #[error(
        "grain {index} has radius {radius} m and centre {centre:?} m: the radius must be above 0 and all must be finite"
    )]
    Sphere {
        /// Index of the grain.
        index: usize,
        /// Its radius (m).
        radius: f64,
        /// Its centre (m).
        centre: [f64; 3],
    },
    /// A grain would overlap its own periodic image.
    #[error("grain {index} is {diameter} m wide, more than the periodic cell's {length} m: widen the cell")]
    WiderThanCell {
        /// Index of the grain.
        index: usize,
        /// Its diameter (m).
        diameter: f64,
        /// The cell's length (m).
        length: f64,
    },
    /// The contact law is unusable.
    #[error(transparent)]
    Law(#[from] ContactLawError),
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
            law,
            lid,
            held: false,
            lid_state: LidState::default(),
            contacts: ContactList::new(&radii),
            radii,
        })
    }

    /// Adds a load from elsewhere (the gel) on a grain until the next
    /// `compute_contacts`: force (N), torque about its centre (N m), and the
    /// stiffness (N/m) with which the load answers the grain's motion.
    #[inline]
    pub fn add_load(&mut self, grain: usize, force: Vector, torque: Vector, stiffness: f64) {
        self.forces[grain] += force;
        self.torques[grain] += torque;
        self.stiffnesses[grain] += stiffness;
    }

    /// Adds an upward load (N) from elsewhere on the lid, with its stiffness (N/m),
    /// until the next `compute_contacts`.
    #[inline]
    pub fn add_lid_load(&mut self, force_z: f64, stiffness: f64) {
        self.lid_state.force += force_z;
        self.lid_state.stiffness += stiffness;
    }

    /// The grains as spheres, with their centres inside the box.
    pub fn spheres(&self) -> Vec<Sphere> {
        self.centres
            .iter()
            .zip(&self.radii)
            .map(|(centre, &radius)| Sphere { centre: self.cell.wrap(centre), radius })
            .collect()
    }

    /// Volume of the grains over the volume of the whole cell, floor to lid;
    /// overlaps count twice.
    pub fn solid_fraction(&self) -> f64 {
        self.radii.iter().map(|&radius| bedswell_geometry::volume_of_radius(radius)).sum::<f64>()
            / self.cell.volume()
    }

    /// Keeps the first `count` grains, with the contacts among them, and takes the
    /// others out.
    pub fn truncate(&mut self, count: usize) {
        self.centres.truncate(count);
        self.radii.truncate(count);
        self.velocities.truncate(count);
        self.spins.truncate(count);
        self.forces.truncate(count);
        self.torques.truncate(count);
        self.stiffnesses.truncate(count);
        self.contacts.truncate(count);
    }

    /// Stops all motion; contact history stays.
    pub fn stop(&mut self) {
        self.velocities.fill(Vector::zeros());
        self.spins.fill(Vector::zeros());
        self.lid_state.velocity = 0.0;
    }
}
