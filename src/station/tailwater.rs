//! `[tailwater]`: the level below the structure, or at its crest tapping, and which drowned-flow equation
//! takes over.

use toml::Spanned;
use toml::de::DeValue;

use super::quantity::{self, Stated};
use super::section::{Findings, Section, string};
use super::structure::{StationInput, input_without_value, read_value};
use crate::diagnostic::{Code, Diagnostic, Span, nearest, shown};
use crate::model::expression::Table;
use crate::model::structures::{
    Installation, SecondHead, SecondHeadAt, TAILWATER_HEAD, TailwaterCurve,
};
use crate::units::{Dimension, Unit};

/// Where the level of the tailwater comes from.
#[derive(Clone, Debug, PartialEq)]
pub enum Tailwater {
    /// It is always the same.
    Level,
    /// It follows the discharge.
    Curve(Table),
    /// It is a column of the record.
    Column {
        /// Its name.
        name: String,
        /// The unit of its values.
        unit: Unit,
    },
}

/// More points than a curve by hand has.
const MOST_POINTS: usize = 1000;
/// Its name in the equation.
const CURVE: &str = "tailwater_curve";
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
    let mut input = input_without_value(&TAILWATER_HEAD.into());
    let tailwater = match (level, table, column) {
        (Some(level), None, None) => {
            if let Some(read) = read_value("level", level, Some(Dimension::LENGTH), findings) {
                input = StationInput { key: TAILWATER_HEAD.key.to_owned(), ..read };
            }
            check_level(&input, findings);
            Some(Tailwater::Level)
        }
        (None, Some(table), None) => read_curve(table, findings).map(Tailwater::Curve),
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
    let curve = match &tailwater {
        Some(Tailwater::Curve(table)) => Some(TailwaterCurve { table: table.clone(), level: 0.0 }),
        _ => None,
    };
    let second = if installation.sections.is_empty() {
        read_second_head(&mut section, installation, false, findings)
    } else {
        refuse_for_sections(&mut section, findings);
        SecondHead { drowned: None, modular_limit: None, curve: None }
    };
    installation.second_head = Some(SecondHead { curve, ..second });
    for each in &installation.sections {
        check_limit_is_known(&each.installation, section.span.clone(), findings);
    }
    if installation.sections.is_empty() {
        check_limit_is_known(installation, section.span.clone(), findings);
    }
    section.finish(findings);
    add_inputs(installation, &input, inputs);
    tailwater
}

/// Each section of a compound weir has its own equation and limit.
fn refuse_for_sections(section: &mut Section<'_, '_>, findings: &mut Findings<'_>) {
    for key in ["drowned_flow", "modular_limit"] {
        if section.get(key).is_some() {
            let span = section.key_span(key).unwrap_or_else(|| section.span.clone());
            let title = format!("`{key}` has no effect on a compound weir as a whole");
            findings.push(
                Diagnostic::error(Code::UnusedKey, span, title)
                    .help("write it into each [[structure.section]]"),
            );
        }
    }
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
        let title = format!(
            "`level` cannot be {}: a level between {low} m and {high} m above the crest is due",
            input.text
        );
        findings.error(Code::OutsideDomain, span, title);
    }
}

