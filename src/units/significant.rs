//! Writing numbers with a few significant digits, for words and tables.

/// The number with at most `digits` significant digits, without exponent where it reads well.
///
/// ```
/// use nappe::units::significant;
///
/// assert_eq!(significant(0.123456, 3), "0.123");
/// assert_eq!(significant(1234.56, 3), "1230");
/// assert_eq!(significant(2.0, 4), "2");
/// ```
pub fn significant(value: f64, digits: i32) -> String {
    if value == 0.0 || !value.is_finite() {
        return format!("{value}");
    }
    let exponent = value.abs().log10().floor() as i32;
    let decimals = digits - 1 - exponent;
    if !(-5..=6).contains(&exponent) {
        let text = format!("{value:.*e}", (digits - 1).max(0) as usize);
        return text;
    }
    let rounded = if decimals >= 0 {
        format!("{value:.*}", decimals as usize)
    } else {
        let unit = 10_f64.powi(-decimals);
        format!("{:.0}", (value / unit).round() * unit)
    };
    if rounded.contains('.') {
        rounded.trim_end_matches('0').trim_end_matches('.').to_owned()
    } else {
        rounded
    }
}

/// A number with its unit; that of a pure number, `1`, is not written.
///
/// ```
/// use nappe::units::with_unit;
///
/// assert_eq!(with_unit("0.25", "m"), "0.25 m");
/// assert_eq!(with_unit("1.2", "1"), "1.2");
/// ```
pub fn with_unit(number: impl Into<String>, unit: &str) -> String {
    let mut text = number.into();
    if unit != "1" {
        text.push(' ');
        text.push_str(unit);
    }
    text
}
