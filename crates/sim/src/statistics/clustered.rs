use super::{Interval, clopper_pearson};
use serde::{Deserialize, Serialize};
use statrs::distribution::{ContinuousCDF, StudentsT};

/// A fraction over beads that share packs.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Clustered {
    /// Beads that count as independent.
    pub effective_trials: f64,
    /// 95 % interval from that number.
    pub interval: Interval,
}

/// Interval for a fraction counted over clusters: `(events, trials)` per pack.
///
/// Beads of one pack share its soil and its load, so they tell less than as many
/// beads of separate packs. The exact interval is taken at an effective number of
/// beads: the number that would give the variance seen between packs, corrected
/// for its own degrees of freedom and never above the true number (Korn & Graubard
/// 1998, Survey Methodology 24:193, from memory). Without any variance between
/// packs (all or none torn) a pack counts as a single bead. `None` without packs.
pub fn clustered_fraction(packs: &[(u64, u64)]) -> Option<Clustered> {
    let trials: u64 = packs.iter().map(|&(_, trials)| trials).sum();
    let events: u64 = packs.iter().map(|&(events, _)| events).sum();
    if trials == 0 {
        return None;
    }
    let (clusters, n) = (packs.len() as f64, trials as f64);
    let fraction = events as f64 / n;
    let effective_trials = if packs.iter().all(|&(_, trials)| trials == 1) {
        n
    } else if packs.len() < 2 {
        1.0
    } else {
        let squares: f64 =
            packs.iter().map(|&(events, trials)| (events as f64 - fraction * trials as f64).powi(2)).sum();
        let variance = squares * clusters / (clusters - 1.0) / (n * n);
        if variance > 0.0 {
            let degrees = (t_quantile(n - 1.0) / t_quantile(clusters - 1.0)).powi(2);
            (fraction * (1.0 - fraction) / variance * degrees).min(n)
        } else {
            clusters
        }
    };
    let interval = clopper_pearson((fraction * effective_trials).min(effective_trials), effective_trials);
    Some(Clustered { effective_trials, interval })
}

/// Student's t quantile at 97.5 %.
fn t_quantile(degrees: f64) -> f64 {
    let Ok(t) = StudentsT::new(0.0, 1.0, degrees) else {
        unreachable!("degrees of freedom are positive: {degrees}");
    };
    t.inverse_cdf(0.975)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn one_bead_per_pack_is_the_plain_exact_interval() {
        let packs = [(1, 1), (0, 1), (0, 1), (1, 1), (0, 1)];
        let clustered = clustered_fraction(&packs).unwrap();
        assert_eq!(clustered.interval, clopper_pearson(2.0, 5.0));
    }

    #[test]
    fn beads_that_tear_together_count_as_one_per_pack_at_most() {
        // Ten packs of four beads, all or none torn: variance p(1-p)/(k-1) exactly, so the
        // effective number is (k-1) (t_39 / t_9)², with t = 2.0227 and 2.2622 (common tables).
        let packs: Vec<(u64, u64)> = (0..10).map(|i| (if i < 5 { 4 } else { 0 }, 4)).collect();
        let clustered = clustered_fraction(&packs).unwrap();
        let expected = 9.0 * (2.0227_f64 / 2.2622).powi(2);
        assert!((clustered.effective_trials - expected).abs() < 1e-3, "{clustered:?}");
    }

    #[test]
    fn no_torn_bead_at_all_counts_packs_not_beads() {
        let clustered = clustered_fraction(&[(0, 5); 20]).unwrap();
        assert_eq!(clustered.interval, clopper_pearson(0.0, 20.0));
    }

    #[test]
    fn packs_more_alike_than_chance_never_count_for_more_than_their_beads() {
        let clustered = clustered_fraction(&[(2, 4), (2, 4), (2, 4), (1, 4)]).unwrap();
        assert!((clustered.effective_trials - 16.0).abs() < 1e-12);
    }
}
