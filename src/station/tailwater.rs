//! `[tailwater]`: the level below the structure, or at its crest tapping, and which drowned-flow equation
//! takes over.

use toml::Spanned;
use toml::de::DeValue;

use super::quantity::{self, Stated};
use super::section::{Findings, Section, string};
use super::structure::{StationInput, input_without_value, read_value};
use crate::diagnostic::{Code, Diagnostic, nearest, shown};
use crate::model::expression::Table;
use crate::model::structures::{Installation, SecondHead, TAILWATER_HEAD};
use crate::units::{Dimension, Unit};

/// Where the level of the tailwater comes from.
#[derive(Clone, Debug, PartialEq)]
pub enum Tailwater {
    /// It is always the same.
    Level,
    /// It follows the discharge.
    Rating(Table),
    /// It is a column of the record.
    Column {
        /// Its name.
        name: String,
        /// The unit of its values.
        unit: Unit,
    },
}

/// More points than a rating by hand has.
const MOST_POINTS: usize = 1000;
/// The name of the rating in the equation.
const RATING: &str = "tailwater_rating";
/// That the level on file is no head of a drowned-flow equation.
const NO_EQUATION: &str = "none";

/// Reads the table, tells the installation of the second head, and adds the inputs that come with it.
pub(super) fn read(
    mut section: Section<'_, '_>,
    installation: &mut Installation,
    inputs: &mut Vec<StationInput>,
    findings: &mut Findings<'_>,
) -> Option<Tailwater> {
    let level = section.get("level");
    let table = section.get("table");
    let column = section.get("column");
    let unit = section.text("unit", findings);
    let drowned = read_drowned(&mut section, installation, findings);
    let modular_limit = read_limit(&mut section, findings);
    let mut input = input_without_value(&TAILWATER_HEAD.into());
    let tailwater = match (level, table, column) {
        (Some(level), None, None) => {
            input = read_value(TAILWATER_HEAD.key, level, Some(Dimension::LENGTH), findings)
                .unwrap_or(input);
            check_level(&input, findings);
            Some(Tailwater::Level)
        }
        (None, Some(table), None) => read_rating(table, findings).map(Tailwater::Rating),
        (None, None, Some(column)) => read_column(column, unit.as_ref(), findings),
        _ => {
            let span = section.span.clone();
            let title = "[tailwater] says where the level comes from in exactly one way";
            let help = "level = \"-0.10 m\" above the crest; or table = [[\"10 l/s\", \"-50 mm\"], ...], \
                        level against discharge; or column = \"...\" of the record, with its unit";
            findings.push(Diagnostic::error(Code::KeysDisagree, span, title).help(help));
            None
        }
    };
    if let Some((_, span)) = unit.filter(|_| column.is_none()) {
        let title = "`unit` belongs to a column of the record";
        findings.error(Code::KeysDisagree, span, title);
    }
    check_modular_limit(installation, modular_limit, &section, findings);
    section.finish(findings);
    let rating = match &tailwater {
        Some(Tailwater::Rating(table)) => Some((table.clone(), 0.0)),
        _ => None,
    };
    for section in &mut installation.sections {
        let drowned = section.installation.drowned().first().copied();
        section.installation.second_head =
            Some(SecondHead { drowned, modular_limit: None, rating: None });
    }
    installation.second_head = Some(SecondHead { drowned, modular_limit, rating });
    add_inputs(installation, &input, inputs);
    tailwater
}

/// The inputs that the second head brings, in the order of the installation.
fn add_inputs(
    installation: &Installation,
    tailwater: &StationInput,
    inputs: &mut Vec<StationInput>,
) {
    let mut stated = std::mem::take(inputs);
    for due in installation.inputs() {
        let found = stated.iter().position(|input| input.key == due.key);
        inputs.push(match found {
            Some(place) => stated.remove(place),
            None if due.key == TAILWATER_HEAD.key => {
                StationInput { symbol: due.symbol, ..tailwater.clone() }
            }
            None => input_without_value(&due),
        });
    }
}

fn check_level(input: &StationInput, findings: &mut Findings<'_>) {
    let [low, high] = TAILWATER_HEAD.domain;
    if let (Some(value), Some(span)) = (input.value, input.span.clone())
        && !(low..=high).contains(&value)
    {
        let title = format!("`level` cannot be {}: it is a head above the crest", input.text);
        findings.error(Code::OutsideDomain, span, title);
    }
}

