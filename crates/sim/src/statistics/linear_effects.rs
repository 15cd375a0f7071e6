use super::Measure;
use super::bootstrap::bootstrap;
use super::least_squares::least_squares;

/// The slopes of a linear model over the points of a sample, each with an interval from
/// drawing points, and the share of the response's variance that the model explains.
/// `columns` holds one value per point for each term; `None` where the points do not
/// determine the model.
pub(crate) fn linear_effects(
    columns: &[Vec<f64>],
    response: &[f64],
    seed: u64,
) -> (Vec<Option<Measure>>, Option<f64>) {
    let all: Vec<usize> = (0..response.len()).collect();
    let explained = least_squares(columns, response, &all).map(|model| model.explained);
    let slopes = bootstrap(response.len(), seed, |points| match least_squares(columns, response, points) {
        Some(model) => model.slopes,
        None => vec![f64::NAN; columns.len()],
    });
    (slopes, explained.filter(|share| share.is_finite()))
}

#[cfg(test)]
mod tests {
    use super::super::least_squares::tests::{COLUMNS, RESPONSE};
    use super::*;
    use crate::statistics::factorial::example::assert_between;

    #[test]
    fn limits_of_the_slopes_agree_with_numpy() {
        let columns = COLUMNS.map(|column| column.to_vec());
        let (slopes, explained) = linear_effects(&columns, &RESPONSE, 9);
        // Quantiles at 1.75, 3.25, 96.75 and 98.25 % over a million drawings.
        for (slope, quantiles) in slopes.iter().zip([
            [-28.291_996, -27.450_609, -23.044_590, -22.461_400],
            [-8.194_798, -7.870_687, -3.500_039, -2.368_120],
        ]) {
            let slope = slope.unwrap();
            assert_between(slope.low, [quantiles[0], quantiles[1]]);
            assert_between(slope.high, [quantiles[2], quantiles[3]]);
        }
        assert!(explained.is_some());
    }

    #[test]
    fn too_few_points_have_no_effects() {
        let columns = COLUMNS.map(|column| column[..2].to_vec());
        assert_eq!(linear_effects(&columns, &RESPONSE[..2], 9), (vec![None, None], None));
    }
}
