//! Drawing findings with the line and the place marked.

use std::io::Write;
use std::path::Path;

use annotate_snippets::renderer::DecorStyle;
use annotate_snippets::{AnnotationKind, Level, Patch, Renderer, Snippet};

use crate::diagnostic::{Diagnostic, Severity};

/// Longer lines are cut before they are shown: a junk file may be one line of a megabyte.
const LONGEST_LINE: usize = 400;

/// Prints findings on standard error, with a count at the end.
pub(super) fn print(path: &Path, text: &str, list: &[Diagnostic]) {
    let mut out = anstream::stderr();
    let name = path.display().to_string();
    for diagnostic in list {
        let _ = writeln!(out, "{}\n", render(&name, text, diagnostic));
    }
    let errors = list.iter().filter(|each| each.severity == Severity::Error).count();
    if errors > 0 {
        let word = if errors == 1 { "error" } else { "errors" };
        let _ = writeln!(out, "{errors} {word} in {name}");
    }
}

fn render(name: &str, text: &str, diagnostic: &Diagnostic) -> String {
    let level = match diagnostic.severity {
        Severity::Error => Level::ERROR,
        Severity::Warning => Level::WARNING,
    };
    let title = level.primary_title(visible(&diagnostic.title)).id(diagnostic.code.as_str());
    let drawable = diagnostic.labels.iter().all(|label| drawable(text, &label.span));
    let mut first = match diagnostic.labels.split_first() {
        Some((primary, others)) if drawable => {
            let spans = others.iter().map(|label| {
                AnnotationKind::Context.span(label.span.clone()).label(label.text.as_str())
            });
            title.element(
                Snippet::source(text)
                    .path(name)
                    .annotation(
                        AnnotationKind::Primary
                            .span(primary.span.clone())
                            .label(Some(primary.text.as_str()).filter(|text| !text.is_empty())),
                    )
                    .annotations(spans),
            )
        }
        Some((primary, _)) => {
            let before = text.get(..primary.span.start).unwrap_or_default();
            let line = before.matches('\n').count() + 1;
            let column = before.rsplit('\n').next().map_or(0, |start| start.chars().count()) + 1;
            title.element(Level::NOTE.message(format!("{name}, line {line}, column {column}")))
        }
        None => title.element(Level::NOTE.message(name.to_owned())),
    };
    let fix = diagnostic.fix.as_ref().filter(|fix| drawable && self::drawable(text, &fix.span));
    let mut groups = Vec::new();
    match (fix, &diagnostic.help) {
        (Some(fix), help) => {
            let words = help.as_deref().unwrap_or("mend it like this").to_owned();
            let patch = Patch::new(fix.span.clone(), fix.replacement.as_str());
            groups.push(first);
            groups.push(
                Level::HELP
                    .secondary_title(visible(&words))
                    .element(Snippet::source(text).path(name).patch(patch)),
            );
        }
        (None, Some(help)) => {
            first = first.element(Level::HELP.message(visible(help)));
            groups.push(first);
        }
        (None, None) => groups.push(first),
    }
    Renderer::styled().decor_style(DecorStyle::Ascii).render(&groups)
}

/// A place on lines that are short enough to be shown.
fn drawable(text: &str, span: &std::ops::Range<usize>) -> bool {
    let (Some(before), Some(after)) = (text.get(..span.start), text.get(span.end..)) else {
        return false;
    };
    let start = before.rfind('\n').map_or(0, |at| at + 1);
    let end = span.end + after.find('\n').unwrap_or(after.len());
    end - start <= LONGEST_LINE
}

/// Text without control characters, which could rewrite a terminal.
fn visible(text: &str) -> String {
    text.chars().map(|c| if c.is_control() { '\u{fffd}' } else { c }).collect()
}
