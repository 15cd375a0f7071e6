//! The strength of a gel from beads that were swollen on the bench, torn or not.
//!
//! A bench array holds a bead among spheres that stay where they are, so that its tension is
//! known from the scene alone. Which beads tore then tells the two numbers of the weakest-link
//! law, the scale and the modulus of the strength. They do not tell the stiffness of the gel
//! as well: among fixed spheres, at one free swell, tension goes with the gel's shear modulus
//! (a gel twice as stiff is in 1.92 times the tension in the array that a test tries), so that
//! a stiffer and as much stronger gel tears alike. Stiffness is the datasheet's to give.

mod fit;
mod likelihood;
mod maximum;
mod outcomes;
mod table;

pub use fit::{FitError, LoadCase, StrengthFit, fit_strength};
pub use outcomes::{BenchArray, BenchCount, BenchGrade, BenchOutcomes, read_bench_outcomes};
pub use table::gel_table;
