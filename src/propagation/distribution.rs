//! Distributions of an error: their parameters and moments. Drawing from them is the Monte Carlo
//! method's business.

/// The distribution of one error, in the unit of that error.
#[derive(Clone, Debug, PartialEq)]
pub enum Distribution {
    /// A known bias without an uncertainty of its own.
    Fixed {
        /// The bias.
        mean: f64,
    },
    /// Normal (JCGM 101 6.4.7).
    Normal {
        /// Expectation.
        mean: f64,
        /// Standard deviation.
        standard_uncertainty: f64,
    },
    /// Rectangular between two limits (JCGM 101 6.4.2).
    Rectangular {
        /// Middle of the limits.
        mean: f64,
        /// Half their distance.
        half_width: f64,
    },
    /// Triangular between two limits (JCGM 101 6.4.5).
    Triangular {
        /// Middle of the limits.
        mean: f64,
        /// Half their distance.
        half_width: f64,
    },
    /// Isosceles trapezoid between two limits (JCGM 101 6.4.4).
    Trapezoidal {
        /// Middle of the limits.
        mean: f64,
        /// Half their distance.
        half_width: f64,
        /// Half the length of the flat top.
        flat_half_width: f64,
    },
    /// Arcsine, of a sinusoid of unknown phase (JCGM 101 6.4.6).
    Arcsine {
        /// Middle of the limits.
        mean: f64,
        /// Half their distance.
        half_width: f64,
    },
    /// Rectangular with limits that are themselves known only to within some distance
    /// (JCGM 101 6.4.3).
    CurvilinearTrapezoid {
        /// Middle of the limits.
        mean: f64,
        /// Half their expected distance.
        half_width: f64,
        /// How far each limit may be off.
        limit_half_width: f64,
    },
    /// Scaled and shifted t (JCGM 101 6.4.9).
    ScaledT {
        /// Location.
        mean: f64,
        /// Scale: the standard uncertainty of the linear method.
        scale: f64,
        /// Degrees of freedom.
        degrees_of_freedom: f64,
    },
    /// One of several values, each with its probability.
    Discrete {
        /// The values.
        values: Vec<f64>,
        /// Their probabilities, which add up to 1.
        probabilities: Vec<f64>,
    },
    /// There for a share of the time only, and otherwise 0.
    Occasional {
        /// The share.
        present: f64,
        /// What it is while it is there.
        distribution: Box<Distribution>,
    },
}

impl Distribution {
    /// Expectation; the location of a t distribution, which has no expectation for 1 degree of freedom.
    pub fn mean(&self) -> f64 {
        match self {
            Self::Fixed { mean }
            | Self::Normal { mean, .. }
            | Self::Rectangular { mean, .. }
            | Self::Triangular { mean, .. }
            | Self::Trapezoidal { mean, .. }
            | Self::Arcsine { mean, .. }
            | Self::CurvilinearTrapezoid { mean, .. }
            | Self::ScaledT { mean, .. } => *mean,
            Self::Discrete { values, probabilities } => {
                values.iter().zip(probabilities).map(|(value, weight)| value * weight).sum()
            }
            Self::Occasional { present, distribution } => present * distribution.mean(),
        }
    }

    /// The standard uncertainty that the linear method takes: the standard deviation, but the scale of a
    /// t distribution (JCGM 100 4.2.3 against JCGM 101 6.4.9.4).
    ///
    /// ```
    /// use nappe::propagation::Distribution;
    ///
    /// let limits = Distribution::Rectangular { mean: 0.0, half_width: 3.0 };
    /// assert!((limits.standard_uncertainty() - 3.0_f64.sqrt()).abs() < 1e-15);
    /// ```
    pub fn standard_uncertainty(&self) -> f64 {
        match self {
            Self::Fixed { .. } => 0.0,
            Self::Normal { standard_uncertainty, .. } => *standard_uncertainty,
            Self::Rectangular { half_width, .. } => half_width / 3.0_f64.sqrt(),
            Self::Triangular { half_width, .. } => half_width / 6.0_f64.sqrt(),
            // a² (1 + β²)/6 with the flat top β a (JCGM 100 4.3.9).
            Self::Trapezoidal { half_width, flat_half_width, .. } => {
                ((half_width.powi(2) + flat_half_width.powi(2)) / 6.0).sqrt()
            }
            Self::Arcsine { half_width, .. } => half_width / 2.0_f64.sqrt(),
            // a²/3 + d²/9 (JCGM 101 6.4.3.3).
            Self::CurvilinearTrapezoid { half_width, limit_half_width, .. } => {
                (half_width.powi(2) / 3.0 + limit_half_width.powi(2) / 9.0).sqrt()
            }
            Self::ScaledT { scale, .. } => *scale,
            Self::Discrete { values, probabilities } => {
                let mean = self.mean();
                let square = |value: &f64| (value - mean).powi(2);
                let variance: f64 =
                    values.iter().zip(probabilities).map(|(value, p)| square(value) * p).sum();
                variance.sqrt()
            }
            Self::Occasional { present, distribution } => {
                let (mean, u) = (distribution.mean(), distribution.standard_uncertainty());
                let variance = present * (u * u + mean * mean) - (present * mean).powi(2);
                variance.max(0.0).sqrt()
            }
        }
    }

    /// It is normal: what a joint normal distribution stands for without loss.
    pub fn is_normal(&self) -> bool {
        matches!(self, Self::Normal { .. })
    }

    /// Whether expectation and standard deviation of the draws exist.
    pub fn has_moments(&self) -> bool {
        match self {
            Self::ScaledT { degrees_of_freedom, .. } => *degrees_of_freedom > 2.0,
            Self::Occasional { distribution, .. } => distribution.has_moments(),
            _ => true,
        }
    }
}
