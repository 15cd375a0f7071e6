use statrs::distribution::{ChiSquared, ContinuousCDF};

/// Probability that a chi-squared variable with so many degrees of freedom is as large as
/// `statistic` or larger.
///
/// # Panics
/// Without degrees of freedom.
#[track_caller]
pub(super) fn upper_tail(statistic: f64, degrees_of_freedom: usize) -> f64 {
    assert!(degrees_of_freedom > 0, "no degrees of freedom");
    if statistic.is_infinite() {
        return 0.0;
    }
    let Ok(distribution) = ChiSquared::new(degrees_of_freedom as f64) else {
        unreachable!("degrees of freedom are positive: {degrees_of_freedom}");
    };
    distribution.sf(statistic.max(0.0))
}

#[cfg(test)]
mod tests {
    use super::upper_tail;

    #[test]
    fn tails_agree_with_common_tables() {
        // Upper 5 % and 0.1 % points.
        for (statistic, degrees, tail) in
            [(3.841_459, 1, 0.05), (5.991_465, 2, 0.05), (18.307_038, 10, 0.05), (10.827_566, 1, 0.001)]
        {
            approx::assert_relative_eq!(upper_tail(statistic, degrees), tail, max_relative = 1e-6);
        }
        assert_eq!((upper_tail(0.0, 3), upper_tail(f64::INFINITY, 3)), (1.0, 0.0));
    }
}
