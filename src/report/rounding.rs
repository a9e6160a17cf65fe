//! Rounding for print: the uncertainty to two significant digits, the value to the same place
//! (JCGM 100 7.2.6).

/// A value and its uncertainty, written to the same decimal place.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Rounded {
    /// The value.
    pub value: String,
    /// Its uncertainty.
    pub uncertainty: String,
    places: i32,
}

impl Rounded {
    /// Another number to the same place: the end of an interval.
    pub fn like(&self, value: f64) -> String {
        to_place(value, self.places)
    }
}

/// Significant digits of an uncertainty.
const DIGITS: i32 = 2;

/// Rounds a value and its uncertainty. Without an uncertainty (0, or not finite) the value keeps six
/// digits.
///
/// ```
/// use nappe::report::rounded;
///
/// let both = rounded(100.021_47, 0.000_354);
/// assert_eq!((both.value.as_str(), both.uncertainty.as_str()), ("100.02147", "0.00035"));
/// // Carrying over moves the last place: 0.0996 is 0.10.
/// assert_eq!(rounded(1.0, 0.0996).uncertainty, "0.10");
/// ```
pub fn rounded(value: f64, uncertainty: f64) -> Rounded {
    if !(uncertainty > 0.0 && uncertainty.is_finite()) {
        let exponent = if value == 0.0 { 0 } else { value.abs().log10().floor() as i32 };
        let places = (5 - exponent).clamp(-300, 300);
        let value = to_place(value, places);
        return Rounded { value, uncertainty: format!("{uncertainty}"), places };
    }
    let exponent = uncertainty.log10().floor() as i32;
    let mut places = DIGITS - 1 - exponent;
    let scaled = uncertainty / 10_f64.powi(-places);
    if scaled.round() >= 10_f64.powi(DIGITS) {
        places -= 1;
    }
    Rounded { value: to_place(value, places), uncertainty: to_place(uncertainty, places), places }
}

/// A number with this many decimals; with a negative count, to tens, hundreds, ...
fn to_place(value: f64, places: i32) -> String {
    if !value.is_finite() {
        return format!("{value}");
    }
    let text = if places >= 0 {
        format!("{value:.*}", places as usize)
    } else {
        let unit = 10_f64.powi(-places);
        format!("{:.0}", (value / unit).round() * unit)
    };
    // A value that rounds to zero has no sign.
    match text.strip_prefix('-') {
        Some(rest) if rest.chars().all(|c| c == '0' || c == '.') => rest.to_owned(),
        _ => text,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn large_uncertainties_round_to_tens() {
        let both = rounded(12_345.0, 678.0);
        assert_eq!((both.value.as_str(), both.uncertainty.as_str()), ("12350", "680"));
        assert_eq!(both.like(-3.0), "0");
    }

    #[test]
    fn without_uncertainty_six_digits_stand() {
        assert_eq!(rounded(1.0 / 3.0, 0.0).value, "0.333333");
        assert_eq!(rounded(0.0, 0.0).value, "0.00000");
    }
}
