use bedswell_sim::{
    Factor, Level, RunSummary, Scene, SceneError, Study, StudySummary, combination_in_words, read_scene,
};
use parquet::file::reader::{FileReader, SerializedFileReader};
use parquet::record::{Field, Row};
use std::fs::File;
use std::path::{Path, PathBuf};
use thiserror::Error;

/// Why a study's folder cannot be shown.
#[derive(Debug, Error)]
pub enum StudyReadError {
    /// A file is missing or cannot be read.
    #[error("cannot read {path}: {cause}; the study may not have got that far", path = path.display())]
    Read {
        /// The file.
        path: PathBuf,
        /// What the system says.
        cause: std::io::Error,
    },
    /// A file is not what a study writes.
    #[error("{path} is incomplete or was altered ({reason}); run the study again into this folder", path = path.display())]
    Damaged {
        /// The file.
        path: PathBuf,
        /// What is wrong with it.
        reason: String,
    },
    /// A scene of the study cannot be used.
    #[error(transparent)]
    Scene(#[from] SceneError),
}

/// The packs of a study and what they came to.
pub(crate) struct Packs {
    /// Name of the study.
    pub(crate) name: String,
    /// Its summary, once there is one.
    pub(crate) summary: Option<StudySummary>,
    /// What varies; empty for a single scene.
    pub(crate) factors: Vec<Factor>,
    /// Name and scene of each level.
    pub(crate) levels: Vec<(String, Scene)>,
    /// One row per pack.
    pub(crate) rows: Vec<PackRow>,
    /// Folder under which packs are computed again to be looked at.
    pub(crate) folder: PathBuf,
}

/// What one pack came to.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct PackRow {
    /// Number of its level.
    pub(crate) level: usize,
    /// Number of the pack.
    pub(crate) pack: u64,
    /// Means over its beads, or why it has none.
    pub(crate) outcome: Result<PackFigures, String>,
}

/// Means over the beads of a pack.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub(crate) struct PackFigures {
    /// Beads that tore.
    pub(crate) torn: f64,
    /// Beads.
    pub(crate) beads: f64,
    /// Tear probability.
    pub(crate) tear_probability: f64,
    /// Water uptake (g/g).
    pub(crate) uptake: f64,
    /// 99 % tension (Pa).
    pub(crate) tension: f64,
    /// Rise of the lid (m).
    pub(crate) heave: f64,
}

impl Packs {
    /// The packs of a study of which nothing is computed yet.
    pub(crate) fn planned(study: Study, folder: PathBuf) -> Self {
        let row = |level, pack| PackRow { level, pack, outcome: Err("not computed".to_owned()) };
        let levels = study.levels.len();
        let named = |level: Level| (level_name(&study.factors, &level.values), level.scene);
        Self {
            name: study.name,
            summary: None,
            rows: (0..levels).flat_map(|level| (0..study.packs).map(move |pack| row(level, pack))).collect(),
            levels: study.levels.into_iter().map(named).collect(),
            factors: study.factors,
            folder,
        }
    }

    /// The folder in which a pack is computed again.
    pub(crate) fn folder_of(&self, row: &PackRow) -> PathBuf {
        self.folder.join("packs").join(if self.levels.len() > 1 {
            format!("level-{}-pack-{}", row.level, row.pack)
        } else {
            format!("pack-{}", row.pack)
        })
    }
}

impl From<&RunSummary> for PackFigures {
    fn from(run: &RunSummary) -> Self {
        let mut figures = Self { heave: run.heave_m, ..Self::default() };
        for bead in &run.beads {
            figures.add(&Self {
                torn: f64::from(u8::from(bead.torn)),
                beads: 1.0,
                tear_probability: bead.tear_probability,
                uptake: bead.uptake_g_per_g,
                tension: bead.tension_q99_pa,
                heave: 0.0,
            });
        }
        figures.divide();
        figures
    }
}

