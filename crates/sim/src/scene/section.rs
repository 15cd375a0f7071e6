//! Typed reading of one table of a scene file, with errors that say where and what to do.

use super::error::{Place, SceneError};
use super::raw::{Node, Table, Value};
use super::unit::{Kind, parse_quantity, range_in_words};
use std::ops::RangeInclusive;

/// One table of the file, all of whose keys are known.
pub(crate) struct Section<'a> {
    name: &'static str,
    table: Option<&'a Table>,
    place: Place,
}

/// A key that is there.
pub(crate) struct Entry<'a> {
    pub(crate) key: String,
    pub(crate) node: &'a Node,
}

impl<'a> Section<'a> {
    /// The table called `name` (dotted) of the document; it may be absent.
    pub(crate) fn new(document: &'a Node, name: &'static str, known: &[&str]) -> Result<Self, SceneError> {
        let Some(node) = document.find(name) else {
            return Ok(Self { name, table: None, place: document.place.clone() });
        };
        let Value::Table(table) = &node.value else {
            let entry = Entry { key: name.to_owned(), node };
            return Err(entry.refuse(format!("must be a table, [{name}]")));
        };
        refuse_unknown(&format!("{name}."), table, known)?;
        Ok(Self { name, table: Some(table), place: node.place.clone() })
    }

    pub(crate) fn is_given(&self) -> bool {
        self.table.is_some()
    }

    pub(crate) fn get(&self, key: &str) -> Option<Entry<'a>> {
        let (_, node) = self.table?.iter().find(|(name, _)| name == key)?;
        Some(Entry { key: format!("{}.{key}", self.name), node })
    }

    /// The value of a key that must be there; `example` shows what to write.
    pub(crate) fn need(&self, key: &str, example: &str) -> Result<Entry<'a>, SceneError> {
        self.get(key).ok_or_else(|| self.missing(key, format!("write {example} under [{}]", self.name)))
    }

    pub(crate) fn missing(&self, key: &str, mend: String) -> SceneError {
        SceneError::Missing { place: self.place.clone(), key: format!("{}.{key}", self.name), mend }
    }
}

/// Refuses keys of `table` that are not among the known ones.
pub(crate) fn refuse_unknown(prefix: &str, table: &Table, known: &[&str]) -> Result<(), SceneError> {
    match table.iter().find(|(key, _)| !known.contains(&key.as_str())) {
        None => Ok(()),
        Some((key, node)) => Err(SceneError::UnknownKey {
            place: node.place.clone(),
            key: format!("{prefix}{key}"),
            suggestion: nearest_word(key, known).map(|near| format!("{prefix}{near}")),
            known: known.iter().map(|&key| key.to_owned()).collect(),
        }),
    }
}

impl<'a> Entry<'a> {
    pub(crate) fn refuse(&self, problem: impl Into<String>) -> SceneError {
        SceneError::Value {
            place: self.node.place.clone(),
            key: self.key.clone(),
            value: self.node.written(),
            problem: problem.into(),
        }
    }

    /// A quantity with a unit, in the base unit of its kind.
    pub(crate) fn quantity(&self, kind: Kind, range: RangeInclusive<f64>) -> Result<f64, SceneError> {
        let value = match &self.node.value {
            Value::Text(text) => parse_quantity(text, kind).map_err(|problem| self.refuse(problem))?,
            Value::Integer(_) | Value::Number(_) => {
                let with_unit = format!("\"{} {}\"", self.node.written(), kind.base());
                return Err(
                    self.refuse(format!("the unit is missing; write it in text, such as {with_unit}"))
                );
            }
            _ => {
                return Err(self.refuse(format!("must be text with a unit, such as \"1.5 {}\"", kind.base())));
            }
        };
        self.within(value, &range, Some(kind))
    }

