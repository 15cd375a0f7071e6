use super::Measure;
use super::factorial::{Combination, Contrast, bootstrap_contrasts, levels_of};

/// What one level of a factor does.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct MainEffect {
    /// Mean at this level, the other factors averaged with equal weight.
    pub(crate) mean: Option<Measure>,
    /// That mean less the one at the factor's first level; `None` at the first.
    pub(crate) difference: Option<Measure>,
}

/// The main effects of a full factorial: for each factor, each level's. A level with a
/// combination without packs has none.
pub(crate) fn main_effects(combinations: &[Combination], seed: u64) -> Vec<Vec<MainEffect>> {
    let factors = combinations.first().map_or(0, |one| one.levels.len());
    let levels: Vec<usize> = (0..factors).map(|factor| levels_of(combinations, factor)).collect();
    let mean = |factor, level| vec![(1.0, vec![(factor, level)])];
    let difference = |factor, level| vec![(1.0, vec![(factor, level)]), (-1.0, vec![(factor, 0)])];
    let contrasts: Vec<Contrast> = (0..factors)
        .flat_map(|factor| (0..levels[factor]).map(move |level| (factor, level)))
        .flat_map(|(factor, level)| [mean(factor, level), difference(factor, level)])
        .collect();
    let mut measures = bootstrap_contrasts(combinations, &contrasts, seed).into_iter();
    let mut effect = |level| {
        let (mean, difference) = (measures.next().flatten(), measures.next().flatten());
        MainEffect { mean, difference: difference.filter(|_| level > 0) }
    };
    levels.iter().map(|&levels| (0..levels).map(&mut effect).collect()).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::statistics::factorial::example::{assert_between, combinations};

    /// A figure, and the exact quantiles of its bootstrap at 1.75, 3.25, 96.75 and 98.25 %, by
    /// numpy over all 3125 drawings.
    type Exact = (f64, [f64; 4]);

    /// Factor, level, mean and difference.
    const REFERENCE: [(usize, usize, Exact, Exact); 3] = [
        (0, 1, (10.51, [10.05, 10.10, 10.91, 10.96]), (-0.86, [-1.03, -1.01, -0.73, -0.71])),
        (
            0,
            2,
            (8.965, [8.2225, 8.355, 9.58, 9.7375]),
            (-2.405, [-2.59, -2.573_333_333, -2.213_333_333, -2.21]),
        ),
        (
            1,
            1,
            (11.83, [11.133_333_333, 11.246_666_667, 12.373_333_333, 12.433_333_333]),
            (3.096_666_667, [2.841_666_667, 2.88, 3.288_341_667, 3.313_333_333]),
        ),
    ];

    #[test]
    fn means_differences_and_limits_agree_with_numpy() {
        let effects = main_effects(&combinations(), 4);
        for (factor, level, mean, difference) in REFERENCE {
            let effect = effects[factor][level];
            for (measure, (value, exact)) in [(effect.mean, mean), (effect.difference, difference)] {
                let measure = measure.unwrap();
                approx::assert_abs_diff_eq!(measure.value, value, epsilon = 1e-9);
                assert_between(measure.low, [exact[0], exact[1]]);
                assert_between(measure.high, [exact[2], exact[3]]);
            }
        }
        assert!(effects.iter().all(|levels| levels[0].difference.is_none()));
    }

    #[test]
    fn a_combination_without_packs_leaves_the_levels_it_belongs_to_unknown() {
        let mut combinations = combinations();
        combinations[5].packs.clear();
        let effects = main_effects(&combinations, 4);
        let known =
            |factor: usize| -> Vec<bool> { effects[factor].iter().map(|at| at.mean.is_some()).collect() };
        assert_eq!((known(0), known(1)), (vec![true, true, false], vec![true, false]));
    }

    #[test]
    fn one_pack_at_each_combination_has_means_but_no_limits() {
        let mut combinations = combinations();
        combinations.iter_mut().for_each(|one| one.packs.truncate(1));
        let change = main_effects(&combinations, 4)[1][1].difference.unwrap();
        approx::assert_abs_diff_eq!(change.value, (1.9 + 3.2 + 4.8) / 3.0, epsilon = 1e-12);
        assert_eq!((change.low, change.high), (None, None));
    }
}
