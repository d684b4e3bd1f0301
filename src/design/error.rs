//! One error for everything a design file can get wrong: what, where, and what would be accepted.

use std::fmt;
use std::ops::Range;
use std::sync::Arc;

use miette::{Diagnostic, LabeledSpan, NamedSource, SourceCode};

/// A text that values come from: a design file, a catalogue, one `--set`.
#[derive(Debug, PartialEq)]
pub struct SourceText {
    /// As it is shown: the file's path, or "--set".
    pub name: String,
    /// The whole text.
    pub text: String,
}

/// Where in which text something stands.
#[derive(Clone, Debug, PartialEq)]
pub struct Place {
    /// The text.
    pub source: Arc<SourceText>,
    /// Bytes of it.
    pub range: Range<usize>,
}

impl Place {
    /// The line, counted from 1.
    pub fn line(&self) -> usize {
        let end = self.range.start.min(self.source.text.len());
        self.source.text.as_bytes()[..end]
            .iter()
            .filter(|b| **b == b'\n')
            .count()
            + 1
    }
}

/// A fault of a design, its place underlined. It always means exit code 2.
#[derive(Clone)]
pub struct DesignError(Box<Inner>);

#[derive(Clone)]
struct Inner {
    message: String,
    help: String,
    place: Option<Place>,
    code: Option<NamedSource<Arc<str>>>,
}

impl DesignError {
    /// `message` says what is wrong, `help` what would be accepted (may be empty).
    pub fn new(place: Option<&Place>, message: impl Into<String>, help: impl Into<String>) -> Self {
        let code =
            place.map(|p| NamedSource::new(&p.source.name, Arc::from(p.source.text.as_str())));
        DesignError(Box::new(Inner {
            message: message.into(),
            help: help.into(),
            place: place.cloned(),
            code,
        }))
    }

    /// What would be accepted.
    pub fn help_text(&self) -> &str {
        &self.0.help
    }

    /// Where the fault stands.
    pub fn place(&self) -> Option<&Place> {
        self.0.place.as_ref()
    }

    /// The line of the fault in its text, counted from 1.
    pub fn line(&self) -> Option<usize> {
        self.place().map(Place::line)
    }

    /// The text that is underlined.
    pub fn underlined(&self) -> Option<&str> {
        self.place()
            .and_then(|p| p.source.text.get(p.range.clone()))
    }
}

impl fmt::Display for DesignError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.0.message)
    }
}

impl fmt::Debug for DesignError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "{} (line {:?}; {})",
            self.0.message,
            self.line(),
            self.0.help
        )
    }
}

impl std::error::Error for DesignError {}

impl Diagnostic for DesignError {
    fn help<'a>(&'a self) -> Option<Box<dyn fmt::Display + 'a>> {
        (!self.0.help.is_empty()).then(|| Box::new(&self.0.help) as Box<dyn fmt::Display>)
    }

    fn source_code(&self) -> Option<&dyn SourceCode> {
        self.0.code.as_ref().map(|code| code as &dyn SourceCode)
    }

    fn labels(&self) -> Option<Box<dyn Iterator<Item = LabeledSpan> + '_>> {
        let place = self.0.place.as_ref()?;
        let span = LabeledSpan::underline((place.range.start, place.range.len()));
        Some(Box::new(std::iter::once(span)))
    }
}
