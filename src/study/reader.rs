//! Reading one section key by key; every fault is reported at its place.

use core::cell::RefCell;
use core::ops::Range;
use std::path::Path;

use serde_spanned::Spanned;
use toml::de::{DeTable, DeValue};

use super::error::StudyError;
use super::suggestion::suggestion;

/// The allowed range of a number, both ends included, and its unit.
#[derive(Clone, Copy)]
pub(super) struct Limits {
    pub low: f64,
    pub high: f64,
    pub unit: &'static str,
}

/// Shorthand for [`Limits`].
pub(super) const fn limits(low: f64, high: f64, unit: &'static str) -> Limits {
    Limits { low, high, unit }
}

/// A file's name and text, for messages.
#[derive(Clone, Copy)]
pub(super) struct Document<'a> {
    pub file: &'a Path,
    pub text: &'a str,
}

/// A table of the file, and which of its keys were asked for.
pub(super) struct Section<'a> {
    document: Document<'a>,
    table: &'a DeTable<'a>,
    path: String,
    span: Range<usize>,
    known: RefCell<Vec<&'static str>>,
}

type Value<'a> = &'a Spanned<DeValue<'a>>;
type Outcome<T> = Result<T, StudyError>;

impl<'a> Section<'a> {
    /// The whole file.
    pub fn root(document: Document<'a>, table: &'a Spanned<DeTable<'a>>) -> Self {
        let known = RefCell::default();
        Self { document, table: table.get_ref(), path: String::new(), span: 0..0, known }
    }

    fn key(&self, key: &str) -> String {
        if self.path.is_empty() { key.to_owned() } else { format!("{}.{key}", self.path) }
    }

    /// Line on which this section begins, from 1.
    pub fn line(&self) -> usize {
        self.document.text[..self.span.start].matches('\n').count() + 1
    }

