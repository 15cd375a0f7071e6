//! A TOML file as a tree of values that remember where they were written.

use super::error::{Place, SceneError};
use std::path::Path;
use std::sync::Arc;
use toml::de::{DeTable, DeValue};

/// A value and where it stands.
#[derive(Clone, Debug)]
pub(crate) struct Node {
    pub(crate) value: Value,
    pub(crate) place: Place,
}

/// What a scene file can say.
#[derive(Clone, Debug)]
pub(crate) enum Value {
    Text(String),
    Integer(i64),
    Number(f64),
    Flag(bool),
    List(Vec<Node>),
    Table(Table),
    Date(String),
}

/// Keys in the order of their names.
pub(crate) type Table = Vec<(String, Node)>;

/// Reads and parses a TOML file.
pub(crate) fn read_document(path: &Path) -> Result<Node, SceneError> {
    let text = std::fs::read_to_string(path)
        .map_err(|cause| SceneError::Unreadable { path: path.to_owned(), cause })?;
    parse_document(path, &text)
}

/// Parses TOML text; `path` is for messages.
pub(crate) fn parse_document(path: &Path, text: &str) -> Result<Node, SceneError> {
    let source = Source { file: path.into(), text };
    let document = DeTable::parse(text).map_err(|error| {
        let place = source.place(error.span().map_or(0, |span| span.start));
        let line = text.lines().nth(place.line - 1).unwrap_or_default().trim();
        SceneError::Syntax { message: format!("{} in `{line}`", error.message()), place }
    })?;
    let place = source.place(0);
    Ok(Node { value: Value::Table(source.table(document.get_ref())), place })
}

impl Node {
    /// The value under a dotted key, if it is there.
    pub(crate) fn find(&self, key: &str) -> Option<&Node> {
        key.split('.').try_fold(self, |node, step| match &node.value {
            Value::Table(table) => table.iter().find(|(name, _)| name == step).map(|(_, node)| node),
            _ => None,
        })
    }

    /// Puts a value under a dotted key, making tables on the way.
    pub(crate) fn set(&mut self, key: &str, replacement: Node) {
        let (step, rest) = key.split_once('.').map_or((key, None), |(step, rest)| (step, Some(rest)));
        if !matches!(self.value, Value::Table(_)) {
            self.value = Value::Table(Table::new());
        }
        let Value::Table(table) = &mut self.value else { unreachable!("made a table above") };
        let index = table.iter().position(|(name, _)| name == step).unwrap_or_else(|| {
            let empty = Node { value: Value::Table(Table::new()), place: replacement.place.clone() };
            table.push((step.to_owned(), empty));
            table.len() - 1
        });
        match rest {
            Some(rest) => table[index].1.set(rest, replacement),
            None => table[index].1 = replacement,
        }
    }

    /// The value as it would be written.
    pub(crate) fn written(&self) -> String {
        match &self.value {
            Value::Text(text) => format!("{text:?}"),
            Value::Integer(integer) => integer.to_string(),
            Value::Number(number) => number.to_string(),
            Value::Flag(flag) => flag.to_string(),
            Value::Date(date) => date.clone(),
            Value::Table(_) => "a table".to_owned(),
            Value::List(list) => {
                let shown: Vec<String> = list.iter().take(SHOWN).map(Node::written).collect();
                let more = if list.len() > SHOWN { ", …" } else { "" };
                format!("[{}{more}]", shown.join(", "))
            }
        }
    }
}

/// Entries of a list that a message shows.
const SHOWN: usize = 4;

struct Source<'a> {
    file: Arc<Path>,
    text: &'a str,
}

impl Source<'_> {
    fn place(&self, byte: usize) -> Place {
        let line = self.text.as_bytes()[..byte.min(self.text.len())].iter().filter(|&&b| b == b'\n').count();
        Place { file: Arc::clone(&self.file), line: line + 1 }
    }

    fn table(&self, table: &DeTable<'_>) -> Table {
        table
            .iter()
            .map(|(key, value)| {
                // A table's own place is its heading; a value's is the line of its key.
                let node = Node { value: self.value(value.get_ref()), place: self.place(key.span().start) };
                (key.get_ref().to_string(), node)
            })
            .collect()
    }

    fn value(&self, value: &DeValue<'_>) -> Value {
        match value {
            DeValue::String(text) => Value::Text(text.to_string()),
            DeValue::Integer(integer) => match i64::from_str_radix(integer.as_str(), integer.radix()) {
                Ok(integer) => Value::Integer(integer),
                Err(_) => Value::Number(integer.as_str().parse().unwrap_or(f64::INFINITY)),
            },
            DeValue::Float(float) => Value::Number(float.as_str().parse().unwrap_or(f64::NAN)),
            DeValue::Boolean(flag) => Value::Flag(*flag),
            DeValue::Datetime(date) => Value::Date(date.to_string()),
            DeValue::Array(list) => Value::List(
                list.iter()
                    .map(|entry| Node {
                        value: self.value(entry.get_ref()),
                        place: self.place(entry.span().start),
                    })
                    .collect(),
            ),
            DeValue::Table(table) => Value::Table(self.table(table)),
        }
    }
}
