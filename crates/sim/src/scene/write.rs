//! A checked scene as text that reads back to the same scene, bit for bit.

use super::unit::Kind;
use super::{BeadAmount, Gel, Scene, SoilGrading, Strength, Time, Toughness};
use bedswell_gel::Change;
use std::fmt::Write;

/// File that [`Scene::to_toml`] refers to when the soil lists its spheres.
pub const SPHERES_FILE: &str = "spheres.csv";

impl Scene {
    /// The scene in SI units, as a scene file. Listed spheres go to a table of
    /// their own, [`Scene::spheres_csv`], which must lie beside it as [`SPHERES_FILE`].
    pub fn to_toml(&self) -> String {
        let mut text = Writer { text: String::new() };
        text.table("scene");
        text.line("version", format!("{:?}", env!("CARGO_PKG_VERSION")));
        text.line("name", toml::Value::from(self.name.as_str()));
        text.line("seed", self.seed);

        text.table("bed");
        if !matches!(self.soil.grading, SoilGrading::Spheres { .. }) {
            text.line("grains", self.bed.grains);
        }
        if let Some(porosity) = self.bed.porosity {
            text.line("porosity", number(porosity));
        }
        if let Some(diameter) = self.bed.pot {
            text.line("pot", with_unit(diameter, Kind::Length));
            text.line("top", if self.bed.open { "\"open\"" } else { "\"lid\"" });
            text.line("flooded", self.bed.flooded);
        }
        if !self.bed.open {
            text.line("lid_stress", with_unit(self.bed.lid_stress, Kind::Stress));
            text.line("lid_held", self.bed.lid_held);
        }
        text.line("fixed_grains", self.bed.fixed_grains);

        text.table("soil");
        if self.soil.grading != SoilGrading::Absent {
            text.line("density", with_unit(self.soil.density, Kind::Density));
        }
        text.line("friction", number(self.soil.friction));
        text.line("rolling_friction", number(self.soil.rolling_friction));
        self.write_grading(&mut text);

        text.table("beads");
        match &self.beads.amount {
            BeadAmount::Count(count) => text.line("count", count),
            BeadAmount::Dose(dose) => text.line("dose", with_unit(*dose, Kind::MassRatio)),
            BeadAmount::At(centres) => {
                text.line("centres", list(centres.iter().map(lengths)));
            }
        }
        text.line("dry_diameter", with_unit(self.beads.dry_diameter, Kind::Length));
        text.line("across", self.beads.across);
        text.line("voxel_budget", self.beads.voxel_budget);
        text.line("held", self.beads.held);

        text.gel(&self.gel);

        text.table("water");
        text.line("salt", with_unit(self.water.salt, Kind::Concentration));
        text.line("potential", with_unit(self.water.potential, Kind::Stress));
        text.line("temperature", with_unit(self.water.temperature, Kind::Temperature));

        text.strength(&self.strength);
        if let Some(toughness) = &self.toughness {
            text.toughness(toughness);
        }

        text.table("march");
        text.line("increments", self.march.increments);
        text.line("overlap", number(self.march.overlap));
        text.line("damping", number(self.march.damping));

        if let Some(time) = &self.time {
            text.time(time);
        }
        text.text
    }

    fn write_grading(&self, text: &mut Writer) {
        let cutoff = match &self.soil.grading {
            SoilGrading::Sieves { openings, percent_passing, fines_cutoff } => {
                let rows = openings
                    .iter()
                    .zip(percent_passing)
                    .map(|(d, p)| format!("[{}, {}]", with_unit(*d, Kind::Length), number(*p)));
                text.line("sieves", list(rows));
                *fines_cutoff
            }
            SoilGrading::Lognormal { median, spread, fines_cutoff } => {
                text.line("median", with_unit(*median, Kind::Length));
                text.line("spread", number(*spread));
                *fines_cutoff
            }
            SoilGrading::Spheres { size, periodic, .. } => {
                text.line("spheres", format!("{SPHERES_FILE:?}"));
                text.line("cell", lengths(size));
                text.line("periodic", periodic);
                None
            }
            SoilGrading::Absent => None,
        };
        if let Some(cutoff) = cutoff {
            text.line("fines_cutoff", with_unit(cutoff, Kind::Length));
        }
    }

