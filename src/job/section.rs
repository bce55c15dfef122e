//! Typed access to the tables of a job file: every refusal of a value is worded here.

use std::cell::RefCell;
use std::collections::BTreeMap;

use super::built::{TABLES, keys_of, without_indices};
use super::choice::Choice;
use super::layers::Patterns;
use super::names::{nearest, same_name};
use super::pattern::Pattern;
use super::problem::Problem;
use super::tree::{Kind, Table, Value};
use crate::units::Dimension;

/// What is found while a file is read.
#[derive(Debug, Default)]
pub(super) struct Notes {
    problems: RefCell<Vec<Problem>>,
    lines: RefCell<BTreeMap<String, u64>>,
}

impl Notes {
    /// Adds a problem.
    pub(super) fn add(
        &self,
        check: &'static str,
        line: u64,
        message: impl Into<String>,
        remedy: impl Into<String>,
    ) {
        self.problems.borrow_mut().push(Problem {
            check,
            line,
            message: message.into(),
            remedy: remedy.into(),
        });
    }

    /// The problems in the order in which they were found, and the line of every known key.
    pub(super) fn finish(self) -> (Vec<Problem>, BTreeMap<String, u64>) {
        (self.problems.into_inner(), self.lines.into_inner())
    }
}

/// What a number must be.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Bound {
    /// Any finite number.
    Any,
    /// Greater than 0.
    Positive,
    /// 0 or greater.
    NotNegative,
    /// Greater than 0, at most 1.
    Part,
}

impl Bound {
    fn holds(self, value: f64) -> bool {
        match self {
            Self::Any => true,
            Self::Positive => value > 0.0,
            Self::NotNegative => value >= 0.0,
            Self::Part => value > 0.0 && value <= 1.0,
        }
    }

    fn words(self) -> &'static str {
        match self {
            Self::Any => "finite",
            Self::Positive => "greater than 0",
            Self::NotNegative => "0 or greater",
            Self::Part => "greater than 0 and at most 1",
        }
    }
}

static EMPTY: Table = Table::new();

/// One table of the job file.
pub(super) struct Section<'a> {
    table: &'a Table,
    path: String,
    /// Line of its header, or of the key that holds it.
    pub line: u64,
    /// Where problems go.
    pub notes: &'a Notes,
}

impl<'a> Section<'a> {
    /// The file itself, or a `[[sheet]]` table. `also` are keys that exist here and are read elsewhere.
    pub(super) fn root(table: &'a Table, also: &[&str], notes: &'a Notes) -> Self {
        let section = Self { table, path: String::new(), line: 1, notes };
        section.refuse_unknown(also);
        section
    }

