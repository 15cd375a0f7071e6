use super::{Level, Study};
use crate::SceneError;
use crate::scene::{Entry, Node, Section, Value, read_document, refuse_unknown, scene_from};
use std::path::Path;

/// Packs of a study that does not say how many.
const USUAL_PACKS: u64 = 8;
/// Packs a study may have at each level.
const MOST_PACKS: u64 = 1_000_000;

/// Reads a study file, or a scene file as a study of that scene alone.
///
/// A study file names its scene (`scene = "grit.toml"`, relative to itself) and
/// holds `packs`, `half_width` and one `[factor]` with `key` and `values`; each
/// value replaces that key of the scene and is checked as if it stood there.
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
            let levels = vec![Level { value: String::new(), scene }];
            let name = levels[0].scene.name.clone();
            return Ok(Study { name, packs: USUAL_PACKS, half_width: None, factor: None, levels });
        }
    };
    if let Value::Table(table) = &document.value {
        refuse_unknown("", table, &["name", "scene", "packs", "half_width", "factor"])?;
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
    let (factor, levels) = read_levels(&document, &scene_document, &scene_path)?;
    let name = match top("name") {
        Some(name) => name.text()?.to_owned(),
        None => path.file_stem().map_or(String::new(), |stem| stem.to_string_lossy().into_owned()),
    };
    Ok(Study { name, packs, half_width, factor, levels })
}

fn read_levels(
    document: &Node,
    scene_document: &Node,
    scene_path: &Path,
) -> Result<(Option<String>, Vec<Level>), SceneError> {
    let section = Section::new(document, "factor", &["key", "values"])?;
    if !section.is_given() {
        let scene = scene_from(scene_document, scene_path)?;
        return Ok((None, vec![Level { value: String::new(), scene }]));
    }
    let key = section.need("key", "key = \"soil.median\"")?;
    let name = key.text()?;
    if name.is_empty() || name.split('.').any(str::is_empty) || ["scene.seed", "scene.name"].contains(&name) {
        return Err(key.refuse("must be a dotted key of the scene that may vary, such as \"soil.median\""));
    }
    let values = section.need("values", "values = [\"2 mm\", \"4 mm\"]")?;
    let levels = values
        .list()?
        .iter()
        .map(|entry| {
            let mut varied = scene_document.clone();
            varied.set(name, entry.node.clone());
            let value = match &entry.node.value {
                Value::Text(text) => text.clone(),
                _ => entry.node.written(),
            };
            Ok(Level { value, scene: scene_from(&varied, scene_path)? })
        })
        .collect::<Result<Vec<_>, SceneError>>()?;
    if levels.is_empty() {
        return Err(values.refuse("names no value"));
    }
    Ok((Some(name.to_owned()), levels))
}
