//! The spread of an error: which number a file states, and the distribution that it makes.

use super::size::Amount;
use crate::propagation::Distribution;

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
    pub(super) const WORDS: [&'static str; 6] =
        ["normal", "rectangular", "triangular", "trapezoidal", "arcsine", "curvilinear-trapezoid"];

    pub(super) fn word(&self) -> &'static str {
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
    pub(super) fn with_half_width(&self, mean: f64, half_width: f64, value: f64) -> Distribution {
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

    /// The distribution with a standard uncertainty: the half-width that gives it.
    pub(super) fn with_standard_uncertainty(&self, u: f64, value: f64) -> Distribution {
        let half_width = match self {
            // u^2 = (a^2 + f^2)/6 and u^2 = a^2/3 + d^2/9, solved for a.
            Self::Trapezoidal(flat) => (6.0 * u * u - flat.at(value).powi(2)).max(0.0).sqrt(),
            Self::CurvilinearTrapezoid(limit) => {
                (3.0 * u * u - limit.at(value).powi(2) / 3.0).max(0.0).sqrt()
            }
            _ => u / self.with_half_width(0.0, 1.0, value).standard_uncertainty(),
        };
        self.with_half_width(0.0, half_width, value)
    }
}

/// The same distribution about a mean that lies higher by `bias`.
pub(super) fn shift(distribution: Distribution, bias: f64) -> Distribution {
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
