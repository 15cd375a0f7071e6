use crate::thermodynamics::{Gel, GelNumbers, Surroundings, WATER_DENSITY};
use serde::{Deserialize, Serialize};
use thiserror::Error;

/// What a formulator knows about a gel grade.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Datasheet {
    /// Density of the dry polymer (kg/m³).
    pub dry_density: f64,
    /// Free swell in deionised or tap water: water per dry gel (g/g).
    pub free_swell_water: f64,
    /// Salt in that water (mol/L).
    pub water_salt: f64,
    /// Free swell in saline: water per dry gel (g/g), if it was measured.
    pub free_swell_saline: Option<f64>,
    /// Salt in the saline (mol/L); 0.9 % sodium chloride is 0.154.
    pub saline_salt: f64,
    /// Shear modulus swollen in that water (Pa), if it was measured.
    pub swollen_modulus: Option<f64>,
    /// Flory-Huggins interaction parameter.
    pub chi: f64,
    /// Temperature of the measurements (K).
    pub temperature: f64,
}

/// Largest relative disagreement between a datasheet's saline swell and the one
/// that follows from its other two numbers: makers' test methods scatter by about
/// this much (common practice, no source).
const SALINE_TOLERANCE: f64 = 0.3;

/// Why no gel fits a datasheet.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum DatasheetError {
    /// Only the swell in one water is given.
    #[error(
        "the datasheet must give, besides the free swell in water, the swollen modulus or the free swell in saline"
    )]
    Incomplete,
    /// A neutral gel of that modulus already swells more.
    #[error(
        "a gel with a swollen modulus of {modulus} Pa and chi {chi} swells to at least {neutral:.3} g/g without any charge, \
         more than the free swell of {swell} g/g: raise the modulus, the free swell or chi"
    )]
    SwellsTooLittle {
        /// The modulus given (Pa).
        modulus: f64,
        /// The interaction parameter given.
        chi: f64,
        /// The uptake without charges (g/g).
        neutral: f64,
        /// The uptake given (g/g).
        swell: f64,
    },
    /// Saline must shrink the gel.
    #[error("free swell in saline ({saline} g/g) must be below the free swell in water ({water} g/g)")]
    SalineAboveWater {
        /// The uptake in saline (g/g).
        saline: f64,
        /// The uptake in water (g/g).
        water: f64,
    },
    /// No charge and crosslink number gives both swells.
    #[error(
        "no gel swells to {water} g/g in water and {saline} g/g in saline at chi {chi}: with that swell in water, \
         saline leaves between {least:.3} and {most:.3} g/g"
    )]
    SalineOutOfReach {
        /// The uptake in water (g/g).
        water: f64,
        /// The uptake in saline (g/g).
        saline: f64,
        /// The interaction parameter given.
        chi: f64,
        /// Least uptake in saline that the model allows (g/g).
        least: f64,
        /// Largest uptake in saline that the model allows (g/g).
        most: f64,
    },
    /// The three numbers do not belong to one gel.
    #[error(
        "the three numbers contradict each other: with {water} g/g in water and a swollen modulus of {modulus} Pa \
         the free swell in saline is {expected:.3} g/g, not {saline} g/g; correct one of them or leave one out"
    )]
    Contradictory {
        /// The uptake in water (g/g).
        water: f64,
        /// The swollen modulus (Pa).
        modulus: f64,
        /// The uptake in saline that follows (g/g).
        expected: f64,
        /// The uptake in saline given (g/g).
        saline: f64,
    },
}

/// The gel that fits a datasheet, and how well.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Calibration {
    /// The gel's numbers.
    pub numbers: GelNumbers,
    /// Free swell in saline that these numbers give (g/g).
    pub free_swell_saline: f64,
    /// Swollen shear modulus in the datasheet's water that these numbers give (Pa).
    pub swollen_modulus: f64,
}

/// Solves for crosslinks and charges: the swollen modulus gives the crosslinks
/// (`G = n kT/(Ω λ)`), the swell in water then the charges; without a modulus the
/// two swells give both. All three: the saline swell must agree with the other two.
///
/// # Errors
/// When the numbers are too few or do not belong to one gel of this model.
pub fn calibrate_datasheet(sheet: &Datasheet) -> Result<Calibration, DatasheetError> {
    if let Some(saline) = sheet.free_swell_saline
        && saline >= sheet.free_swell_water
    {
        return Err(DatasheetError::SalineAboveWater { saline, water: sheet.free_swell_water });
    }
    match (sheet.swollen_modulus, sheet.free_swell_saline) {
        (None, None) => Err(DatasheetError::Incomplete),
        (Some(modulus), saline) => {
            let calibration = from_modulus(sheet, modulus)?;
            match saline {
                Some(saline)
                    if (calibration.free_swell_saline / saline - 1.0).abs() > SALINE_TOLERANCE
                        || (saline / calibration.free_swell_saline - 1.0).abs() > SALINE_TOLERANCE =>
                {
                    Err(DatasheetError::Contradictory {
                        water: sheet.free_swell_water,
                        modulus,
                        expected: calibration.free_swell_saline,
                        saline,
                    })
                }
                _ => Ok(calibration),
            }
        }
        (None, Some(saline)) => from_swells(sheet, saline),
    }
}