    /// A quantity above zero.
    pub(crate) fn positive(&self, kind: Kind) -> Result<f64, SceneError> {
        let value = self.quantity(kind, f64::NEG_INFINITY..=f64::INFINITY)?;
        if value > 0.0 { Ok(value) } else { Err(self.refuse("must be above zero")) }
    }

    /// A plain number.
    pub(crate) fn number(&self, range: RangeInclusive<f64>) -> Result<f64, SceneError> {
        let value = match self.node.value {
            Value::Integer(integer) => integer as f64,
            Value::Number(number) => number,
            _ => return Err(self.refuse("must be a plain number, without quotes and without a unit")),
        };
        self.within(value, &range, None)
    }

    /// A whole number.
    pub(crate) fn whole(&self, range: RangeInclusive<u64>) -> Result<u64, SceneError> {
        let allowed = || format!("must be a whole number from {} to {}", range.start(), range.end());
        match self.node.value {
            Value::Integer(integer) => u64::try_from(integer)
                .ok()
                .filter(|whole| range.contains(whole))
                .ok_or_else(|| self.refuse(allowed())),
            _ => Err(self.refuse(allowed())),
        }
    }

    pub(crate) fn flag(&self) -> Result<bool, SceneError> {
        match self.node.value {
            Value::Flag(flag) => Ok(flag),
            _ => Err(self.refuse("must be true or false")),
        }
    }

    pub(crate) fn text(&self) -> Result<&'a str, SceneError> {
        match &self.node.value {
            Value::Text(text) => Ok(text),
            _ => Err(self.refuse("must be text in quotes")),
        }
    }

    /// The entries of a list, each under the list's own key with its place in it.
    pub(crate) fn list(&self) -> Result<Vec<Entry<'a>>, SceneError> {
        match &self.node.value {
            Value::List(list) => Ok(list
                .iter()
                .enumerate()
                .map(|(index, node)| Entry { key: format!("{}[{}]", self.key, index + 1), node })
                .collect()),
            _ => Err(self.refuse("must be a list in square brackets")),
        }
    }

    /// The entries of a list of known length.
    pub(crate) fn list_of<const N: usize>(&self, meaning: &str) -> Result<[Entry<'a>; N], SceneError> {
        self.list()?.try_into().map_err(|_| self.refuse(format!("must be a list of {meaning}")))
    }

    fn within(&self, value: f64, range: &RangeInclusive<f64>, kind: Option<Kind>) -> Result<f64, SceneError> {
        if value.is_finite() && range.contains(&value) {
            Ok(value)
        } else {
            Err(self.refuse(format!("outside the allowed range, {}", range_in_words(range, kind))))
        }
    }
}

/// The known word that a slip of the pen most likely meant.
pub fn nearest_word<'k>(written: &str, known: &[&'k str]) -> Option<&'k str> {
    let (distance, key) = known.iter().map(|key| (edits(written, key), *key)).min()?;
    (distance <= 1 + written.len() / 4).then_some(key)
}

/// Insertions, deletions and replacements that turn one word into the other
/// (Levenshtein 1966, from memory).
fn edits(from: &str, to: &str) -> usize {
    let to: Vec<char> = to.chars().collect();
    let mut row: Vec<usize> = (0..=to.len()).collect();
    for (i, a) in from.chars().enumerate() {
        let mut diagonal = row[0];
        row[0] = i + 1;
        for (j, &b) in to.iter().enumerate() {
            let replaced = diagonal + usize::from(a != b);
            diagonal = row[j + 1];
            row[j + 1] = replaced.min(row[j] + 1).min(diagonal + 1);
        }
    }
    row[to.len()]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn slips_of_the_pen_find_their_key() {
        assert_eq!(nearest_word("porosty", &["grains", "porosity"]), Some("porosity"));
        assert_eq!(nearest_word("grain", &["grains", "porosity"]), Some("grains"));
        assert_eq!(nearest_word("wavelength", &["grains", "porosity"]), None);
        assert_eq!(edits("kitten", "sitting"), 3);
    }
}
