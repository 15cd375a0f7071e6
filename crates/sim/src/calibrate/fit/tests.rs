use super::*;
use bedswell_geometry::stream;
use rand::RngExt;

const VOLUME: f64 = 1e-9;
const ASSUMED: Strength = Strength { scale: 1.0, modulus: 8.0, volume: VOLUME, length: None };

fn case(tension: f64, torn: u64, beads: u64) -> LoadCase {
    LoadCase { name: format!("{tension} Pa"), field: TensionField::uniform(VOLUME, tension), torn, beads }
}

fn both(cases: &[LoadCase]) -> (Measure, Measure, Agreement) {
    match fit_strength(cases, &ASSUMED) {
        Ok(StrengthFit::Both { scale, modulus, agreement }) => (scale, modulus, agreement),
        other => panic!("{other:?}"),
    }
}

#[track_caller]
fn assert_measure(measure: Measure, [value, low, high]: [f64; 3]) {
    for (found, reference) in [(Some(measure.value), value), (measure.low, low), (measure.high, high)] {
        approx::assert_relative_eq!(found.unwrap(), reference, max_relative = 2e-6);
    }
}

#[test]
fn estimates_and_profile_limits_agree_with_scipy() {
    let cases = [case(300.0, 1, 20), case(400.0, 4, 20), case(500.0, 11, 20), case(600.0, 18, 20)];
    let (scale, modulus, agreement) = both(&cases);
    assert_measure(scale, [518.916_456, 485.751_449, 560.076_517]);
    assert_measure(modulus, [5.644_443, 3.635_198, 8.038_284]);
    approx::assert_abs_diff_eq!(agreement.chi_squared, 0.023_783, epsilon = 1e-5);
    approx::assert_abs_diff_eq!(agreement.p_value.unwrap(), 0.988_179, epsilon = 1e-5);
    assert_eq!(agreement.degrees_of_freedom, 2);
}

/// Simulated benches whose law is known: five loads of 20 beads, fields of three parts of which
/// one is pressed.
#[test]
fn limits_hold_the_true_law_as_often_as_they_should() {
    const BENCHES: usize = 300;
    let truth = Strength { scale: 500.0, modulus: 6.0, volume: VOLUME, length: None };
    let mut random = stream(11, &[]);
    let (mut scales, mut moduli) = (Vec::new(), Vec::new());
    let (mut scale_held, mut modulus_held) = (0, 0);
    for _ in 0..BENCHES {
        let cases: Vec<LoadCase> = [350.0, 430.0, 510.0, 590.0, 670.0]
            .into_iter()
            .map(|tension| {
                let volumes = vec![0.3 * VOLUME, 0.5 * VOLUME, 0.4 * VOLUME];
                let field = TensionField { volumes, tensions: vec![tension, 0.8 * tension, -tension] };
                let probability = field.tear_probability(&truth);
                let torn = (0..20).filter(|_| random.random::<f64>() < probability).count() as u64;
                LoadCase { name: String::new(), field, torn, beads: 20 }
            })
            .collect();
        let (scale, modulus, _) = both(&cases);
        let holds = |measure: &Measure, value: f64| {
            measure.low.is_none_or(|low| low <= value) && measure.high.is_none_or(|high| value <= high)
        };
        scale_held += usize::from(holds(&scale, truth.scale));
        modulus_held += usize::from(holds(&modulus, truth.modulus));
        scales.push(scale.value);
        moduli.push(modulus.value);
    }
    // 95 % of 300 is 285, with a standard error of 3.8: within three of them.
    for (name, held) in [("scale", scale_held), ("modulus", modulus_held)] {
        assert!((274..=296).contains(&held), "{name}: {held} of {BENCHES}");
    }
    let median = |values: &mut Vec<f64>| {
        values.sort_by(f64::total_cmp);
        values[BENCHES / 2]
    };
    approx::assert_relative_eq!(median(&mut scales), truth.scale, max_relative = 0.01);
    // Likeliest moduli run a few percent high in small samples.
    approx::assert_relative_eq!(median(&mut moduli), truth.modulus, max_relative = 0.05);
}

