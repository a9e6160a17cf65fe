//! `[[error_source]]`: what can make an input wrong, and by how much.

use toml::Spanned;
use toml::de::DeValue;

use super::section::{Findings, Section, article, number, string};
use super::size::{self, Amount, Size};
use super::structure::{
    Evidence, StationInput, mean, read_evidence, read_observations, standard_deviation,
};
use crate::diagnostic::{Code, Diagnostic, Span, nearest};
use crate::propagation::{Coverage, DegreesOfFreedom, Distribution};
use crate::units::{Dimension, Quantity};

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
    fn is_redrawn(self) -> bool {
        matches!(self, Self::Visit | Self::Cleaning | Self::Reading | Self::CorrelationTime(_))
    }
}

/// Three decimals at the most.
fn round_to(value: f64) -> f64 {
    (value * 1000.0).round() / 1000.0
}

/// The spread of a source, before it is known for what value of the input.
#[derive(Clone, Debug, PartialEq)]
pub enum Spread {
    /// A standard uncertainty or a half-width, and the shape that it belongs to.
    Shape(Shape, Width),
    /// Limits, not symmetric.
    Limits(Shape, Amount, Amount),
    /// Observed errors, in SI units or as fractions.
    Observed {
        /// Their mean: a known bias.
        mean: f64,
        /// Standard uncertainty of the next draw.
        scale: f64,
    },
    /// Values with their probabilities.
    Table(Vec<f64>, Vec<f64>),
    /// A known bias alone.
    None,
}

/// What a width is.
#[derive(Clone, Debug, PartialEq)]
pub enum Width {
    /// A standard uncertainty.
    Standard(Amount),
    /// A standard uncertainty times this factor.
    Expanded(Amount, f64),
    /// A half-width.
    Half(Amount),
    /// A whole step, of which half counts each way.
    Step(Amount),
}

/// The shape of a distribution.
#[derive(Clone, Debug, PartialEq)]
pub enum Shape {
    /// Normal.
    Normal,
    /// Rectangular.
    Rectangular,
    /// Triangular.
    Triangular,
    /// Arcsine.
    Arcsine,
    /// Trapezoidal, with the half-width of its flat top.
    Trapezoidal(Amount),
    /// Curvilinear trapezoid, with how well the limits are known.
    CurvilinearTrapezoid(Amount),
}

impl Shape {
    const WORDS: [&'static str; 6] =
        ["normal", "rectangular", "triangular", "trapezoidal", "arcsine", "curvilinear-trapezoid"];

    fn word(&self) -> &'static str {
        match self {
            Self::Normal => "normal",
            Self::Rectangular => "rectangular",
            Self::Triangular => "triangular",
            Self::Arcsine => "arcsine",
            Self::Trapezoidal(_) => "trapezoidal",
            Self::CurvilinearTrapezoid(_) => "curvilinear-trapezoid",
        }
    }

    /// The distribution with a half-width.
    fn with_half_width(&self, mean: f64, half_width: f64, value: f64) -> Distribution {
        match self {
            Self::Normal => Distribution::Normal { mean, standard_uncertainty: half_width },
            Self::Rectangular => Distribution::Rectangular { mean, half_width },
            Self::Triangular => Distribution::Triangular { mean, half_width },
            Self::Arcsine => Distribution::Arcsine { mean, half_width },
            Self::Trapezoidal(flat) => {
                Distribution::Trapezoidal { mean, half_width, flat_half_width: flat.at(value) }
            }
            Self::CurvilinearTrapezoid(limit) => Distribution::CurvilinearTrapezoid {
                mean,
                half_width,
                limit_half_width: limit.at(value),
            },
        }
    }

    /// The distribution with a standard uncertainty, for shapes that one number fixes.
    fn with_standard_uncertainty(&self, u: f64) -> Distribution {
        let unit = self.with_half_width(0.0, 1.0, 0.0).standard_uncertainty();
        self.with_half_width(0.0, u / unit, 0.0)
    }
}

