use super::chi_squared::upper_tail;
use super::{Interval, wilson};
use serde::{Deserialize, Serialize};
use thiserror::Error;

/// Predicted probabilities held against what happened.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Agreement {
    /// Groups of alike predictions, from the lowest.
    pub bins: Vec<AgreementBin>,
    /// Statistic of Hosmer and Lemeshow; infinite if what was sure did not happen.
    pub chi_squared: f64,
    /// Its degrees of freedom.
    pub degrees_of_freedom: usize,
    /// Probability of as large a statistic or a larger one if the predictions are right; none
    /// without degrees of freedom.
    pub p_value: Option<f64>,
}

/// A group of alike predictions.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct AgreementBin {
    /// Lowest probability predicted.
    pub lowest: f64,
    /// Highest probability predicted.
    pub highest: f64,
    /// Predictions.
    pub count: u64,
    /// How often it happened.
    pub happened: u64,
    /// Mean of the probabilities predicted.
    pub predicted: f64,
    /// Share in which it happened.
    pub observed: f64,
    /// Wilson's 95 % interval of that share.
    pub interval: Interval,
}

/// Why predictions cannot be held against what happened.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum AgreementError {
    /// Nothing was predicted.
    #[error("there are no predictions to judge")]
    Empty,
    /// No groups are wanted.
    #[error("predictions need at least one bin to be judged in")]
    NoBins,
    /// A probability that is none.
    #[error("prediction {index} is {probability}; a probability lies between 0 and 1")]
    Probability {
        /// Place in the list, from 0.
        index: usize,
        /// The value given.
        probability: f64,
    },
}

/// Holds predicted probabilities against whether it happened, in `bins` groups of alike
/// predictions and about equal numbers; equal predictions stay together, so that there may be
/// fewer groups.
///
/// The statistic is Σ (O - n p̄)² / (n p̄ (1 - p̄)) over the groups, with O of n having happened
/// where p̄ is predicted in the mean (Hosmer & Lemeshow 1980, Commun. Stat. Theory Methods
/// 9:1043, from memory). It has a degree of freedom per group less those that the predictions
/// took from these same outcomes, `fitted`: 0 for predictions made without them. It is about
/// chi-squared distributed where groups expect some five of either kind and outcomes are
/// independent given the predictions.
///
/// # Errors
/// When there are no predictions, no bins, or a probability is none.
pub fn agreement(pairs: &[(f64, bool)], bins: usize, fitted: usize) -> Result<Agreement, AgreementError> {
    let possible = |probability: f64| (0.0..=1.0).contains(&probability);
    if let Some(index) = pairs.iter().position(|pair| !possible(pair.0)) {
        return Err(AgreementError::Probability { index, probability: pairs[index].0 });
    }
    if pairs.is_empty() {
        return Err(AgreementError::Empty);
    }
    if bins == 0 {
        return Err(AgreementError::NoBins);
    }
    let mut sorted = pairs.to_vec();
    sorted.sort_by(|a, b| a.0.total_cmp(&b.0));
    Ok(Agreement::of(cut(&sorted, bins).map(bin).collect(), fitted))
}

impl Agreement {
    /// The statistic over groups already made, of which none is empty.
    pub(crate) fn of(bins: Vec<AgreementBin>, fitted: usize) -> Self {
        let chi_squared = bins.iter().map(AgreementBin::distance).sum();
        let degrees_of_freedom = bins.len().saturating_sub(fitted);
        let p_value = (degrees_of_freedom > 0).then(|| upper_tail(chi_squared, degrees_of_freedom));
        Self { bins, chi_squared, degrees_of_freedom, p_value }
    }
}

impl AgreementBin {
    /// A group of which all share one predicted probability.
    ///
    /// # Panics
    /// When it is empty or more happened than there are.
    #[track_caller]
    pub(crate) fn alike(probability: f64, happened: u64, count: u64) -> Self {
        Self {
            lowest: probability,
            highest: probability,
            count,
            happened,
            predicted: probability,
            observed: happened as f64 / count as f64,
            interval: wilson(happened, count),
        }
    }

    /// (O - E)² over the variance of O.
    fn distance(&self) -> f64 {
        let n = self.count as f64;
        let excess = self.happened as f64 - n * self.predicted;
        if excess == 0.0 { 0.0 } else { excess * excess / (n * self.predicted * (1.0 - self.predicted)) }
    }
}

/// Cuts sorted pairs into runs of about equal length that split no ties.
fn cut(sorted: &[(f64, bool)], bins: usize) -> impl Iterator<Item = &[(f64, bool)]> {
    let bins = bins.min(sorted.len());
    let mut start = 0;
    (1..=bins).filter_map(move |bin| {
        let mut end = sorted.len() * bin / bins;
        if end <= start {
            return None;
        }
        let last = sorted[end - 1].0;
        end += sorted[end..].partition_point(|pair| pair.0 == last);
        let run = &sorted[start..end];
        start = end;
        Some(run)
    })
}

