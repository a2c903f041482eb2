//! RFC 8785 output of a [`Json`] value, and an indented form of the same for people.

use std::fmt::Write as _;

use unicode_normalization::UnicodeNormalization as _;

use super::Json;

impl Json {
    /// The canonical text (RFC 8785): no white space, keys in order of their UTF-16 units, numbers as
    /// ECMAScript prints them, strings in NFC.
    pub fn canonical(&self) -> String {
        let mut out = String::new();
        self.write(&mut out, None);
        out
    }

    /// The same values, indented by two blanks a level, with a line end at the end. Arrays of plain values stay
    /// on one line.
    pub fn pretty(&self) -> String {
        let mut out = String::new();
        self.write(&mut out, Some(0));
        out.push('\n');
        out
    }

    fn write(&self, out: &mut String, indent: Option<usize>) {
        match self {
            Json::Null => out.push_str("null"),
            Json::Bool(b) => out.push_str(if *b { "true" } else { "false" }),
            Json::Count(n) => write!(out, "{n}").expect("a string takes all"),
            Json::Real(x) => number(out, *x),
            Json::Text(s) => string(out, s),
            Json::Array(items) => {
                let inner = match indent {
                    Some(_) if items.iter().all(Json::is_plain) => None,
                    other => other,
                };
                out.push('[');
                for (i, item) in items.iter().enumerate() {
                    separate(out, i, inner.map(|n| n + 1));
                    if i > 0 && inner.is_none() && indent.is_some() {
                        out.push(' ');
                    }
                    item.write(out, inner.map(|n| n + 1));
                }
                if !items.is_empty() {
                    line(out, inner);
                }
                out.push(']');
            }
            Json::Object(members) => {
                let mut members: Vec<(String, &Json)> = members
                    .iter()
                    .map(|(key, value)| (key.nfc().collect(), value))
                    .collect();
                members.sort_by(|a, b| a.0.encode_utf16().cmp(b.0.encode_utf16()));
                out.push('{');
                for (i, (key, value)) in members.iter().enumerate() {
                    separate(out, i, indent.map(|n| n + 1));
                    string(out, key);
                    out.push_str(if indent.is_some() { ": " } else { ":" });
                    value.write(out, indent.map(|n| n + 1));
                }
                if !members.is_empty() {
                    line(out, indent);
                }
                out.push('}');
            }
        }
    }

    fn is_plain(&self) -> bool {
        !matches!(self, Json::Array(_) | Json::Object(_))
    }
}

fn separate(out: &mut String, index: usize, indent: Option<usize>) {
    if index > 0 {
        out.push(',');
    }
    line(out, indent);
}

fn line(out: &mut String, indent: Option<usize>) {
    if let Some(level) = indent {
        out.push('\n');
        for _ in 0..level {
            out.push_str("  ");
        }
    }
}

/// A string of RFC 8785, section 3.2.2.2, in NFC.
fn string(out: &mut String, text: &str) {
    out.push('"');
    for c in text.nfc() {
        match c {
            '"' => out.push_str("\\\""),
            '\\' => out.push_str("\\\\"),
            '\u{8}' => out.push_str("\\b"),
            '\t' => out.push_str("\\t"),
            '\n' => out.push_str("\\n"),
            '\u{c}' => out.push_str("\\f"),
            '\r' => out.push_str("\\r"),
            c if c < ' ' => write!(out, "\\u{:04x}", c as u32).expect("a string takes all"),
            c => out.push(c),
        }
    }
    out.push('"');
}

/// ECMAScript's Number::toString (ECMA-262, 6.1.6.1.20) from Rust's shortest digits that read back the same.
fn number(out: &mut String, x: f64) {
    if x == 0.0 {
        out.push('0');
        return;
    }
    let text = format!("{:e}", x.abs());
    let (mantissa, exponent) = text.split_once('e').expect("scientific form");
    let exponent: i32 = exponent.parse().expect("an exponent");
    let digits: String = mantissa.chars().filter(|c| *c != '.').collect();
    let digits = even_at_tie(x.abs(), exponent, digits);
    let k = digits.len() as i32;
    let n = exponent + 1;
    if x < 0.0 {
        out.push('-');
    }
    let zeros = |count: i32| "0".repeat(count as usize);
    if k <= n && n <= 21 {
        out.push_str(&digits);
        out.push_str(&zeros(n - k));
    } else if 0 < n && n <= 21 {
        out.push_str(&digits[..n as usize]);
        out.push('.');
        out.push_str(&digits[n as usize..]);
    } else if -6 < n && n <= 0 {
        out.push_str("0.");
        out.push_str(&zeros(-n));
        out.push_str(&digits);
    } else {
        out.push_str(&digits[..1]);
        if k > 1 {
            out.push('.');
            out.push_str(&digits[1..]);
        }
        write!(out, "e{:+}", n - 1).expect("a string takes all");
    }
}

