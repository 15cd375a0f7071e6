//! Gradings against worked sieve analyses and exact laws.

use approx::{assert_abs_diff_eq, assert_relative_eq};
use bedswell_grains::{Grading, GradingError, MassCurve};

/// Percent passing (finest first) from retained masses (coarsest first, pan last).
fn percent_passing(retained: &[f64]) -> Vec<f64> {
    let total: f64 = retained.iter().sum();
    let mut finer = total;
    let mut percents: Vec<f64> = retained[..retained.len() - 1]
        .iter()
        .map(|mass| {
            finer -= mass;
            100.0 * finer / total
        })
        .collect();
    percents.reverse();
    percents
}

const SIEVES: [f64; 7] = [0.075e-3, 0.150e-3, 0.250e-3, 0.425e-3, 0.850e-3, 2.00e-3, 4.75e-3];

#[test]
fn worked_sieve_analyses_come_out_to_the_printed_digits() {
    // Masses from public problem pages; D values computed with the logarithmic rule.
    let first = percent_passing(&[28.0, 42.0, 48.0, 128.0, 221.0, 86.0, 40.0, 24.0]);
    for (percent, printed) in first.iter().zip([3.8898, 10.3728, 24.3112, 60.1297, 80.8752, 88.6548, 95.4619])
    {
        assert_abs_diff_eq!(*percent, printed, epsilon = 6.0e-5);
    }
    let second = percent_passing(&[0.0, 18.5, 53.2, 90.5, 81.8, 92.2, 58.5, 26.5]);
    let printed = [
        (first, [0.144139, 0.271982, 0.365777, 0.424184], 2.942881, 1.209887),
        (second, [0.090248, 0.188630, 0.310481, 0.408034], 4.521244, 0.966240),
    ];
    for (mut percents, sizes, uniformity, curvature) in printed {
        let mut openings = SIEVES.to_vec();
        if percents[6] < 100.0 {
            openings.push(9.5e-3);
            percents.push(100.0);
        }
        let grading = Grading::from_sieves(&openings, &percents, Some(0.075e-3)).unwrap();
        let numbers = grading.soil.numbers();
        let found = [numbers.d10, numbers.d30, numbers.d50, numbers.d60].map(|size| size.unwrap() * 1.0e3);
        for (found, printed) in found.iter().zip(sizes) {
            assert_abs_diff_eq!(*found, printed, epsilon = 6.0e-7);
        }
        assert_abs_diff_eq!(numbers.uniformity.unwrap(), uniformity, epsilon = 6.0e-7);
        assert_abs_diff_eq!(numbers.curvature.unwrap(), curvature, epsilon = 6.0e-7);
        assert_relative_eq!(grading.left_out, percents[0] / 100.0, max_relative = 1.0e-12);
    }
}

#[test]
fn uniformity_and_curvature_follow_a_textbook_problem() {
    // Das & Sobhan, Principles of Geotechnical Engineering, 9th ed., problem 2.2:
    // D10 = 0.30, D30 = 0.41, D60 = 0.77 mm give Cu = 2.57, Cc = 0.73.
    let openings = [0.2e-3, 0.30e-3, 0.41e-3, 0.77e-3, 2.0e-3];
    let grading = Grading::from_sieves(&openings, &[0.0, 10.0, 30.0, 60.0, 100.0], None).unwrap();
    let numbers = grading.soil.numbers();
    assert_abs_diff_eq!(numbers.uniformity.unwrap(), 2.57, epsilon = 0.005);
    assert_abs_diff_eq!(numbers.curvature.unwrap(), 0.73, epsilon = 0.005);
}

