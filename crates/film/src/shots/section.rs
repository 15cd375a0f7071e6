//! Typed reading of TOML tables, with errors that say where and what to do.

use super::length::parse_length;
use super::{Place, ShotError, Word};
use bedswell_sim::nearest_word;
use std::ops::{Range, RangeInclusive};
use std::path::Path;
use std::sync::Arc;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// The text of a file and its name.
pub(super) struct Source<'t> {
    file: Arc<Path>,
    text: &'t str,
}

/// One table of the file.
pub(super) struct Section<'t> {
    source: &'t Source<'t>,
    table: &'t DeTable<'t>,
    name: String,
    place: Place,
}

/// A value that is there.
pub(super) struct Entry<'t> {
    source: &'t Source<'t>,
    value: &'t DeValue<'t>,
    span: Range<usize>,
    key: String,
    place: Place,
}

impl<'t> Source<'t> {
    pub(super) fn new(file: &Path, text: &'t str) -> Self {
        Self { file: file.into(), text }
    }

    pub(super) fn parse(&self) -> Result<Spanned<DeTable<'t>>, ShotError> {
        DeTable::parse(self.text).map_err(|error| {
            let place = self.place(error.span().map_or(0, |span| span.start));
            let line = self.text.lines().nth(place.line - 1).unwrap_or_default().trim();
            ShotError::Syntax { message: format!("{} in `{line}`", error.message()), place }
        })
    }

    /// The whole file as a table.
    pub(super) fn section(&'t self, document: &'t Spanned<DeTable<'t>>) -> Section<'t> {
        Section { source: self, table: document.get_ref(), name: String::new(), place: self.place(0) }
    }

    fn place(&self, byte: usize) -> Place {
        let before = &self.text.as_bytes()[..byte.min(self.text.len())];
        Place { file: Arc::clone(&self.file), line: 1 + before.iter().filter(|&&byte| byte == b'\n').count() }
    }
}

impl<'t> Section<'t> {
    pub(super) fn place(&self) -> &Place {
        &self.place
    }

    /// Refuses keys that are not among the known ones.
    pub(super) fn only(&self, known: &[&str]) -> Result<(), ShotError> {
        let Some(key) = self.table.keys().find(|key| !known.contains(&key.get_ref().as_ref())) else {
            return Ok(());
        };
        let advice = match nearest_word(key.get_ref(), known) {
            Some(near) => format!("did you mean `{}`?", self.dotted(near)),
            None => format!("the keys known here are {}", known.join(", ")),
        };
        let place = self.source.place(key.span().start);
        Err(ShotError::UnknownKey { place, key: self.dotted(key.get_ref()), advice })
    }

    pub(super) fn get(&self, key: &str) -> Option<Entry<'t>> {
        let (name, value) = self.table.get_key_value(key)?;
        Some(Entry {
            source: self.source,
            value: value.get_ref(),
            span: value.span(),
            key: self.dotted(key),
            place: self.source.place(name.span().start),
        })
    }

    /// The value of a key that must be there; `example` shows what to write.
    pub(super) fn need(&self, key: &str, example: &str) -> Result<Entry<'t>, ShotError> {
        self.get(key).ok_or_else(|| ShotError::Missing {
            place: self.place.clone(),
            key: self.dotted(key),
            mend: format!("write for example {example}"),
        })
    }

    pub(super) fn number(
        &self,
        key: &str,
        range: RangeInclusive<f64>,
        left_out: f64,
    ) -> Result<f64, ShotError> {
        self.get(key).map_or(Ok(left_out), |entry| entry.number(range))
    }

    pub(super) fn word(&self, key: &str) -> Result<Option<Word>, ShotError> {
        self.get(key).map(|entry| entry.word()).transpose()
    }

    /// A key with the name of its table.
    pub(super) fn dotted(&self, key: &str) -> String {
        if self.name.is_empty() { key.to_owned() } else { format!("{}.{key}", self.name) }
    }
}

