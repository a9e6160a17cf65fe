//! Coverage probability and coverage factor.

use statrs::distribution::{ContinuousCDF, Normal, StudentsT};

use super::DegreesOfFreedom;

/// What an expanded uncertainty is to cover: stated as a probability or as a factor.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Coverage {
    /// The coverage probability, between 0 and 1; the factor follows from the t distribution.
    Probability(f64),
    /// The coverage factor; the probability is that of a normal distribution.
    Factor(f64),
}

impl Coverage {
    /// The coverage probability.
    pub fn probability(self) -> f64 {
        match self {
            Self::Probability(probability) => probability,
            Self::Factor(factor) => 2.0 * standard_normal().cdf(factor) - 1.0,
        }
    }

    /// The coverage factor (JCGM 100 G.6.4): from t with the effective degrees of freedom, not rounded;
    /// from the normal distribution where they are infinite or undefined.
    ///
    /// ```
    /// use nappe::propagation::{Coverage, DegreesOfFreedom};
    ///
    /// // JCGM 100 table G.2: t_95(10) = 2.23
    /// let k = Coverage::Probability(0.95).factor(DegreesOfFreedom::Finite(10.0));
    /// assert!((k - 2.23).abs() < 0.005);
    /// ```
    pub fn factor(self, degrees_of_freedom: DegreesOfFreedom) -> f64 {
        let Self::Probability(probability) = self else {
            let Self::Factor(factor) = self else { return f64::NAN };
            return factor;
        };
        let upper = f64::midpoint(1.0, probability);
        if let DegreesOfFreedom::Finite(freedom) = degrees_of_freedom
            && let Ok(t) = StudentsT::new(0.0, 1.0, freedom)
        {
            return t.inverse_cdf(upper);
        }
        standard_normal().inverse_cdf(upper)
    }
}

fn standard_normal() -> Normal {
    Normal::standard()
}
