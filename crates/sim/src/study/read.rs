use super::choices::make_room;
use super::design::{Setting, combinations};
use super::read_factor::read_factors;
use super::{Factor, Level, Study, combination_in_words};
use crate::SceneError;
use crate::scene::{Entry, Node, Value, read_document, refuse_unknown, scene_from};
use std::path::Path;

/// Packs of a study that does not say how many.
const USUAL_PACKS: u64 = 8;
/// Packs a study may have at each level.
const MOST_PACKS: u64 = 1_000_000;

/// Reads a study file, or a scene file as a study of that scene alone.
///
/// A study file names its scene (`scene = "grit.toml"`, relative to itself) and
/// holds `packs`, `half_width`, and for each key that varies a `[[factor]]` with `key`
/// and either `values` or a range, `from` and `to`, of which `samples` are drawn. Each
/// combination of values replaces those keys of the scene and is checked as if it
/// stood there.
///
/// # Errors
/// When either file cannot be read or holds a key or value that cannot be used.
pub fn read_study(path: &Path) -> Result<Study, SceneError> {
    let document = read_document(path)?;
    let scene_entry = match document.find("scene") {
        Some(node) if !matches!(node.value, Value::Table(_)) => Entry { key: "scene".into(), node },
        None if document.find("packs").or(document.find("factor")).is_some() => {
            return Err(SceneError::Missing {
                place: document.place.clone(),
                key: "scene".into(),
                mend: "a study names its scene, such as scene = \"tree-pit.toml\"".into(),
            });
        }
        _ => {
            let scene = scene_from(&document, path)?;
            let name = scene.name.clone();
            let levels = vec![Level { values: Vec::new(), positions: Vec::new(), scene }];
            return Ok(Study { name, packs: USUAL_PACKS, half_width: None, factors: Vec::new(), levels });
        }
    };
    if let Value::Table(table) = &document.value {
        refuse_unknown("", table, &["name", "scene", "packs", "half_width", "samples", "factor"])?;
    }
    let top = |key: &str| document.find(key).map(|node| Entry { key: key.to_owned(), node });
    let packs = top("packs").map_or(Ok(USUAL_PACKS), |entry| entry.whole(1..=MOST_PACKS))?;
    let half_width = top("half_width").map(|entry| entry.number(0.001..=0.5)).transpose()?;

    let scene_path = path.parent().unwrap_or(Path::new("")).join(scene_entry.text()?);
    let scene_document = read_document(&scene_path).map_err(|error| match error {
        SceneError::Unreadable { path, cause } => {
            scene_entry.refuse(format!("cannot read {}: {cause}", path.display()))
        }
        other => other,
    })?;
    let factors = read_factors(&document)?;
    let combinations = combinations(&document, &factors, top("samples"), seed_of(&scene_document))?;
    let factors: Vec<Factor> = factors.into_iter().map(|given| given.factor).collect();
    let level = |settings| read_level(&scene_document, &scene_path, &factors, settings);
    let levels = combinations.into_iter().map(level).collect::<Result<_, _>>()?;
    let name = match top("name") {
        Some(name) => name.text()?.to_owned(),
        None => path.file_stem().map_or(String::new(), |stem| stem.to_string_lossy().into_owned()),
    };
    Ok(Study { name, packs, half_width, factors, levels })
}

/// The scene with the settings of one combination.
fn read_level(
    scene_document: &Node,
    scene_path: &Path,
    factors: &[Factor],
    settings: Vec<Setting>,
) -> Result<Level, SceneError> {
    let mut varied = scene_document.clone();
    for (factor, setting) in factors.iter().zip(&settings) {
        make_room(&mut varied, &factor.key);
        varied.set(&factor.key, setting.node.clone());
    }
    let (values, positions): (Vec<_>, Vec<_>) =
        settings.into_iter().map(|setting| (setting.value, setting.position)).unzip();
    match scene_from(&varied, scene_path) {
        Ok(scene) => Ok(Level { values, positions, scene }),
        Err(error) if factors.is_empty() => Err(error),
        Err(error) => Err(in_combination(error, &combination_in_words(factors, &values))),
    }
}

/// The error with the combination in which it came up.
fn in_combination(error: SceneError, combination: &str) -> SceneError {
    let more = |text: String| format!("{text} (in the study, at {combination})");
    match error {
        SceneError::Value { place, key, value, problem } => {
            SceneError::Value { place, key, value, problem: more(problem) }
        }
        SceneError::Missing { place, key, mend } => SceneError::Missing { place, key, mend: more(mend) },
        other => other,
    }
}

/// The seed as the scene gives it; a scene without a usable one is refused later.
fn seed_of(scene_document: &Node) -> u64 {
    match scene_document.find("scene.seed").map(|node| &node.value) {
        Some(Value::Integer(seed)) => u64::try_from(*seed).unwrap_or(0),
        _ => 0,
    }
}
