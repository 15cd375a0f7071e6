use super::{Lifetimes, SurvivalError};
use crate::statistics::chi_squared::upper_tail;
use nalgebra::{DMatrix, DVector};
use serde::{Deserialize, Serialize};

/// How the events of groups compare with what one shared survival curve would give.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct LogRank {
    /// Each group, in the order given.
    pub groups: Vec<GroupCount>,
    /// The statistic: about chi-squared distributed if the groups share one curve.
    pub chi_squared: f64,
    /// Its degrees of freedom.
    pub degrees_of_freedom: usize,
    /// Probability of as large a statistic or a larger one if the groups share one curve.
    pub p_value: f64,
}

/// The events of a group.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct GroupCount {
    /// Events that came.
    pub observed: usize,
    /// Events that one shared curve would give.
    pub expected: f64,
}

/// Compares two or more groups by the log-rank test (Mantel 1966, Cancer Chemother. Rep.
/// 50:163; Peto & Peto 1972, J. R. Stat. Soc. A 135:185; from memory).
///
/// At each time of an event the d events are shared out over the n at risk as if by lot,
/// which gives the groups' means and covariances (hypergeometric, so that ties are covered);
/// these add up over time. It tells best groups whose risks differ by a constant factor; it can
/// miss curves that cross.
///
/// # Errors
/// When there are fewer than two groups, or no event at which chance could have chosen
/// between two of them. A group that chance never touched takes no part in the statistic.
pub fn log_rank(groups: &[Lifetimes]) -> Result<LogRank, SurvivalError> {
    if groups.len() < 2 {
        return Err(SurvivalError::TooFewGroups { groups: groups.len() });
    }
    let Lots { counts, covariance } = draw_lots(groups);
    let touched: Vec<usize> = (0..groups.len()).filter(|&group| covariance[(group, group)] > 0.0).collect();
    // The excesses of all groups add up to nothing, so that one of them says nothing new.
    let Some((_, told)) = touched.split_last().filter(|(_, told)| !told.is_empty()) else {
        return Err(SurvivalError::NothingToCompare);
    };
    let excess = DVector::from_iterator(
        told.len(),
        told.iter().map(|&group| counts[group].observed as f64 - counts[group].expected),
    );
    let among = DMatrix::from_fn(told.len(), told.len(), |i, j| covariance[(told[i], told[j])]);
    let weighed = among.cholesky().ok_or(SurvivalError::NothingToCompare)?.solve(&excess);
    let chi_squared = excess.dot(&weighed);
    let degrees_of_freedom = told.len();
    let p_value = upper_tail(chi_squared, degrees_of_freedom);
    Ok(LogRank { groups: counts, chi_squared, degrees_of_freedom, p_value })
}

/// What sharing out the events by lot gives.
struct Lots {
    counts: Vec<GroupCount>,
    covariance: DMatrix<f64>,
}

fn draw_lots(groups: &[Lifetimes]) -> Lots {
    let mut times: Vec<f64> = groups.iter().flat_map(Lifetimes::event_times).collect();
    times.sort_by(f64::total_cmp);
    times.dedup();
    let mut counts = vec![GroupCount { observed: 0, expected: 0.0 }; groups.len()];
    let mut covariance = DMatrix::zeros(groups.len(), groups.len());
    for time in times {
        let at_risk: Vec<f64> = groups.iter().map(|group| group.at_risk(time) as f64).collect();
        let events: Vec<usize> = groups.iter().map(|group| group.events_at(time)).collect();
        let (n, d) = (at_risk.iter().sum::<f64>(), events.iter().sum::<usize>() as f64);
        let spared = if n > 1.0 { d * (n - d) / (n - 1.0) } else { 0.0 };
        for (i, count) in counts.iter_mut().enumerate() {
            let share = at_risk[i] / n;
            count.observed += events[i];
            count.expected += d * share;
            covariance[(i, i)] += spared * share;
            for (j, other) in at_risk.iter().enumerate() {
                covariance[(i, j)] -= spared * share * other / n;
            }
        }
    }
    Lots { counts, covariance }
}