    /// The table under `key`; an empty one when it is absent or no table.
    pub(super) fn table(&self, key: &str) -> Section<'a> {
        let path = self.path_of(key);
        let (table, line) = match self.value(key) {
            None => (&EMPTY, self.line),
            Some(value) => match &value.kind {
                Kind::Table(table) => (table, value.line),
                _ => {
                    self.refuse(&path, value, "a table", &format!("Write [{path}]"));
                    (&EMPTY, self.line)
                }
            },
        };
        let section = Section { table, path, line, notes: self.notes };
        section.refuse_unknown(&[]);
        section
    }

    /// The tables of an array of tables; empty when it is absent or none.
    pub(super) fn tables(&self, key: &str) -> Vec<Section<'a>> {
        let path = self.path_of(key);
        let plain = without_indices(&path);
        let remedy = format!("Write a table headed [[{plain}]] for each");
        let Some(value) = self.value(key) else {
            return Vec::new();
        };
        let Kind::Array(values) = &value.kind else {
            self.refuse(&path, value, "an array of tables", &remedy);
            return Vec::new();
        };
        let mut sections = Vec::new();
        for (place, value) in values.iter().enumerate() {
            if let Kind::Table(table) = &value.kind {
                let section =
                    Section { table, path: format!("{path}[{place}]"), line: value.line, notes: self.notes };
                section.refuse_unknown(&[]);
                sections.push(section);
            } else {
                self.refuse(&path, value, "an array of tables", &remedy);
            }
        }
        sections
    }

    /// Whether the key is there.
    pub(super) fn has(&self, key: &str) -> bool {
        self.table.contains_key(key)
    }

    /// Line of a key, or of the table when the key is absent.
    pub(super) fn line_of(&self, key: &str) -> u64 {
        self.table.get(key).map_or(self.line, |entry| entry.line)
    }

    /// Adds a problem with the value of a key.
    pub(super) fn object(&self, key: &str, message: impl AsRef<str>, remedy: impl Into<String>) {
        let path = without_indices(&self.path_of(key));
        self.notes.add("job-value", self.line_of(key), format!("`{path}` {}", message.as_ref()), remedy);
    }

    /// `value`, which was read from `key`; when the key is absent, that is a problem.
    pub(super) fn require<T>(&self, key: &str, value: Option<T>) -> Option<T> {
        if value.is_none() && !self.has(key) {
            let table = without_indices(&self.path);
            self.notes.add(
                "job-missing",
                self.line,
                format!("[[{table}]] has no `{key}`"),
                format!("Add `{key}` to this table"),
            );
        }
        value
    }

    /// A number, or a text with a unit, in the tool's own unit.
    pub(super) fn quantity(&self, key: &str, dimension: Dimension, bound: Bound) -> Option<f64> {
        self.quantity_in(key, self.value(key)?, dimension, bound)
    }

    /// The same for a value that is already at hand.
    pub(super) fn quantity_in(
        &self,
        key: &str,
        value: &Value,
        dimension: Dimension,
        bound: Bound,
    ) -> Option<f64> {
        let path = self.path_of(key);
        let number = match &value.kind {
            Kind::Whole(number) => *number as f64,
            Kind::Number(number) => *number,
            Kind::Text(text) => match dimension.parse(text) {
                Ok(number) => number,
                Err(error) => {
                    let (message, remedy) = match dimension {
                        Dimension::Plain => (
                            format!("is no number: {error}"),
                            "Write a plain number with a decimal point".to_owned(),
                        ),
                        _ => (
                            format!("= \"{text}\" was not read: {error}"),
                            format!(
                                "Write a number in {} with a decimal point, or a text with one of the units {}",
                                dimension.unit(),
                                dimension.examples()
                            ),
                        ),
                    };
                    self.object_at(&path, value.line, &message, remedy);
                    return None;
                }
            },
            _ => {
                let wanted = match dimension {
                    Dimension::Plain => "a number".to_owned(),
                    _ => format!("a number in {} or a text with a unit", dimension.unit()),
                };
                self.refuse(&path, value, &wanted, "Write a number");
                return None;
            }
        };
        if number.is_finite() && bound.holds(number) {
            // A negative zero would print as -0 in every output.
            Some(number + 0.0)
        } else {
            let wanted = if number.is_finite() { bound.words() } else { "finite" };
            self.object_at(
                &path,
                value.line,
                &format!("must be {wanted}, not {number}"),
                "Correct the number, or remove the key".to_owned(),
            );
            None
        }
    }

    /// A plain number.
    pub(super) fn number(&self, key: &str, bound: Bound) -> Option<f64> {
        self.quantity(key, Dimension::Plain, bound)
    }

    /// A whole number of at least 1.
    pub(super) fn count(&self, key: &str) -> Option<u32> {
        let value = self.value(key)?;
        let number = match value.kind {
            Kind::Whole(number) => u32::try_from(number).ok().filter(|&number| number > 0),
            _ => None,
        };
        if number.is_none() {
            self.refuse(
                &self.path_of(key),
                value,
                "a whole number of at least 1",
                "Correct the number, or remove the key",
            );
        }
        number
    }

    /// True or false.
    pub(super) fn flag(&self, key: &str) -> Option<bool> {
        let value = self.value(key)?;
        if let Kind::Flag(flag) = value.kind {
            return Some(flag);
        }
        self.refuse(&self.path_of(key), value, "true or false", "Write true or false, without quotes");
        None
    }

    /// A text that is not empty.
    pub(super) fn text(&self, key: &str) -> Option<String> {
        self.text_in(key, self.value(key)?)
    }

    /// The same for a value that is already at hand.
    pub(super) fn text_in(&self, key: &str, value: &Value) -> Option<String> {
        match &value.kind {
            Kind::Text(text) if !text.trim().is_empty() && !text.contains(|c: char| c.is_control()) => {
                Some(text.clone())
            }
            Kind::Text(_) => {
                self.object_at(
                    &self.path_of(key),
                    value.line,
                    "must not be empty or have control characters (line ends, tabs)",
                    "Write a text in one line, or remove the key".to_owned(),
                );
                None
            }
            _ => {
                self.refuse(&self.path_of(key), value, "a text", "Write it in double quotes");
                None
            }
        }
    }

    /// One of a closed list.
    pub(super) fn choice<T: Choice>(&self, key: &str) -> Option<T> {
        self.choice_in(key, self.value(key)?)
    }

    /// The same for a value that is already at hand.
    pub(super) fn choice_in<T: Choice>(&self, key: &str, value: &Value) -> Option<T> {
        let names: Vec<&str> = T::NAMES.iter().map(|(name, _)| *name).collect();
        let list = names.join("\", \"");
        let Kind::Text(text) = &value.kind else {
            self.refuse(&self.path_of(key), value, "a text", &format!("Write one of \"{list}\""));
            return None;
        };
        let found = T::NAMES.iter().find(|(name, _)| name == text);
        if found.is_none() {
            let near = nearest(text, names).unwrap_or_default();
            self.object_at(
                &self.path_of(key),
                value.line,
                &format!("has no value \"{text}\"; the values are \"{list}\""),
                format!("Perhaps \"{near}\" was meant"),
            );
        }
        found.map(|&(_, choice)| choice)
    }

    /// An array of values of a closed list, each at most once.
    pub(super) fn choices<T: Choice + PartialEq>(&self, key: &str) -> Option<Vec<T>> {
        let mut choices = Vec::new();
        for value in self.array(key)? {
            if let Some(choice) = self.choice_in(key, value) {
                if choices.contains(&choice) {
                    self.object_at(
                        &self.path_of(key),
                        value.line,
                        "names one value twice",
                        "Remove one of the two".to_owned(),
                    );
                } else {
                    choices.push(choice);
                }
            }
        }
        Some(choices)
    }

    /// The values of an array.
    pub(super) fn array(&self, key: &str) -> Option<&'a [Value]> {
        self.array_in(key, self.value(key)?)
    }

    /// The same for a value that is already at hand.
    pub(super) fn array_in<'v>(&self, key: &str, value: &'v Value) -> Option<&'v [Value]> {
        if let Kind::Array(values) = &value.kind {
            return Some(values);
        }
        self.refuse(&self.path_of(key), value, "an array", "Write it in square brackets");
        None
    }

    /// `N` quantities in an array.
    pub(super) fn quantities_in<const N: usize>(
        &self,
        key: &str,
        value: &Value,
        parts: [(Dimension, Bound); N],
    ) -> Option<[f64; N]> {
        let values = self.array_in(key, value)?;
        if values.len() != N {
            self.object_at(
                &self.path_of(key),
                value.line,
                &format!("needs {N} numbers here, not {}", values.len()),
                format!("Write {N} numbers in square brackets"),
            );
            return None;
        }
        let mut numbers = [0.0; N];
        let mut complete = true;
        for ((number, value), (dimension, bound)) in numbers.iter_mut().zip(values).zip(parts) {
            match self.quantity_in(key, value, dimension, bound) {
                Some(read) => *number = read,
                None => complete = false,
            }
        }
        complete.then_some(numbers)
    }

    /// A table of numbers under names that the user chooses.
    pub(super) fn factors(&self, key: &str) -> Option<BTreeMap<String, f64>> {
        let value = self.value(key)?;
        let Kind::Table(table) = &value.kind else {
            self.refuse(&self.path_of(key), value, "a table of factors", "Write { \"NAME\" = 1.0 }");
            return None;
        };
        let mut factors: BTreeMap<String, f64> = BTreeMap::new();
        for (name, entry) in table {
            if factors.keys().any(|known| same_name(known, name)) {
                self.object_at(
                    &self.path_of(key),
                    entry.line,
                    &format!("names \"{name}\" twice; capitals and small letters do not matter"),
                    "Remove one of the two".to_owned(),
                );
            }
            if let Some(factor) = self.quantity_in(key, &entry.value, Dimension::Plain, Bound::NotNegative) {
                factors.insert(name.clone(), factor);
            }
        }
        Some(factors)
    }

    /// One or several names or patterns.
    pub(super) fn patterns(&self, key: &str) -> Option<Patterns> {
        let value = self.value(key)?;
        let values = match &value.kind {
            Kind::Array(values) => &values[..],
            _ => std::slice::from_ref(value),
        };
        if values.is_empty() {
            self.object(key, "names no layer", "Name one, or remove the key for the default");
            return None;
        }
        let patterns: Vec<Pattern> =
            values.iter().filter_map(|value| self.text_in(key, value)).map(Pattern::new).collect();
        (!patterns.is_empty()).then_some(Patterns(patterns))
    }

    /// A day.
    pub(super) fn day(&self, key: &str) -> Option<jiff::civil::Date> {
        let value = self.value(key)?;
        let day = match &value.kind {
            Kind::Date(written) if written.time.is_none() => {
                written.date.and_then(|date| parse_day(&date.to_string()))
            }
            Kind::Text(text) => parse_day(text),
            _ => None,
        };
        if day.is_none() {
            self.object(
                key,
                "must be a day of the calendar",
                "Write a date such as 2027-06-30, without a time",
            );
        }
        day
    }

    /// The value of a key, whose line is noted.
    pub(super) fn value(&self, key: &str) -> Option<&'a Value> {
        let entry = self.table.get(key)?;
        self.notes.lines.borrow_mut().insert(self.path_of(key), entry.line);
        Some(&entry.value)
    }

    fn path_of(&self, key: &str) -> String {
        if self.path.is_empty() { key.to_owned() } else { format!("{}.{key}", self.path) }
    }

    fn object_at(&self, path: &str, line: u64, message: &str, remedy: String) {
        let path = without_indices(path);
        self.notes.add("job-value", line, format!("`{path}` {message}"), remedy);
    }

    fn refuse(&self, path: &str, value: &Value, wanted: &str, remedy: &str) {
        let found = value.kind.name();
        self.object_at(path, value.line, &format!("must be {wanted}, not {found}"), remedy.to_owned());
    }

    fn refuse_unknown(&self, also: &[&str]) {
        let plain = without_indices(&self.path);
        let known: Vec<&str> =
            keys_of(&plain).iter().map(|(name, _)| *name).chain(also.iter().copied()).collect();
        for (key, entry) in self.table {
            if known.contains(&key.as_str()) {
                continue;
            }
            let full = if plain.is_empty() { key.clone() } else { format!("{plain}.{key}") };
            let elsewhere = TABLES
                .iter()
                .find(|(_, keys)| keys.iter().any(|(name, _)| name == key))
                .filter(|(table, _)| !table.is_empty());
            let remedy = match elsewhere {
                Some((table, _)) => format!("The key `{key}` belongs into [{table}]"),
                None => {
                    let near = nearest(key, known.iter().copied()).unwrap_or_default();
                    format!("The nearest known key is `{near}`")
                }
            };
            self.notes.add("job-key", entry.line, format!("`{full}` is not a key of the job file"), remedy);
        }
    }
}

/// A day written as `YYYY-MM-DD` and no other way.
fn parse_day(text: &str) -> Option<jiff::civil::Date> {
    let day: jiff::civil::Date = text.parse().ok()?;
    (day.to_string() == text).then_some(day)
}
