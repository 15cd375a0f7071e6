//! Gel thermodynamics, bead lattices and their equilibrium.
