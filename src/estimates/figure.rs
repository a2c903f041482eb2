//! A value with its Monte Carlo error in parentheses: 0.4213(7).

use crate::maths::absolute;

/// `value` with the error in units of its last digits: `0.4213(7)` is 0.4213 with error 0.0007.
///
/// The error is rounded up, never down: to one digit, or to two where the first is a 1 or a 2 (rounding
/// 0.0012 up to 0.002 would overstate it by two thirds). From 10^7 on and below 10^-4 a power of ten stands
/// behind: `4.213(7)e-8`. A value without an error has
/// three digits and a question mark, `0.421(?)`, a whole number all of its digits (a median among equal
/// whole numbers has no error, and is right); no value is a dash.
pub fn figure(value: Option<f64>, error: Option<f64>) -> String {
    let Some(value) = value.filter(|v| !v.is_nan()) else {
        return "\u{2013}".into();
    };
    if value.is_infinite() {
        return if value > 0.0 {
            "inf".into()
        } else {
            "-inf".into()
        };
    }
    match error.filter(|e| e.is_finite() && *e >= 0.0) {
        None if value.fract() == 0.0 && absolute(value) < 1e9 => format!("{value:.0}(?)"),
        None => format!("{}(?)", three_digits(value)),
        Some(0.0) => format!("{}(0)", plain(value)),
        Some(error) => with_error(value, error),
    }
}

fn with_error(value: f64, error: f64) -> String {
    let (digits, place) = rounded_up(error);
    written(value, place, digits.len(), &digits)
}

/// A value rounded at a power of ten, without an error: `rounded(0.02118, -3)` is 0.021.
pub fn rounded(value: f64, place: i32) -> String {
    if value.is_nan() {
        "\u{2013}".into()
    } else if value.is_infinite() {
        if value > 0.0 {
            "inf".into()
        } else {
            "-inf".into()
        }
    } else {
        written(value, place, 1, "")
    }
}

/// The power of ten at which numbers that differ by about `width` should be rounded: two digits of it, or
/// three where the first is a 1 or a 2.
pub fn place_for(width: f64) -> Option<i32> {
    if !(width.is_finite() && width > 0.0) {
        return None;
    }
    let (two, place) = ceil_to(width, 2);
    Some(if two < 30 { place - 1 } else { place })
}

/// The value rounded at a place, then the error's digits in parentheses, if any.
fn written(value: f64, place: i32, digits: usize, error: &str) -> String {
    let mark = |zeros: usize| {
        if error.is_empty() {
            String::new()
        } else {
            format!("({error}{})", "0".repeat(zeros))
        }
    };
    let highest = place + digits as i32 - 1;
    // The power of ten of the leading digit of the value, once rounded.
    let leading = leading_power(value, place);
    let top = leading.unwrap_or(highest);
    if (top < -4 && highest < -4) || top >= 7 || highest >= 7 {
        let power = if top < place { highest } else { top };
        let decimals = usize::try_from(power - place).unwrap_or(0);
        format!("{}{}e{power}", shifted(value, power, decimals), mark(0))
    } else if let Ok(zeros) = usize::try_from(place) {
        // Rounded left of the point: zeros fill the places down to the units, in the error too.
        let whole = shifted(value, place, 0);
        let zeros_of_value = if whole == "0" { 0 } else { zeros };
        format!("{whole}{}{}", "0".repeat(zeros_of_value), mark(zeros))
    } else {
        let decimals = usize::try_from(-place).unwrap_or(0);
        format!(
            "{}{}",
            unsigned_zero(format!("{value:.decimals$}")),
            mark(0)
        )
    }
}

/// The digits of an error, rounded up, and the power of ten of the last of them.
fn rounded_up(error: f64) -> (String, i32) {
    let two = ceil_to(error, 2);
    if two.0 < 30 {
        return (two.0.to_string(), two.1);
    }
    let one = ceil_to(error, 1);
    // 0.00095 has become 0.0010: keep both digits.
    if one.0 == 1 {
        return ("10".into(), one.1 - 1);
    }
    (one.0.to_string(), one.1)
}

/// The smallest number of so many digits that is not below a positive error: digits, power of the last.
fn ceil_to(error: f64, digits: usize) -> (u64, i32) {
    let decimals = digits - 1;
    let text = format!("{error:.decimals$e}");
    let (mantissa, exponent) = text.split_once('e').unwrap_or(("0", "0"));
    let mut whole: u64 = mantissa.replace('.', "").parse().unwrap_or(0);
    let mut power = exponent.parse::<i32>().unwrap_or(0) - decimals as i32;
    let back: f64 = format!("{whole}e{power}").parse().unwrap_or(f64::INFINITY);
    if back < error {
        whole += 1;
    }
    if whole == 10u64.pow(digits as u32) {
        whole /= 10;
        power += 1;
    }
    (whole, power)
}

