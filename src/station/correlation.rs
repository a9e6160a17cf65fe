//! `[[correlation]]`: sources whose errors go together.

use super::section::{Findings, Section, number, string};
use crate::diagnostic::{Code, Diagnostic, Span, listed, nearest, shown};

/// A correlation as a file states it.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct StatedCorrelation {
    pub(super) names: [String; 2],
    pub(super) coefficient: f64,
    pub(super) span: Span,
}

pub(super) fn read(
    mut section: Section<'_, '_>,
    sources: &[String],
    findings: &mut Findings<'_>,
) -> Option<StatedCorrelation> {
    let span = section.span.clone();
    let names = read_names(&mut section, sources, findings);
    let help = "a number from -1 to 1";
    let coefficient = section.need("coefficient", help, findings).and_then(|value| {
        let coefficient = number(value.get_ref()).filter(|r| (-1.0..=1.0).contains(r));
        if coefficient.is_none() {
            let title = "`coefficient` is a number from -1 to 1";
            findings.error(Code::OutsideDomain, value.span(), title);
        }
        coefficient
    });
    section.finish(findings);
    Some(StatedCorrelation { names: names?, coefficient: coefficient?, span })
}

fn read_names(
    section: &mut Section<'_, '_>,
    sources: &[String],
    findings: &mut Findings<'_>,
) -> Option<[String; 2]> {
    let help = "two names, for example sources = [\"gauge\", \"zero\"]";
    section.need("sources", help, findings)?;
    let (items, span) = section.list("sources")?;
    let mut names = Vec::new();
    for item in &items {
        let name = string("sources", item, findings)?;
        if !sources.contains(&name) {
            let shown = shown(&name);
            let title = format!("there is no source `{shown}`");
            let diagnostic = Diagnostic::error(Code::UnknownSource, item.span(), title);
            findings.push(match nearest(&name, sources.iter().map(String::as_str)) {
                Some(near) => diagnostic
                    .help(format!("the nearest is `{near}`"))
                    .fix(item.span(), format!("\"{near}\"")),
                None => diagnostic
                    .help(format!("sources: {}", listed(sources.iter().map(String::as_str)))),
            });
            return None;
        }
        names.push(name);
    }
    match <[String; 2]>::try_from(names) {
        Ok(names) if names[0] != names[1] => Some(names),
        _ => {
            let title = "a correlation has two different sources";
            findings.error(Code::OutsideDomain, span, title);
            None
        }
    }
}
