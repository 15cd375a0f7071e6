//! Strength by place.

use bedswell_geometry::stream;
use rand::RngExt;
use statrs::function::gamma::gamma;

/// Independent strengths of cubes of dry gel of volume ℓ³, over their mean: Weibull's
/// distribution (1951, J. Appl. Mech. 18:293, from memory), whose weakest of N cubes has
/// N^(-1/m) times the strength of one. A place has the same strength on every lattice.
#[derive(Clone, Debug)]
pub(crate) struct Strengths {
    /// Weibull modulus m; without end where there is no scatter.
    pub(crate) modulus: f64,
    /// Edge of a cube (m).
    edge: f64,
    seed: u64,
}

impl Strengths {
    pub(super) fn new(scatter: f64, edge: f64, seed: u64) -> Self {
        Self { modulus: modulus_of(scatter), edge, seed }
    }

    /// Strength over the mean at a place of the dry gel, seen from its centre (m).
    pub(crate) fn at(&self, place: [f64; 3]) -> f64 {
        if self.modulus.is_infinite() {
            return 1.0;
        }
        self.of_cube(place.map(|c| (c / self.edge).floor() as i64))
    }

    /// The least strength over the mean within `half` (m) of the centre along each axis.
    pub(super) fn least(&self, half: [f64; 3]) -> f64 {
        if self.modulus.is_infinite() {
            return 1.0;
        }
        let cubes = half.map(|half| (half / self.edge).ceil() as i64);
        let mut least = f64::INFINITY;
        for x in -cubes[0]..=cubes[0] {
            for y in -cubes[1]..=cubes[1] {
                for z in -cubes[2]..=cubes[2] {
                    least = least.min(self.of_cube([x, y, z]));
                }
            }
        }
        least
    }

    fn of_cube(&self, cube: [i64; 3]) -> f64 {
        let survival = 1.0 - stream(self.seed, &cube.map(|index| index as u64)).random::<f64>();
        (-survival.ln()).powf(1.0 / self.modulus) / gamma(1.0 + 1.0 / self.modulus)
    }
}

/// Standard deviation over mean of Weibull's distribution with a modulus.
pub(super) fn scatter_of(modulus: f64) -> f64 {
    (gamma(1.0 + 2.0 / modulus) / gamma(1.0 + 1.0 / modulus).powi(2) - 1.0).max(0.0).sqrt()
}

/// The Weibull modulus whose distribution has this standard deviation over its mean.
fn modulus_of(scatter: f64) -> f64 {
    if scatter == 0.0 {
        return f64::INFINITY;
    }
    // It falls with m; bisection on ln m.
    let (mut low, mut high) = (0.0_f64, 20.0_f64);
    for _ in 0..100 {
        let middle = 0.5 * (low + high);
        if scatter_of(middle.exp()) > scatter { low = middle } else { high = middle }
    }
    low.exp()
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Coefficients of variation by Weibull modulus, computed with scipy.
    #[test]
    fn scatter_gives_the_tabled_modulus() {
        for (m, scatter) in [(3.0, 0.363447), (5.0, 0.229053), (10.0, 0.120310), (20.0, 0.061976)] {
            assert!((modulus_of(scatter) / m - 1.0).abs() < 1e-4, "{m}");
        }
    }

    /// Mean 1 and the scatter asked for, over many places; the sampling errors are 0.1 % of
    /// the mean and 1 % of the scatter.
    #[test]
    fn strengths_have_mean_one_and_the_scatter_asked_for() {
        let strengths = Strengths::new(0.1, 1.0, 7);
        let all: Vec<f64> = (0..20_000)
            .map(|k| strengths.at([f64::from(k % 25), f64::from(k / 25 % 25), f64::from(k / 625)]))
            .collect();
        let mean = all.iter().sum::<f64>() / all.len() as f64;
        let variance = all.iter().map(|s| (s - mean).powi(2)).sum::<f64>() / all.len() as f64;
        assert!((mean - 1.0).abs() < 3e-3 && (variance.sqrt() / 0.1 - 1.0).abs() < 0.03, "{mean} {variance}");
    }
}
