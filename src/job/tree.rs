//! A job file as a tree of values that know their lines, and how one tree is laid over another.

use std::collections::BTreeMap;

use toml::de::{DeTable, DeValue};

use super::problem::Problem;

/// Keys of one table in the order of their names.
pub(super) type Table = BTreeMap<String, Entry>;

/// A key with its value.
#[derive(Debug, Clone)]
pub(super) struct Entry {
    /// Line of the key, counted from 1.
    pub line: u64,
    /// What stands behind it.
    pub value: Value,
}

/// A value with its line.
#[derive(Debug, Clone)]
pub(super) struct Value {
    /// Line where it begins, counted from 1.
    pub line: u64,
    /// What it is.
    pub kind: Kind,
}

/// The kinds of TOML values; whole numbers and others are told apart only where it matters.
#[derive(Debug, Clone)]
pub(super) enum Kind {
    Text(String),
    Whole(i64),
    Number(f64),
    Flag(bool),
    /// A date or time, as written.
    Date(toml::value::Datetime),
    Array(Vec<Value>),
    Table(Table),
}

impl Kind {
    /// What it is called in messages.
    pub(super) fn name(&self) -> &'static str {
        match self {
            Self::Text(_) => "a text",
            Self::Whole(_) | Self::Number(_) => "a number",
            Self::Flag(_) => "true or false",
            Self::Date(_) => "a date",
            Self::Array(_) => "an array",
            Self::Table(_) => "a table",
        }
    }
}

/// Reads TOML. Numbers that TOML allows and no job can use (`nan`, `inf`, too large) are kept as they are, for the
/// place where their key is known to refuse them.
///
/// # Errors
/// The first offence against the grammar of TOML, with its line.
pub(super) fn parse(text: &str) -> Result<Table, Problem> {
    let lines = Lines::new(text);
    match DeTable::parse(text) {
        Ok(table) => Ok(convert_table(table.get_ref(), &lines)),
        Err(error) => Err(Problem {
            check: "job-syntax",
            line: error.span().map_or(1, |span| lines.at(span.start)),
            message: format!("The job file is not valid TOML: {}", error.message()),
            remedy: "Mend this line; texts stand in double quotes, numbers have a decimal point".to_owned(),
        }),
    }
}

/// Lays `over` on `base`: tables are merged key by key, everything else (arrays of tables too) replaces.
pub(super) fn merge(base: &mut Table, over: &Table) {
    for (key, entry) in over {
        match (base.get_mut(key), &entry.value.kind) {
            (Some(Entry { value: Value { kind: Kind::Table(below), .. }, .. }), Kind::Table(above)) => {
                merge(below, above)
            }
            _ => {
                base.insert(key.clone(), entry.clone());
            }
        }
    }
}

fn convert_table(table: &DeTable<'_>, lines: &Lines) -> Table {
    table
        .iter()
        .map(|(key, value)| {
            let entry = Entry {
                line: lines.at(key.span().start),
                value: convert(value.get_ref(), value.span().start, lines),
            };
            (key.get_ref().to_string(), entry)
        })
        .collect()
}

fn convert(value: &DeValue<'_>, start: usize, lines: &Lines) -> Value {
    let kind = match value {
        DeValue::String(text) => Kind::Text(text.to_string()),
        DeValue::Integer(number) => i64::from_str_radix(number.as_str(), number.radix())
            .map_or(Kind::Number(f64::INFINITY), Kind::Whole),
        DeValue::Float(number) => Kind::Number(number.as_str().parse().unwrap_or(f64::NAN)),
        DeValue::Boolean(flag) => Kind::Flag(*flag),
        DeValue::Datetime(date) => Kind::Date(*date),
        DeValue::Array(values) => Kind::Array(
            values.iter().map(|value| convert(value.get_ref(), value.span().start, lines)).collect(),
        ),
        DeValue::Table(table) => Kind::Table(convert_table(table, lines)),
    };
    Value { line: lines.at(start), kind }
}

/// Byte offsets at which lines end.
struct Lines(Vec<usize>);

impl Lines {
    fn new(text: &str) -> Self {
        Self(memchr::memchr_iter(b'\n', text.as_bytes()).collect())
    }

    /// Line of a byte, counted from 1.
    fn at(&self, offset: usize) -> u64 {
        1 + self.0.partition_point(|&end| end < offset) as u64
    }
}
