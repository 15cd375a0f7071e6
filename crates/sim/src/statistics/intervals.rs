use serde::{Deserialize, Serialize};
use statrs::distribution::{Beta, ContinuousCDF};

/// The standard normal quantile at 97.5 %, for two-sided 95 % intervals.
pub(super) const NORMAL_QUANTILE: f64 = 1.959_963_984_540_054;
/// Half of what a 95 % interval leaves out.
const TAIL: f64 = 0.025;

/// A two-sided 95 % interval.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Interval {
    /// Lower limit.
    pub low: f64,
    /// Upper limit.
    pub high: f64,
}

impl Interval {
    /// Half the width of the interval.
    pub fn half_width(&self) -> f64 {
        0.5 * (self.high - self.low)
    }
}

/// Wilson's score interval for `events` out of `trials`
/// (Wilson 1927, J. Am. Stat. Assoc. 22:209, from memory).
///
/// # Panics
/// When there are more events than trials, or no trials.
#[track_caller]
pub fn wilson(events: u64, trials: u64) -> Interval {
    assert!(trials > 0 && events <= trials, "{events} events out of {trials} trials");
    let (n, square) = (trials as f64, NORMAL_QUANTILE * NORMAL_QUANTILE);
    let fraction = events as f64 / n;
    let centre = fraction + square / (2.0 * n);
    let spread = NORMAL_QUANTILE * (fraction * (1.0 - fraction) / n + square / (4.0 * n * n)).sqrt();
    let scale = 1.0 + square / n;
    // The limits at no and at all events are 0 and 1 exactly; rounding would blur them.
    Interval {
        low: if events == 0 { 0.0 } else { (centre - spread) / scale },
        high: if events == trials { 1.0 } else { (centre + spread) / scale },
    }
}

/// The exact interval of Clopper and Pearson for `events` out of `trials`
/// (Clopper & Pearson 1934, Biometrika 26:404, from memory). Both may be
/// fractions, as effective numbers are.
///
/// # Panics
/// When there are more events than trials, or no trials.
#[track_caller]
pub fn clopper_pearson(events: f64, trials: f64) -> Interval {
    assert!(trials > 0.0 && (0.0..=trials).contains(&events), "{events} events out of {trials} trials");
    Interval {
        low: if events > 0.0 { beta_quantile(events, trials - events + 1.0, TAIL) } else { 0.0 },
        high: if events < trials { beta_quantile(events + 1.0, trials - events, 1.0 - TAIL) } else { 1.0 },
    }
}

/// Quantile of the beta distribution, by bisection of its distribution function.
fn beta_quantile(a: f64, b: f64, probability: f64) -> f64 {
    let Ok(beta) = Beta::new(a, b) else {
        unreachable!("both shapes are positive: {a}, {b}");
    };
    let (mut low, mut high) = (0.0, 1.0);
    loop {
        let middle = 0.5 * (low + high);
        if middle <= low || middle >= high {
            return middle;
        }
        if beta.cdf(middle) < probability {
            low = middle;
        } else {
            high = middle;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Events, trials, Wilson low and high, Clopper-Pearson low and high: closed form,
    /// scipy.stats.binomtest and statsmodels agree on every digit. The first four cases are
    /// those of Newcombe 1998, Stat. Med. 17:857, Table I (limits from memory).
    const TABLE: [(u64, u64, f64, f64, f64, f64); 12] = [
        (81, 263, 0.25528852, 0.36620958, 0.25273675, 0.36762192),
        (15, 148, 0.06238640, 0.16048724, 0.05784401, 0.16165049),
        (0, 20, 0.0, 0.16112516, 0.0, 0.16843347),
        (1, 29, 0.00611321, 0.17175522, 0.00087265, 0.17764430),
        (23, 60, 0.27088272, 0.50982404, 0.26070706, 0.51788505),
        (0, 10, 0.0, 0.27753280, 0.0, 0.30849711),
        (5, 10, 0.23659309, 0.76340691, 0.18708603, 0.81291397),
        (10, 10, 0.72246720, 1.0, 0.69150289, 1.0),
        (0, 100, 0.0, 0.03699350, 0.0, 0.03621669),
        (1, 100, 0.00176743, 0.05448620, 0.00025315, 0.05445939),
        (50, 100, 0.40383153, 0.59616847, 0.39832113, 0.60167887),
        (3, 200, 0.00511424, 0.04316573, 0.00310411, 0.04320828),
    ];

    #[test]
    fn limits_agree_with_the_published_table_to_its_last_digit() {
        for (events, trials, wilson_low, wilson_high, exact_low, exact_high) in TABLE {
            let score = wilson(events, trials);
            let exact = clopper_pearson(events as f64, trials as f64);
            for (value, reference) in [
                (score.low, wilson_low),
                (score.high, wilson_high),
                (exact.low, exact_low),
                (exact.high, exact_high),
            ] {
                assert!((value - reference).abs() < 0.51e-8, "{events}/{trials}: {value} for {reference}");
            }
        }
    }
}
