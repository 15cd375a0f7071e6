//! Free swelling, moduli and confinement against solved values of the printed
//! equations, made with scipy 1.17 (brentq).

use approx::assert_relative_eq;
use bedswell_gel::{Datasheet, DatasheetError, Gel, GelNumbers, Surroundings, calibrate_datasheet};

/// One pound-force per square inch (kPa).
const PSI: f64 = 6.894_757;

fn gel(crosslinks: f64, chi: f64, charges: f64, salt: f64) -> Gel {
    Gel::new(GelNumbers { crosslinks, chi, charges }, Surroundings { salt, ..Surroundings::default() })
}

/// Hong, Zhao, Zhou & Suo 2008 (from memory), solved with scipy; 3.215 at
/// n = 1e-3, χ = 0.2 and 3.390 at χ = 0.1 are also printed in Zhao, Hong & Suo
/// 2008 and Kang & Huang 2010 (from memory).
#[test]
fn neutral_gels_swell_as_tabled() {
    for (n, chi, stretch) in [
        (1e-5, 0.0, 8.73028126),
        (1e-5, 0.5, 3.71737948),
        (1e-4, 0.2, 5.00871900),
        (1e-4, 0.45, 3.61679933),
        (1e-3, 0.1, 3.38995395),
        (1e-3, 0.2, 3.21502151),
        (1e-3, 0.6, 1.57566154),
        (1e-2, 0.3, 2.00789189),
        (1e-1, 0.0, 1.58550814),
        (1e-1, 0.6, 1.29020082),
    ] {
        assert_relative_eq!(gel(n, chi, 0.0, 0.0).free_stretch(), stretch, epsilon = 1e-8);
    }
}

/// Ideal Donnan ions (Ricka & Tanaka 1984, from memory), solved with scipy, and
/// the drained Poisson ratio.
#[test]
fn charged_gels_swell_as_tabled() {
    for (n, chi, charges, salt, stretch, poisson) in [
        (1e-3, 0.45, 0.1, 0.0, 10.05234034, Some(0.000247)),
        (1e-3, 0.45, 0.1, 1e-3, 8.88568948, Some(0.097577)),
        (1e-3, 0.45, 0.1, 0.154, 3.98326692, Some(0.238015)),
        (1e-4, 0.45, 0.1, 1e-2, 10.67844026, Some(0.245743)),
        (1e-3, 0.3, 0.05, 0.1, 3.58619459, None),
        (5e-4, 0.45, 0.2, 1.0, 4.19054904, None),
    ] {
        let gel = gel(n, chi, charges, salt);
        assert_relative_eq!(gel.free_stretch(), stretch, epsilon = 2e-8);
        if let Some(poisson) = poisson {
            assert_relative_eq!(gel.moduli().poisson(), poisson, epsilon = 1e-6);
        }
    }
}

/// Linearised moduli, checked by finite differences when they were tabled.
#[test]
fn drained_moduli_are_as_tabled() {
    for (n, chi, shear, bulk, poisson) in [
        (1e-5, 0.0, 1.145438e-6, 1.895170e-6, 0.24847446),
        (1e-3, 0.1, 2.949893e-4, 4.718413e-4, 0.24131512),
        (1e-1, 0.2, 6.655005e-2, 9.572234e-2, 0.21778273),
    ] {
        let gel = gel(n, chi, 0.0, 0.0);
        let moduli = gel.moduli();
        assert_relative_eq!(moduli.shear / gel.energy_density(), shear, max_relative = 1e-6);
        assert_relative_eq!(moduli.bulk() / gel.energy_density(), bulk, max_relative = 1e-6);
        assert_relative_eq!(moduli.poisson(), poisson, epsilon = 1e-7);
    }
}