/// Where the number lies just half-way between two shortest texts, ECMAScript asks for the even digit; Rust
/// rounds up.
fn even_at_tie(x: f64, exponent: i32, digits: String) -> String {
    let k = digits.len();
    let exact = |places: usize| -> String {
        let text = format!("{x:.places$e}");
        let mantissa = text.split('e').next().unwrap_or_default();
        mantissa.chars().filter(|c| *c != '.').collect()
    };
    if !exact(k + 1).ends_with("50") || exact(800).trim_end_matches('0').len() != k + 1 {
        return digits;
    }
    let lower = exact(800)[..k].to_string();
    let even = lower.ends_with(['0', '2', '4', '6', '8']);
    let reads_back = |d: &str| format!("{d}e{}", exponent + 1 - k as i32).parse() == Ok(x);
    if even && reads_back(&lower) {
        lower
    } else {
        digits
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn text(x: f64) -> String {
        Json::Real(x).canonical()
    }

    /// RFC 8785, appendix B (bits and text; from memory).
    #[test]
    fn numbers_of_the_rfc() {
        for (bits, want) in [
            (0x0000000000000000, "0"),
            (0x8000000000000000, "0"),
            (0x0000000000000001, "5e-324"),
            (0x8000000000000001, "-5e-324"),
            (0x7fefffffffffffff, "1.7976931348623157e+308"),
            (0xffefffffffffffff, "-1.7976931348623157e+308"),
            (0x4340000000000000, "9007199254740992"),
            (0xc340000000000000, "-9007199254740992"),
            (0x4430000000000000, "295147905179352830000"),
            (0x44b52d02c7e14af5, "9.999999999999997e+22"),
            (0x44b52d02c7e14af6, "1e+23"),
            (0x44b52d02c7e14af7, "1.0000000000000001e+23"),
            (0x444b1ae4d6e2ef4e, "999999999999999700000"),
            (0x444b1ae4d6e2ef4f, "999999999999999900000"),
            (0x444b1ae4d6e2ef50, "1e+21"),
            (0x3eb0c6f7a0b5ed8c, "9.999999999999997e-7"),
            (0x3eb0c6f7a0b5ed8d, "0.000001"),
            (0x41b3de4355555553, "333333333.3333332"),
            (0x41b3de4355555554, "333333333.33333325"),
            (0x41b3de4355555555, "333333333.3333333"),
            (0x41b3de4355555556, "333333333.3333334"),
            (0x41b3de4355555557, "333333333.33333343"),
            (0xbecbf647612f3696, "-0.0000033333333333333333"),
            (0x43143ff3c1cb0959, "1424953923781206.2"),
        ] {
            assert_eq!(text(f64::from_bits(bits)), want);
        }
    }

    /// RFC 8785, section 3.2.2 (from memory): numbers, strings and literals.
    #[test]
    fn sample_of_the_rfc() {
        let value = Json::object([
            (
                "numbers",
                Json::array(
                    [
                        "333333333.33333329".parse().expect("a number"),
                        1e30,
                        4.50,
                        2e-3,
                        0.000000000000000000000000001,
                    ]
                    .map(Json::real),
                ),
            ),
            (
                "string",
                Json::text("\u{20ac}$\u{f}\u{a}A'\u{42}\u{22}\u{5c}\u{5c}\u{22}/"),
            ),
            (
                "literals",
                Json::array([Json::Null, Json::Bool(true), Json::Bool(false)]),
            ),
        ]);
        assert_eq!(
            value.canonical(),
            "{\"literals\":[null,true,false],\"numbers\":[333333333.3333333,1e+30,4.5,0.002,1e-27],\
             \"string\":\"€$\\u000f\\nA'B\\\"\\\\\\\\\\\"/\"}"
        );
    }

    /// RFC 8785, section 3.2.3 (from memory): keys by UTF-16 units, not by code points. The key
    /// U+FB33 of the original is left out: NFC takes it apart.
    #[test]
    fn keys_by_utf16() {
        let value = Json::object(
            [
                ("\u{20ac}", "Euro Sign"),
                ("\r", "Carriage Return"),
                ("\u{ffe9}", "Halfwidth Leftwards Arrow"),
                ("1", "One"),
                ("\u{1f600}", "Emoji: Grinning Face"),
                ("\u{80}", "Control"),
                ("\u{f6}", "Latin Small Letter O With Diaeresis"),
            ]
            .map(|(k, v)| (k, Json::text(v))),
        );
        let text = value.canonical();
        let order: Vec<usize> = [
            "Carriage",
            "One",
            "Control",
            "Latin",
            "Euro",
            "Emoji",
            "Halfwidth",
        ]
        .iter()
        .map(|name| text.find(name).expect("present"))
        .collect();
        assert!(order.is_sorted(), "{text}");
    }

    #[test]
    fn composed_strings() {
        assert_eq!(Json::text("o\u{308}").canonical(), "\"\u{f6}\"");
    }

    #[test]
    fn reals_are_one() {
        assert_eq!(Json::real(-0.0).canonical(), "0");
        assert_eq!(Json::real(1.0).canonical(), Json::Count(1).canonical());
        assert_eq!(Json::real(f64::NEG_INFINITY).canonical(), "\"-inf\"");
    }

    #[test]
    fn pretty_form() {
        let value = Json::object([
            ("b", Json::array([Json::Count(1), Json::real(0.5)])),
            ("a", Json::array([Json::object([("x", Json::Null)])])),
            ("c", Json::array([])),
        ]);
        let want = "{\n  \"a\": [\n    {\n      \"x\": null\n    }\n  ],\n  \"b\": [1, 0.5],\n  \"c\": []\n}\n";
        assert_eq!(value.pretty(), want);
        let back: serde_json::Value = serde_json::from_str(&value.pretty()).unwrap();
        let plain: serde_json::Value = serde_json::from_str(&value.canonical()).unwrap();
        assert_eq!(back, plain);
    }
}
