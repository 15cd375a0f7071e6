use super::Measure;
use super::factorial::{Combination, Contrast, bootstrap_contrasts, contrast_values, levels_of};

/// How far two factors are from adding up, where they are farthest.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Deviation {
    /// The two factors.
    pub(crate) factors: [usize; 2],
    /// The levels of both at which the deviation is largest.
    pub(crate) levels: [usize; 2],
    /// Mean there, less what the two main effects add up to. The interval takes the
    /// place as given.
    pub(crate) deviation: Measure,
}

/// For each pair of factors of a full factorial, the largest deviation from additivity:
/// `m(a, b) - m(a) - m(b) + m`, other factors averaged with equal weight. Pairs with a
/// combination without packs are left out.
pub(crate) fn largest_deviations(combinations: &[Combination], seed: u64) -> Vec<Deviation> {
    let factors = combinations.first().map_or(0, |one| one.levels.len());
    let pairs = (0..factors).flat_map(|first| (first + 1..factors).map(move |second| [first, second]));
    let places: Vec<_> = pairs.filter_map(|pair| Some((pair, farthest_place(combinations, pair)?))).collect();
    let contrasts: Vec<Contrast> = places.iter().map(|&(pair, levels)| contrast(pair, levels)).collect();
    let deviations = bootstrap_contrasts(combinations, &contrasts, seed);
    let found = places.into_iter().zip(deviations);
    found
        .filter_map(|((factors, levels), deviation)| {
            Some(Deviation { factors, levels, deviation: deviation? })
        })
        .collect()
}

/// The levels at which two factors are farthest from adding up, if all are known.
fn farthest_place(combinations: &[Combination], factors: [usize; 2]) -> Option<[usize; 2]> {
    let [rows, columns] = factors.map(|factor| levels_of(combinations, factor));
    let places: Vec<[usize; 2]> = (0..rows).flat_map(|a| (0..columns).map(move |b| [a, b])).collect();
    let contrasts: Vec<Contrast> = places.iter().map(|&levels| contrast(factors, levels)).collect();
    let sizes: Vec<f64> = contrast_values(combinations, &contrasts).into_iter().map(f64::abs).collect();
    let largest = sizes.iter().copied().fold(0.0, f64::max);
    // Of places alike but for rounding, as all are of two factors with two levels, the last.
    let farthest = sizes.iter().rposition(|&size| size >= (1.0 - 1e-9) * largest)?;
    sizes.iter().all(|size| size.is_finite()).then(|| places[farthest])
}

fn contrast([first, second]: [usize; 2], [a, b]: [usize; 2]) -> Contrast {
    vec![
        (1.0, vec![(first, a), (second, b)]),
        (-1.0, vec![(first, a)]),
        (-1.0, vec![(second, b)]),
        (1.0, Vec::new()),
    ]
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::statistics::factorial::example::{assert_between, combinations};

    #[test]
    fn the_largest_deviation_and_its_limits_agree_with_numpy() {
        let deviations = largest_deviations(&combinations(), 4);
        assert_eq!(deviations.len(), 1);
        let Deviation { factors, levels, deviation } = deviations[0];
        assert_eq!((factors, levels), ([0, 1], [2, 1]));
        approx::assert_abs_diff_eq!(deviation.value, 0.736_666_667, epsilon = 1e-9);
        assert_between(deviation.low, [0.65, 0.66]);
        assert_between(deviation.high, [0.874_444_444, 0.89]);
    }

    #[test]
    fn factors_that_add_up_deviate_nowhere() {
        let mut combinations = combinations();
        for one in &mut combinations {
            let sum = 2.0 * one.levels[0] as f64 + 5.0 * one.levels[1] as f64;
            one.packs.iter_mut().for_each(|pack| pack.1 = sum);
        }
        approx::assert_abs_diff_eq!(
            largest_deviations(&combinations, 1)[0].deviation.value,
            0.0,
            epsilon = 1e-12
        );
    }
}