impl<'t> Entry<'t> {
    pub(super) fn refuse(&self, problem: impl Into<String>) -> ShotError {
        let written = self.source.text.get(self.span.clone()).unwrap_or_default();
        let value = match self.value {
            DeValue::Table(_) => "a table".to_owned(),
            _ => written.lines().next().unwrap_or_default().chars().take(SHOWN).collect(),
        };
        ShotError::Value { place: self.place.clone(), key: self.key.clone(), value, problem: problem.into() }
    }

    pub(super) fn key(&self) -> &str {
        &self.key
    }

    pub(super) fn place(&self) -> &Place {
        &self.place
    }

    /// A plain number.
    pub(super) fn number(&self, range: RangeInclusive<f64>) -> Result<f64, ShotError> {
        let written = match self.value {
            DeValue::Integer(integer) if integer.radix() == 10 => integer.as_str(),
            DeValue::Float(float) => float.as_str(),
            _ => return Err(self.refuse("must be a plain number, without quotes and without a unit")),
        };
        match written.parse::<f64>() {
            Ok(value) if range.contains(&value) => Ok(value),
            _ => Err(self.refuse(format!("outside the allowed range, {} to {}", range.start(), range.end()))),
        }
    }

    /// A whole number.
    pub(super) fn whole(&self, range: RangeInclusive<u32>) -> Result<u32, ShotError> {
        let written = match self.value {
            DeValue::Integer(integer) if integer.radix() == 10 => integer.as_str(),
            _ => "",
        };
        written.parse().ok().filter(|whole| range.contains(whole)).ok_or_else(|| {
            self.refuse(format!("must be a whole number from {} to {}", range.start(), range.end()))
        })
    }

    pub(super) fn text(&self) -> Result<&'t str, ShotError> {
        self.value.as_str().ok_or_else(|| self.refuse("must be text in quotes"))
    }

    pub(super) fn word(&self) -> Result<Word, ShotError> {
        Ok(Word { text: self.text()?.to_owned(), key: self.key.clone(), place: self.place.clone() })
    }

    /// A length with its unit (m).
    pub(super) fn length(&self) -> Result<f64, ShotError> {
        let DeValue::String(text) = self.value else {
            return Err(self.refuse("must be text with a unit, such as \"1.5 mm\""));
        };
        parse_length(text).map_err(|problem| self.refuse(problem))
    }

    pub(super) fn is_list(&self) -> bool {
        self.value.is_array()
    }

    /// The entries of a list, each under the list's own key with its place in it.
    pub(super) fn list(&self) -> Result<Vec<Entry<'t>>, ShotError> {
        let list = self.value.as_array().ok_or_else(|| self.refuse("must be a list in square brackets"))?;
        let entry = |(index, value): (usize, &'t Spanned<DeValue<'t>>)| Entry {
            source: self.source,
            value: value.get_ref(),
            span: value.span(),
            key: format!("{}[{}]", self.key, index + 1),
            place: self.source.place(value.span().start),
        };
        Ok(list.iter().enumerate().map(entry).collect())
    }

    /// The entries of a list of known length.
    pub(super) fn list_of<const N: usize>(&self, meaning: &str) -> Result<[Entry<'t>; N], ShotError> {
        self.list()?.try_into().map_err(|_| self.refuse(format!("must be a list of {meaning}")))
    }

    pub(super) fn section(&self) -> Result<Section<'t>, ShotError> {
        let table = self.value.as_table().ok_or_else(|| self.refuse("must be a table"))?;
        Ok(Section { source: self.source, table, name: self.key.clone(), place: self.place.clone() })
    }

    /// The tables of a list written under headings in double brackets.
    pub(super) fn sections(&self) -> Result<Vec<Section<'t>>, ShotError> {
        let double = format!("must be a list of tables, each under a heading [[{}]]", bare(&self.key));
        let list = self.list().map_err(|_| self.refuse(double.clone()))?;
        list.iter().map(|entry| entry.section().map_err(|_| entry.refuse(double.clone()))).collect()
    }
}

/// Letters of a value that a message shows.
const SHOWN: usize = 60;

/// A key without the numbers of the tables it is in, as in headings.
fn bare(key: &str) -> String {
    key.split('.').map(|step| step.split('[').next().unwrap_or_default()).collect::<Vec<_>>().join(".")
}
