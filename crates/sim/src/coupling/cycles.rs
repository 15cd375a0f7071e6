//! How beads fare from one wetting to the next.

use crate::{CoursePoint, CyclePoint};

/// Share of the most that a bead ever held by which its water must turn for a turn to count.
const TURN: f64 = 0.02;

/// Each bead's cycles of wetting and drying: where its water was most and least, from its first
/// turn on, and where it stood at the end. Empty for courses that tell of no cracks.
pub(super) fn cycles(course: &[CoursePoint], beads: usize) -> Vec<CyclePoint> {
    (0..beads)
        .flat_map(|bead| {
            let own: Vec<&CoursePoint> = course.iter().filter(|point| point.bead == bead).collect();
            turns(&own.iter().map(|point| point.uptake_g_per_g).collect::<Vec<_>>())
                .into_iter()
                .scan(0, |cycle, (at, is_most)| {
                    // A cycle begins with a wetting.
                    *cycle += usize::from(is_most);
                    Some((at, is_most, (*cycle).max(1)))
                })
                .filter_map(|(at, is_most, cycle)| {
                    let point = own[at];
                    let (time_s, uptake_g_per_g) = (point.time_s, point.uptake_g_per_g);
                    Some(CyclePoint { bead, cycle, is_most, time_s, uptake_g_per_g, cracks: point.cracks? })
                })
                .collect::<Vec<_>>()
        })
        .collect()
}

/// Where a course turns, by at least a share of its largest value, and its end: the place of
/// each largest value between rises and falls, and of each smallest between falls and rises.
fn turns(values: &[f64]) -> Vec<(usize, bool)> {
    let least = TURN * values.iter().copied().fold(0.0, f64::max);
    let mut found: Vec<(usize, bool)> = Vec::new();
    let (mut low, mut high) = (0, 0);
    for (at, &value) in values.iter().enumerate() {
        let rising = found.last().map(|(_, was_most)| !was_most);
        if value > values[high] {
            high = at;
        }
        if value < values[low] {
            low = at;
        }
        if rising != Some(false) && values[high] - value >= least && high > 0 {
            found.push((high, true));
            low = at;
        } else if rising != Some(true) && value - values[low] >= least && low > 0 {
            found.push((low, false));
            high = at;
        }
    }
    if let Some(end) = values.len().checked_sub(1) {
        let rises = found.last().map_or(values[end] >= values[0], |(_, was_most)| !was_most);
        let end = if rises { high } else { low };
        if found.last().is_none_or(|(last, _)| *last < end) {
            found.push((end, rises));
        }
    }
    found
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn turns_are_where_water_is_most_and_least() {
        // Up, down, up, with a ripple that is no turn.
        let values = [1.0, 5.0, 9.0, 10.0, 9.9, 10.1, 6.0, 2.0, 3.0, 8.0, 8.1];
        assert_eq!(turns(&values), [(5, true), (7, false), (10, true)]);
        assert_eq!(turns(&[5.0, 4.0, 3.0, 6.0]), [(2, false), (3, true)]);
        assert_eq!(turns(&[1.0, 2.0, 3.0]), [(2, true)]);
        assert_eq!(turns(&[3.0, 2.0, 1.0]), [(2, false)]);
        assert!(turns(&[]).is_empty());
    }
}
