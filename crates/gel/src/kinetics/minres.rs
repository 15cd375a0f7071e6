//! The minimal-residual method for symmetric, indefinite systems (Paige & Saunders 1975,
//! SIAM J. Numer. Anal. 12:617; preconditioned form as in Elman, Silvester & Wathen, Finite
//! Elements and Fast Iterative Solvers, ch. 4; both from memory).

use crate::equilibrium::dot;

/// A symmetric system and a positive definite guess at its inverse.
pub(super) trait System {
    /// Writes the matrix times `vector`.
    fn times(&self, vector: &[f64], out: &mut [f64]);
    /// Writes the guess at the inverse times `vector`.
    fn precondition(&self, vector: &[f64], out: &mut [f64]);
}

/// What came out.
pub(super) struct Solution {
    pub(super) vector: Vec<f64>,
    /// Norm of the right-hand side that the preconditioner measures.
    pub(super) size: f64,
    pub(super) iterations: usize,
}

/// Solves for `right` until the residual's norm, as the preconditioner measures it, has
/// fallen to the share `forcing` or below `target`.
pub(super) fn solve(
    system: &impl System,
    right: &[f64],
    forcing: f64,
    target: f64,
    limit: usize,
) -> Solution {
    let length = right.len();
    let mut vector = vec![0.0; length];
    let (mut before, mut now) = (vec![0.0; length], right.to_vec());
    let mut z = vec![0.0; length];
    system.precondition(&now, &mut z);
    let (mut w_before, mut w) = (vec![0.0; length], vec![0.0; length]);
    let mut product = vec![0.0; length];
    let (mut gamma_before, mut gamma) = (1.0, dot(&z, &now).max(0.0).sqrt());
    let size = gamma;
    let (mut cosine_before, mut cosine, mut sine_before, mut sine) = (1.0, 1.0, 0.0, 0.0);
    let mut eta = gamma;
    let mut iterations = 0;
    while eta.abs() > (forcing * size).max(target) && iterations < limit && gamma > 0.0 {
        iterations += 1;
        z.iter_mut().for_each(|z| *z /= gamma);
        system.times(&z, &mut product);
        let delta = dot(&product, &z);
        let (along, back) = (delta / gamma, gamma / gamma_before);
        for ((before, now), product) in before.iter_mut().zip(&now).zip(&product) {
            *before = product - along * now - back * *before;
        }
        std::mem::swap(&mut before, &mut now);
        let unit = z.clone();
        system.precondition(&now, &mut z);
        let next = dot(&z, &now).max(0.0).sqrt();
        let first = cosine * delta - cosine_before * sine * gamma;
        let pivot = first.hypot(next);
        let second = sine * delta + cosine_before * cosine * gamma;
        let third = sine_before * gamma;
        (cosine_before, sine_before) = (cosine, sine);
        (cosine, sine) = (first / pivot, next / pivot);
        let length = cosine * eta;
        for (((w_before, w), unit), x) in w_before.iter_mut().zip(&w).zip(&unit).zip(&mut vector) {
            *w_before = (unit - third * *w_before - second * w) / pivot;
            *x += length * *w_before;
        }
        std::mem::swap(&mut w_before, &mut w);
        eta *= -sine;
        (gamma_before, gamma) = (gamma, next);
    }
    Solution { vector, size, iterations }
}

#[cfg(test)]
mod tests {
    use super::*;

    struct Indefinite;

    impl System for Indefinite {
        fn times(&self, v: &[f64], out: &mut [f64]) {
            let matrix = [[2.0, 1.0, 0.5], [1.0, -3.0, 0.25], [0.5, 0.25, 4.0]];
            (0..3).for_each(|row| out[row] = (0..3).map(|column| matrix[row][column] * v[column]).sum());
        }

        fn precondition(&self, v: &[f64], out: &mut [f64]) {
            out.copy_from_slice(&[v[0] / 2.0, v[1] / 3.0, v[2] / 4.0]);
        }
    }

    #[test]
    fn an_indefinite_system_is_solved_in_as_many_steps_as_it_has_unknowns() {
        let wanted = [1.0, -2.0, 0.5];
        let mut right = [0.0; 3];
        Indefinite.times(&wanted, &mut right);
        let found = solve(&Indefinite, &right, 1e-13, 0.0, 10);
        assert!(found.iterations <= 4);
        for (found, wanted) in found.vector.iter().zip(wanted) {
            assert!((found - wanted).abs() < 1e-10, "{found} {wanted}");
        }
    }
}