/// Pairs of discharge and level, in increasing discharge.
fn read_curve(value: &Spanned<DeValue<'_>>, findings: &mut Findings<'_>) -> Option<Table> {
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
    if let Some([first, _]) = points.first().filter(|[flow, _]| flow.value < 0.0) {
        let title = format!("`table`: a discharge cannot be {}", first.text);
        findings.push(Diagnostic::error(Code::OutsideDomain, first.span.clone(), title).help(help));
        return None;
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
    Table::line(CURVE, &column(0), &column(1))
}

fn read_column(
    value: &Spanned<DeValue<'_>>,
    unit: Option<&(String, Span)>,
    findings: &mut Findings<'_>,
) -> Option<Tailwater> {
    let name = string("column", value, findings)?;
    if name.trim().is_empty() {
        findings.error(Code::OutsideDomain, value.span(), "`column` has no name");
        return None;
    }
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

/// What a table says of the second head of a structure, besides its level: which drowned-flow equation
/// takes over, and a modular limit of its own.
///
/// Without a word, the first equation whose head is the tailwater's; a section of a compound weir, which
/// shares its tailwater, can have no other.
pub(super) fn read_second_head(
    section: &mut Section<'_, '_>,
    installation: &Installation,
    is_section: bool,
    findings: &mut Findings<'_>,
) -> SecondHead {
    let equations = installation.structure.drowned;
    let by_tailwater = |index: &usize| equations[*index].reads == SecondHeadAt::Tailwater;
    let mut published = installation.drowned();
    let first = published.iter().copied().find(by_tailwater);
    if is_section {
        published.retain(by_tailwater);
    }
    let words: Vec<&str> =
        published.iter().map(|index| equations[*index].name).chain([NO_EQUATION]).collect();
    let drowned = match section.text("drowned_flow", findings) {
        Some((word, _)) if word == NO_EQUATION => None,
        Some((word, span)) => {
            let found = published.iter().find(|index| equations[**index].name == word).copied();
            if found.is_none() {
                unknown_equation(&word, span, &words, findings);
            }
            found
        }
        None => {
            if first.is_none() && !published.is_empty() {
                let title = format!("{} needs `drowned_flow`: which head is it", section.name());
                let help = format!(
                    "\"{}\" if the level is that at the tapping, \"{NO_EQUATION}\" if it is the tailwater's",
                    words[0]
                );
                findings.push(
                    Diagnostic::error(Code::MissingKey, section.span.clone(), title).help(help),
                );
            }
            first
        }
    };
    let modular_limit = read_limit(section, findings);
    if let Some(span) = section.key_span("modular_limit")
        && !installation.structure.modular.is_ratio()
    {
        let title =
            "`modular_limit` has no effect: the limit of this structure is no ratio of heads";
        findings.push(
            Diagnostic::error(Code::UnusedKey, span, title)
                .help(installation.structure.modular.words),
        );
    }
    SecondHead { drowned, modular_limit, curve: None }
}

fn unknown_equation(word: &str, span: Span, words: &[&str], findings: &mut Findings<'_>) {
    let title = format!("`drowned_flow`: \"{}\" is not published for this structure", shown(word));
    let diagnostic = Diagnostic::error(Code::UnknownWord, span.clone(), title)
        .help(format!("one of: {}", words.join(", ")));
    findings.push(match nearest(word, words.iter().copied()) {
        Some(near) => diagnostic.fix(span, format!("\"{near}\"")),
        None => diagnostic,
    });
}

fn read_limit(section: &mut Section<'_, '_>, findings: &mut Findings<'_>) -> Option<f64> {
    let value = section.get("modular_limit")?;
    let stated = quantity::read("modular_limit", value, Some(Dimension::NONE), findings)?;
    if !(stated.value > 0.0 && stated.value < 1.0) {
        let title = format!(
            "`modular_limit` cannot be {}: it is a ratio of two heads, above 0 and below 1",
            stated.text
        );
        findings.error(Code::OutsideDomain, value.span(), title);
        return None;
    }
    Some(stated.value)
}

/// A limit that nobody published has to be stated.
fn check_limit_is_known(installation: &Installation, span: Span, findings: &mut Findings<'_>) {
    let structure = installation.structure;
    if structure.modular.is_ratio() && installation.modular_limit().is_none() {
        let title =
            format!("no modular limit of `{}` is known: state `modular_limit`", structure.kind);
        findings.push(Diagnostic::error(Code::MissingKey, span, title).help(
            "from your copy of the standard, for example modular_limit = 0.75, in [tailwater] or in the \
             section of a compound weir",
        ));
    }
}
