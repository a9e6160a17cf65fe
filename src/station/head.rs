//! `[head]`: the range of heads that the station works over, and its surveyed zero.

use toml::de::DeValue;

use super::quantity::{self, Stated};
use super::section::{Findings, Section, article};
use crate::diagnostic::{Code, Diagnostic};
use crate::units::Dimension;

/// What a file says of the head.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Head {
    /// Lowest and highest indicated head.
    pub range: Option<[Stated; 2]>,
    /// The gauge's zero above the crest, as surveyed: a station whose zero lies below the crest reads
    /// high.
    pub zero_above_crest: Option<Stated>,
    /// The largest head that the structure can take: the top of the plate, the freeboard.
    pub maximum: Option<Stated>,
    /// How far upstream of the crest or throat the head is read.
    pub gauge_distance: Option<Stated>,
}

impl Head {
    /// The largest head that is to be expected: the stated maximum, or the end of the range.
    pub fn largest(&self) -> Option<&Stated> {
        self.maximum.as_ref().or(self.range.as_ref().map(|[_, high]| high))
    }
}

pub(super) fn read(mut section: Section<'_, '_>, findings: &mut Findings<'_>) -> Head {
    let mut head = Head::default();
    let length = Some(Dimension::LENGTH);
    if let Some(value) = section.get("range") {
        match value.get_ref() {
            DeValue::Array(items) if items.len() == 2 => {
                let ends: Vec<Stated> = items
                    .iter()
                    .filter_map(|item| quantity::read("range", item, length, findings))
                    .collect();
                if let Ok([low, high]) = <[Stated; 2]>::try_from(ends) {
                    check_order(&low, &high, value.span(), findings);
                    head.range = Some([low, high]);
                }
            }
            other => findings.push(
                Diagnostic::error(
                    Code::WrongType,
                    value.span(),
                    match other {
                        DeValue::Array(items) => {
                            format!(
                                "`range` has two heads, the lower and the higher, not {}",
                                items.len()
                            )
                        }
                        other => format!("`range` is a list of two heads, not {}", article(other)),
                    },
                )
                .help("for example range = [\"0.06 m\", \"0.30 m\"]"),
            ),
        }
    }
    if let Some(value) = section.get("zero_above_crest") {
        head.zero_above_crest = quantity::read("zero_above_crest", value, length, findings);
        if let Some(zero) = head.zero_above_crest.as_ref().filter(|zero| zero.value.abs() > 5.0) {
            let title =
                format!("`zero_above_crest` cannot be {}: it is an offset of the gauge", zero.text);
            findings.error(Code::OutsideDomain, value.span(), title);
        }
    }
    head.maximum = read_length("maximum", [1e-3, 20.0], &mut section, findings);
    head.gauge_distance = read_length("gauge_distance", [0.0, 1000.0], &mut section, findings);
    if let (Some([_, high]), Some(maximum)) = (&head.range, &head.maximum)
        && high.value > maximum.value
    {
        let title = format!("`range` ends at {}, above the maximum of {}", high.text, maximum.text);
        findings.push(
            Diagnostic::error(Code::OutsideDomain, high.span.clone(), title)
                .context(maximum.span.clone(), "more the structure cannot take")
                .help("end the range at the maximum, or mend the maximum"),
        );
    }
    section.finish(findings);
    head
}

fn read_length(
    key: &str,
    domain: [f64; 2],
    section: &mut Section<'_, '_>,
    findings: &mut Findings<'_>,
) -> Option<Stated> {
    let value = section.get(key)?;
    let stated = quantity::read(key, value, Some(Dimension::LENGTH), findings)?;
    let [low, high] = domain;
    if !(low..=high).contains(&stated.value) {
        let title = format!("`{key}` cannot be {}: {low} m to {high} m is due", stated.text);
        findings.error(Code::OutsideDomain, value.span(), title);
        return None;
    }
    Some(stated)
}

fn check_order(
    low: &Stated,
    high: &Stated,
    span: crate::diagnostic::Span,
    findings: &mut Findings<'_>,
) {
    if low.value == high.value {
        let title = format!("`range` begins and ends at {}", low.text);
        findings.error(Code::RangeReversed, span, title);
    } else if low.value > high.value {
        findings.push(
            Diagnostic::error(
                Code::RangeReversed,
                span.clone(),
                format!("`range` runs from {} down to {}", low.text, high.text),
            )
            .help("the lower head comes first")
            .fix(span, format!("[\"{}\", \"{}\"]", high.text, low.text)),
        );
    }
    if high.value <= 0.0 {
        let title = format!("`range` ends at {}, where no water passes the crest", high.text);
        findings.error(Code::OutsideDomain, high.span.clone(), title);
    }
    for end in [low, high] {
        if !(-1.0..=20.0).contains(&end.value) {
            let title = format!("`range`: {} is no head that a station can have", end.text);
            findings.error(Code::OutsideDomain, end.span.clone(), title);
        }
    }
}
