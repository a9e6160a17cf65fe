//! `[[structure.section]]`: the sections of a compound weir.

use toml::de::DeValue;

use super::section::{Findings, Section, string};
use super::structure::{StationInput, read_choice, read_input, report_kind};
use super::tailwater::read_second_head;
use crate::diagnostic::{Code, Diagnostic};
use crate::model::structures::{
    self, CATALOGUE, CREST_LEVEL, Installation, can_be_section, find, section_inputs,
};

/// More sections than any weir has.
const MOST_SECTIONS: usize = 20;

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
        lowest = lowest.min(of_section[0].value.unwrap_or(f64::NAN));
        sections.push(section);
        inputs.extend(of_section);
    }
    if sections.len() < items.len() {
        return None;
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
    let kinds = || CATALOGUE.iter().filter(|each| can_be_section(each)).map(|each| each.kind);
    let help = format!("one of: {}", kinds().collect::<Vec<_>>().join(", "));
    let value = section.need("kind", &help, findings)?;
    let kind = string("kind", value, findings)?;
    let Some(structure) = find(&kind) else {
        report_kind(&kind, value, kinds(), findings);
        return None;
    };
    if !can_be_section(structure) {
        let title = format!("`{kind}` cannot be a section of a compound weir");
        findings.push(Diagnostic::error(Code::UnknownWord, value.span(), title).help(format!(
            "its head is read inside it, not in an approach that sections share; {help}"
        )));
        return None;
    }
    let mut installation = Installation::plain(structure);
    if let Some(choice) = &structure.choice {
        installation.option = read_choice(&mut section, choice, findings)?;
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
        let Some(mut input) = read_input(&mut section, &spec, findings) else { continue };
        if spec.default_value().is_none() && spec.key != CREST_LEVEL.key {
            given.push(spec.key.to_owned());
        }
        input.key = format!("section {number} {}", spec.key);
        input.symbol = format!("{}_s{number}", spec.symbol);
        inputs.push(input);
    }
    installation.second_head = Some(read_second_head(&mut section, &installation, true, findings));
    section.finish(findings);
    let complete = inputs.first().is_some_and(|input| input.key.ends_with(CREST_LEVEL.key));
    complete.then_some((structures::Section { installation, given }, inputs))
}
