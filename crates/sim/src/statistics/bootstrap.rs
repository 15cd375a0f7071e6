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
    let mean_of_all = mean(values.iter().copied());
    if values.len() < 2 {
        return Some(Estimate { mean: mean_of_all, low: None, high: None });
    }
    let mut random = stream(seed, &[PURPOSE]);
    let mut means: Vec<f64> = (0..RESAMPLES)
        .map(|_| mean((0..values.len()).map(|_| values[random.random_range(0..values.len())])))
        .collect();
    means.sort_by(f64::total_cmp);
    let Interval { low, high } = percentile_interval(&means);
    Some(Estimate { mean: mean_of_all, low: Some(low), high: Some(high) })
}

fn mean(values: impl ExactSizeIterator<Item = f64>) -> f64 {
    let count = values.len() as f64;
    values.sum::<f64>() / count
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
}
