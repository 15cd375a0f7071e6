//! What sizes of grain a soil has.

mod mass_curve;
mod sample;

pub use mass_curve::{MassCurve, SizeNumbers};

use thiserror::Error;

/// A soil's size distribution by mass, and the part of it that is packed.
#[derive(Clone, Debug, PartialEq)]
pub struct Grading {
    /// The whole soil.
    pub soil: MassCurve,
    /// The soil without the fines below the cut-off, whose curve runs from 0 to 1.
    pub packed: MassCurve,
    /// Mass fraction of the soil below the cut-off, which is left out.
    pub left_out: f64,
}

/// Why a grading cannot be used.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum GradingError {
    /// Lists of different length, or too short.
    #[error(
        "the sieve table has {openings} openings and {percents} percentages: give at least two of each, as many of one as of the other"
    )]
    Lengths {
        /// Number of openings.
        openings: usize,
        /// Number of percentages.
        percents: usize,
    },
    /// An opening that is no size, or out of order.
    #[error("sieve opening {opening} m after {before} m: openings must be above 0 and increase")]
    Opening {
        /// The opening (m).
        opening: f64,
        /// The opening before it (m), 0 for the first.
        before: f64,
    },
    /// A percentage out of range or out of order.
    #[error(
        "{percent} % passes the sieve of {opening} m after {before} % at the finer one: percentages must lie in 0-100 and must not decrease"
    )]
    Percent {
        /// The percentage.
        percent: f64,
        /// Its opening (m).
        opening: f64,
        /// The percentage before it.
        before: f64,
    },
    /// The coarsest sieve holds something back.
    #[error(
        "{percent} % passes the coarsest sieve of {opening} m: the table must end at 100 %, so add a sieve that everything passes"
    )]
    Unfinished {
        /// The last percentage.
        percent: f64,
        /// Its opening (m).
        opening: f64,
    },
    /// Material finer than the finest sieve, of unknown size.
    #[error(
        "{percent} % is finer than the finest sieve of {opening} m, and its sizes are unknown: give a fines cut-off of at least that opening, or add a sieve that nothing passes"
    )]
    UnknownFines {
        /// Percent passing the finest sieve.
        percent: f64,
        /// Its opening (m).
        opening: f64,
    },
    /// A median that is no size.
    #[error("median diameter is {0} m: it must be above 0")]
    Median(f64),
    /// A spread that is no geometric standard deviation.
    #[error("spread is {0}: a geometric standard deviation lies between 1 (equal grains) and 5")]
    Spread(f64),
    /// A cut-off that leaves nothing.
    #[error(
        "a fines cut-off of {cutoff} m leaves no grains: the coarsest are {coarsest} m, and it must be above 0"
    )]
    Cutoff {
        /// The cut-off (m).
        cutoff: f64,
        /// The largest grain (m).
        coarsest: f64,
    },
}

impl Grading {
    /// From a sieve analysis: openings (m), finest first, and the percentage of the
    /// mass that passes each, ending at 100. Between sieves the percentage is linear
    /// in the logarithm of size. Grains finer than `fines_cutoff` (m) are left out;
    /// it is required where something passes the finest sieve.
    ///
    /// # Errors
    /// A table that is not increasing, does not end at 100, or leaves sizes open.
    pub fn from_sieves(
        openings: &[f64],
        percent_passing: &[f64],
        fines_cutoff: Option<f64>,
    ) -> Result<Self, GradingError> {
        if openings.len() != percent_passing.len() || openings.len() < 2 {
            return Err(GradingError::Lengths { openings: openings.len(), percents: percent_passing.len() });
        }
        let (mut before, mut percent_before) = (0.0, 0.0);
        for (&opening, &percent) in openings.iter().zip(percent_passing) {
            if !(opening.is_finite() && opening > before) {
                return Err(GradingError::Opening { opening, before });
            }
            if !(percent >= percent_before && percent <= 100.0) {
                return Err(GradingError::Percent { percent, opening, before: percent_before });
            }
            (before, percent_before) = (opening, percent);
        }
        if percent_before != 100.0 {
            return Err(GradingError::Unfinished { percent: percent_before, opening: before });
        }
        let (finest, fines) = (openings[0], percent_passing[0]);
        if fines > 0.0 && fines_cutoff.is_none_or(|cutoff| cutoff < finest) {
            return Err(GradingError::UnknownFines { percent: fines, opening: finest });
        }
        let points = openings.iter().zip(percent_passing).map(|(&size, percent)| (size, percent / 100.0));
        Self::cut(MassCurve::new(points.collect()), fines_cutoff)
    }

    /// Lognormal by mass, with its median diameter (m) and its geometric standard
    /// deviation (1: equal grains), out to six standard deviations. By number it is
    /// then lognormal too, of the same deviation σ = ln(spread) and a median smaller
    /// by exp(-3σ²) (Hatch & Choate 1929, from memory).
    ///
    /// # Errors
    /// A median or spread out of range, or a cut-off that leaves nothing.
    pub fn lognormal(median: f64, spread: f64, fines_cutoff: Option<f64>) -> Result<Self, GradingError> {
        if !(median.is_finite() && median > 0.0) {
            return Err(GradingError::Median(median));
        }
        if !(1.0..=5.0).contains(&spread) {
            return Err(GradingError::Spread(spread));
        }
        if spread == 1.0 {
            return Self::cut(MassCurve::new(vec![(median, 0.0), (median, 1.0)]), fines_cutoff);
        }
        // Simpson's rule for the normal distribution on a fine table.
        const STEPS: usize = 600;
        const REACH: f64 = 6.0;
        let width = 2.0 * REACH / STEPS as f64;
        let density = |z: f64| (-0.5 * z * z).exp();
        let mut sum = 0.0;
        let mut points = vec![(median * spread.powf(-REACH), 0.0)];
        for step in 0..STEPS {
            let z = -REACH + step as f64 * width;
            sum += density(z) + 4.0 * density(z + 0.5 * width) + density(z + width);
            points.push((median * spread.powf(z + width), sum));
        }
        points.iter_mut().for_each(|point| point.1 /= sum);
        Self::cut(MassCurve::new(points), fines_cutoff)
    }

    fn cut(soil: MassCurve, fines_cutoff: Option<f64>) -> Result<Self, GradingError> {
        let Some(cutoff) = fines_cutoff else {
            return Ok(Self { packed: soil.clone(), soil, left_out: 0.0 });
        };
        let coarsest = soil.coarsest();
        if !(cutoff > 0.0 && cutoff < coarsest) {
            return Err(GradingError::Cutoff { cutoff, coarsest });
        }
        let left_out = soil.passing(cutoff);
        Ok(Self { packed: soil.without_fines(cutoff), soil, left_out })
    }
}
