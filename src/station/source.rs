//! `[[error_source]]`: what can make an input wrong, and by how much.

use super::section::{Findings, Section, number, string};
use super::size::{self, Amount, Size};
use super::spread::{Spread, Width, shift};
use super::spread_reader::Reader;
use super::structure::{Evidence, StationInput, read_evidence};
use crate::diagnostic::{Code, Diagnostic, Span, listed, nearest, shown};
use crate::model::structures::{DROWNED_FLOW_FACTOR, TAILWATER_HEAD};
use crate::propagation::Distribution;
use crate::units::Dimension;

/// An error source as a file states it.
#[derive(Clone, Debug, PartialEq)]
pub struct ErrorSource {
    /// Its name.
    pub name: String,
    /// The inputs it acts on, by place.
    pub inputs: Vec<usize>,
    /// Whether it shifts or scales them.
    pub kind: Size,
    /// Its distribution, made for an input of a given value.
    pub spread: Spread,
    /// Its size as stated, in words: `half_width 3 mm, rectangular`.
    pub size_text: String,
    /// Known bias, stated beside the size.
    pub bias: Option<(f64, Amount)>,
    /// Share of the time that it is there.
    pub present: Option<f64>,
    /// Months of the year that it is there, 1 to 12; all if empty.
    pub months: Vec<u32>,
    /// When a new draw of its error is made.
    pub fixed_until: FixedUntil,
    /// Degrees of freedom of its standard uncertainty.
    pub degrees_of_freedom: f64,
    /// The degrees of freedom are those of observations, so that a normal error is drawn as a t; not a
    /// mere judgement of how reliable the size is.
    pub drawn_as_t: bool,
    /// The automatic source whose place it takes.
    pub replaces: Option<String>,
    /// What stands behind it.
    pub evidence: Evidence,
    /// The place of its name.
    pub span: Span,
}

/// When a new draw of an error is made.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum FixedUntil {
    /// The structure is rebuilt.
    Rebuilding,
    /// The instrument is recalibrated.
    Recalibration,
    /// The next survey.
    Survey,
    /// The next check visit.
    Visit,
    /// The next cleaning.
    Cleaning,
    /// The next reading.
    Reading,
    /// It wanders with this correlation time, in seconds.
    CorrelationTime(f64),
}