/// The power of the leading digit of a value rounded at a place; `None` when it rounds to zero.
fn leading_power(value: f64, place: i32) -> Option<i32> {
    let first = exponent(value)?;
    if first < place {
        // Half of the place or more rounds up to one digit at it.
        let half: f64 = format!("5e{}", place - 1).parse().unwrap_or(f64::INFINITY);
        return (absolute(value) > half).then_some(place);
    }
    let digits = usize::try_from(first - place).unwrap_or(0);
    exponent_of(&format!("{value:.digits$e}"))
}

fn exponent(value: f64) -> Option<i32> {
    (value != 0.0)
        .then(|| exponent_of(&format!("{value:e}")))
        .flatten()
}

fn exponent_of(text: &str) -> Option<i32> {
    text.split_once('e').and_then(|(_, e)| e.parse().ok())
}

/// The value divided by a power of ten, with so many decimals, from its exact decimal digits.
fn shifted(value: f64, power: i32, decimals: usize) -> String {
    let Some(first) = exponent(value) else {
        return format!("{:.decimals$}", 0.0);
    };
    // Digits after the leading one of the value that are kept.
    let keep = decimals as i32 + first - power;
    if keep < 0 {
        let rounds_up = keep == -1 && leading_power(value, power - decimals as i32).is_some();
        let sign = if value < 0.0 && rounds_up { "-" } else { "" };
        let unit = if rounds_up { 1 } else { 0 };
        return if decimals == 0 {
            format!("{sign}{unit}")
        } else {
            format!("{sign}0.{unit:0decimals$}")
        };
    }
    let text = format!("{value:.*e}", keep as usize);
    let (mantissa, exponent) = text.split_once('e').unwrap_or(("0", "0"));
    let exponent: i32 = exponent.parse().unwrap_or(0);
    let negative = mantissa.starts_with('-');
    let mut digits: String = mantissa.chars().filter(char::is_ascii_digit).collect();
    // Put the point `power - exponent` places to the left.
    let left = power - exponent;
    for _ in 0..left {
        digits.insert(0, '0');
    }
    let point = 1 + usize::try_from(-left).unwrap_or(0);
    while digits.len() < point + decimals {
        digits.push('0');
    }
    digits.truncate(point + decimals);
    let (whole, part) = digits.split_at(point);
    let sign = if negative { "-" } else { "" };
    if decimals == 0 {
        format!("{sign}{whole}")
    } else {
        format!("{sign}{whole}.{part}")
    }
}

fn unsigned_zero(text: String) -> String {
    if text.starts_with('-') && text.bytes().all(|b| matches!(b, b'-' | b'0' | b'.')) {
        text[1..].into()
    } else {
        text
    }
}

/// The shortest digits that give the value back.
fn plain(value: f64) -> String {
    let size = absolute(value);
    if value == 0.0 {
        "0".into()
    } else if (1e-4..1e7).contains(&size) {
        format!("{value}")
    } else {
        format!("{value:e}")
    }
}

/// R-hat with three decimals; how far beyond 100 it lies tells nothing more.
pub fn r_hat_text(r_hat: f64) -> String {
    if r_hat > 100.0 {
        "> 100".into()
    } else {
        format!("{r_hat:.3}")
    }
}

/// Three significant digits.
pub fn three_digits(value: f64) -> String {
    if value == 0.0 {
        return "0".into();
    }
    let text = format!("{value:.2e}");
    let (mantissa, power) = text.split_once('e').unwrap_or(("0", "0"));
    let power: i32 = power.parse().unwrap_or(0);
    if (-4..7).contains(&power) {
        let decimals = usize::try_from(2 - power).unwrap_or(0);
        if power <= 2 {
            return format!("{value:.decimals$}");
        }
        let whole: f64 = text.parse().unwrap_or(value);
        return format!("{whole:.0}");
    }
    format!("{mantissa}e{power}")
}

#[cfg(test)]
mod tests {
    use super::*;

    fn f(value: f64, error: f64) -> String {
        figure(Some(value), Some(error))
    }

    #[test]
    fn ordinary_figures() {
        assert_eq!(f(0.42134, 0.00068), "0.4213(7)");
        assert_eq!(f(0.42134, 0.00123), "0.4213(13)");
        assert_eq!(f(0.42134, 0.00291), "0.421(3)");
        assert_eq!(f(0.42134, 0.00281), "0.4213(29)");
        assert_eq!(f(0.42134, 0.0003), "0.4213(3)");
        assert_eq!(f(-12.345, 0.5), "-12.3(5)");
        assert_eq!(f(12.345, 3.0), "12(3)");
        assert_eq!(f(12.345, 12.0), "12(12)");
        assert_eq!(f(100.0, 1.0), "100.0(10)");
    }

    #[test]
    fn the_error_is_never_rounded_down() {
        assert_eq!(f(1.0, 0.000901), "1.0000(10)");
        assert_eq!(f(1.0, 0.00031), "1.0000(4)");
        assert_eq!(f(1.0, 0.0095), "1.000(10)");
        assert_eq!(f(1.0, 0.0100001), "1.000(11)");
    }

