//! What a soil's grading says before any grain is drawn.

use super::SoilGrading;
use bedswell_geometry::volume_of_radius;
use statrs::distribution::{ContinuousCDF, Normal};

/// Equal mass shares over which means of a grading are taken.
const SHARES: usize = 1000;

impl SoilGrading {
    /// Diameter (m) that the fraction `passing` (0 to 1) of the mass passes, fines
    /// included: linear in percent passing and logarithmic in size between sieves.
    pub fn diameter_passing(&self, passing: f64) -> f64 {
        match self {
            SoilGrading::Sieves { openings, percent_passing, .. } => {
                let percent = 100.0 * passing;
                let above = percent_passing.partition_point(|&p| p < percent).clamp(1, openings.len() - 1);
                let (p1, p2) = (percent_passing[above - 1], percent_passing[above]);
                let (d1, d2) = (openings[above - 1], openings[above]);
                if p2 > p1 { d1 * (d2 / d1).powf((percent - p1) / (p2 - p1)) } else { d2 }
            }
            SoilGrading::Lognormal { median, spread, .. } => {
                median * (spread.ln() * Normal::standard().inverse_cdf(passing)).exp()
            }
            SoilGrading::Spheres { spheres, .. } => {
                let mut radii: Vec<f64> = spheres.iter().map(|sphere| sphere.radius).collect();
                radii.sort_by(f64::total_cmp);
                let total: f64 = radii.iter().map(|radius| radius.powi(3)).sum();
                let mut sum = 0.0;
                let at = radii.iter().find(|radius| {
                    sum += radius.powi(3);
                    sum >= passing * total
                });
                2.0 * at.or(radii.last()).copied().unwrap_or(0.0)
            }
        }
    }

    /// Mass fraction finer than the cut-off, which the bed leaves out.
    pub fn fines_left_out(&self) -> f64 {
        match self {
            SoilGrading::Sieves { openings, percent_passing, fines_cutoff: Some(cutoff) } => {
                let above = openings.partition_point(|d| d < cutoff);
                if above == 0 {
                    return 0.0;
                }
                let Some(d2) = openings.get(above) else { return 1.0 };
                let (d1, p1, p2) = (openings[above - 1], percent_passing[above - 1], percent_passing[above]);
                0.01 * (p1 + (p2 - p1) * (cutoff / d1).ln() / (d2 / d1).ln())
            }
            SoilGrading::Lognormal { median, spread, fines_cutoff: Some(cutoff) } => {
                if *spread > 1.0 {
                    Normal::standard().cdf((cutoff / median).ln() / spread.ln())
                } else {
                    f64::from(u8::from(cutoff > median))
                }
            }
            _ => 0.0,
        }
    }

    /// Mean volume of a grain by number (m³), fines left out.
    pub fn mean_grain_volume(&self) -> f64 {
        let reciprocal: f64 =
            self.shares().map(|diameter| 1.0 / volume_of_radius(0.5 * diameter)).sum::<f64>() / SHARES as f64;
        1.0 / reciprocal
    }

    /// Standard deviation, by mass, of the logarithm of the grain size, fines left out.
    pub fn log_spread(&self) -> f64 {
        let count = SHARES as f64;
        let mean = self.shares().map(f64::ln).sum::<f64>() / count;
        (self.shares().map(|diameter| (diameter.ln() - mean).powi(2)).sum::<f64>() / count).sqrt()
    }

    /// Diameters (m) at the middles of equal mass shares of what is not left out.
    fn shares(&self) -> impl Iterator<Item = f64> {
        let fines = self.fines_left_out();
        (0..SHARES).map(move |share| {
            self.diameter_passing(fines + (1.0 - fines) * (share as f64 + 0.5) / SHARES as f64)
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn sizes_passing_agree_with_a_worked_sieve_analysis() {
        // Sieve masses 28, 42, 48, 128, 221, 86, 40 and pan 24 g, from a published exercise; sizes
        // computed independently with the logarithmic rule.
        let mm = [0.075, 0.150, 0.250, 0.425, 0.850, 2.0, 4.75];
        let percent = [3.8898, 10.3728, 24.3112, 60.1297, 80.8752, 88.6548, 95.4619];
        let grading = SoilGrading::Sieves {
            openings: mm.iter().chain(&[9.5]).map(|d| d * 1e-3).collect(),
            percent_passing: percent.iter().copied().chain([100.0]).collect(),
            fines_cutoff: Some(0.15e-3),
        };
        for (passing, expected) in [(0.1, 0.144139), (0.3, 0.271982), (0.5, 0.365777), (0.6, 0.424184)] {
            let diameter = grading.diameter_passing(passing) * 1e3;
            assert!((diameter / expected - 1.0).abs() < 1e-5, "D at {passing}: {diameter}");
        }
        assert!((grading.fines_left_out() - 0.103728).abs() < 1e-9);
    }

    #[test]
    fn a_lognormal_grading_has_its_own_mean_volume_and_spread() {
        // By mass lognormal (median D, spread s): number-mean volume is π/6 D³ exp(-9 s²/2).
        let sigma = 0.3_f64;
        let grading = SoilGrading::Lognormal { median: 1e-3, spread: sigma.exp(), fines_cutoff: None };
        let expected = std::f64::consts::PI / 6.0 * 1e-9 * (-4.5 * sigma * sigma).exp();
        assert!((grading.mean_grain_volume() / expected - 1.0).abs() < 0.01);
        assert!((grading.log_spread() / sigma - 1.0).abs() < 0.01);
    }
}
