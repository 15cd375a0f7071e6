use super::choices::clash;
use super::range::Range;
use super::{Factor, Variation};
use crate::SceneError;
use crate::scene::{Entry, Node, Section, Value};

/// A factor as read; its values are still to be tried in the scene.
pub(super) struct GivenFactor {
    pub(super) factor: Factor,
    pub(super) source: Source,
}

/// Where a factor's values come from.
pub(super) enum Source {
    /// The values themselves.
    Listed(Vec<Node>),
    /// To be drawn from a range.
    Range(Range),
}

/// Reads every `[[factor]]` of a study, or its only `[factor]`.
pub(super) fn read_factors(document: &Node) -> Result<Vec<GivenFactor>, SceneError> {
    let Some(node) = document.find("factor") else { return Ok(Vec::new()) };
    let tables = match &node.value {
        Value::List(tables) if !tables.is_empty() => tables.as_slice(),
        _ => std::slice::from_ref(node),
    };
    let mut factors: Vec<GivenFactor> = Vec::new();
    for table in tables {
        let holder =
            Node { value: Value::Table(vec![("factor".into(), table.clone())]), place: table.place.clone() };
        let section = Section::new(&holder, "factor", &["key", "values", "from", "to", "logarithmic"])?;
        let key = section.need("key", "key = \"soil.median\"")?;
        let name = read_key(&key)?;
        if let Some(problem) = factors.iter().find_map(|other| clash(&other.factor.key, name)) {
            return Err(key.refuse(problem));
        }
        let source = read_source(&section)?;
        let variation = match &source {
            Source::Listed(values) => Variation::Listed { values: values.iter().map(in_words).collect() },
            Source::Range(range) => range.variation(),
        };
        factors.push(GivenFactor { factor: Factor { key: name.to_owned(), variation }, source });
    }
    Ok(factors)
}

/// A value as reports show it.
pub(super) fn in_words(node: &Node) -> String {
    match &node.value {
        Value::Text(text) => text.clone(),
        _ => node.written(),
    }
}

fn read_key<'a>(key: &Entry<'a>) -> Result<&'a str, SceneError> {
    let name = key.text()?;
    if name.is_empty() || name.split('.').any(str::is_empty) || ["scene.seed", "scene.name"].contains(&name) {
        return Err(key.refuse("must be a dotted key of the scene that may vary, such as \"soil.median\""));
    }
    Ok(name)
}

fn read_source(section: &Section<'_>) -> Result<Source, SceneError> {
    let (from, to, logarithmic) = (section.get("from"), section.get("to"), section.get("logarithmic"));
    match (section.get("values"), from, to) {
        (Some(values), None, None) => match logarithmic {
            Some(entry) => Err(entry.refuse("belongs to a range; leave it out beside `values`")),
            None => Ok(Source::Listed(read_values(&values)?)),
        },
        (Some(_), Some(end), _) | (Some(_), None, Some(end)) => {
            Err(end.refuse("a factor has either `values` or a range; keep one of them"))
        }
        (None, Some(from), Some(to)) => {
            let logarithmic = logarithmic.map_or(Ok(false), |entry| entry.flag())?;
            Ok(Source::Range(Range::read(&from, &to, logarithmic)?))
        }
        (None, Some(_), None) => Err(section.missing("to", "a range has `from` and `to`".into())),
        (None, None, Some(_)) => Err(section.missing("from", "a range has `from` and `to`".into())),
        (None, None, None) => Err(section.missing(
            "values",
            "write values = [\"2 mm\", \"4 mm\"], or a range as from = \"2 mm\" and to = \"4 mm\"".into(),
        )),
    }
}

fn read_values(values: &Entry<'_>) -> Result<Vec<Node>, SceneError> {
    let listed = values.list()?;
    if listed.is_empty() {
        return Err(values.refuse("names no value"));
    }
    for (index, entry) in listed.iter().enumerate() {
        // Longer values are shown in part only, so that two may look alike.
        let plain = !matches!(entry.node.value, Value::List(_) | Value::Table(_));
        let same = |other: &Entry<'_>| other.node.written() == entry.node.written();
        if plain && listed[..index].iter().any(same) {
            return Err(entry.refuse("stands there twice; leave one of them out"));
        }
    }
    Ok(listed.iter().map(|entry| entry.node.clone()).collect())
}
