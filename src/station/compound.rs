//! `[[structure.section]]`: the sections of a compound weir.

use toml::de::DeValue;

use super::section::{Findings, Section, string};
use super::structure::{StationInput, input_without_value, read_choice, read_input, report_kind};
use super::tailwater::read_second_head;
use crate::diagnostic::{Code, Diagnostic};
use crate::model::structures::{
    self, CATALOGUE, COMPOUND, CREST_LEVEL, Installation, find, section_inputs, section_key,
    section_symbol,
};

/// More sections than any weir has.
const MOST_SECTIONS: usize = 20;
/// Sections that each solve for a depth of their own: more would take minutes.
const MOST_SOLVED: usize = 6;

/// The sections, and their inputs one section after the other. `None` if one cannot be told, as the
/// inputs are then not known.
pub(super) fn read(
    structure: &mut Section<'_, '_>,
    findings: &mut Findings<'_>,
) -> Option<(Vec<structures::Section>, Vec<StationInput>)> {
    let help = "a compound weir has its sections, each under [[structure.section]] with its kind and \
                crest_level";
    let value = structure.need("section", help, findings)?;
    let items: &[_] = match value.get_ref() {
        DeValue::Array(items) => items,
        _ => &[],
    };
    if !(2..=MOST_SECTIONS).contains(&items.len()) {
        let title = format!("a compound weir has 2 to {MOST_SECTIONS} sections");
        findings.push(Diagnostic::error(Code::WrongType, value.span(), title).help(help));
        return None;
    }
    let (mut sections, mut inputs) = (Vec::new(), Vec::new());
    let mut lowest = f64::INFINITY;
    for (number, item) in (1..).zip(items) {
        let section = Section::of("[[structure.section]]", item, findings);
        let read = section.and_then(|section| read_section(section, number, findings));
        let Some((section, of_section)) = read else { continue };
        // A level with a fault is reported; it is no reason to miss the lowest as well.
        lowest = lowest.min(of_section[0].value.unwrap_or(0.0));
        sections.push(section);
        inputs.extend(of_section);
    }
    if sections.len() < items.len() {
        return None;
    }
    let solved = |section: &structures::Section| {
        section.installation.structure.regimes.iter().any(|regime| regime.solved.is_some())
    };
    if sections.iter().filter(|section| solved(section)).count() > MOST_SOLVED {
        let title = format!(
            "a compound weir has at most {MOST_SOLVED} sections whose critical depth is solved for"
        );
        findings.error(Code::OutsideDomain, value.span(), title);
    }
    if lowest > 0.0 {
        let title = "no section has crest_level = \"0 m\"";
        findings.push(
            Diagnostic::error(Code::OutsideDomain, value.span(), title)
                .help("levels are above the lowest crest, and the head is above it"),
        );
    }
    Some((sections, inputs))
}

fn read_section(
    mut section: Section<'_, '_>,
    number: usize,
    findings: &mut Findings<'_>,
) -> Option<(structures::Section, Vec<StationInput>)> {
    let kinds = || CATALOGUE.iter().filter(|each| each.head_in_approach).map(|each| each.kind);
    let help = format!("one of: {}", kinds().collect::<Vec<_>>().join(", "));
    let value = section.need("kind", &help, findings)?;
    let kind = string("kind", value, findings)?;
    let Some(structure) = find(&kind) else {
        report_kind(&kind, value, kinds(), findings);
        return None;
    };
    if !structure.head_in_approach {
        let title = format!("`{kind}` cannot be a section of a compound weir");
        let why = if kind == COMPOUND {
            "a section is a single structure"
        } else {
            "its head is read inside it, not in an approach that sections share"
        };
        findings.push(
            Diagnostic::error(Code::UnknownWord, value.span(), title)
                .help(format!("{why}; {help}")),
        );
        return None;
    }
    let mut installation = Installation::plain(structure);
    if let Some(choice) = &structure.choice {
        installation.set = read_choice(&mut section, choice, findings)?;
    }
    let mut given = Vec::new();
    let mut inputs = Vec::new();
    for spec in std::iter::once(CREST_LEVEL).chain(section_inputs(structure)) {
        let is_given = section.key_span(spec.key).is_some();
        // What has no value and may be left out is no input of this section.
        if !is_given && spec.default.is_some() && spec.default_value().is_none() {
            section.get(spec.key);
            continue;
        }
        if spec.default_value().is_none() && spec.key != CREST_LEVEL.key {
            given.push(spec.key.to_owned());
        }
        // An input with a fault stays an input, so that what acts on it is not reported as well.
        let input = read_input(&mut section, &spec, findings)
            .unwrap_or_else(|| input_without_value(&spec.into()));
        inputs.push(StationInput {
            key: section_key(number, spec.key),
            symbol: section_symbol(number, spec.symbol),
            ..input
        });
    }
    installation.second_head = Some(read_second_head(&mut section, &installation, true, findings));
    section.finish(findings);
    Some((structures::Section { installation, given }, inputs))
}