/// Pairs of discharge and level, in increasing discharge.
fn read_rating(value: &Spanned<DeValue<'_>>, findings: &mut Findings<'_>) -> Option<Table> {
    let help = "table = [[\"0 l/s\", \"-80 mm\"], [\"50 l/s\", \"120 mm\"]]: discharge and level above the \
                crest, in increasing discharge";
    let mut wrong = |span, title: String| {
        findings.push(Diagnostic::error(Code::WrongType, span, title).help(help));
        None
    };
    let DeValue::Array(items) = value.get_ref() else {
        return wrong(value.span(), "`table` is a list of pairs".to_owned());
    };
    if !(2..=MOST_POINTS).contains(&items.len()) {
        return wrong(value.span(), format!("`table` has 2 to {MOST_POINTS} pairs"));
    }
    let mut points: Vec<[Stated; 2]> = Vec::new();
    for item in items {
        let pair = match item.get_ref() {
            DeValue::Array(pair) if pair.len() == 2 => pair,
            _ => {
                let title = "a point of `table` is a pair of discharge and level".to_owned();
                findings.push(Diagnostic::error(Code::WrongType, item.span(), title).help(help));
                return None;
            }
        };
        let flow = quantity::read("table", &pair[0], Some(Dimension::DISCHARGE), findings);
        let level = quantity::read("table", &pair[1], Some(Dimension::LENGTH), findings);
        points.push([flow?, level?]);
    }
    for pair in points.windows(2) {
        if pair[1][0].value <= pair[0][0].value {
            let title = format!(
                "`table`: the discharge {} does not come after {}",
                pair[1][0].text, pair[0][0].text
            );
            let span = pair[1][0].span.clone();
            findings.push(Diagnostic::error(Code::RangeReversed, span, title).help(help));
            return None;
        }
        if pair[1][1].value < pair[0][1].value {
            let title = "`table`: the tailwater falls while the discharge rises";
            let span = pair[1][1].span.clone();
            findings.push(Diagnostic::error(Code::RangeReversed, span, title).help(help));
            return None;
        }
    }
    let column = |place: usize| points.iter().map(|p| p[place].value).collect::<Vec<f64>>();
    Table::line(RATING, &column(0), &column(1))
}

fn read_column(
    value: &Spanned<DeValue<'_>>,
    unit: Option<&(String, crate::diagnostic::Span)>,
    findings: &mut Findings<'_>,
) -> Option<Tailwater> {
    let name = string("column", value, findings)?;
    let Some((text, span)) = unit else {
        let title = "`column` needs `unit`: that of its values";
        findings.push(
            Diagnostic::error(Code::MissingKey, value.span(), title)
                .help("for example unit = \"mm\""),
        );
        return None;
    };
    let unit = Unit::parse(text).ok().filter(|unit| unit.dimension() == Dimension::LENGTH);
    if unit.is_none() {
        let title = format!("`unit` cannot be \"{}\": a length is due", shown(text));
        findings.push(
            Diagnostic::error(Code::UnknownUnit, span.clone(), title)
                .help(format!("units that would do: {}", Dimension::LENGTH.usual_units())),
        );
    }
    Some(Tailwater::Column { name, unit: unit? })
}

/// Which of the structure's drowned-flow equations takes over: the first that is published for it, unless
/// the file chooses.
fn read_drowned(
    section: &mut Section<'_, '_>,
    installation: &Installation,
    findings: &mut Findings<'_>,
) -> Option<usize> {
    let published = installation.drowned();
    let Some((word, span)) = section.text("drowned_flow", findings) else {
        return published.first().copied();
    };
    if word == NO_EQUATION {
        return None;
    }
    let name = |index: &usize| installation.structure.drowned[*index].name;
    let found = published.iter().find(|index| name(index) == word).copied();
    if found.is_none() {
        let mut words: Vec<&str> = published.iter().map(name).collect();
        words.push(NO_EQUATION);
        let title =
            format!("`drowned_flow`: \"{}\" is not published for this structure", shown(&word));
        let diagnostic = Diagnostic::error(Code::UnknownWord, span.clone(), title)
            .help(format!("one of: {}", words.join(", ")));
        findings.push(match nearest(&word, words) {
            Some(near) => diagnostic.fix(span, format!("\"{near}\"")),
            None => diagnostic,
        });
    }
    found
}

fn read_limit(section: &mut Section<'_, '_>, findings: &mut Findings<'_>) -> Option<f64> {
    let value = section.get("modular_limit")?;
    let stated = quantity::read("modular_limit", value, Some(Dimension::NONE), findings)?;
    if !(0.0..1.0).contains(&stated.value) {
        let title = format!(
            "`modular_limit` cannot be {}: it is the ratio of two heads, 0 to 1",
            stated.text
        );
        findings.error(Code::OutsideDomain, value.span(), title);
        return None;
    }
    Some(stated.value)
}

/// A limit that is no ratio takes no other, and one that nobody published has to be stated.
fn check_modular_limit(
    installation: &Installation,
    stated: Option<f64>,
    section: &Section<'_, '_>,
    findings: &mut Findings<'_>,
) {
    let structure = installation.structure;
    let is_ratio = structure.modular.highest.contains("M_L");
    if stated.is_some() && !is_ratio {
        let span = section.key_span("modular_limit").unwrap_or_else(|| section.span.clone());
        let title =
            "`modular_limit` has no effect: the limit of this structure is no ratio of heads";
        findings
            .push(Diagnostic::error(Code::UnusedKey, span, title).help(structure.modular.words));
    }
    let in_choice = structure.choice.is_some_and(|c| c.symbols.iter().any(|(s, _)| *s == "M_L"));
    if stated.is_none() && is_ratio && structure.modular.ratio.is_none() && !in_choice {
        let title = "[tailwater] needs `modular_limit`: none is known for this structure";
        findings.push(
            Diagnostic::error(Code::MissingKey, section.span.clone(), title)
                .help("from your copy of the standard, for example modular_limit = 0.75"),
        );
    }
}