#[cfg(test)]
mod tests {
    use super::super::remission::{group, treated, untreated};
    use super::*;

    #[test]
    fn the_remission_data_agree_with_their_published_statistic() {
        // Textbooks print 16.79; the digits are those of statsmodels.
        let compared = log_rank(&[treated(), untreated()]).unwrap();
        assert!((compared.chi_squared - 16.792_941).abs() < 0.51e-6, "{compared:?}");
        assert!((compared.p_value - 4.169e-5).abs() < 0.51e-8, "{compared:?}");
        assert_eq!(compared.degrees_of_freedom, 1);
        assert_eq!((compared.groups[0].observed, compared.groups[1].observed), (9, 21));
    }

    #[test]
    fn three_groups_with_ties_agree_with_statsmodels_in_any_order() {
        let a = group(&[3, 5, 5, 8, 12], &[5, 14]);
        let b = group(&[5, 8, 8, 9], &[8, 15, 16, 20]);
        let c = group(&[2, 2, 3, 4, 8, 9], &[10]);
        for order in [[&a, &b, &c], [&c, &a, &b], [&b, &c, &a]] {
            let compared = log_rank(&order.map(Clone::clone)).unwrap();
            approx::assert_abs_diff_eq!(compared.chi_squared, THREE_GROUPS.0, epsilon = 1e-6);
            approx::assert_abs_diff_eq!(compared.p_value, THREE_GROUPS.1, epsilon = 1e-6);
            assert_eq!(compared.degrees_of_freedom, 2);
        }
    }

    const THREE_GROUPS: (f64, f64) = (4.270_347_350, 0.118_224_056);

    #[test]
    fn a_group_without_events_takes_part() {
        let spared = group(&[], &[9, 9, 9, 9]);
        let compared = log_rank(&[group(&[1, 2, 3, 4], &[]), spared]).unwrap();
        assert_eq!(compared.groups[1].observed, 0);
        // At risk 4 of 8, 3 of 7, 2 of 6, 1 of 5: what lots would give the first group.
        let expected = 4.0 / 8.0 + 3.0 / 7.0 + 2.0 / 6.0 + 1.0 / 5.0;
        let variance = 1.0 / 4.0 + 12.0 / 49.0 + 8.0 / 36.0 + 4.0 / 25.0;
        approx::assert_abs_diff_eq!(compared.groups[0].expected, expected, epsilon = 1e-12);
        let statistic = (4.0 - expected) * (4.0 - expected) / variance;
        approx::assert_abs_diff_eq!(compared.chi_squared, statistic, epsilon = 1e-12);
    }

    #[test]
    fn the_same_group_twice_does_not_differ() {
        let compared = log_rank(&[treated(), treated()]).unwrap();
        approx::assert_abs_diff_eq!(compared.chi_squared, 0.0, epsilon = 1e-12);
        approx::assert_abs_diff_eq!(compared.p_value, 1.0, epsilon = 1e-6);
    }

    #[test]
    fn a_group_that_left_before_any_event_adds_no_freedom() {
        let two = log_rank(&[treated(), untreated()]).unwrap();
        let three = log_rank(&[treated(), group(&[], &[0, 0]), untreated()]).unwrap();
        approx::assert_abs_diff_eq!(three.chi_squared, two.chi_squared, epsilon = 1e-12);
        assert_eq!(three.degrees_of_freedom, 1);
    }

    #[test]
    fn what_cannot_be_compared_is_said() {
        assert_eq!(log_rank(&[treated()]), Err(SurvivalError::TooFewGroups { groups: 1 }));
        let spared = || group(&[], &[3, 4]);
        assert_eq!(log_rank(&[spared(), spared()]), Err(SurvivalError::NothingToCompare));
        // Everybody at once leaves nothing to chance.
        assert_eq!(log_rank(&[group(&[2], &[]), group(&[2], &[])]), Err(SurvivalError::NothingToCompare));
    }
}
