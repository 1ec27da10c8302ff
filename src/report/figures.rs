//! Numbers as people read them.

/// A value with its standard error, rounded to two digits of the error: `12.34 ± 0.56`.
pub fn with_error(value: f64, error: f64) -> String {
    if !value.is_finite() {
        return "\u{2013}".into();
    }
    if !(error.is_finite() && error > 0.0) {
        return short(value);
    }
    let digits = 1 - error.log10().floor() as i32;
    if value.abs() >= 1e6 || value.abs().max(error) < 1e-4 {
        let power = value.abs().max(error).log10().floor() as i32;
        let scale = 10.0_f64.powi(power);
        let digits = (digits + power).clamp(0, 12) as usize;
        return format!("({:.digits$} ± {:.digits$})e{power}", value / scale, error / scale);
    }
    let rounded = |number: f64| {
        let unit = 10.0_f64.powi(-digits);
        if digits < 0 { (number / unit).round() * unit } else { number }
    };
    let (value, error) = (rounded(value), rounded(error));
    let digits = digits.clamp(0, 12) as usize;
    format!("{value:.digits$} ± {error:.digits$}")
}

/// A number of three digits; a dash if there is none.
pub fn short(value: f64) -> String {
    if !value.is_finite() {
        return "\u{2013}".into();
    }
    if value == 0.0 {
        return "0".into();
    }
    let power = value.abs().log10().floor() as i32;
    if !(-4..6).contains(&power) {
        return format!("{value:.2e}");
    }
    let digits = (2 - power).max(0) as usize;
    let text = format!("{value:.digits$}");
    if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.').into() } else { text }
}

/// A probability in percent; a dash if there is none.
pub fn percent(probability: f64) -> String {
    if probability.is_finite() {
        format!("{:.0} %", 100.0 * probability)
    } else {
        "\u{2013}".into()
    }
}

/// An angle with the letter of its side.
pub fn degrees(angle_deg: f64, positive: char, negative: char) -> String {
    format!("{:.4}° {}", angle_deg.abs(), if angle_deg < 0.0 { negative } else { positive })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn errors_set_the_number_of_digits() {
        assert_eq!(with_error(12.3456, 0.567), "12.35 ± 0.57");
        assert_eq!(with_error(1234.0, 56.0), "1234 ± 56");
        assert_eq!(with_error(12_345.0, 567.0), "12350 ± 570");
        assert_eq!(with_error(f64::NAN, 1.0), "\u{2013}");
        assert_eq!(with_error(2.0, 0.0), "2");
        assert_eq!(with_error(3.21e-7, 1.2e-8), "(3.21 ± 0.12)e-7");
    }

    #[test]
    fn short_numbers_have_three_digits() {
        assert_eq!(
            (short(0.0), short(3.15159), short(1234.6)),
            ("0".into(), "3.15".into(), "1235".into())
        );
        assert_eq!((short(f64::INFINITY), short(1e-9)), ("\u{2013}".into(), "1.00e-9".into()));
    }
}