/// Water uptake (g/g) to volume ratio, volumes being additive.
pub fn volume_ratio_of_uptake(uptake: f64, dry_density: f64) -> f64 {
    1.0 + uptake * dry_density / WATER_DENSITY
}

/// Volume ratio to water uptake (g/g), volumes being additive.
pub fn uptake_of_volume_ratio(j: f64, dry_density: f64) -> f64 {
    (j - 1.0) * WATER_DENSITY / dry_density
}

fn from_modulus(sheet: &Datasheet, modulus: f64) -> Result<Calibration, DatasheetError> {
    let j = volume_ratio_of_uptake(sheet.free_swell_water, sheet.dry_density);
    let scale = Gel::new(GelNumbers { crosslinks: 0.0, chi: sheet.chi, charges: 0.0 }, in_water(sheet))
        .energy_density();
    let crosslinks = modulus * j.cbrt() / scale;
    let numbers = charges_for(sheet, crosslinks, j).ok_or_else(|| {
        let neutral = GelNumbers { crosslinks, chi: sheet.chi, charges: 0.0 };
        let neutral = Gel::new(neutral, in_water(sheet)).free_volume_ratio();
        DatasheetError::SwellsTooLittle {
            modulus,
            chi: sheet.chi,
            neutral: uptake_of_volume_ratio(neutral, sheet.dry_density),
            swell: sheet.free_swell_water,
        }
    })?;
    Ok(calibration(sheet, numbers))
}

/// Two gels can share the same pair of swells: as crosslinks and charges rise
/// together at a given swell in water, the swell in saline first falls, then rises.
/// The softer gel is taken; a modulus on the datasheet settles it.
fn from_swells(sheet: &Datasheet, saline: f64) -> Result<Calibration, DatasheetError> {
    let j = volume_ratio_of_uptake(sheet.free_swell_water, sheet.dry_density);
    let swell_in_saline = |ln_n: f64| {
        charges_for(sheet, ln_n.exp(), j)
            .map_or(f64::INFINITY, |numbers| calibration(sheet, numbers).free_swell_saline)
    };
    let (mut low, mut high) = ((1e-9_f64).ln(), (0.1_f64).ln());
    let start = bisect(low, high, |ln_n| swell_in_saline(ln_n).is_finite());
    let most = swell_in_saline(start);
    while high - low > 1e-9 {
        let (first, second) = (low + (high - low) / 3.0, high - (high - low) / 3.0);
        if swell_in_saline(first) < swell_in_saline(second) {
            high = second;
        } else {
            low = first;
        }
    }
    let least = swell_in_saline(high);
    let out_of_reach = DatasheetError::SalineOutOfReach {
        water: sheet.free_swell_water,
        saline,
        chi: sheet.chi,
        least,
        most,
    };
    if !(least..=most).contains(&saline) {
        return Err(out_of_reach);
    }
    let ln_n = bisect(start, high, |ln_n| swell_in_saline(ln_n) <= saline);
    charges_for(sheet, ln_n.exp(), j).map(|numbers| calibration(sheet, numbers)).ok_or(out_of_reach)
}

/// The charges with which a gel of these crosslinks swells to `j` in the
/// datasheet's water, in closed form: the ions must supply the missing pressure P,
/// `√((α/J)² + 4s²) = P + 2s`. `None` when it would swell more without any.
fn charges_for(sheet: &Datasheet, crosslinks: f64, j: f64) -> Option<GelNumbers> {
    let neutral = GelNumbers { crosslinks, chi: sheet.chi, charges: 0.0 };
    let gel = Gel::new(neutral, in_water(sheet));
    let missing = -gel.confining_pressure(j) / gel.energy_density();
    let twice_salt = 2.0 * crate::thermodynamics::MOLAR_VOLUME_LITRES * sheet.water_salt;
    (missing >= 0.0)
        .then(|| GelNumbers { charges: j * (missing * (missing + 2.0 * twice_salt)).sqrt(), ..neutral })
}

fn calibration(sheet: &Datasheet, numbers: GelNumbers) -> Calibration {
    let saline = Surroundings { salt: sheet.saline_salt, ..in_water(sheet) };
    Calibration {
        numbers,
        free_swell_saline: uptake_of_volume_ratio(
            Gel::new(numbers, saline).free_volume_ratio(),
            sheet.dry_density,
        ),
        swollen_modulus: Gel::new(numbers, in_water(sheet)).moduli().shear,
    }
}

fn in_water(sheet: &Datasheet) -> Surroundings {
    Surroundings { salt: sheet.water_salt, potential: 0.0, temperature: sheet.temperature }
}

/// The point between `low` and `high` at which `above` turns true.
fn bisect(mut low: f64, mut high: f64, above: impl Fn(f64) -> bool) -> f64 {
    for _ in 0..200 {
        let middle = 0.5 * (low + high);
        if above(middle) {
            high = middle;
        } else {
            low = middle;
        }
    }
    high
}
