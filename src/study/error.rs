//! One message for whatever is wrong with a study.

use core::fmt;
use core::ops::Range;
use std::path::{Path, PathBuf};

/// What is wrong with a study, with its place in the file.
///
/// Displayed as `file:line: key = value: problem`, followed by the line itself.
#[derive(Clone, Debug, PartialEq)]
pub struct StudyError {
    /// The file.
    pub file: PathBuf,
    /// The line, from 1; absent if the file as a whole is at fault.
    pub line: Option<usize>,
    /// The key with its sections, such as `telescope[2].mirror_area_m2`; empty if none.
    pub key: String,
    /// The value as written; empty if there is none.
    pub value: String,
    /// What is wrong and what is allowed.
    pub problem: String,
    /// The line of the file, and the columns that the fault covers.
    excerpt: Option<(String, Range<usize>)>,
}

impl core::error::Error for StudyError {}

/// Longest piece of a file that a message repeats.
const EXCERPT_CHARACTERS: usize = 100;

impl StudyError {
    /// An error about a file as a whole.
    pub fn of_file(file: &Path, problem: impl Into<String>) -> Self {
        Self {
            file: file.to_owned(),
            line: None,
            key: String::new(),
            value: String::new(),
            problem: problem.into(),
            excerpt: None,
        }
    }

    /// An error at a byte range of the file's text.
    pub(super) fn at(file: &Path, text: &str, span: &Range<usize>, key: &str, value: bool) -> Self {
        let start = floor(text, span.start.min(text.len()));
        let begin = text[..start].rfind('\n').map_or(0, |at| at + 1);
        let end = text[start..].find('\n').map_or(text.len(), |at| start + at);
        let stop = floor(text, span.end.clamp(start, end));
        let line: String = text[begin..end].chars().take(EXCERPT_CHARACTERS).collect();
        let first = text[begin..start].chars().count();
        let marked = text[start..stop].chars().count().max(1);
        let written = floor(text, span.end.clamp(start, text.len()));
        Self {
            file: file.to_owned(),
            line: Some(text[..start].matches('\n').count() + 1),
            key: key.to_owned(),
            value: if value { shortened(&text[start..written]) } else { String::new() },
            problem: String::new(),
            excerpt: (first < EXCERPT_CHARACTERS)
                .then(|| (line, first..(first + marked).min(EXCERPT_CHARACTERS))),
        }
    }

    /// The same place with its problem stated.
    pub(super) fn because(mut self, problem: impl Into<String>) -> Self {
        self.problem = problem.into();
        self
    }
}

/// The start of the character that holds a byte.
fn floor(text: &str, mut at: usize) -> usize {
    while !text.is_char_boundary(at) {
        at -= 1;
    }
    at
}

/// One line of at most sixty characters.
fn shortened(value: &str) -> String {
    let line = value.split_whitespace().collect::<Vec<_>>().join(" ");
    if line.chars().count() <= 60 {
        return line;
    }
    line.chars().take(57).chain("...".chars()).collect()
}

impl fmt::Display for StudyError {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(out, "{}", self.file.display())?;
        if let Some(line) = self.line {
            write!(out, ":{line}")?;
        }
        write!(out, ": ")?;
        match (self.key.is_empty(), self.value.is_empty()) {
            (false, false) => write!(out, "`{}` = {}: ", self.key, self.value)?,
            (false, true) => write!(out, "`{}`: ", self.key)?,
            _ => {}
        }
        write!(out, "{}", self.problem)?;
        if let (Some(line), Some((text, columns))) = (self.line, &self.excerpt) {
            let gutter = " ".repeat(line.to_string().len());
            let text: String = text.chars().map(|c| if c == '\t' { ' ' } else { c }).collect();
            write!(out, "\n {gutter} |\n {line} | {}\n {gutter} | ", text.trim_end())?;
            write!(out, "{}{}", " ".repeat(columns.start), "^".repeat(columns.len().max(1)))?;
        }
        Ok(())
    }
}
