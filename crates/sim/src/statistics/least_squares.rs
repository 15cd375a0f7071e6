use nalgebra::{DMatrix, DVector};

/// A linear model fitted by least squares.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct LinearModel {
    /// Change of the response per unit of each column.
    pub(super) slopes: Vec<f64>,
    /// Share of the response's variance that the model explains; not a number for a
    /// constant response.
    pub(super) explained: f64,
}

/// Part of a column's variance that the columns before it must leave, so that it can be
/// told from them.
const DISTINCT: f64 = 1e-9;

/// Fits `response = intercept + Σ slope · column` over the given rows. `None` if the rows
/// do not determine the slopes: too few of them, or columns that go together.
pub(super) fn least_squares(columns: &[Vec<f64>], response: &[f64], rows: &[usize]) -> Option<LinearModel> {
    let centred = |values: &[f64]| {
        let chosen = DVector::from_iterator(rows.len(), rows.iter().map(|&row| values[row]));
        let mean = chosen.mean();
        chosen.add_scalar(-mean)
    };
    let columns: Vec<DVector<f64>> = columns.iter().map(|values| centred(values)).collect();
    let response = centred(response);
    let normal = DMatrix::from_fn(columns.len(), columns.len(), |i, j| columns[i].dot(&columns[j]));
    let right = DVector::from_fn(columns.len(), |i, _| columns[i].dot(&response));
    let variances = normal.diagonal();
    let factor = normal.cholesky()?;
    let left_over = factor.l_dirty().diagonal();
    if left_over.iter().zip(&variances).any(|(left, variance)| left * left <= DISTINCT * variance) {
        return None;
    }
    let slopes = factor.solve(&right);
    let mut residual = response.clone();
    for (column, slope) in columns.iter().zip(&slopes) {
        residual.axpy(-slope, column, 1.0);
    }
    let explained = 1.0 - residual.norm_squared() / response.norm_squared();
    Some(LinearModel { slopes: slopes.iter().copied().collect(), explained })
}

#[cfg(test)]
pub(super) mod tests {
    use super::*;

    /// Two columns and a response, made up; the same as in `assets/reference_values.py`.
    pub(in crate::statistics) const COLUMNS: [[f64; 8]; 2] =
        [[0.05, 0.91, 0.42, 0.66, 0.18, 0.80, 0.31, 0.55], [0.60, 0.20, 0.95, 0.08, 0.33, 0.74, 0.47, 0.86]];
    pub(in crate::statistics) const RESPONSE: [f64; 8] = [71.2, 52.8, 60.1, 58.9, 69.0, 50.7, 66.3, 57.5];

    #[test]
    fn slopes_and_the_share_explained_agree_with_statsmodels() {
        let columns = COLUMNS.map(|column| column.to_vec());
        let model = least_squares(&columns, &RESPONSE, &[0, 1, 2, 3, 4, 5, 6, 7]).unwrap();
        approx::assert_abs_diff_eq!(model.slopes[0], -24.985_330_765, epsilon = 1e-9);
        approx::assert_abs_diff_eq!(model.slopes[1], -6.079_319_826, epsilon = 1e-9);
        approx::assert_abs_diff_eq!(model.explained, 0.993_526_803, epsilon = 1e-9);
    }

    #[test]
    fn what_the_rows_do_not_determine_is_not_told() {
        let columns = COLUMNS.map(|column| column.to_vec());
        assert_eq!(least_squares(&columns, &RESPONSE, &[0, 1, 1, 0]), None);
        let alike = [columns[0].clone(), columns[0].iter().map(|value| 3.0 * value + 1.0).collect()];
        assert_eq!(least_squares(&alike, &RESPONSE, &[0, 1, 2, 3, 4]), None);
        assert_eq!(least_squares(&columns, &RESPONSE, &[]), None);
    }
}
