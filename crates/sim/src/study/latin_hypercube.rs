use bedswell_geometry::stream;
use rand::RngExt;
use rand::seq::SliceRandom;

/// The random streams kept for sampling ("LATINCUB" in ASCII).
const PURPOSE: u64 = 0x4c41_5449_4e43_5542;

/// The part of a factor's range in which a sample lies.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Stratum {
    /// Number of the stratum, from 0.
    pub(super) number: usize,
    /// Place within the whole range, from 0 to 1.
    pub(super) place: f64,
}

/// Draws a Latin hypercube: for each factor, the stratum of each sample. The range of
/// every factor is cut into as many strata as there are samples; each stratum holds one
/// sample, at random within it, in a random order (McKay, Beckman & Conover 1979,
/// Technometrics 21:239, from memory).
pub(super) fn latin_hypercube(samples: usize, factors: usize, seed: u64) -> Vec<Vec<Stratum>> {
    let column = |factor| {
        let mut random = stream(seed, &[PURPOSE, factor as u64]);
        let mut order: Vec<usize> = (0..samples).collect();
        order.shuffle(&mut random);
        let mut within =
            |number| Stratum { number, place: (number as f64 + random.random::<f64>()) / samples as f64 };
        order.into_iter().map(&mut within).collect()
    };
    (0..factors).map(column).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_stratum_of_every_factor_holds_one_sample() {
        for column in latin_hypercube(50, 3, 8) {
            let mut seen = [false; 50];
            for Stratum { number, place } in column {
                assert!((number as f64..(number + 1) as f64).contains(&(50.0 * place)), "{number}: {place}");
                assert!(!std::mem::replace(&mut seen[number], true), "two samples in stratum {number}");
            }
        }
    }

    #[test]
    fn factors_and_seeds_have_orders_of_their_own() {
        let drawn = latin_hypercube(20, 2, 1);
        assert_ne!(drawn[0], drawn[1]);
        assert_ne!(drawn, latin_hypercube(20, 2, 2));
        assert_eq!(drawn, latin_hypercube(20, 2, 1));
    }
}
