use super::Interval;
use bedswell_geometry::stream;
use rand::RngExt;
use serde::{Deserialize, Serialize};

/// Resamples drawn per interval.
const RESAMPLES: usize = 4000;
/// The random stream kept for resampling ("BOOTSTRA" in ASCII).
const PURPOSE: u64 = 0x424f_4f54_5354_5241;

/// A mean with its 95 % interval.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Estimate {
    /// Mean over packs.
    pub mean: f64,
    /// Lower limit; `None` where a single pack tells nothing of the scatter.
    pub low: Option<f64>,
    /// Upper limit.
    pub high: Option<f64>,
}

/// A figure with its 95 % interval.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Measure {
    /// The figure.
    pub value: f64,
    /// Lower limit; `None` where there is too little to tell the scatter from.
    pub low: Option<f64>,
    /// Upper limit.
    pub high: Option<f64>,
}

impl From<Measure> for Estimate {
    fn from(Measure { value, low, high }: Measure) -> Self {
        Self { mean: value, low, high }
    }
}

/// Mean of `values`, one per pack, with the percentile interval of the bootstrap
/// (Efron 1979, Ann. Stat. 7:1, from memory). `None` without values; a single
/// value has no interval.
///
/// The resampling draws from a stream of `seed`: same values, same interval. With
/// few packs the interval is somewhat too narrow (by a factor of about
/// `√((k-1)/k)` for `k` packs), as the method's is.
pub fn bootstrap_mean(values: &[f64], seed: u64) -> Option<Estimate> {
    if values.is_empty() {
        return None;
    }
    let mean =
        |chosen: &[usize]| chosen.iter().map(|&index| values[index]).sum::<f64>() / chosen.len() as f64;
    bootstrap(values.len(), seed, |chosen| vec![mean(chosen)])[0].map(Estimate::from)
}

/// The figures that `figures_of` makes of `count` things, each with the percentile
/// interval of the bootstrap: the things are drawn again and again with replacement.
///
/// A figure that is not finite for the things themselves is `None`. One that is not
/// finite for more than half of the drawings has no limits; nor has any for a single
/// thing.
pub(crate) fn bootstrap(
    count: usize,
    seed: u64,
    figures_of: impl Fn(&[usize]) -> Vec<f64>,
) -> Vec<Option<Measure>> {
    let mut chosen: Vec<usize> = (0..count).collect();
    let figures = figures_of(&chosen);
    let mut drawn = vec![Vec::new(); figures.len()];
    if count > 1 {
        let mut random = stream(seed, &[PURPOSE]);
        for _ in 0..RESAMPLES {
            chosen.fill_with(|| random.random_range(0..count));
            for (kept, figure) in drawn.iter_mut().zip(figures_of(&chosen)) {
                kept.extend(figure.is_finite().then_some(figure));
            }
        }
    }
    figures.into_iter().zip(drawn).map(|(figure, drawn)| measure(figure, drawn)).collect()
}

fn measure(value: f64, mut drawn: Vec<f64>) -> Option<Measure> {
    if !value.is_finite() {
        return None;
    }
    if 2 * drawn.len() < RESAMPLES {
        return Some(Measure { value, low: None, high: None });
    }
    drawn.sort_by(f64::total_cmp);
    let Interval { low, high } = percentile_interval(&drawn);
    Some(Measure { value, low: Some(low), high: Some(high) })
}

fn percentile_interval(sorted: &[f64]) -> Interval {
    let at = |probability: f64| {
        let place = probability * (sorted.len() - 1) as f64;
        let below = place.floor() as usize;
        let above = (below + 1).min(sorted.len() - 1);
        sorted[below] + (place - below as f64) * (sorted[above] - sorted[below])
    };
    Interval { low: at(0.025), high: at(0.975) }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn two_packs_have_the_interval_that_can_be_worked_out_by_hand() {
        // Resampled means of {0, 1} are 0, 0.5, 1 with chances 1/4, 1/2, 1/4.
        assert_eq!(
            bootstrap_mean(&[0.0, 1.0], 1),
            Some(Estimate { mean: 0.5, low: Some(0.0), high: Some(1.0) })
        );
    }

    #[test]
    fn the_interval_of_a_large_normal_sample_is_the_normal_one() {
        // Equally spaced normal scores: standard error of the mean s/√n, so ±1.96 s/√n.
        use statrs::distribution::{ContinuousCDF, Normal};
        let normal = Normal::standard();
        let values: Vec<f64> = (0..400).map(|i| normal.inverse_cdf((f64::from(i) + 0.5) / 400.0)).collect();
        let estimate = bootstrap_mean(&values, 7).unwrap();
        let expected = 1.96 / 20.0;
        assert!((estimate.high.unwrap() / expected - 1.0).abs() < 0.05, "{estimate:?}");
        assert!((estimate.low.unwrap() / -expected - 1.0).abs() < 0.05, "{estimate:?}");
    }

    #[test]
    fn one_pack_has_no_interval() {
        assert_eq!(bootstrap_mean(&[0.3], 1), Some(Estimate { mean: 0.3, low: None, high: None }));
        assert_eq!(bootstrap_mean(&[], 1), None);
    }

    #[test]
    fn the_same_seed_gives_the_same_bits() {
        let values = [0.3, 0.1, 0.7, 0.2];
        assert_eq!(bootstrap_mean(&values, 3), bootstrap_mean(&values, 3));
        assert_ne!(bootstrap_mean(&values, 3), bootstrap_mean(&[0.3, 0.1, 0.7, 0.25], 3));
    }

    #[test]
    fn a_figure_that_most_drawings_leave_undefined_has_no_limits() {
        // Of three things, all three are drawn with chance 6/27; at least the first with 19/27.
        let all = |chosen: &[usize]| (0..3).all(|thing| chosen.contains(&thing));
        let figures = bootstrap(3, 1, |chosen| {
            let defined = |is: bool| if is { chosen.len() as f64 } else { f64::NAN };
            vec![defined(all(chosen)), defined(chosen.contains(&0)), f64::NAN]
        });
        assert_eq!(figures[0], Some(Measure { value: 3.0, low: None, high: None }));
        assert_eq!(figures[1], Some(Measure { value: 3.0, low: Some(3.0), high: Some(3.0) }));
        assert_eq!(figures[2], None);
    }
}
