use super::Gel;
use super::error::SceneError;
use super::raw::Node;
use super::section::Section;
use super::unit::Kind;
use bedswell_gel::{Datasheet, calibrate_datasheet};

/// Salt in 0.9 % sodium chloride (mol/L): 9 g/L over 58.44 g/mol.
const SALINE: f64 = 0.154;
/// Uptakes a datasheet may claim (kg/kg).
const UPTAKES: std::ops::RangeInclusive<f64> = 0.1..=5000.0;

/// Reads `[gel]`: the raw thermodynamic numbers, or a datasheet from which they follow.
pub(crate) fn read_gel(document: &Node) -> Result<Gel, SceneError> {
    let section =
        Section::new(document, "gel", &["crosslinks", "chi", "charges", "dry_density", "datasheet"])?;
    let dry_density = section.need("dry_density", "dry_density = \"1400 kg/m3\"")?.positive(Kind::Density)?;
    let chi = section.get("chi").map(|entry| entry.number(-1.0..=2.0)).transpose()?;
    let sheet = Section::new(
        document,
        "gel.datasheet",
        &["free_swell", "water_salt", "free_swell_saline", "saline_salt", "swollen_modulus", "temperature"],
    )?;
    if !sheet.is_given() {
        return Ok(Gel {
            crosslinks: section
                .need("crosslinks", "crosslinks = 1e-4, or give the maker's numbers as [gel.datasheet],")?
                .number(1e-9..=0.5)?,
            chi: chi.ok_or_else(|| section.missing("chi", "write chi = 0.5 under [gel]".into()))?,
            charges: section.get("charges").map_or(Ok(0.0), |entry| entry.number(0.0..=1.0))?,
            dry_density,
        });
    }
    if let Some(raw) = section.get("crosslinks").or_else(|| section.get("charges")) {
        return Err(raw.refuse("the gel is given twice; keep either the raw numbers or [gel.datasheet]"));
    }
    let free_swell = sheet.need("free_swell", "free_swell = \"180 g/g\"")?;
    let concentration = |key: &str, default: f64| {
        sheet.get(key).map_or(Ok(default), |entry| entry.quantity(Kind::Concentration, 0.0..=6.0))
    };
    let datasheet = Datasheet {
        dry_density,
        free_swell_water: free_swell.quantity(Kind::MassRatio, UPTAKES)?,
        water_salt: concentration("water_salt", 0.0)?,
        free_swell_saline: sheet
            .get("free_swell_saline")
            .map(|entry| entry.quantity(Kind::MassRatio, UPTAKES))
            .transpose()?,
        saline_salt: concentration("saline_salt", SALINE)?,
        swollen_modulus: sheet
            .get("swollen_modulus")
            .map(|entry| entry.positive(Kind::Stress))
            .transpose()?,
        chi: chi.unwrap_or(0.5),
        temperature: sheet
            .get("temperature")
            .map_or(Ok(298.15), |entry| entry.quantity(Kind::Temperature, 273.15..=373.15))?,
    };
    let numbers =
        calibrate_datasheet(&datasheet).map_err(|error| free_swell.refuse(error.to_string()))?.numbers;
    Ok(Gel { crosslinks: numbers.crosslinks, chi: numbers.chi, charges: numbers.charges, dry_density })
}