fn bin(run: &[(f64, bool)]) -> AgreementBin {
    let happened = run.iter().filter(|pair| pair.1).count() as u64;
    let predicted = run.iter().map(|pair| pair.0).sum::<f64>() / run.len() as f64;
    AgreementBin {
        lowest: run[0].0,
        highest: run[run.len() - 1].0,
        ..AgreementBin::alike(predicted, happened, run.len() as u64)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use bedswell_geometry::stream;
    use rand::RngExt;

    /// Twelve predictions with what happened; the same as in `assets/reference_values.py`.
    const PAIRS: [(f64, bool); 12] = [
        (0.62, true),
        (0.05, false),
        (0.31, true),
        (0.90, true),
        (0.12, false),
        (0.47, false),
        (0.08, true),
        (0.71, true),
        (0.55, true),
        (0.24, false),
        (0.83, false),
        (0.38, false),
    ];

    #[test]
    fn three_bins_agree_with_the_printed_formula() {
        let judged = agreement(&PAIRS, 3, 0).unwrap();
        let counts: Vec<_> = judged.bins.iter().map(|bin| (bin.count, bin.happened)).collect();
        assert_eq!(counts, [(4, 1), (4, 2), (4, 3)]);
        approx::assert_abs_diff_eq!(judged.bins[1].predicted, 0.4275, epsilon = 1e-12);
        assert_eq!((judged.bins[1].lowest, judged.bins[1].highest), (0.31, 0.55));
        assert_eq!(judged.bins[2].interval, wilson(3, 4));
        approx::assert_abs_diff_eq!(judged.chi_squared, THREE_BINS.0, epsilon = 1e-9);
        approx::assert_abs_diff_eq!(judged.p_value.unwrap(), THREE_BINS.1, epsilon = 1e-9);
        assert_eq!(judged.degrees_of_freedom, 3);
        let fitted = agreement(&PAIRS, 3, 2).unwrap();
        assert_eq!((fitted.chi_squared, fitted.degrees_of_freedom), (judged.chi_squared, 1));
        assert_eq!(agreement(&PAIRS, 2, 2).unwrap().p_value, None);
    }

    const THREE_BINS: (f64, f64) = (0.695_831_326, 0.874_184_023);

    #[test]
    fn equal_predictions_stay_together() {
        let pairs = [(0.2, false), (0.2, true), (0.2, false), (0.7, true)];
        let counts = |bins| -> Vec<u64> {
            agreement(&pairs, bins, 0).unwrap().bins.iter().map(|bin| bin.count).collect()
        };
        assert_eq!(counts(2), [3, 1]);
        assert_eq!(counts(usize::MAX), [3, 1]);
        assert_eq!(counts(1), [4]);
    }

    /// 500 predictions that are right.
    fn drawn(random: &mut impl RngExt) -> Vec<(f64, bool)> {
        let mut draw = || {
            let probability = random.random::<f64>();
            (probability, random.random::<f64>() < probability)
        };
        std::iter::repeat_with(&mut draw).take(500).collect()
    }

    #[test]
    fn right_predictions_are_refused_as_rarely_as_they_should_be() {
        // Of 400 seeded sets, 5 % are expected below p = 0.05: 20, within three standard errors.
        let mut random = stream(5, &[]);
        let refused = (0..400)
            .filter(|_| {
                let pairs = drawn(&mut random);
                agreement(&pairs, 10, 0).unwrap().p_value.unwrap() < 0.05
            })
            .count();
        assert!((7..=33).contains(&refused), "{refused} of 400");
    }

    #[test]
    fn predictions_that_are_half_as_high_are_found_out() {
        let mut pairs = drawn(&mut stream(6, &[]));
        pairs.iter_mut().for_each(|pair| pair.0 *= 0.5);
        let judged = agreement(&pairs, 10, 0).unwrap();
        assert!(judged.p_value.unwrap() < 1e-6, "{judged:?}");
    }

    #[test]
    fn a_surprise_where_nothing_could_happen_is_beyond_all_chance() {
        assert_eq!(agreement(&[(0.0, true)], 1, 0).unwrap().p_value, Some(0.0));
        let expected = agreement(&[(0.0, false), (1.0, true)], 2, 0).unwrap();
        assert_eq!((expected.chi_squared, expected.p_value), (0.0, Some(1.0)));
    }

    #[test]
    fn what_cannot_be_judged_is_refused() {
        assert_eq!(agreement(&[], 3, 0), Err(AgreementError::Empty));
        assert_eq!(agreement(&[(0.5, true)], 0, 0), Err(AgreementError::NoBins));
        for probability in [-0.1, 1.1, f64::NAN] {
            let error = agreement(&[(0.5, true), (probability, false)], 3, 0).unwrap_err();
            assert!(matches!(error, AgreementError::Probability { index: 1, .. }), "{error}");
        }
    }
}
