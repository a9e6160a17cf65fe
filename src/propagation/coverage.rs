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
        let z = standard_normal().inverse_cdf(upper);
        match degrees_of_freedom {
            DegreesOfFreedom::Finite(freedom) if freedom > NEARLY_NORMAL => {
                nearly_normal(z, freedom)
            }
            DegreesOfFreedom::Finite(freedom) => match StudentsT::new(0.0, 1.0, freedom) {
                Ok(t) => t.inverse_cdf(upper),
                Err(_) => f64::NAN,
            },
            DegreesOfFreedom::Infinite | DegreesOfFreedom::Undefined => z,
        }
    }
}

/// Beyond this the search for the quantile of t, which needs the incomplete beta function at the edge of
/// its domain, may never end, and the expansion is exact to rounding.
const NEARLY_NORMAL: f64 = 1e4;

/// The quantile of t from that of the normal distribution, to the third power of 1/ν (Abramowitz and
/// Stegun 1964, 26.7.5).
fn nearly_normal(z: f64, freedom: f64) -> f64 {
    let first = (z.powi(3) + z) / 4.0;
    let second = (5.0 * z.powi(5) + 16.0 * z.powi(3) + 3.0 * z) / 96.0;
    let third = (3.0 * z.powi(7) + 19.0 * z.powi(5) + 17.0 * z.powi(3) - 15.0 * z) / 384.0;
    z + first / freedom + second / freedom.powi(2) + third / freedom.powi(3)
}

fn standard_normal() -> Normal {
    Normal::standard()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn any_number_of_degrees_of_freedom_has_a_factor_in_no_time() {
        let factor =
            |freedom: f64| Coverage::Probability(0.95).factor(DegreesOfFreedom::Finite(freedom));
        let mut last = f64::INFINITY;
        for exponent in 0..400 {
            let k = factor(10_f64.powf(f64::from(exponent) / 20.0));
            assert!(k <= last + 1e-12 && k > 1.959, "{k} after {last}");
            last = k;
        }
        // The two ways meet where one takes over from the other.
        assert!((factor(9_999.9) - factor(10_000.1)).abs() < 1e-7);
    }
}
