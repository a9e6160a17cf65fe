//! Reading the one way in which a source states its size.

use toml::Spanned;
use toml::de::DeValue;

use super::section::{Findings, Section, article, number};
use super::size::{self, Amount, Size};
use super::source::{FixedUntil, round_to, unknown_word};
use super::spread::{Shape, Spread, Width};
use super::structure::{mean, read_observations, standard_deviation};
use crate::diagnostic::{Code, Diagnostic, Span};
use crate::propagation::{Coverage, DegreesOfFreedom, Distribution};
use crate::units::{Dimension, Quantity};

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

/// A size that was read.
pub(super) struct ReadSize {
    pub(super) spread: Spread,
    /// `None` where nothing but a bias is stated.
    pub(super) kind: Option<Size>,
    pub(super) text: String,
    pub(super) freedom: Option<f64>,
}

/// Reads the one way in which a source states its size.
pub(super) struct Reader<'r, 's, 'a, 'i, 't> {
    pub(super) section: &'s mut Section<'a, 'i>,
    pub(super) dimension: Option<Dimension>,
    pub(super) findings: &'r mut Findings<'t>,
    pub(super) freedom: Option<f64>,
    pub(super) fixed_until: Option<FixedUntil>,
}

impl<'a, 'i> Reader<'_, '_, 'a, 'i, '_> {
    pub(super) fn read(mut self, has_bias: bool) -> Option<ReadSize> {
        let error_to = self.section.get("error_to");
        let stated: Vec<&str> =
            SIZE_KEYS.into_iter().filter(|key| self.section.get(key).is_some()).collect();
        let shape = self.read_shape(&stated);
        for key in ["coverage_factor", "coverage"] {
            let span = self.section.get(key).map(Spanned::span);
            if let Some(span) = span.filter(|_| !stated.contains(&"expanded_uncertainty")) {
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
            [] if self.section.has_slip_of(&SIZE_KEYS) => None,
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
                // The inner width must fit the half-width that the uncertainty gives.
                let outer = shape.with_standard_uncertainty(amount.at(1.0), 1.0);
                self.check_inner_width(&shape, &amount, half_width_of(&outer))?;
                let text = format!("standard uncertainty {}, {}", amount.text, shape.word());
                Some(shaped(shape, amount, Width::Standard, text))
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
                self.check_inner_width(&shape, &amount, amount.at(1.0))?;
                let text = format!("half-width {}, {}", amount.text, shape.word());
                Some(shaped(shape, amount, Width::Half, text))
            }
            ["resolution"] => {
                let amount = self.amount("resolution")?;
                self.only_without_shape(shape?.as_ref(), "resolution")?;
                let text = format!("resolution {}, rectangular", amount.text);
                Some(shaped(Shape::Rectangular, amount, Width::Step, text))
            }
            ["error_from"] => self.limits(shape?),
            ["observations"] => self.observed(shape?.as_ref()),
            ["table"] => self.table(shape?.as_ref()),
            [first, second, ..] => {
                let first_span = self.section.key_span(first).unwrap_or(0..0);
                let second_span = self.section.key_span(second).unwrap_or(0..0);
                self.findings.push(
                    Diagnostic::error(
                        Code::TwoSizes,
                        second_span,
                        format!("the size is stated more than once: {}", stated.join(", ")),
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

    fn normal_has_no_limits(&mut self) {
        let span = self.section.key_span("shape").unwrap_or(0..0);
        self.findings.push(
            Diagnostic::error(Code::KeysDisagree, span, "a normal distribution has no half-width")
                .help("state standard_uncertainty, or expanded_uncertainty with coverage_factor"),
        );
    }

    fn only_without_shape(&mut self, shape: Option<&Shape>, key: &str) -> Option<()> {
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
        let is_flat = matches!(shape, Some(Shape::Trapezoidal(_)));
        let is_limit = matches!(shape, Some(Shape::CurvilinearTrapezoid(_)));
        for (key, there, fits, owner) in [
            ("flat_half_width", flat, is_flat, "trapezoidal"),
            ("limit_half_width", limit, is_limit, "curvilinear-trapezoid"),
        ] {
            // Where the size is stated twice, that is the fault to tell.
            if there && !fits && stated.len() == 1 {
                let span = self.section.key_span(key).unwrap_or(0..0);
                self.disagree(span, &format!("`{key}` belongs to the shape `{owner}`"));
                return None;
            }
        }
        Some(shape)
    }

    /// The inner width of a trapezoid lies inside the outer one, and is stated in the same way.
    fn check_inner_width(&mut self, shape: &Shape, outer: &Amount, half_width: f64) -> Option<()> {
        let (key, inner) = match shape {
            Shape::Trapezoidal(inner) => ("flat_half_width", inner),
            Shape::CurvilinearTrapezoid(inner) => ("limit_half_width", inner),
            _ => return Some(()),
        };
        // A flat top may be as wide as the limits; limits known to within their width say nothing.
        let below = match shape {
            Shape::CurvilinearTrapezoid(_) => inner.at(1.0) < half_width,
            _ => inner.at(1.0) <= half_width,
        };
        let fits = inner.kind() == outer.kind() && outer.kind() != Size::Mixed && below;
        if fits {
            return Some(());
        }
        let span = self.section.key_span(key).unwrap_or(0..0);
        self.disagree(
            span,
            &format!(
                "`{key}` must not be above the half-width, and must be stated in its kind of unit"
            ),
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
        Some(shaped(Shape::Normal, amount, |amount| Width::Expanded(amount, k), text))
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
        self.check_inner_width(&shape, &half, half.at(1.0))?;
        let text = format!("error from {} to {}, {}", from.text, to.text, shape.word());
        let kind = Some(from.kind());
        Some(ReadSize { spread: Spread::Limits(shape, from, to), kind, text, freedom: None })
    }

    fn observed(&mut self, shape: Option<&Shape>) -> Option<ReadSize> {
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

    fn table(&mut self, shape: Option<&Shape>) -> Option<ReadSize> {
        self.only_without_shape(shape, "table")?;
        let value = self.section.get("table")?;
        let DeValue::Array(rows) = value.get_ref() else {
            let title = format!("`table` is a list of pairs, not {}", article(value.get_ref()));
            self.findings.error(Code::WrongType, value.span(), title);
            return None;
        };
        let mut amounts = Vec::new();
        let mut weights = Vec::new();
        for row in rows {
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
        let usable = sum > 0.0 && sum.is_finite() && one_kind && kind != Some(Size::Mixed);
        if !usable {
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

/// The half-width of a distribution that has one.
fn half_width_of(distribution: &Distribution) -> f64 {
    match distribution {
        Distribution::Trapezoidal { half_width, .. }
        | Distribution::CurvilinearTrapezoid { half_width, .. } => *half_width,
        _ => f64::INFINITY,
    }
}

/// A size of a shape that one width fixes.
fn shaped(shape: Shape, amount: Amount, width: impl Fn(Amount) -> Width, text: String) -> ReadSize {
    let kind = Some(amount.kind());
    ReadSize { spread: Spread::Shape(shape, width(amount)), kind, text, freedom: None }
}

/// A coverage probability: `"95 %"`.
fn read_probability(
    key: &str,
    value: &Spanned<DeValue<'_>>,
    findings: &mut Findings<'_>,
) -> Option<f64> {
    let stated = match value.get_ref().as_str() {
        Some(text) => Quantity::parse(text)
            .ok()
            .filter(|quantity| quantity.dimension().is_none())
            .map(|quantity| quantity.value),
        None => number(value.get_ref()),
    };
    let probability = stated.filter(|p| (0.5..=0.9999).contains(p));
    if probability.is_none() {
        let title = format!("`{key}` is a probability from 50 % to 99.99 %, such as \"95 %\"");
        findings.error(Code::OutsideDomain, value.span(), title);
    }
    probability
}
