//! What the figures of a full factorial have in common: sums over groups of combinations.

use super::Measure;
use super::bootstrap::bootstrap;

/// One combination of a full factorial.
#[derive(Clone, Debug)]
pub(crate) struct Combination {
    /// Number of the level of each factor.
    pub(crate) levels: Vec<usize>,
    /// Number and response of each pack, in the order of numbers.
    pub(crate) packs: Vec<(u64, f64)>,
}

/// The combinations at which each of these factors stands at this level: (factor, level).
pub(super) type Group = Vec<(usize, usize)>;

/// A weighted sum of means over groups.
pub(super) type Contrast = Vec<(f64, Group)>;

/// Part of the terms' size below which their sum is rounding.
const ROUNDING: f64 = 1e-13;

/// The contrasts with their intervals.
///
/// The mean of a group weighs every combination alike. It is not known (nor is any
/// contrast with it) if a combination of the group has no pack. The bootstrap draws
/// pack numbers and takes the same numbers at every combination, since packs of one
/// number share their random choices: what is due to the soil of a pack then cancels
/// in differences, and is not counted as if it were new at every combination.
pub(super) fn bootstrap_contrasts(
    combinations: &[Combination],
    contrasts: &[Contrast],
    seed: u64,
) -> Vec<Option<Measure>> {
    let numbers = pack_numbers(combinations);
    bootstrap(numbers.len(), seed, contrasts_of_packs(combinations, contrasts, &numbers))
}

/// The contrasts alone; not a number where one is not known.
pub(super) fn contrast_values(combinations: &[Combination], contrasts: &[Contrast]) -> Vec<f64> {
    let numbers = pack_numbers(combinations);
    let all: Vec<usize> = (0..numbers.len()).collect();
    contrasts_of_packs(combinations, contrasts, &numbers)(&all)
}

/// What the contrasts come to for packs chosen from `numbers` by their indices.
fn contrasts_of_packs(
    combinations: &[Combination],
    contrasts: &[Contrast],
    numbers: &[u64],
) -> impl Fn(&[usize]) -> Vec<f64> {
    // The response of each pack at each combination; not a number where it is not known.
    let responses: Vec<Vec<f64>> = combinations.iter().map(|one| responses(one, numbers)).collect();
    let contrasts: Vec<Vec<(f64, Vec<usize>)>> = contrasts
        .iter()
        .map(|terms| terms.iter().map(|(weight, group)| (*weight, members(combinations, group))).collect())
        .collect();
    move |chosen| {
        let means: Vec<f64> = responses.iter().map(|packs| mean_of_known(packs, chosen)).collect();
        let mean_over =
            |group: &[usize]| group.iter().map(|&one| means[one]).sum::<f64>() / group.len() as f64;
        let sum = |terms: &Vec<(f64, Vec<usize>)>| {
            let parts: Vec<f64> = terms.iter().map(|(weight, group)| weight * mean_over(group)).collect();
            let (sum, size) = parts.iter().fold((0.0, 0.0), |at, part| (at.0 + part, at.1 + part.abs()));
            // What rounding leaves where terms cancel is nought.
            if sum.abs() <= ROUNDING * size { 0.0 } else { sum }
        };
        contrasts.iter().map(sum).collect()
    }
}

/// Levels that a factor has among the combinations.
pub(super) fn levels_of(combinations: &[Combination], factor: usize) -> usize {
    combinations.iter().map(|one| one.levels[factor] + 1).max().unwrap_or(0)
}

fn pack_numbers(combinations: &[Combination]) -> Vec<u64> {
    let mut numbers: Vec<u64> =
        combinations.iter().flat_map(|one| one.packs.iter().map(|pack| pack.0)).collect();
    numbers.sort_unstable();
    numbers.dedup();
    numbers
}

fn responses(combination: &Combination, numbers: &[u64]) -> Vec<f64> {
    let mut responses = vec![f64::NAN; numbers.len()];
    for (number, response) in &combination.packs {
        if let Ok(index) = numbers.binary_search(number) {
            responses[index] = *response;
        }
    }
    responses
}

fn members(combinations: &[Combination], group: &Group) -> Vec<usize> {
    let belongs = |one: &Combination| group.iter().all(|&(factor, level)| one.levels[factor] == level);
    (0..combinations.len()).filter(|&index| belongs(&combinations[index])).collect()
}

fn mean_of_known(values: &[f64], chosen: &[usize]) -> f64 {
    let known = chosen.iter().map(|&index| values[index]).filter(|value| !value.is_nan());
    let (count, sum) = known.fold((0, 0.0), |(count, sum), value| (count + 1, sum + value));
    sum / f64::from(count)
}

#[cfg(test)]
pub(super) mod example {
    use super::Combination;

    /// Two factors of three and two levels with five packs each, made up; the last pack
    /// of the last combination is missing. The same as in `assets/reference_values.py`.
    pub(in crate::statistics) fn combinations() -> Vec<Combination> {
        const RESPONSES: [&[f64]; 6] = [
            &[10.1, 11.3, 9.6, 10.9, 10.4],
            &[12.0, 13.1, 11.2, 12.9, 12.2],
            &[8.7, 9.9, 8.4, 9.1, 9.2],
            &[11.9, 12.6, 11.1, 12.4, 11.8],
            &[6.2, 7.9, 6.0, 6.9, 6.4],
            &[11.0, 12.2, 10.1, 11.7],
        ];
        let one = |(index, packs): (usize, &&[f64])| Combination {
            levels: vec![index / 2, index % 2],
            packs: (0..).zip(packs.iter().copied()).collect(),
        };
        RESPONSES.iter().enumerate().map(one).collect()
    }

    /// Asserts that a limit lies between the exact quantiles three standard errors of the
    /// drawing away: at 1.75 and 3.25 %, or 96.75 and 98.25 %.
    #[track_caller]
    pub(in crate::statistics) fn assert_between(limit: Option<f64>, quantiles: [f64; 2]) {
        let limit = limit.expect("a limit");
        let slack = 1e-6;
        assert!(
            (quantiles[0] - slack..=quantiles[1] + slack).contains(&limit),
            "{limit} outside {quantiles:?}"
        );
    }
}
