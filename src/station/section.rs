//! Walking over the tables of a TOML file, with every fault noted and none fatal.

use std::collections::BTreeSet;
use std::ops::Range;

use toml::Spanned;
use toml::de::{DeTable, DeValue};

use crate::diagnostic::{Code, Diagnostic, Span, listed, nearest, shown};

/// The text of a file and what has been found wrong with it.
#[derive(Debug)]
pub(super) struct Findings<'t> {
    text: &'t str,
    pub(super) list: Vec<Diagnostic>,
}

impl<'t> Findings<'t> {
    pub(super) fn new(text: &'t str) -> Self {
        Self { text, list: Vec::new() }
    }

    pub(super) fn push(&mut self, diagnostic: Diagnostic) {
        self.list.push(diagnostic);
    }

    pub(super) fn error(&mut self, code: Code, span: Span, title: impl Into<String>) {
        self.list.push(Diagnostic::error(code, span, title));
    }

    /// The place in the file of a part of a string's content. Where the string holds escapes, places
    /// inside do not carry over, and the whole string is meant.
    pub(super) fn inside(&self, string: &Span, content: &str, part: &Range<usize>) -> Span {
        let start = string.start + 1;
        match self.text.get(start..start + content.len()) {
            Some(found) if found == content => start + part.start..start + part.end,
            _ => string.clone(),
        }
    }
}

/// A table of the file that is being read: it remembers which keys it was asked for, and complains of
/// the others.
#[derive(Debug)]
pub(super) struct Section<'a, 'i> {
    /// What the table is, for messages: `[head]`.
    name: String,
    /// Its header.
    pub(super) span: Span,
    table: &'a DeTable<'i>,
    known: BTreeSet<String>,
}

impl<'a, 'i> Section<'a, 'i> {
    pub(super) fn new(name: impl Into<String>, span: Span, table: &'a DeTable<'i>) -> Self {
        Self { name: name.into(), span, table, known: BTreeSet::new() }
    }

    /// The table that a value is; a fault if it is something else.
    pub(super) fn of(
        name: impl Into<String>,
        value: &'a Spanned<DeValue<'i>>,
        findings: &mut Findings<'_>,
    ) -> Option<Self> {
        let name = name.into();
        match value.get_ref() {
            DeValue::Table(table) => Some(Self::new(name, value.span(), table)),
            other => {
                findings.push(
                    Diagnostic::error(
                        Code::WrongType,
                        value.span(),
                        format!("{name} is a table, not {}", article(other)),
                    )
                    .help(format!("write {name} on a line of its own, with its keys below")),
                );
                None
            }
        }
    }

    pub(super) fn name(&self) -> &str {
        &self.name
    }

    /// The value of a key, if it is there.
    pub(super) fn get(&mut self, key: &str) -> Option<&'a Spanned<DeValue<'i>>> {
        self.known.insert(key.to_owned());
        self.table.iter().find(|(name, _)| name.get_ref() == key).map(|(_, value)| value)
    }

    /// The value of a key that has to be there. Where a key stands that looks like a slip of it, only
    /// the slip is reported.
    pub(super) fn need(
        &mut self,
        key: &str,
        help: &str,
        findings: &mut Findings<'_>,
    ) -> Option<&'a Spanned<DeValue<'i>>> {
        let value = self.get(key);
        if value.is_none() && !self.has_slip_of(&[key]) {
            let title = format!("{} needs `{key}`", self.name);
            findings.push(if self.span.is_empty() {
                Diagnostic::about_file(Code::MissingKey, title).help(help)
            } else {
                Diagnostic::error(Code::MissingKey, self.span.clone(), title).help(help)
            });
        }
        value
    }

    /// Some key of the table looks like a slip of one of these.
    pub(super) fn has_slip_of(&self, keys: &[&str]) -> bool {
        self.table
            .iter()
            .map(|(name, _)| name.get_ref())
            .any(|name| nearest(name, keys.iter().copied()).is_some_and(|near| near != name))
    }

    /// A text, with its place.
    pub(super) fn text(
        &mut self,
        key: &str,
        findings: &mut Findings<'_>,
    ) -> Option<(String, Span)> {
        let value = self.get(key)?;
        let text = string(key, value, findings)?;
        Some((text, value.span()))
    }

    /// A text, without a word if it is none: for a first look.
    pub(super) fn peek(&self, key: &str) -> Option<String> {
        let (_, value) = self.table.iter().find(|(name, _)| name.get_ref() == key)?;
        value.get_ref().as_str().map(str::to_owned)
    }

    /// A list, with its place; an item that stands alone counts as a list of one.
    pub(super) fn list(&mut self, key: &str) -> Option<(Vec<&'a Spanned<DeValue<'i>>>, Span)> {
        let value = self.get(key)?;
        let items = match value.get_ref() {
            DeValue::Array(items) => items.iter().collect(),
            _ => vec![value],
        };
        Some((items, value.span()))
    }

    /// The place of a key that is there.
    pub(super) fn key_span(&self, key: &str) -> Option<Span> {
        self.table.iter().find(|(name, _)| name.get_ref() == key).map(|(name, _)| name.span())
    }

    /// All keys with their values, as known keys.
    pub(super) fn entries(&mut self) -> Vec<(String, Span, &'a Spanned<DeValue<'i>>)> {
        self.known.extend(self.table.iter().map(|(name, _)| name.get_ref().to_string()));
        self.table
            .iter()
            .map(|(name, value)| (name.get_ref().to_string(), name.span(), value))
            .collect()
    }

    /// Complains of every key that was not asked for.
    pub(super) fn finish(self, findings: &mut Findings<'_>) {
        for (name, _) in self.table {
            let key: &str = name.get_ref();
            if self.known.contains(key) {
                continue;
            }
            let shown = shown(key);
            let title = format!("unknown key `{shown}` in {}", self.name);
            let mut diagnostic = Diagnostic::error(Code::UnknownKey, name.span(), title);
            if let Some(known) = nearest(key, self.known.iter().map(String::as_str)) {
                diagnostic = diagnostic
                    .help(format!("the nearest known key is `{known}`"))
                    .fix(name.span(), known);
            } else {
                let keys = self.known.iter().map(String::as_str);
                diagnostic = diagnostic.help(format!("known keys: {}", listed(keys)));
            }
            findings.push(diagnostic);
        }
    }
}

/// The text that a value is; a fault if it is something else.
pub(super) fn string(
    what: &str,
    value: &Spanned<DeValue<'_>>,
    findings: &mut Findings<'_>,
) -> Option<String> {
    match value.get_ref() {
        DeValue::String(text) => Some(text.to_string()),
        other => {
            let title = format!("`{what}` is a text in quotes, not {}", article(other));
            findings.error(Code::WrongType, value.span(), title);
            None
        }
    }
}

/// The number that a value is, if it is one.
pub(super) fn number(value: &DeValue<'_>) -> Option<f64> {
    match value {
        DeValue::Integer(integer) if integer.radix() == 10 => {
            integer.as_str().replace('_', "").parse().ok()
        }
        DeValue::Float(float) => float.as_str().replace('_', "").parse().ok(),
        _ => None,
    }
}

/// What a value is, with its article.
pub(super) fn article(value: &DeValue<'_>) -> &'static str {
    match value {
        DeValue::String(_) => "a text",
        DeValue::Integer(_) | DeValue::Float(_) => "a number",
        DeValue::Boolean(_) => "true or false",
        DeValue::Datetime(_) => "a date",
        DeValue::Array(_) => "a list",
        DeValue::Table(_) => "a table",
    }
}