    /// The listed spheres as a table, if the soil lists them.
    pub fn spheres_csv(&self) -> Option<String> {
        let SoilGrading::Spheres { spheres, .. } = &self.soil.grading else { return None };
        let mut text = String::from("x [m],y [m],z [m],d [m]\n");
        for sphere in spheres {
            let c = sphere.centre;
            let _ = writeln!(text, "{:e},{:e},{:e},{:e}", c.x, c.y, c.z, 2.0 * sphere.radius);
        }
        Some(text)
    }
}

/// The tables `[gel]` and `[strength]` of a scene.
pub(crate) fn gel_and_strength(gel: &Gel, strength: &Strength) -> String {
    let mut text = Writer { text: String::new() };
    text.gel(gel);
    text.strength(strength);
    text.text
}

struct Writer {
    text: String,
}

impl Writer {
    fn gel(&mut self, gel: &Gel) {
        self.table("gel");
        self.line("crosslinks", number(gel.crosslinks));
        self.line("chi", number(gel.chi));
        self.line("charges", number(gel.charges));
        self.line("dry_density", with_unit(gel.dry_density, Kind::Density));
    }

    fn time(&mut self, time: &Time) {
        self.table("time");
        self.line("until", with_unit(time.until, Kind::Time));
        self.line("diffusion", with_unit(time.diffusion, Kind::Diffusion));
        self.line("exponent", number(time.exponent));
        self.line("contact_seals", time.contact_seals);
        self.line("step_error", number(time.step_error));
        let changes: Vec<Change> = time.history.clone().into();
        for Change { time, outside } in changes {
            self.table("[time.outside]");
            self.line("at", with_unit(time, Kind::Time));
            self.line("potential", with_unit(outside.surroundings.potential, Kind::Stress));
            self.line("salt", with_unit(outside.surroundings.salt, Kind::Concentration));
            if let Some(supply) = outside.supply {
                self.line("supply", with_unit(supply, Kind::Flow));
            }
        }
    }

    fn strength(&mut self, strength: &Strength) {
        self.table("strength");
        self.line("scale", with_unit(strength.scale, Kind::Stress));
        self.line("modulus", number(strength.modulus));
        self.line("volume", with_unit(strength.volume, Kind::Volume));
        if let Some(length) = strength.length {
            self.line("length", with_unit(length, Kind::Length));
        }
    }

    fn toughness(&mut self, toughness: &Toughness) {
        self.table("toughness");
        self.line("energy", with_unit(toughness.energy, Kind::FractureEnergy));
        if let Some(length) = toughness.length {
            self.line("length", with_unit(length, Kind::Length));
        }
        self.line("scatter", number(toughness.scatter));
        self.line("torn_area", number(toughness.torn_area));
        self.line("torn_share", number(toughness.torn_share));
    }

    fn table(&mut self, name: &str) {
        let gap = if self.text.is_empty() { "" } else { "\n" };
        let _ = writeln!(self.text, "{gap}[{name}]");
    }

    fn line(&mut self, key: &str, value: impl std::fmt::Display) {
        let _ = writeln!(self.text, "{key} = {value}");
    }
}

/// Rust prints the shortest digits that read back to the same bits.
fn number(value: f64) -> String {
    format!("{value:?}")
}

fn with_unit(value: f64, kind: Kind) -> String {
    format!("\"{value:?} {}\"", kind.base())
}

fn lengths(values: &[f64; 3]) -> String {
    list(values.iter().map(|value| with_unit(*value, Kind::Length)))
}

fn list(entries: impl Iterator<Item = String>) -> String {
    format!("[{}]", entries.collect::<Vec<_>>().join(", "))
}