impl ErrorSource {
    /// The distribution of its error for an input of this value, in SI units or as a fraction.
    pub fn distribution(&self, value: f64) -> Distribution {
        let plain = match &self.spread {
            Spread::Shape(shape, width) => match width {
                Width::Standard(u) => shape.with_standard_uncertainty(u.at(value)),
                Width::Expanded(expanded, k) => {
                    shape.with_standard_uncertainty(expanded.at(value) / k)
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

/// The same distribution about a mean that lies higher by `bias`.
fn shift(distribution: Distribution, bias: f64) -> Distribution {
    let mut shifted = distribution;
    match &mut shifted {
        Distribution::Fixed { mean }
        | Distribution::Normal { mean, .. }
        | Distribution::Rectangular { mean, .. }
        | Distribution::Triangular { mean, .. }
        | Distribution::Trapezoidal { mean, .. }
        | Distribution::Arcsine { mean, .. }
        | Distribution::CurvilinearTrapezoid { mean, .. }
        | Distribution::ScaledT { mean, .. } => *mean += bias,
        Distribution::Discrete { values, .. } => values.iter_mut().for_each(|each| *each += bias),
        Distribution::Occasional { distribution, .. } => {
            **distribution = shift((**distribution).clone(), bias);
        }
    }
    shifted
}

/// Keys that state a size; just one of them is due.
const SIZE_KEYS: [&str; 7] = [
    "standard_uncertainty",
    "expanded_uncertainty",
    "half_width",
    "error_from",
    "resolution",
    "observations",
    "table",
];

/// Reads one source. `inputs` are those of the structure; `automatic` the names of automatic sources.
pub(super) fn read(
    mut section: Section<'_, '_>,
    inputs: &[StationInput],
    automatic: &[String],
    findings: &mut Findings<'_>,
) -> Option<ErrorSource> {
    let before = findings.list.len();
    let name = section
        .need("name", "a source is known by its name in every table", findings)
        .and_then(|value| Some((string("name", value, findings)?, value.span())));
    if let Some((name, span)) =
        name.as_ref().filter(|(name, _)| name.trim().is_empty() || name.len() > 200)
    {
        let title = format!("a source's name has 1 to 200 letters, not {}", name.len());
        findings.error(Code::OutsideDomain, span.clone(), title);
    }
    let acts_on = read_acts_on(&mut section, inputs, findings);
    let dimension =
        acts_on.as_ref().and_then(|places| common_dimension(places, inputs, &section, findings));
    let replaces = read_replaces(&mut section, automatic, findings);
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
        freedom: freedom.as_ref().map(|f| f.0),
        fixed_until,
    }
    .read(bias.is_some());
    section.finish(findings);
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
        let kinds_differ = size.kind.is_some_and(|kind| kind != amount.kind());
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
    let shown: String = key.chars().take(60).collect();
    let title = format!("`{shown}` is no input of this structure");
    let diagnostic = Diagnostic::error(Code::UnknownInput, span.clone(), title);
    findings.push(match nearest(key, keys.iter().copied()) {
        Some(near) => {
            diagnostic.help(format!("the nearest is `{near}`")).fix(span, format!("\"{near}\""))
        }
        None => diagnostic.help(format!("its inputs: {}", keys.join(", "))),
    });
}

/// The dimension that all inputs of a source share; a size in per cent does not need one.
fn common_dimension(
    places: &[usize],
    inputs: &[StationInput],
    section: &Section<'_, '_>,
    findings: &mut Findings<'_>,
) -> Option<Dimension> {
    let first = &inputs[places[0]];
    let other = places.iter().map(|place| &inputs[*place]).find(|i| i.dimension != first.dimension);
    if let Some(other) = other {
        let span = section.key_span("acts_on").unwrap_or_else(|| section.span.clone());
        findings.push(
            Diagnostic::error(
                Code::WrongDimension,
                span,
                format!(
                    "one source acts on `{}`, {}, and `{}`, {}",
                    first.key,
                    first.dimension.described(),
                    other.key,
                    other.dimension.described()
                ),
            )
            .help("one error shifts inputs of one dimension; write two sources and correlate them"),
        );
    }
    Some(first.dimension)
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
    let shown: String = name.chars().take(60).collect();
    let title = format!("`{shown}` is no automatic source of this structure");
    let diagnostic = Diagnostic::error(Code::UnknownSource, span, title);
    findings.push(if automatic.is_empty() {
        diagnostic.help("an equation of your own has none: leave `replaces` out")
    } else {
        diagnostic.help(format!("automatic sources: {}", automatic.join(", ")))
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

fn unknown_word(key: &str, word: &str, words: &[&str], span: Span, findings: &mut Findings<'_>) {
    let shown: String = word.chars().take(60).collect();
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
    Some((sign, size::read(key, value, dimension, findings)?))
}

/// A size that was read.
struct ReadSize {
    spread: Spread,
    /// `None` where nothing but a bias is stated.
    kind: Option<Size>,
    text: String,
    freedom: Option<f64>,
}

/// Reads the one way in which a source states its size.
struct Reader<'r, 's, 'a, 'i, 't> {
    section: &'s mut Section<'a, 'i>,
    dimension: Option<Dimension>,
    findings: &'r mut Findings<'t>,
    freedom: Option<f64>,
    fixed_until: Option<FixedUntil>,
}

impl<'a, 'i> Reader<'_, '_, 'a, 'i, '_> {
    fn read(mut self, has_bias: bool) -> Option<ReadSize> {
        let error_to = self.section.get("error_to");
        let stated: Vec<&str> =
            SIZE_KEYS.into_iter().filter(|key| self.section.get(key).is_some()).collect();
        let shape = self.read_shape(&stated);
        for key in ["coverage_factor", "coverage"] {
            let span = self.section.get(key).map(Spanned::span);
            if let Some(span) = span.filter(|_| stated != ["expanded_uncertainty"]) {
                self.disagree(span, &format!("`{key}` belongs to `expanded_uncertainty`"));
            }
        }
        match stated.as_slice() {
            [] if error_to.is_some() => {
                self.missing("error_from", "`error_to` needs `error_from`");
                None
            }
            [] if has_bias => Some(ReadSize {
                spread: Spread::None,
                kind: None,
                text: String::new(),
                freedom: None,
            }),
            [] => {
                let name = self.section.name().to_owned();
                self.findings.push(
                    Diagnostic::error(
                        Code::MissingSize,
                        self.section.span.clone(),
                        format!("{name} states no size"),
                    )
                    .help(format!("one of: {}", SIZE_KEYS.join(", "))),
                );
                None
            }
            ["standard_uncertainty"] => {
                let amount = self.amount("standard_uncertainty")?;
                let shape = shape?.unwrap_or(Shape::Normal);
                if matches!(shape, Shape::Trapezoidal(_) | Shape::CurvilinearTrapezoid(_)) {
                    self.missing_half_width(&shape);
                    return None;
                }
                let text = format!("standard uncertainty {}, {}", amount.text, shape.word());
                self.shaped(shape, amount, Width::Standard, text)
            }
            ["expanded_uncertainty"] => self.expanded(shape?),
            ["half_width"] => {
                let amount = self.amount("half_width")?;
                let Some(shape) = shape? else {
                    self.missing_shape("half_width");
                    return None;
                };
                if shape == Shape::Normal {
                    self.normal_has_no_limits();
                    return None;
                }
                self.check_inner_width(&shape, &amount)?;
                let text = format!("half-width {}, {}", amount.text, shape.word());
                self.shaped(shape, amount, Width::Half, text)
            }
            ["resolution"] => {
                let amount = self.amount("resolution")?;
                self.only_without_shape(&shape?, "resolution")?;
                let text = format!("resolution {}, rectangular", amount.text);
                self.shaped(Shape::Rectangular, amount, Width::Step, text)
            }
            ["error_from"] => self.limits(shape?),
            ["observations"] => self.observed(&shape?),
            ["table"] => self.table(&shape?),
            [first, second, ..] => {
                let first_span = self.section.key_span(first).unwrap_or(0..0);
                let second_span = self.section.key_span(second).unwrap_or(0..0);
                self.findings.push(
                    Diagnostic::error(
                        Code::TwoSizes,
                        second_span,
                        format!("the size is stated twice: `{first}` and `{second}`"),
                    )
                    .context(first_span, "stated here as well")
                    .help("state the size in exactly one way"),
                );
                None
            }
            [_] => None,
        }
    }

    fn amount(&mut self, key: &str) -> Option<Amount> {
        let value = self.section.get(key)?;
        let amount = size::read(key, value, self.dimension, self.findings)?;
        let negative = amount.absolute.is_some_and(|part| part < 0.0)
            || amount.relative.is_some_and(|part| part < 0.0);
        if negative {
            let title = format!("`{key}` cannot be negative: \"{}\"", amount.text);
            self.findings.error(Code::OutsideDomain, value.span(), title);
            return None;
        }
        Some(amount)
    }

    fn shaped(
        &mut self,
        shape: Shape,
        amount: Amount,
        width: impl Fn(Amount) -> Width,
        text: String,
    ) -> Option<ReadSize> {
        let kind = Some(amount.kind());
        Some(ReadSize { spread: Spread::Shape(shape, width(amount)), kind, text, freedom: None })
    }

    fn disagree(&mut self, span: Span, title: &str) {
        self.findings.error(Code::KeysDisagree, span, title);
    }

    fn missing(&mut self, key: &str, title: &str) {
        self.findings.push(
            Diagnostic::error(Code::MissingKey, self.section.span.clone(), title)
                .help(format!("add `{key}`")),
        );
    }

    fn missing_shape(&mut self, key: &str) {
        let span = self.section.key_span(key).unwrap_or_else(|| self.section.span.clone());
        self.findings.push(
            Diagnostic::error(Code::MissingShape, span, format!("`{key}` needs `shape`")).help(
                "limits alone do not say how likely the values between them are: shape = \
                 \"rectangular\" where nothing more is known",
            ),
        );
    }

    fn missing_half_width(&mut self, shape: &Shape) {
        let title = format!("a {} shape needs `half_width`", shape.word());
        self.missing("half_width", &title);
    }

    fn normal_has_no_limits(&mut self) {
        let span = self.section.key_span("shape").unwrap_or(0..0);
        self.findings.push(
            Diagnostic::error(Code::KeysDisagree, span, "a normal distribution has no half-width")
                .help("state standard_uncertainty, or expanded_uncertainty with coverage_factor"),
        );
    }

    fn only_without_shape(&mut self, shape: &Option<Shape>, key: &str) -> Option<()> {
        if shape.is_some() {
            let span = self.section.key_span("shape").unwrap_or(0..0);
            self.disagree(span, &format!("`{key}` has a shape of its own: leave `shape` out"));
            return None;
        }
        Some(())
    }

    /// The shape; the outer `None` for a fault, the inner one where none is stated.
    #[allow(clippy::option_option, reason = "a fault and an absent key are different things")]
    fn read_shape(&mut self, stated: &[&str]) -> Option<Option<Shape>> {
        let flat = self.section.get("flat_half_width").is_some();
        let limit = self.section.get("limit_half_width").is_some();
        let word = self.section.text("shape", self.findings);
        if word.is_none() && self.section.get("shape").is_some() {
            return None;
        }
        let shape = match &word {
            None => None,
            Some((word, span)) => match word.as_str() {
                "normal" => Some(Shape::Normal),
                "rectangular" => Some(Shape::Rectangular),
                "triangular" => Some(Shape::Triangular),
                "arcsine" => Some(Shape::Arcsine),
                "trapezoidal" if flat => Some(Shape::Trapezoidal(self.amount("flat_half_width")?)),
                "curvilinear-trapezoid" if limit => {
                    Some(Shape::CurvilinearTrapezoid(self.amount("limit_half_width")?))
                }
                "trapezoidal" => {
                    self.missing("flat_half_width", "a trapezoidal shape needs `flat_half_width`");
                    return None;
                }
                "curvilinear-trapezoid" => {
                    let title = "a curvilinear-trapezoid shape needs `limit_half_width`";
                    self.missing("limit_half_width", title);
                    return None;
                }
                other => {
                    unknown_word("shape", other, &Shape::WORDS, span.clone(), self.findings);
                    return None;
                }
            },
        };
        let belongs = |key: &str, there: bool, fits: bool| {
            there && !fits && stated.len() == 1 && !key.is_empty()
        };
        let is_flat = matches!(shape, Some(Shape::Trapezoidal(_)));
        let is_limit = matches!(shape, Some(Shape::CurvilinearTrapezoid(_)));
        for (key, there, fits, owner) in [
            ("flat_half_width", flat, is_flat, "trapezoidal"),
            ("limit_half_width", limit, is_limit, "curvilinear-trapezoid"),
        ] {
            if belongs(key, there, fits) {
                let span = self.section.key_span(key).unwrap_or(0..0);
                self.disagree(span, &format!("`{key}` belongs to the shape `{owner}`"));
                return None;
            }
        }
        Some(shape)
    }

    /// The inner width of a trapezoid lies inside the outer one, and is stated in the same way.
    fn check_inner_width(&mut self, shape: &Shape, outer: &Amount) -> Option<()> {
        let (key, inner) = match shape {
            Shape::Trapezoidal(inner) => ("flat_half_width", inner),
            Shape::CurvilinearTrapezoid(inner) => ("limit_half_width", inner),
            _ => return Some(()),
        };
        let fits = inner.kind() == outer.kind()
            && outer.kind() != Size::Mixed
            && inner.at(1.0) <= outer.at(1.0);
        if fits {
            return Some(());
        }
        let span = self.section.key_span(key).unwrap_or(0..0);
        self.disagree(
            span,
            &format!("`{key}` is not above `half_width`, and both are lengths or both are in %"),
        );
        None
    }

    fn expanded(&mut self, shape: Option<Shape>) -> Option<ReadSize> {
        let amount = self.amount("expanded_uncertainty")?;
        if shape.is_some_and(|shape| shape != Shape::Normal) {
            let span = self.section.key_span("shape").unwrap_or(0..0);
            self.disagree(span, "an expanded uncertainty belongs to a normal distribution");
            return None;
        }
        let factor = self.section.get("coverage_factor");
        let coverage = self.section.get("coverage");
        let (k, words) = match (factor, coverage) {
            (Some(value), None) => match number(value.get_ref()) {
                Some(k) if (0.1..=10.0).contains(&k) => (k, format!("k = {k}")),
                _ => {
                    let title = "`coverage_factor` is a number such as 2";
                    self.findings.error(Code::OutsideDomain, value.span(), title);
                    return None;
                }
            },
            (None, Some(value)) => {
                let probability = read_probability("coverage", value, self.findings)?;
                let freedom =
                    self.freedom.map_or(DegreesOfFreedom::Infinite, DegreesOfFreedom::Finite);
                let k = Coverage::Probability(probability).factor(freedom);
                (k, format!("{} %", round_to(probability * 100.0)))
            }
            (Some(_), Some(second)) => {
                let title = "`coverage_factor` and `coverage` exclude each other";
                self.findings.error(Code::KeysDisagree, second.span(), title);
                return None;
            }
            (None, None) => {
                let title = "`expanded_uncertainty` needs `coverage_factor` or `coverage`";
                self.missing("coverage_factor", title);
                return None;
            }
        };
        let text = format!("expanded uncertainty {}, {words}", amount.text);
        self.shaped(Shape::Normal, amount, |amount| Width::Expanded(amount, k), text)
    }

    fn limits(&mut self, shape: Option<Shape>) -> Option<ReadSize> {
        let from_value = self.section.get("error_from")?;
        let Some(to_value) = self.section.get("error_to") else {
            self.missing("error_to", "`error_from` needs `error_to`");
            return None;
        };
        let from = size::read("error_from", from_value, self.dimension, self.findings)?;
        let to = size::read("error_to", to_value, self.dimension, self.findings)?;
        let shape = shape.unwrap_or(Shape::Rectangular);
        if shape == Shape::Normal {
            self.normal_has_no_limits();
            return None;
        }
        if from.kind() != to.kind() || from.kind() == Size::Mixed {
            self.disagree(to_value.span(), "`error_from` and `error_to` are in units of one kind");
            return None;
        }
        if from.at(1.0) > to.at(1.0) {
            self.findings.push(
                Diagnostic::error(
                    Code::RangeReversed,
                    to_value.span(),
                    format!("the error runs from {} down to {}", from.text, to.text),
                )
                .context(from_value.span(), "from here")
                .help("the smaller error comes first"),
            );
            return None;
        }
        let half = Amount {
            absolute: from.absolute.zip(to.absolute).map(|(a, b)| (b - a) / 2.0),
            relative: from.relative.zip(to.relative).map(|(a, b)| (b - a) / 2.0),
            text: String::new(),
        };
        self.check_inner_width(&shape, &half)?;
        let text = format!("error from {} to {}, {}", from.text, to.text, shape.word());
        let kind = Some(from.kind());
        Some(ReadSize { spread: Spread::Limits(shape, from, to), kind, text, freedom: None })
    }

    fn observed(&mut self, shape: &Option<Shape>) -> Option<ReadSize> {
        self.only_without_shape(shape, "observations")?;
        let value = self.section.get("observations")?;
        let (observed, first) = self.list_of_errors("observations", value)?;
        let count = observed.len() as f64;
        let s = standard_deviation(&observed);
        let redrawn = self.fixed_until.unwrap_or(FixedUntil::Survey).is_redrawn();
        let scale = if redrawn { s * (1.0 + 1.0 / count).sqrt() } else { s / count.sqrt() };
        let text = format!("{} observations", observed.len());
        let spread = Spread::Observed { mean: mean(&observed), scale };
        Some(ReadSize { spread, kind: Some(first), text, freedom: Some(count - 1.0) })
    }

    /// Observed errors in the unit of the input, or all in per cent.
    fn list_of_errors(
        &mut self,
        key: &str,
        value: &'a Spanned<DeValue<'i>>,
    ) -> Option<(Vec<f64>, Size)> {
        let in_per_cent =
            value.get_ref().as_array().and_then(|items| items.first()).is_some_and(|item| {
                item.get_ref().as_str().is_some_and(|text| text.trim_end().ends_with('%'))
            });
        let (dimension, kind) = if in_per_cent {
            (Some(Dimension::NONE), Size::Scale)
        } else {
            (self.dimension, Size::Shift)
        };
        let (observed, _) = read_observations(key, value, dimension, self.findings)?;
        Some((observed, kind))
    }

    fn table(&mut self, shape: &Option<Shape>) -> Option<ReadSize> {
        self.only_without_shape(shape, "table")?;
        let value = self.section.get("table")?;
        let DeValue::Array(rows) = value.get_ref() else {
            let title = format!("`table` is a list of pairs, not {}", article(value.get_ref()));
            self.findings.error(Code::WrongType, value.span(), title);
            return None;
        };
        let mut amounts = Vec::new();
        let mut weights = Vec::new();
        for row in rows.iter() {
            let pair = row.get_ref().as_array().filter(|pair| pair.len() == 2);
            let weight = pair.and_then(|pair| number(pair[1].get_ref())).filter(|w| *w >= 0.0);
            let (Some(pair), Some(weight)) = (pair, weight) else {
                self.findings.push(
                    Diagnostic::error(
                        Code::WrongType,
                        row.span(),
                        "a row of `table` is an error and its weight",
                    )
                    .help("for example table = [[\"0 mm\", 3], [\"2 mm\", 1]]"),
                );
                return None;
            };
            amounts.push(size::read("table", &pair[0], self.dimension, self.findings)?);
            weights.push(weight);
        }
        let sum: f64 = weights.iter().sum();
        let kind = amounts.first().map(Amount::kind);
        let one_kind = amounts.iter().all(|amount| Some(amount.kind()) == kind);
        if !(sum > 0.0 && sum.is_finite()) || !one_kind || kind == Some(Size::Mixed) {
            let title = "`table` needs rows of one kind, and weights that do not add up to 0";
            self.findings.error(Code::OutsideDomain, value.span(), title);
            return None;
        }
        let errors: Vec<f64> = amounts.iter().map(|amount| amount.at(1.0)).collect();
        let probabilities = weights.iter().map(|weight| weight / sum).collect();
        let text = format!("table of {} errors", errors.len());
        Some(ReadSize { spread: Spread::Table(errors, probabilities), kind, text, freedom: None })
    }
}

/// A coverage probability: `"95 %"`.
pub(super) fn read_probability(
    key: &str,
    value: &Spanned<DeValue<'_>>,
    findings: &mut Findings<'_>,
) -> Option<f64> {
    let text = string(key, value, findings)?;
    let probability = Quantity::parse(&text)
        .ok()
        .filter(|quantity| quantity.dimension().is_none())
        .map(|quantity| quantity.value)
        .filter(|p| (0.5..=0.9999).contains(p));
    if probability.is_none() {
        let title = format!("`{key}` is a probability from 50 % to 99.99 %, such as \"95 %\"");
        findings.error(Code::OutsideDomain, value.span(), title);
    }
    probability
}