#[test]
fn six_hundred_grains_stand_for_the_curve() {
    let gradings = [
        Grading::from_sieves(&[0.5e-3, 1.0e-3, 2.0e-3, 5.0e-3], &[0.0, 25.0, 70.0, 100.0], None).unwrap(),
        Grading::lognormal(1.0e-3, 1.5, None).unwrap(),
        Grading::lognormal(1.0e-3, 2.2, Some(0.3e-3)).unwrap(),
        Grading::lognormal(1.0e-3, 1.0, None).unwrap(),
    ];
    for grading in gradings {
        let sample = grading.packed.sample(600);
        assert_eq!(sample.len(), 600);
        let curve = MassCurve::of_grains(&sample).unwrap();
        for fraction in [0.1, 0.3, 0.5, 0.6] {
            let (found, wanted) =
                (curve.size_at(fraction).unwrap(), grading.packed.size_at(fraction).unwrap());
            assert_relative_eq!(found, wanted, max_relative = 0.01);
        }
        // No set of whole grains follows a curve closer than by parts of its largest.
        if grading.packed.finest() < grading.packed.coarsest() {
            let share = sample[599].powi(3) / sample.iter().map(|d| d.powi(3)).sum::<f64>();
            let misses = grading.packed.points().iter().map(|&(size, p)| (curve.passing(size) - p).abs());
            let worst = misses.fold(0.0, f64::max);
            assert!(worst < share, "the curve is missed by {worst}, the largest grain has {share}");
        }
    }
}

#[test]
fn a_lognormal_soil_has_the_exact_sizes_by_mass_and_by_number() {
    let sigma: f64 = 0.3;
    let grading = Grading::lognormal(1.0e-3, sigma.exp(), None).unwrap();
    // Standard normal quantiles.
    for (fraction, z) in [(0.1, -1.2815516), (0.3, -0.5244005), (0.5, 0.0), (0.6, 0.2533471)] {
        let size = grading.soil.size_at(fraction).unwrap();
        assert_relative_eq!(size, 1.0e-3 * (sigma * z).exp(), max_relative = 1.0e-4);
    }
    let mut sample = grading.packed.sample(20_000);
    sample.sort_unstable_by(f64::total_cmp);
    let median = sample[10_000];
    // d32 over the number median is exp(2.5 σ²): 1.252323 at σ = 0.3 (computed).
    let d32 = sample.iter().map(|d| d.powi(3)).sum::<f64>() / sample.iter().map(|d| d.powi(2)).sum::<f64>();
    assert_relative_eq!(d32 / median, 1.252323, max_relative = 1.0e-3);
    assert_relative_eq!(median, 1.0e-3 * (-3.0 * sigma * sigma).exp(), max_relative = 1.0e-3);
}

#[test]
fn bad_tables_are_refused_with_the_value() {
    let table = |openings: &[f64], percents: &[f64], cutoff| {
        Grading::from_sieves(openings, percents, cutoff).unwrap_err()
    };
    assert_eq!(
        table(&[1.0e-3, 2.0e-3], &[0.0, 90.0], None),
        GradingError::Unfinished { percent: 90.0, opening: 2.0e-3 }
    );
    assert_eq!(
        table(&[1.0e-3, 2.0e-3, 3.0e-3], &[20.0, 10.0, 100.0], None),
        GradingError::Percent { percent: 10.0, opening: 2.0e-3, before: 20.0 }
    );
    assert_eq!(
        table(&[2.0e-3, 1.0e-3], &[0.0, 100.0], None),
        GradingError::Opening { opening: 1.0e-3, before: 2.0e-3 }
    );
    assert_eq!(
        table(&[1.0e-3, 2.0e-3], &[5.0, 100.0], None),
        GradingError::UnknownFines { percent: 5.0, opening: 1.0e-3 }
    );
    assert!(matches!(table(&[1.0e-3, 2.0e-3], &[f64::NAN, 100.0], None), GradingError::Percent { .. }));
    assert!(matches!(table(&[1.0e-3, 2.0e-3], &[0.0, 100.0], Some(2.0e-3)), GradingError::Cutoff { .. }));
    assert_eq!(Grading::lognormal(1.0e-3, 0.9, None).unwrap_err(), GradingError::Spread(0.9));
    assert_eq!(Grading::lognormal(-1.0, 1.5, None).unwrap_err(), GradingError::Median(-1.0));
}