    fn value(&self, key: &'static str) -> Option<Value<'a>> {
        self.known.borrow_mut().push(key);
        self.table.iter().find(|(name, _)| name.get_ref() == key).map(|(_, value)| value)
    }

    /// Whether a key is there.
    pub fn has(&self, key: &'static str) -> bool {
        self.value(key).is_some()
    }

    /// An error about a value that is there.
    pub fn wrong(&self, key: &'static str, problem: impl Into<String>) -> StudyError {
        match self.value(key) {
            Some(value) => self.at(&value.span(), &self.key(key), true).because(problem),
            None => self.absent(key).because(problem),
        }
    }

    /// The place of a key that is not there: its section's first line, if it has one.
    fn absent(&self, key: &str) -> StudyError {
        if self.path.is_empty() {
            let mut error = StudyError::of_file(self.document.file, "");
            error.key = key.to_owned();
            return error;
        }
        self.at(&self.span, &self.key(key), false)
    }

    /// An error about this section as a whole.
    pub fn wrong_section(&self, problem: impl Into<String>) -> StudyError {
        self.at(&self.span, &self.path, false).because(problem)
    }

    fn at(&self, span: &Range<usize>, key: &str, value: bool) -> StudyError {
        StudyError::at(self.document.file, self.document.text, span, key, value)
    }

    fn missing(&self, key: &'static str, wanted: &str) -> StudyError {
        // A key with another unit or a slip in its spelling explains the gap best.
        let known = self.known.borrow();
        let stray = self.table.keys().find(|name| {
            !known.contains(&name.get_ref().as_ref())
                && suggestion(name.get_ref(), &[key]).is_some()
        });
        if let Some(stray) = stray {
            let problem = format!("unknown key; write `{key}`, {wanted}");
            return self.at(&stray.span(), &self.key(stray.get_ref()), false).because(problem);
        }
        let place = if self.path.is_empty() { "the study" } else { self.path.as_str() };
        let problem = format!("missing from {place}; write {wanted}");
        self.absent(key).because(problem)
    }

    fn mismatch(&self, key: &str, value: Value<'a>, wanted: &str) -> StudyError {
        let kind = match value.get_ref() {
            DeValue::String(_) => "a text",
            DeValue::Integer(_) | DeValue::Float(_) => "a number",
            DeValue::Boolean(_) => "true or false",
            DeValue::Datetime(_) => "a date",
            DeValue::Array(_) => "a list",
            DeValue::Table(_) => "a section",
        };
        self.at(&value.span(), key, true).because(format!("is {kind}; write {wanted}"))
    }

    fn in_range(&self, key: &str, value: Value<'a>, limits: Limits) -> Outcome<f64> {
        let wanted = wanted_number(limits);
        let number = match value.get_ref() {
            DeValue::Float(float) => float.as_str().parse::<f64>().ok(),
            DeValue::Integer(integer) => i64::from_str_radix(integer.as_str(), integer.radix())
                .ok()
                .map(|integer| integer as f64),
            _ => return Err(self.mismatch(key, value, &wanted)),
        };
        let fault = |problem: &str| {
            let place = self.at(&value.span(), key, true);
            Err(place.because(format!("{problem}; write {wanted}")))
        };
        match number {
            Some(number) if !number.is_finite() => fault("is not finite"),
            Some(number) if number < limits.low => fault("is too small"),
            Some(number) if number > limits.high => fault("is too large"),
            Some(number) => Ok(number),
            None => fault("is too large"),
        }
    }

    /// A number that must be there.
    pub fn number(&self, key: &'static str, limits: Limits) -> Outcome<f64> {
        let value = self.value(key).ok_or_else(|| self.missing(key, &wanted_number(limits)))?;
        self.in_range(&self.key(key), value, limits)
    }

    /// A number that may be left out.
    pub fn number_if_any(&self, key: &'static str, limits: Limits) -> Outcome<Option<f64>> {
        let value = self.value(key);
        value.map(|value| self.in_range(&self.key(key), value, limits)).transpose()
    }

    /// A number with a default.
    pub fn number_or(&self, key: &'static str, limits: Limits, otherwise: f64) -> Outcome<f64> {
        Ok(self.number_if_any(key, limits)?.unwrap_or(otherwise))
    }

    /// A whole number that may be left out.
    pub fn count_if_any(&self, key: &'static str, low: u64, high: u64) -> Outcome<Option<u64>> {
        let Some(value) = self.value(key) else { return Ok(None) };
        let wanted = format!("a whole number from {low} to {high}");
        let DeValue::Integer(integer) = value.get_ref() else {
            return Err(self.mismatch(&self.key(key), value, &wanted));
        };
        let count = u64::from_str_radix(integer.as_str(), integer.radix()).ok();
        match count.filter(|count| (low..=high).contains(count)) {
            Some(count) => Ok(Some(count)),
            None => Err(self.wrong(key, format!("is out of range; write {wanted}"))),
        }
    }

    /// A whole number that must be there.
    pub fn count(&self, key: &'static str, low: u64, high: u64) -> Outcome<u64> {
        let wanted = format!("a whole number from {low} to {high}");
        self.count_if_any(key, low, high)?.ok_or_else(|| self.missing(key, &wanted))
    }

    /// A whole number with a default.
    pub fn count_or(&self, key: &'static str, low: u64, high: u64, or: u64) -> Outcome<u64> {
        Ok(self.count_if_any(key, low, high)?.unwrap_or(or))
    }

    /// A switch with a default.
    pub fn flag_or(&self, key: &'static str, otherwise: bool) -> Outcome<bool> {
        match self.value(key) {
            None => Ok(otherwise),
            Some(value) => match value.get_ref().as_bool() {
                Some(flag) => Ok(flag),
                None => Err(self.mismatch(&self.key(key), value, "true or false")),
            },
        }
    }

    /// A text that may be left out.
    pub fn text_if_any(&self, key: &'static str) -> Outcome<Option<&'a str>> {
        let Some(value) = self.value(key) else { return Ok(None) };
        match value.get_ref().as_str() {
            Some(text) if text.trim().is_empty() => Err(self.wrong(key, "is empty; write a text")),
            Some(text) if text.chars().any(char::is_control) => {
                Err(self.wrong(key, "holds control characters; write one line of text"))
            }
            Some(text) => Ok(Some(text)),
            None => Err(self.mismatch(&self.key(key), value, "a text in quotes")),
        }
    }

    /// A text that must be there.
    pub fn text(&self, key: &'static str) -> Outcome<&'a str> {
        self.text_if_any(key)?.ok_or_else(|| self.missing(key, "a text in quotes"))
    }

    /// One of a few words, by position.
    pub fn choice(&self, key: &'static str, words: &[&str]) -> Outcome<usize> {
        let wanted = format!("one of {}", quoted(words));
        let word = self.text_if_any(key)?.ok_or_else(|| self.missing(key, &wanted))?;
        words.iter().position(|candidate| *candidate == word).ok_or_else(|| {
            let hint = suggestion(word, words).map(|near| format!(" (did you mean \"{near}\"?)"));
            self.wrong(key, format!("is unknown{}; write {wanted}", hint.unwrap_or_default()))
        })
    }

    /// One of a few words, by position, with a default.
    pub fn choice_or(&self, key: &'static str, words: &[&str], or: usize) -> Outcome<usize> {
        if self.has(key) { self.choice(key, words) } else { Ok(or) }
    }

    fn child(&self, path: String, value: Value<'a>) -> Outcome<Self> {
        let Some(table) = value.get_ref().as_table() else {
            return Err(self.mismatch(&path, value, "a section"));
        };
        let known = RefCell::default();
        Ok(Self { document: self.document, table, path, span: value.span(), known })
    }

    /// A section that may be left out.
    pub fn section_if_any(&self, key: &'static str) -> Outcome<Option<Self>> {
        self.value(key).map(|value| self.child(self.key(key), value)).transpose()
    }

    /// A section that must be there.
    pub fn section(&self, key: &'static str) -> Outcome<Self> {
        let wanted = format!("a section [{}]", self.key(key));
        self.section_if_any(key)?.ok_or_else(|| self.missing(key, &wanted))
    }

    /// A list of sections; empty if left out.
    pub fn sections(&self, key: &'static str) -> Outcome<Vec<Self>> {
        let Some(value) = self.value(key) else { return Ok(Vec::new()) };
        let Some(array) = value.get_ref().as_array() else {
            let wanted = format!("a list of sections [[{}]]", self.key(key));
            return Err(self.mismatch(&self.key(key), value, &wanted));
        };
        let named = |index: usize| format!("{}[{}]", self.key(key), index + 1);
        array.iter().enumerate().map(|(index, item)| self.child(named(index), item)).collect()
    }

    /// A list of numbers; `None` if left out.
    pub fn numbers_if_any(&self, key: &'static str, limits: Limits) -> Outcome<Option<Vec<f64>>> {
        let Some(value) = self.value(key) else { return Ok(None) };
        let Some(array) = value.get_ref().as_array() else {
            let wanted = format!("a list of numbers, each {}", wanted_number(limits));
            return Err(self.mismatch(&self.key(key), value, &wanted));
        };
        let item = |(index, item): (usize, Value<'a>)| {
            self.in_range(&format!("{}[{}]", self.key(key), index + 1), item, limits)
        };
        array.iter().enumerate().map(item).collect::<Outcome<Vec<f64>>>().map(Some)
    }

    /// A list of exactly `N` numbers; `None` if left out.
    pub fn tuple_if_any<const N: usize>(
        &self,
        key: &'static str,
        limits: Limits,
    ) -> Outcome<Option<[f64; N]>> {
        let Some(numbers) = self.numbers_if_any(key, limits)? else { return Ok(None) };
        let count = numbers.len();
        let fault = |_| self.wrong(key, format!("holds {count} numbers; write {N}"));
        <[f64; N]>::try_from(numbers).map(Some).map_err(fault)
    }

    /// A list of points of two or three coordinates each; `None` if left out.
    pub fn points_if_any(
        &self,
        key: &'static str,
        limits: Limits,
    ) -> Outcome<Option<Vec<Vec<f64>>>> {
        let Some(value) = self.value(key) else { return Ok(None) };
        let wanted = "a list of points [[east, north], ...] in metres";
        let Some(array) = value.get_ref().as_array() else {
            return Err(self.mismatch(&self.key(key), value, wanted));
        };
        let mut points = Vec::with_capacity(array.len());
        for (index, item) in array.iter().enumerate() {
            let path = format!("{}[{}]", self.key(key), index + 1);
            let Some(point) = item.get_ref().as_array() else {
                return Err(self.mismatch(&path, item, "a point [east, north] in metres"));
            };
            if !(2..=3).contains(&point.len()) {
                let place = self.at(&item.span(), &path, true);
                return Err(place.because("write [east, north] or [east, north, up] in metres"));
            }
            let read = point.iter().map(|value| self.in_range(&path, value, limits));
            points.push(read.collect::<Outcome<Vec<f64>>>()?);
        }
        Ok(Some(points))
    }

    /// Refuses keys that nothing asked for.
    pub fn finish(self) -> Outcome<()> {
        let mut known = self.known.borrow().clone();
        known.sort_unstable();
        known.dedup();
        let stray = self.table.keys().filter(|name| !known.contains(&name.get_ref().as_ref()));
        let Some(stray) = stray.min_by_key(|name| name.span().start) else { return Ok(()) };
        let hint = match suggestion(stray.get_ref(), &known) {
            Some(near) => format!("did you mean `{near}`?"),
            None => format!("allowed here: {}", known.join(", ")),
        };
        let place = self.at(&stray.span(), &self.key(stray.get_ref()), false);
        Err(place.because(format!("unknown key; {hint}")))
    }
}

fn wanted_number(limits: Limits) -> String {
    let Limits { low, high, unit } = limits;
    let unit = if unit.is_empty() { String::new() } else { format!(" ({unit})") };
    format!("a number from {low} to {high}{unit}")
}

fn quoted(words: &[&str]) -> String {
    words.iter().map(|word| format!("\"{word}\"")).collect::<Vec<_>>().join(", ")
}
