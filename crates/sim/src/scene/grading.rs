use super::{Soil, SoilGrading};
use bedswell_grains::{Grading, GradingError, MassCurve};

impl Soil {
    /// The soil's size distribution by mass.
    ///
    /// # Errors
    /// When the sizes are no grading, or there are no grains; those of a checked scene with
    /// grains are one.
    pub fn grading(&self) -> Result<Grading, GradingError> {
        match &self.grading {
            SoilGrading::Sieves { openings, percent_passing, fines_cutoff } => {
                Grading::from_sieves(openings, percent_passing, *fines_cutoff)
            }
            SoilGrading::Lognormal { median, spread, fines_cutoff } => {
                Grading::lognormal(*median, *spread, *fines_cutoff)
            }
            SoilGrading::Spheres { .. } | SoilGrading::Absent => {
                let curve = MassCurve::of_grains(&self.listed_diameters())
                    .ok_or(GradingError::Lengths { openings: 0, percents: 0 })?;
                Ok(Grading { packed: curve.clone(), soil: curve, left_out: 0.0 })
            }
        }
    }

    /// Diameters (m) of the grains of a bed of `count`; those listed, if the soil lists its spheres.
    ///
    /// # Errors
    /// When the sizes are no grading; those of a checked scene are one.
    pub fn grain_diameters(&self, count: usize) -> Result<Vec<f64>, GradingError> {
        match &self.grading {
            SoilGrading::Spheres { .. } | SoilGrading::Absent => Ok(self.listed_diameters()),
            _ => Ok(self.grading()?.packed.sample(count)),
        }
    }

    fn listed_diameters(&self) -> Vec<f64> {
        match &self.grading {
            SoilGrading::Spheres { spheres, .. } => spheres.iter().map(|s| 2.0 * s.radius).collect(),
            _ => Vec::new(),
        }
    }
}