/// Reads the folder of a study.
///
/// # Errors
/// When a file is missing, damaged or of no use.
pub(crate) fn read_packs(folder: &Path) -> Result<Packs, StudyReadError> {
    let path = folder.join("summary.json");
    let text =
        std::fs::read_to_string(&path).map_err(|cause| StudyReadError::Read { path: path.clone(), cause })?;
    let summary: StudySummary = serde_json::from_str(&text)
        .map_err(|error| StudyReadError::Damaged { path, reason: error.to_string() })?;
    let mut levels = Vec::new();
    for (index, level) in summary.levels.iter().enumerate() {
        let own =
            if summary.levels.len() > 1 { folder.join(format!("level-{index}")) } else { folder.to_owned() };
        let name = level_name(&summary.factors, &level.values);
        levels.push((name, read_scene(&own.join("scene.toml"))?));
    }
    let rows = read_rows(&folder.join("outcomes.parquet"))?;
    Ok(Packs {
        name: summary.name.clone(),
        factors: summary.factors.clone(),
        levels,
        rows,
        folder: folder.to_owned(),
        summary: Some(summary),
    })
}

/// What the table calls a level: its value, or its combination of several.
fn level_name(factors: &[Factor], values: &[String]) -> String {
    match values {
        [value] => value.clone(),
        _ => combination_in_words(factors, values),
    }
}

fn read_rows(path: &Path) -> Result<Vec<PackRow>, StudyReadError> {
    let damaged = |reason: String| StudyReadError::Damaged { path: path.to_owned(), reason };
    let file = File::open(path).map_err(|cause| StudyReadError::Read { path: path.to_owned(), cause })?;
    let table = SerializedFileReader::new(file).map_err(|error| damaged(error.to_string()))?;
    let rows = table.get_row_iter(None).map_err(|error| damaged(error.to_string()))?;
    let mut packs: Vec<PackRow> = Vec::new();
    for row in rows {
        let row = row.map_err(|error| damaged(error.to_string()))?;
        let need = |name: &str| number(&row, name).ok_or_else(|| damaged(format!("no column {name}")));
        let (level, pack) = (need("level")? as usize, need("pack")? as u64);
        let outcome = match number(&row, "bead") {
            None => Err(text(&row, "failure").unwrap_or_default()),
            Some(_) => Ok(PackFigures {
                torn: need("torn")?,
                beads: 1.0,
                tear_probability: need("tear_probability")?,
                uptake: need("uptake_g_per_g")?,
                tension: need("tension_q99_pa")?,
                heave: need("heave_m")?,
            }),
        };
        match (packs.last_mut(), &outcome) {
            (Some(PackRow { level: same, pack: as_well, outcome: Ok(sum) }), Ok(bead))
                if (*same, *as_well) == (level, pack) =>
            {
                sum.add(bead);
            }
            _ => packs.push(PackRow { level, pack, outcome }),
        }
    }
    packs.iter_mut().filter_map(|pack| pack.outcome.as_mut().ok()).for_each(PackFigures::divide);
    Ok(packs)
}

impl PackFigures {
    fn add(&mut self, bead: &Self) {
        self.torn += bead.torn;
        self.beads += bead.beads;
        self.tear_probability += bead.tear_probability;
        self.uptake += bead.uptake;
        self.tension += bead.tension;
    }

    /// Turns sums over beads into means; the lid is one.
    fn divide(&mut self) {
        self.tear_probability /= self.beads;
        self.uptake /= self.beads;
        self.tension /= self.beads;
    }
}

fn number(row: &Row, name: &str) -> Option<f64> {
    row.get_column_iter().find(|(column, _)| *column == name).and_then(|(_, field)| match field {
        Field::Double(value) => Some(*value),
        Field::Long(value) => Some(*value as f64),
        Field::Bool(value) => Some(f64::from(u8::from(*value))),
        _ => None,
    })
}

fn text(row: &Row, name: &str) -> Option<String> {
    row.get_column_iter().find(|(column, _)| *column == name).and_then(|(_, field)| match field {
        Field::Str(text) => Some(text.clone()),
        _ => None,
    })
}
