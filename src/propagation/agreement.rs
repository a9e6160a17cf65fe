//! Whether the linear method is good enough: its comparison with Monte Carlo (JCGM 101 clause 8).

/// The comparison.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Agreement {
    /// Numerical tolerance of the standard uncertainty, half a unit of its second digit (7.9.2).
    pub tolerance: f64,
    /// Distance of the lower ends of both intervals.
    pub difference_low: f64,
    /// Distance of the upper ends.
    pub difference_high: f64,
}

impl Agreement {
    /// Compares y ± U of the linear method with the Monte Carlo interval.
    pub fn new(
        value: f64,
        expanded_uncertainty: f64,
        interval: [f64; 2],
        standard_uncertainty: f64,
    ) -> Self {
        Self {
            tolerance: numerical_tolerance(standard_uncertainty),
            difference_low: (value - expanded_uncertainty - interval[0]).abs(),
            difference_high: (value + expanded_uncertainty - interval[1]).abs(),
        }
    }

    /// Both ends agree within the tolerance.
    pub fn linear_is_adequate(&self) -> bool {
        self.difference_low <= self.tolerance && self.difference_high <= self.tolerance
    }
}

/// Digits of a standard uncertainty that are taken as meaningful.
const DIGITS: i32 = 2;

/// Half a unit of the second significant digit (JCGM 101 7.9.2): for 0.00035, which is 35e-5, it is
/// 0.5e-5.
pub fn numerical_tolerance(standard_uncertainty: f64) -> f64 {
    if !(standard_uncertainty > 0.0 && standard_uncertainty.is_finite()) {
        return 0.0;
    }
    let place = |value: f64| value.log10().floor() as i32 - (DIGITS - 1);
    let mut exponent = place(standard_uncertainty);
    // 9.96 rounds to 10, one place up.
    if (standard_uncertainty / 10_f64.powi(exponent)).round() >= 10_f64.powi(DIGITS) {
        exponent += 1;
    }
    0.5 * 10_f64.powi(exponent)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// JCGM 101 7.9.2, examples 1 and 2, with two digits.
    #[test]
    fn the_tolerance_is_that_of_the_guides_examples() {
        let close = |a: f64, b: f64| (a / b - 1.0).abs() < 1e-12;
        assert!(close(numerical_tolerance(0.000_35), 0.5e-5));
        assert!(close(numerical_tolerance(2.0), 0.05));
        assert!(close(numerical_tolerance(0.0996), 0.005));
        assert_eq!(numerical_tolerance(0.0), 0.0);
    }
}
