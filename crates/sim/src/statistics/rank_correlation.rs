use super::Measure;
use super::bootstrap::bootstrap;

/// Spearman's rank correlation of two lists (Spearman 1904, Am. J. Psychol. 15:72, from
/// memory) with an interval from drawing pairs; `None` if either is constant.
pub(crate) fn bootstrap_rank_correlation(x: &[f64], y: &[f64], seed: u64) -> Option<Measure> {
    bootstrap(x.len().min(y.len()), seed, |chosen| {
        let pick = |values: &[f64]| chosen.iter().map(|&index| values[index]).collect::<Vec<_>>();
        vec![correlation(&ranks(&pick(x)), &ranks(&pick(y)))]
    })[0]
}

/// Place of each value in increasing order, from 1; equal values share their mean place.
fn ranks(values: &[f64]) -> Vec<f64> {
    let mut order: Vec<usize> = (0..values.len()).collect();
    order.sort_by(|&a, &b| values[a].total_cmp(&values[b]));
    let mut ranks = vec![0.0; values.len()];
    let mut first = 0;
    for alike in order.chunk_by(|&a, &b| values[a] == values[b]) {
        let mean = first as f64 + 0.5 * (alike.len() + 1) as f64;
        alike.iter().for_each(|&index| ranks[index] = mean);
        first += alike.len();
    }
    ranks
}

/// Pearson's correlation; not a number if either list is constant.
fn correlation(x: &[f64], y: &[f64]) -> f64 {
    let mean = |values: &[f64]| values.iter().sum::<f64>() / values.len() as f64;
    let (mean_x, mean_y) = (mean(x), mean(y));
    let (mut xx, mut yy, mut xy) = (0.0, 0.0, 0.0);
    for (x, y) in x.iter().zip(y) {
        let (dx, dy) = (x - mean_x, y - mean_y);
        (xx, yy, xy) = (xx + dx * dx, yy + dy * dy, xy + dx * dy);
    }
    xy / (xx * yy).sqrt()
}

#[cfg(test)]
mod tests {
    use super::super::least_squares::tests::{COLUMNS, RESPONSE};
    use super::*;
    use crate::statistics::factorial::example::assert_between;

    #[test]
    fn correlations_and_limits_agree_with_scipy() {
        let of = |x: &[f64]| bootstrap_rank_correlation(x, &RESPONSE, 2).unwrap();
        approx::assert_abs_diff_eq!(of(&COLUMNS[0]).value, -0.952_380_952, epsilon = 1e-9);
        approx::assert_abs_diff_eq!(of(&COLUMNS[1]).value, -0.047_619_048, epsilon = 1e-9);
        // Quantiles at 1.75, 3.25, 96.75 and 98.25 % over many drawings.
        assert_between(of(&COLUMNS[1]).low, [-0.726_027_397, -0.654_320_988]);
        assert_between(of(&COLUMNS[1]).high, [0.670_886_076, 0.777_777_778]);
    }

    #[test]
    fn ties_share_their_rank() {
        assert_eq!(ranks(&[3.0, 1.0, 3.0, 2.0]), [3.5, 1.0, 3.5, 2.0]);
        let tied = bootstrap_rank_correlation(&[1.0, 2.0, 2.0, 3.0, 5.0], &[2.0, 1.0, 3.0, 3.0, 4.0], 2);
        approx::assert_abs_diff_eq!(tied.unwrap().value, 0.763_157_895, epsilon = 1e-9);
    }

    #[test]
    fn what_never_changes_goes_with_nothing() {
        assert_eq!(bootstrap_rank_correlation(&[1.0, 2.0, 3.0], &[4.0, 4.0, 4.0], 2), None);
    }
}
