//! Largest values and crossings of functions of one variable.

/// The largest value of a function between neighbours of the best of some points in
/// increasing order: (place, value). `at_points` holds its values there; the place is good to
/// `tolerance`.
///
/// By golden section (Kiefer 1953, Proc. Am. Math. Soc. 4:502, from memory).
pub(super) fn maximum(
    points: &[f64],
    at_points: &[f64],
    tolerance: f64,
    value: impl Fn(f64) -> f64,
) -> (f64, f64) {
    const GOLDEN: f64 = 0.618_033_988_749_894_9;
    let best = (1..points.len())
        .fold(0, |best, index| if at_points[index] > at_points[best] { index } else { best });
    let (mut low, mut high) = (points[best.saturating_sub(1)], points[(best + 1).min(points.len() - 1)]);
    let (mut inner_low, mut inner_high) = (high - GOLDEN * (high - low), low + GOLDEN * (high - low));
    let (mut at_low, mut at_high) = (value(inner_low), value(inner_high));
    while high - low > tolerance {
        if at_low < at_high {
            (low, inner_low, at_low) = (inner_low, inner_high, at_high);
            inner_high = low + GOLDEN * (high - low);
            at_high = value(inner_high);
        } else {
            (high, inner_high, at_high) = (inner_high, inner_low, at_low);
            inner_low = high - GOLDEN * (high - low);
            at_low = value(inner_low);
        }
    }
    // The ends of the range and points where the function bends sharply are among the points.
    [(points[best], at_points[best]), (inner_low, at_low), (inner_high, at_high)]
        .into_iter()
        .fold((points[best], f64::NEG_INFINITY), |best, next| if next.1 > best.1 { next } else { best })
}

/// Where a function that lies above `floor` at `from` first falls below it on the way to `end`,
/// to `tolerance`; `None` if it is still above at the end.
pub(super) fn crossing(
    from: f64,
    end: f64,
    floor: f64,
    tolerance: f64,
    value: impl Fn(f64) -> f64,
) -> Option<f64> {
    /// First step, doubled until the function is below.
    const STEP: f64 = 0.01;
    let reach = (end - from).abs();
    let at = |distance: f64| from + (end - from).signum() * distance;
    let (mut inside, mut step) = (0.0, STEP);
    let mut outside = loop {
        let distance = step.min(reach);
        if value(at(distance)) < floor {
            break distance;
        }
        if distance == reach {
            return None;
        }
        (inside, step) = (distance, 2.0 * step);
    };
    while outside - inside > tolerance {
        let middle = 0.5 * (inside + outside);
        if value(at(middle)) < floor {
            outside = middle;
        } else {
            inside = middle;
        }
    }
    Some(at(0.5 * (inside + outside)))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_largest_value_is_found_inside_and_at_an_end() {
        let points = [0.0, 1.0, 2.0, 3.0];
        let of = |value: fn(f64) -> f64| maximum(&points, &points.map(value), 1e-9, value);
        let (place, value) = of(|x| 5.0 - (x - 1.3).powi(2));
        approx::assert_abs_diff_eq!(place, 1.3, epsilon = 1e-7);
        approx::assert_abs_diff_eq!(value, 5.0, epsilon = 1e-12);
        assert_eq!(of(|x| x), (3.0, 3.0));
        assert_eq!(of(|x| -x), (0.0, 0.0));
    }

    #[test]
    fn crossings_are_found_on_both_sides_or_not_at_all() {
        let bell = |x: f64| -x * x;
        approx::assert_abs_diff_eq!(crossing(0.0, 9.0, -4.0, 1e-9, bell).unwrap(), 2.0, epsilon = 1e-8);
        approx::assert_abs_diff_eq!(crossing(0.0, -9.0, -4.0, 1e-9, bell).unwrap(), -2.0, epsilon = 1e-8);
        assert_eq!(crossing(0.0, 1.9, -4.0, 1e-9, bell), None);
        assert_eq!(crossing(2.0, 2.0, -5.0, 1e-9, bell), None);
    }
}