impl FixedUntil {
    const WORDS: [(&'static str, Self); 6] = [
        ("rebuilding", Self::Rebuilding),
        ("recalibration", Self::Recalibration),
        ("survey", Self::Survey),
        ("visit", Self::Visit),
        ("cleaning", Self::Cleaning),
        ("reading", Self::Reading),
    ];

    /// In words, as a file writes it.
    pub fn words(self) -> String {
        match self {
            Self::CorrelationTime(seconds) => {
                let (unit, size) = [("days", 86_400.0), ("h", 3600.0), ("min", 60.0)]
                    .into_iter()
                    .find(|(_, size)| seconds >= *size)
                    .unwrap_or(("s", 1.0));
                format!("correlation time {} {unit}", round_to(seconds / size))
            }
            other => Self::WORDS
                .iter()
                .find(|(_, known)| *known == other)
                .map_or_else(String::new, |(word, _)| (*word).to_owned()),
        }
    }

    /// A new draw is made so often that the spread of single observations counts, not that of their
    /// mean.
    pub(super) fn is_redrawn(self) -> bool {
        matches!(self, Self::Visit | Self::Cleaning | Self::Reading | Self::CorrelationTime(_))
    }
}

/// Three decimals at the most.
pub(super) fn round_to(value: f64) -> f64 {
    (value * 1000.0).round() / 1000.0
}

impl ErrorSource {
    /// The distribution of its error for an input of this value, in SI units or as a fraction.
    pub fn distribution(&self, value: f64) -> Distribution {
        let plain = match &self.spread {
            Spread::Shape(shape, width) => match width {
                Width::Standard(u) => shape.with_standard_uncertainty(u.at(value), value),
                Width::Expanded(expanded, k) => {
                    shape.with_standard_uncertainty(expanded.at(value) / k, value)
                }
                Width::Half(half) => shape.with_half_width(0.0, half.at(value), value),
                Width::Step(step) => shape.with_half_width(0.0, step.at(value) / 2.0, value),
            },
            Spread::Limits(shape, from, to) => {
                let (from, to) = (from.at(value), to.at(value));
                shape.with_half_width(f64::midpoint(from, to), (to - from) / 2.0, value)
            }
            Spread::Observed { mean, scale } => Distribution::ScaledT {
                mean: *mean,
                scale: *scale,
                degrees_of_freedom: self.degrees_of_freedom,
            },
            Spread::Table(values, probabilities) => Distribution::Discrete {
                values: values.clone(),
                probabilities: probabilities.clone(),
            },
            Spread::None => Distribution::Fixed { mean: 0.0 },
        };
        let bias = self.bias.as_ref().map_or(0.0, |(sign, amount)| sign * amount.at(value));
        let shifted = shift(plain, bias);
        let drawn = match shifted {
            // A normal whose uncertainty is itself an estimate is drawn as a t (JCGM 101 6.4.9).
            Distribution::Normal { mean, standard_uncertainty: scale }
                if self.drawn_as_t && scale > 0.0 =>
            {
                Distribution::ScaledT { mean, scale, degrees_of_freedom: self.degrees_of_freedom }
            }
            other => other,
        };
        match self.present {
            Some(present) => Distribution::Occasional { present, distribution: Box::new(drawn) },
            None => drawn,
        }
    }
}

/// Reads one source. `structure` has the inputs and the names of the automatic sources; without it, after
/// a fault there, what can be told of the source is told all the same.
pub(super) fn read(
    mut section: Section<'_, '_>,
    structure: Option<(&[StationInput], &[String])>,
    findings: &mut Findings<'_>,
) -> Option<ErrorSource> {
    let before = findings.list.len();
    let name = section
        .need("name", "a source is known by its name in every table", findings)
        .and_then(|value| Some((string("name", value, findings)?, value.span())));
    if let Some((name, span)) = &name {
        check_name("a source", name, span, findings);
    }
    let acts_on = match structure {
        Some((inputs, _)) => read_acts_on(&mut section, inputs, findings),
        None => section.get("acts_on").and(None),
    };
    let dimension =
        acts_on.as_ref().zip(structure).map(|(places, (inputs, _))| inputs[places[0]].dimension);
    let replaces = match structure {
        Some((_, automatic)) => read_replaces(&mut section, automatic, findings),
        None => section.get("replaces").and(None),
    };
    let fixed_until = read_fixed_until(&mut section, findings);
    let reliable = section.get("reliable_to").is_some();
    let freedom = read_degrees_of_freedom(&mut section, findings);
    let present = read_present(&mut section, findings);
    let months = read_months(&mut section, findings);
    let evidence = read_evidence(&mut section, findings);
    let bias = read_bias(&mut section, dimension, findings);
    let size = Reader {
        section: &mut section,
        dimension,
        findings,
        // A judgement of how reliable a size is does not change what its maker stated.
        freedom: freedom.as_ref().map(|f| f.0).filter(|_| !reliable),
        fixed_until,
    }
    .read(bias.is_some());
    let acts_on_span = section.key_span("acts_on").unwrap_or_else(|| section.span.clone());
    section.finish(findings);
    if let (Some(places), Some((inputs, _)), Some(size)) = (&acts_on, structure, &size)
        && size.kind != Some(Size::Scale)
    {
        check_dimensions(places, inputs, acts_on_span, findings);
    }
    let (name, span) = name?;
    let (mut size, places) = (size?, acts_on?);
    if findings.list.len() > before {
        return None;
    }
    if let Some((value, text)) = &freedom {
        if size.freedom.is_some() {
            let title = format!("`{name}`: degrees of freedom follow from the observations");
            findings.error(Code::KeysDisagree, span, title);
            return None;
        }
        size.freedom = Some(*value);
        size.text = format!("{}, {text}", size.text);
    }
    if let Some((_, amount)) = &bias {
        // A sum shifts as a plain size does; only a scale is another kind.
        let scales = |kind: Size| kind == Size::Scale;
        let kinds_differ = size.kind.is_some_and(|kind| scales(kind) != scales(amount.kind()));
        if kinds_differ || matches!(size.spread, Spread::Limits(..) | Spread::Observed { .. }) {
            findings.push(
                Diagnostic::error(
                    Code::KeysDisagree,
                    span,
                    format!("`{name}`: the bias is stated twice, or in another kind than the size"),
                )
                .help(
                    "error_from and error_to, and observations, give the bias by their middle; a \
                     bias beside another size is in its unit, or in % like it",
                ),
            );
            return None;
        }
    }
    let kind = size.kind.or(bias.as_ref().map(|(_, amount)| amount.kind())).unwrap_or(Size::Shift);
    Some(ErrorSource {
        name,
        inputs: places,
        kind,
        spread: size.spread,
        size_text: describe(&size.text, bias.as_ref(), present),
        bias,
        present,
        months,
        fixed_until: fixed_until.unwrap_or(FixedUntil::Survey),
        degrees_of_freedom: size.freedom.unwrap_or(f64::INFINITY),
        drawn_as_t: size.freedom.is_some() && !reliable,
        replaces,
        evidence,
        span,
    })
}

/// A name is known by its letters: some, not too many, and none that could rewrite a terminal.
pub(super) fn check_name(whose: &str, name: &str, span: &Span, findings: &mut Findings<'_>) {
    let letters = name.chars().count();
    let fault = if name.trim().is_empty() {
        "is blank"
    } else if letters > 200 {
        "has more than 200 letters"
    } else if name.chars().any(char::is_control) {
        "holds a line end, a tab or another control character"
    } else if name.trim() != name {
        "begins or ends with a blank"
    } else {
        return;
    };
    let title = format!("the name of {whose} {fault}");
    findings.error(Code::OutsideDomain, span.clone(), title);
}

fn describe(size: &str, bias: Option<&(f64, Amount)>, present: Option<f64>) -> String {
    let mut parts = vec![size.to_owned()];
    if let Some((sign, amount)) = bias {
        let word = if *sign > 0.0 { "reads high by" } else { "reads low by" };
        parts.push(format!("{word} {}", amount.text));
    }
    if let Some(present) = present {
        parts.push(format!("present {} % of the time", round_to(present * 100.0)));
    }
    parts.retain(|part| !part.is_empty());
    parts.join(", ")
}

fn read_acts_on(
    section: &mut Section<'_, '_>,
    inputs: &[StationInput],
    findings: &mut Findings<'_>,
) -> Option<Vec<usize>> {
    let help = "name the input that the error makes wrong, for example acts_on = \"head\"";
    section.need("acts_on", help, findings)?;
    let (items, span) = section.list("acts_on")?;
    let mut places: Vec<usize> = Vec::new();
    let mut complete = true;
    for item in items {
        let Some(key) = string("acts_on", item, findings) else {
            complete = false;
            continue;
        };
        match inputs.iter().position(|input| input.key == key || input.symbol == key) {
            Some(place) if places.contains(&place) => {
                let title = format!("`acts_on` names `{key}` twice");
                findings.error(Code::DuplicateName, item.span(), title);
                complete = false;
            }
            Some(place) => places.push(place),
            None => {
                unknown_input(&key, item.span(), inputs, findings);
                complete = false;
            }
        }
    }
    if places.is_empty() && complete {
        findings.error(Code::MissingKey, span, "`acts_on` names no input");
        complete = false;
    }
    complete.then_some(places)
}

fn unknown_input(key: &str, span: Span, inputs: &[StationInput], findings: &mut Findings<'_>) {
    let keys: Vec<&str> = inputs.iter().map(|input| input.key.as_str()).collect();
    let shown = shown(key);
    let title = format!("`{shown}` is no input of this structure");
    let diagnostic = Diagnostic::error(Code::UnknownInput, span.clone(), title);
    if [TAILWATER_HEAD.key, DROWNED_FLOW_FACTOR.key].contains(&key) {
        findings
            .push(diagnostic.help("[tailwater] brings it: state the level below the structure"));
        return;
    }
    findings.push(match nearest(key, keys.iter().copied()) {
        Some(near) => {
            diagnostic.help(format!("the nearest is `{near}`")).fix(span, format!("\"{near}\""))
        }
        None => diagnostic.help(format!("its inputs: {}", listed(keys.iter().copied()))),
    });
}

/// One error shifts inputs of one dimension; a scale is a pure number for any.
fn check_dimensions(
    places: &[usize],
    inputs: &[StationInput],
    span: Span,
    findings: &mut Findings<'_>,
) {
    let first = &inputs[places[0]];
    let mut others = places.iter().map(|place| &inputs[*place]);
    let Some(other) = others.find(|input| input.dimension != first.dimension) else { return };
    findings.push(
        Diagnostic::error(
            Code::WrongDimension,
            span,
            format!(
                "one source shifts `{}`, {}, and `{}`, {}",
                first.key,
                first.dimension.described(),
                other.key,
                other.dimension.described()
            ),
        )
        .help("write two sources and correlate them, or state the size in %"),
    );
}

fn read_replaces(
    section: &mut Section<'_, '_>,
    automatic: &[String],
    findings: &mut Findings<'_>,
) -> Option<String> {
    let (name, span) = section.text("replaces", findings)?;
    if automatic.contains(&name) {
        return Some(name);
    }
    let shown = shown(&name);
    let title = format!("`{shown}` is no automatic source of this structure");
    let diagnostic = Diagnostic::error(Code::UnknownSource, span, title);
    findings.push(if automatic.is_empty() {
        diagnostic.help("an equation of your own has none: leave `replaces` out")
    } else {
        diagnostic
            .help(format!("automatic sources: {}", listed(automatic.iter().map(String::as_str))))
    });
    None
}

fn read_fixed_until(
    section: &mut Section<'_, '_>,
    findings: &mut Findings<'_>,
) -> Option<FixedUntil> {
    let word = section.text("fixed_until", findings);
    let time = section.get("correlation_time");
    if let (Some((_, span)), Some(_)) = (&word, time) {
        let title = "`fixed_until` and `correlation_time` exclude each other";
        findings.error(Code::KeysDisagree, span.clone(), title);
        return None;
    }
    if let Some(value) = time {
        let stated =
            super::quantity::read("correlation_time", value, Some(Dimension::TIME), findings)?;
        if stated.value <= 0.0 {
            let title = format!("`correlation_time` cannot be {}", stated.text);
            findings.error(Code::OutsideDomain, value.span(), title);
            return None;
        }
        return Some(FixedUntil::CorrelationTime(stated.value));
    }
    let (word, span) = word?;
    let words = FixedUntil::WORDS.map(|(word, _)| word);
    let found = FixedUntil::WORDS.iter().find(|(known, _)| *known == word);
    if found.is_none() {
        unknown_word("fixed_until", &word, &words, span, findings);
    }
    found.map(|(_, fixed_until)| *fixed_until)
}

pub(super) fn unknown_word(
    key: &str,
    word: &str,
    words: &[&str],
    span: Span,
    findings: &mut Findings<'_>,
) {
    let shown = shown(word);
    let title = format!("`{key}` cannot be `{shown}`");
    let diagnostic = Diagnostic::error(Code::UnknownWord, span.clone(), title)
        .help(format!("one of: {}", words.join(", ")));
    findings.push(match nearest(word, words.iter().copied()) {
        Some(near) => diagnostic.fix(span, format!("\"{near}\"")),
        None => diagnostic,
    });
}

/// Degrees of freedom with the words for them.
fn read_degrees_of_freedom(
    section: &mut Section<'_, '_>,
    findings: &mut Findings<'_>,
) -> Option<(f64, String)> {
    let stated = section.get("degrees_of_freedom");
    let reliable = section.get("reliable_to");
    match (stated, reliable) {
        (Some(_), Some(second)) => {
            let title = "`degrees_of_freedom` and `reliable_to` say the same: one is due";
            findings.error(Code::KeysDisagree, second.span(), title);
            None
        }
        (Some(value), None) => match number(value.get_ref()) {
            Some(freedom) if (1.0..=1e9).contains(&freedom) => {
                Some((freedom, format!("{freedom} degrees of freedom")))
            }
            _ => {
                let title = "`degrees_of_freedom` is a number of 1 or more";
                findings.error(Code::OutsideDomain, value.span(), title);
                None
            }
        },
        (None, Some(value)) => {
            let stated =
                super::quantity::read("reliable_to", value, Some(Dimension::NONE), findings)?;
            if !(stated.value > 0.0 && stated.value <= 1.0) {
                let title = "`reliable_to` is a ratio above 0 and not above 100 %";
                findings.error(Code::OutsideDomain, value.span(), title);
                return None;
            }
            // JCGM 100 G.4.2, equation G.3.
            let freedom = 0.5 / stated.value.powi(2);
            Some((freedom, format!("reliable to {}", stated.text)))
        }
        (None, None) => None,
    }
}

fn read_present(section: &mut Section<'_, '_>, findings: &mut Findings<'_>) -> Option<f64> {
    let value = section.get("present")?;
    let stated = super::quantity::read("present", value, Some(Dimension::NONE), findings)?;
    if !(stated.value > 0.0 && stated.value <= 1.0) {
        let title = "`present` is a share of the time above 0 and not above 100 %";
        findings.error(Code::OutsideDomain, value.span(), title);
        return None;
    }
    Some(stated.value)
}

fn read_months(section: &mut Section<'_, '_>, findings: &mut Findings<'_>) -> Vec<u32> {
    let Some((items, _)) = section.list("months") else { return Vec::new() };
    let mut months: Vec<u32> = Vec::new();
    let stated = items.len();
    for item in items {
        match number(item.get_ref()) {
            Some(month) if month.fract() == 0.0 && (1.0..=12.0).contains(&month) => {
                months.push(month as u32);
            }
            _ => {
                let title = "`months` are whole numbers from 1 to 12";
                findings.error(Code::OutsideDomain, item.span(), title);
            }
        }
    }
    if stated == 0 {
        let span = section.key_span("months").unwrap_or_else(|| section.span.clone());
        findings.error(Code::OutsideDomain, span, "`months` names no month: leave it out for all");
    }
    months.sort_unstable();
    months.dedup();
    months
}

/// The known bias: an error is the indicated value minus the true one, so what reads high has a positive
/// one.
fn read_bias(
    section: &mut Section<'_, '_>,
    dimension: Option<Dimension>,
    findings: &mut Findings<'_>,
) -> Option<(f64, Amount)> {
    let high = section.get("reads_high_by");
    let low = section.get("reads_low_by");
    let (key, value, sign) = match (high, low) {
        (Some(_), Some(second)) => {
            let title = "`reads_high_by` and `reads_low_by` exclude each other";
            findings.error(Code::KeysDisagree, second.span(), title);
            return None;
        }
        (Some(value), None) => ("reads_high_by", value, 1.0),
        (None, Some(value)) => ("reads_low_by", value, -1.0),
        (None, None) => return None,
    };
    let amount = size::read(key, value, dimension, findings)?;
    if amount.at(1.0) < 0.0 {
        let title = format!("`{key}` cannot be negative: the word says which way");
        findings.error(Code::OutsideDomain, value.span(), title);
        return None;
    }
    Some((sign, amount))
}