#[test]
fn fields_that_differ_only_in_unit_give_one_law_in_that_unit() {
    let cases =
        |unit: f64| [(3.0, 2), (4.0, 9), (5.0, 16)].map(|(tension, torn)| case(unit * tension, torn, 20));
    let (in_hundreds, in_thousands) = (both(&cases(100.0)), both(&cases(1000.0)));
    approx::assert_relative_eq!(10.0 * in_hundreds.0.value, in_thousands.0.value, max_relative = 1e-6);
    approx::assert_relative_eq!(in_hundreds.1.value, in_thousands.1.value, max_relative = 1e-6);
}

#[test]
fn whole_beads_bound_the_scale_from_below() {
    // The exact one-sided bound: 0 of 20 leaves a probability of at most 1 - 0.05^(1/20) (0.139108).
    let StrengthFit::AtLeast { scale, assumed_modulus } =
        fit_strength(&[case(400.0, 0, 20)], &ASSUMED).unwrap()
    else {
        panic!("no bead tore");
    };
    let strength = Strength { scale, modulus: assumed_modulus, volume: VOLUME, length: None };
    let probability = TensionField::uniform(VOLUME, 400.0).tear_probability(&strength);
    approx::assert_abs_diff_eq!(probability, 0.139_108, epsilon = 0.51e-6);
}

#[test]
fn torn_beads_bound_the_scale_from_above() {
    let cases = [case(400.0, 20, 20), case(500.0, 10, 10)];
    let StrengthFit::AtMost { scale, assumed_modulus } = fit_strength(&cases, &ASSUMED).unwrap() else {
        panic!("every bead tore");
    };
    let strength = Strength { scale, modulus: assumed_modulus, volume: VOLUME, length: None };
    let probability = |case: &LoadCase| case.field.tear_probability(&strength).powi(case.beads as i32);
    approx::assert_abs_diff_eq!(cases.iter().map(probability).product::<f64>(), 0.05, epsilon = 1e-9);
}

#[test]
fn one_load_tells_the_scale_but_no_modulus() {
    let fit = fit_strength(&[case(400.0, 5, 20)], &ASSUMED).unwrap();
    let StrengthFit::Scale { scale, assumed_modulus, .. } = &fit else { panic!("{fit:?}") };
    assert_eq!(*assumed_modulus, ASSUMED.modulus);
    let probability =
        |scale: f64| TensionField::uniform(VOLUME, 400.0).tear_probability(&Strength { scale, ..ASSUMED });
    approx::assert_abs_diff_eq!(probability(scale.value), 0.25, epsilon = 1e-9);
    // Likelihood-ratio limits of 5 out of 20, solved with scipy.
    approx::assert_abs_diff_eq!(probability(scale.high.unwrap()), ONE_LOAD[0], epsilon = 1e-6);
    approx::assert_abs_diff_eq!(probability(scale.low.unwrap()), ONE_LOAD[1], epsilon = 1e-6);
}

const ONE_LOAD: [f64; 2] = [0.097_814_699_7, 0.462_470_220];

#[test]
fn loads_that_part_torn_from_whole_bound_the_modulus_from_below_only() {
    let (_, modulus, _) = both(&[case(300.0, 0, 20), case(600.0, 20, 20)]);
    assert!(modulus.low.is_some_and(|low| low > 1.0) && modulus.high.is_none(), "{modulus:?}");
}

#[test]
fn loads_without_tension_play_no_part() {
    let cases = [case(300.0, 2, 20), case(400.0, 9, 20), case(500.0, 16, 20)];
    let with = [&cases[..], &[case(-50.0, 0, 20), case(800.0, 0, 0)]].concat();
    assert_eq!(fit_strength(&with, &ASSUMED), fit_strength(&cases, &ASSUMED));
}

#[test]
fn what_cannot_be_fitted_is_refused() {
    let error = |cases: &[LoadCase]| fit_strength(cases, &ASSUMED).unwrap_err();
    assert_eq!(error(&[]), FitError::NothingTested);
    assert_eq!(error(&[case(0.0, 0, 5)]), FitError::NothingTested);
    assert!(matches!(error(&[case(-1.0, 1, 5)]), FitError::TornWithoutTension { .. }));
    assert!(matches!(error(&[case(1.0, 6, 5)]), FitError::Count { torn: 6, beads: 5, .. }));
}