/// A piston on a gel with free access to water and a suction of the same size
/// leave the same volume, solved with scipy.
#[test]
fn suction_swells_as_the_same_pressure_would() {
    for (kilopascal, n, charges, salt, j) in [
        (0.3 * PSI, 1e-4, 0.0, 0.0, 37.400185),
        (0.7 * PSI, 1e-3, 0.1, 1e-3, 528.329151),
        (22.0, 1e-4, 0.05, 1e-2, 126.089242),
    ] {
        let numbers = GelNumbers { crosslinks: n, chi: 0.45, charges };
        let surroundings = Surroundings { salt, potential: -1e3 * kilopascal, temperature: 298.15 };
        assert_relative_eq!(Gel::new(numbers, surroundings).free_volume_ratio(), j, max_relative = 2e-6);
    }
}

#[test]
fn slope_and_curvature_are_the_derivatives_of_the_energy() {
    let gel = gel(1e-3, 0.45, 0.1, 1e-2);
    for j in [1.5, 4.0, 30.0, 277.0] {
        let step = 1e-4 * j;
        let slope = (gel.mixing(j + step) - gel.mixing(j - step)) / (2.0 * step);
        let curvature = (gel.mixing_slope(j + step) - gel.mixing_slope(j - step)) / (2.0 * step);
        assert_relative_eq!(gel.mixing_slope(j), slope, max_relative = 1e-6);
        assert_relative_eq!(gel.mixing_curvature(j), curvature, max_relative = 1e-6);
    }
}

#[test]
fn a_stage_swells_to_its_limit_and_no_further() {
    let gel = gel(1e-3, 0.45, 0.1, 1e-2);
    for stretch in [1.05, 2.0, 6.0] {
        assert_relative_eq!(gel.limited_to(stretch).free_stretch(), stretch, max_relative = 1e-12);
    }
}

fn sheet() -> Datasheet {
    Datasheet {
        dry_density: 1400.0,
        free_swell_water: 150.0,
        water_salt: 2e-3,
        free_swell_saline: None,
        saline_salt: 0.154,
        swollen_modulus: Some(6500.0),
        chi: 0.5,
        temperature: 298.15,
    }
}

#[test]
fn a_datasheet_gives_back_its_own_numbers() {
    let calibration = calibrate_datasheet(&sheet()).unwrap();
    let water = Surroundings { salt: 2e-3, ..Surroundings::default() };
    let gel = Gel::new(calibration.numbers, water);
    assert_relative_eq!(gel.free_volume_ratio(), 1.0 + 150.0 * 1400.0 / 997.0, max_relative = 1e-9);
    assert_relative_eq!(gel.moduli().shear, 6500.0, max_relative = 1e-9);

    // Two swells without a modulus find the same gel.
    let two_swells = Datasheet {
        free_swell_saline: Some(calibration.free_swell_saline),
        swollen_modulus: None,
        ..sheet()
    };
    let again = calibrate_datasheet(&two_swells).unwrap();
    assert_relative_eq!(again.numbers.crosslinks, calibration.numbers.crosslinks, max_relative = 1e-6);
    assert_relative_eq!(again.numbers.charges, calibration.numbers.charges, max_relative = 1e-6);
}

#[test]
fn contradictory_datasheets_are_refused() {
    let saline = calibrate_datasheet(&sheet()).unwrap().free_swell_saline;
    let off = Datasheet { free_swell_saline: Some(2.0 * saline), ..sheet() };
    assert!(matches!(calibrate_datasheet(&off), Err(DatasheetError::Contradictory { .. })));
    let above = Datasheet { free_swell_saline: Some(160.0), ..sheet() };
    assert!(matches!(calibrate_datasheet(&above), Err(DatasheetError::SalineAboveWater { .. })));
    let soft = Datasheet { swollen_modulus: Some(0.01), chi: 0.3, free_swell_water: 20.0, ..sheet() };
    assert!(matches!(calibrate_datasheet(&soft), Err(DatasheetError::SwellsTooLittle { .. })));
    let lonely = Datasheet { swollen_modulus: None, ..sheet() };
    assert_eq!(calibrate_datasheet(&lonely), Err(DatasheetError::Incomplete));
}
