use crate::contact_law::ContactLawError;
use thiserror::Error;

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
    /// A pot that is no size.
    #[error("the pot's radius is {0} m: it must be above 0")]
    WallRadius(f64),
    /// A pot in a periodic cell.
    #[error("a pot has no periodic sides: open the cell in x and y")]
    WallInPeriodicCell,
    /// A grain that does not go into the pot.
    #[error("grain {index} is {diameter} m wide, more than the pot's {pot} m: take a wider pot")]
    WiderThanPot {
        /// Index of the grain.
        index: usize,
        /// Its diameter (m).
        diameter: f64,
        /// The pot's diameter (m).
        pot: f64,
    },
    /// The contact law is unusable.
    #[error(transparent)]
    Law(#[from] ContactLawError),
}