    #[test]
    fn large_and_small() {
        assert_eq!(f(123_456.0, 789.0), "123500(800)");
        assert_eq!(f(12_345_678.0, 789.0), "1.23457(8)e7");
        assert_eq!(f(9_999_960.0, 789.0), "1.00000(8)e7");
        assert_eq!(f(2.0, 2e7), "0.0(20)e7");
        assert_eq!(f(4.2134e-8, 6.8e-11), "4.213(7)e-8");
        assert_eq!(f(1.5e300, 2.2e297), "1.5000(22)e300");
        assert_eq!(f(123_456_789.0, 0.5), "1.234567890(5)e8");
        assert_eq!(f(9.9996e-8, 6e-11), "1.0000(6)e-7");
        assert_eq!(f(5e-324, 5e-324), "5(5)e-324");
        assert_eq!(f(f64::MAX, 3e307), "1.8(3)e308");
    }

    #[test]
    fn errors_beyond_the_value() {
        assert_eq!(f(0.01, 3.0), "0(3)");
        assert_eq!(f(-0.01, 3.0), "0(3)");
        assert_eq!(f(1.0, 400.0), "0(400)");
        assert_eq!(f(0.0, 0.004), "0.000(4)");
        assert_eq!(f(1e-9, 3e-7), "0(3)e-7");
        assert_eq!(f(-90.0, 100.0), "-90(100)");
    }

    #[test]
    fn rounding_at_a_place() {
        assert_eq!(rounded(0.02118, -3), "0.021");
        assert_eq!(rounded(-0.0002, -3), "0.000");
        assert_eq!(rounded(123_456.0, 2), "123500");
        assert_eq!(rounded(2.118e-9, -11), "2.12e-9");
        assert_eq!(rounded(f64::INFINITY, 0), "inf");
        assert_eq!(place_for(0.097), Some(-3));
        assert_eq!(place_for(0.14), Some(-3));
        assert_eq!(place_for(0.0), None);
    }

    #[test]
    fn a_huge_r_hat_is_not_spelt_out() {
        assert_eq!(r_hat_text(1.0004), "1.000");
        assert_eq!(r_hat_text(99.9994), "99.999");
        assert_eq!(r_hat_text(1.883e15), "> 100");
        assert_eq!(r_hat_text(f64::INFINITY), "> 100");
    }

    #[test]
    fn what_is_missing_is_seen() {
        assert_eq!(figure(None, Some(1.0)), "\u{2013}");
        assert_eq!(figure(Some(f64::NAN), Some(1.0)), "\u{2013}");
        assert_eq!(figure(Some(0.42134), None), "0.421(?)");
        assert_eq!(figure(Some(0.42134), Some(f64::NAN)), "0.421(?)");
        assert_eq!(figure(Some(1.5), Some(0.0)), "1.5(0)");
        assert_eq!(figure(Some(f64::NEG_INFINITY), None), "-inf");
        assert_eq!(figure(Some(123_456.0), None), "123456(?)");
        assert_eq!(figure(Some(1.234e-9), None), "1.23e-9(?)");
    }

    /// Read back: the printed error is at least the true one and less than 1.5 times it, and the printed value
    /// within half a unit of its last place.
    #[test]
    fn printed_figures_read_back() {
        let mut word = 88172645463325252u64;
        let mut unit = || {
            word ^= word << 13;
            word ^= word >> 7;
            word ^= word << 17;
            (word >> 11) as f64 / 9007199254740992.0
        };
        for _ in 0..20_000 {
            let text_value = format!("{}e{}", unit() * 2.0 - 1.0, (unit() * 60.0) as i32 - 30);
            let value: f64 = text_value.parse().unwrap_or(1.0);
            let text_error = format!("{}e{}", unit() + 1e-9, (unit() * 60.0) as i32 - 30);
            let error: f64 = text_error.parse().unwrap_or(1.0);
            if absolute(value) > 1e12 * error {
                continue;
            }
            let text = f(value, error);
            let (mantissa, rest) = text.split_once('(').expect("an error");
            let (digits, power) = rest.split_once(')').expect("an end");
            let decimals = mantissa.split_once('.').map_or(0, |(_, d)| d.len()) as i32;
            let power: i32 = power
                .strip_prefix('e')
                .map_or(0, |p| p.parse().expect("a power"));
            let read: f64 = format!("{mantissa}e{power}").parse().expect("a number");
            let read_error: f64 = format!("{digits}e{}", power - decimals)
                .parse()
                .expect("a number");
            // Zeros that only fill the places down to the units.
            let kept = if digits.starts_with(['1', '2']) { 2 } else { 1 };
            let filled = if decimals == 0 && !rest.contains('e') {
                digits.len().saturating_sub(kept) as i32
            } else {
                0
            };
            let unit_of_last: f64 = format!("1e{}", power - decimals + filled)
                .parse()
                .expect("a number");
            assert!(
                read_error >= error && read_error < 1.5 * error,
                "{text}: {value} {error}"
            );
            assert!(
                absolute(read - value) <= 0.5000001 * unit_of_last,
                "{text}: {value} {error}"
            );
        }
    }
}
