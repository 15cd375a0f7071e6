/// A smooth value through keys (place, value) in rising order of place, at rest at both
/// ends and never beyond the keys on either side (monotone cubics with the slopes of
/// Fritsch and Butland, SIAM J. Sci. Stat. Comput. 5, 1984).
pub(super) fn through(keys: &[(f64, f64)], at: f64) -> f64 {
    let (first, last) = (keys[0], keys[keys.len() - 1]);
    if at <= first.0 {
        return first.1;
    }
    let Some(next) = keys.iter().position(|key| at < key.0) else { return last.1 };
    let (from, to) = (keys[next - 1], keys[next]);
    let width = to.0 - from.0;
    let s = (at - from.0) / width;
    let (start, end) = (slope(keys, next - 1) * width, slope(keys, next) * width);
    let rise = to.1 - from.1;
    from.1 + s * (start + s * (3.0 * rise - 2.0 * start - end + s * (start + end - 2.0 * rise)))
}

/// Slope at a key: a harmonic mean of the slopes beside it, none at an end or a turn.
fn slope(keys: &[(f64, f64)], index: usize) -> f64 {
    if index == 0 || index + 1 == keys.len() {
        return 0.0;
    }
    let [before, here, after] = [keys[index - 1], keys[index], keys[index + 1]];
    let (left, right) = ((here.1 - before.1) / (here.0 - before.0), (after.1 - here.1) / (after.0 - here.0));
    if left * right <= 0.0 {
        return 0.0;
    }
    let share = (1.0 + (after.0 - here.0) / (after.0 - before.0)) / 3.0;
    left * right / (share * right + (1.0 - share) * left)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn keys_are_met_and_ends_are_at_rest() {
        let keys = [(0.0, 10.0), (0.3, 40.0), (0.8, 45.0), (1.0, 20.0)];
        for (place, value) in keys {
            assert!((through(&keys, place) - value).abs() < 1e-12);
        }
        assert_eq!((through(&keys, -1.0), through(&keys, 2.0)), (10.0, 20.0));
        let h = 1e-4;
        assert!((through(&keys, h) - 10.0) / h < 0.2);
        assert!((through(&keys, 1.0 - h) - 20.0) / h < 0.2);
        // Half way between two keys alone is half the rise.
        assert_eq!(through(&[(0.0, 0.0), (2.0, 8.0)], 1.0), 4.0);
    }

    #[test]
    fn the_way_is_smooth_and_never_overshoots() {
        let keys = [(0.0, 0.0), (0.1, 5.0), (0.5, 6.0), (1.0, 60.0)];
        let h = 1e-5;
        let mut before = 0.0;
        for step in 1..=1000 {
            let value = through(&keys, f64::from(step) / 1000.0);
            assert!(value >= before, "back from {before} to {value}");
            before = value;
        }
        for (place, value) in &keys[1..3] {
            let (left, right) = (value - through(&keys, place - h), through(&keys, place + h) - value);
            assert!((left - right).abs() < 0.02 * left.max(right), "a kink at {place}");
        }
    }
}
