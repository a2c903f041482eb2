//! The words of a formula, each with its range of bytes.

use crate::place::{Fault, Faults, Text};
use std::ops::Range;

/// Longest formula, in bytes.
pub(super) const LONGEST: usize = 1 << 16;

#[derive(Debug, Clone, PartialEq)]
pub(super) enum Word {
    Number(f64),
    Name(String),
    Text(String),
    Plus,
    Minus,
    Star,
    Slash,
    Caret,
    Equal,
    NotEqual,
    Less,
    LessEqual,
    Greater,
    GreaterEqual,
    And,
    Or,
    Not,
    Open,
    Close,
    OpenIndex,
    CloseIndex,
    Comma,
    Dot,
    /// A single `=`, as in `mean = 0`.
    Is,
    End,
}

#[derive(Debug, Clone, PartialEq)]
pub(super) struct Token {
    pub word: Word,
    pub span: Range<usize>,
}

/// Signs of other notations, with what is written here instead.
const FOREIGN: &[(&str, &str)] = &[
    ("**", "write `^` for a power"),
    ("&&", "write `and`"),
    ("||", "write `or`"),
    ("<>", "write `!=` for unequal"),
    (
        "<-",
        "a formula gives a value; names are given under [model.define]",
    ),
    ("=<", "write `<=`"),
    ("=>", "write `>=`"),
];

const SIGNS: &[(&str, Word)] = &[
    ("==", Word::Equal),
    ("!=", Word::NotEqual),
    ("<=", Word::LessEqual),
    (">=", Word::GreaterEqual),
    ("<", Word::Less),
    (">", Word::Greater),
    ("=", Word::Is),
    ("+", Word::Plus),
    ("-", Word::Minus),
    ("*", Word::Star),
    ("/", Word::Slash),
    ("^", Word::Caret),
    ("(", Word::Open),
    (")", Word::Close),
    ("[", Word::OpenIndex),
    ("]", Word::CloseIndex),
    (",", Word::Comma),
    (".", Word::Dot),
];

/// Cuts a text into words; every foreign sign is a fault, `None` if there was one. The last token is `End`.
pub(super) fn tokens(text: &Text, faults: &mut Faults) -> Option<Vec<Token>> {
    let source = text.text.as_str();
    if source.len() > LONGEST {
        faults.push(
            Fault::at(
                text.place.clone(),
                format!("this formula is longer than {LONGEST} bytes"),
            )
            .label("too long")
            .help(
                "give parts of it names under [model.define], or put the numbers into a data file",
            ),
        );
        return None;
    }
    let mut out = Vec::new();
    let mut good = true;
    let mut at = 0;
    let mut wrong = |span: Range<usize>, what: String, label: &str, help: Option<String>| {
        let mut fault = Fault::at(text.place_of(span), what).label(label);
        fault.help = help;
        faults.push(fault);
        good = false;
    };
    'words: while at < source.len() {
        let rest = &source[at..];
        let first = rest.chars().next().unwrap_or(' ');
        if first.is_whitespace() {
            at += first.len_utf8();
            continue;
        }
        if first.is_ascii_digit()
            || (first == '.' && rest[1..].starts_with(|c: char| c.is_ascii_digit()))
        {
            let length = number_length(rest);
            let span = at..at + length;
            match rest[..length].parse::<f64>() {
                Ok(value) if value.is_finite() => out.push(Token {
                    word: Word::Number(value),
                    span,
                }),
                _ => wrong(
                    span,
                    format!("`{}` is not a number a computer can hold", &rest[..length]),
                    "not a number",
                    Some("numbers reach to about 1.8e308 and are written like 1e-3".into()),
                ),
            }
            at += length;
            continue;
        }
        if first.is_ascii_alphabetic() || first == '_' {
            let length = rest
                .find(|c: char| !(c.is_ascii_alphanumeric() || c == '_'))
                .unwrap_or(rest.len());
            let name = &rest[..length];
            let word = match name {
                "and" => Word::And,
                "or" => Word::Or,
                "not" => Word::Not,
                _ => Word::Name(name.into()),
            };
            out.push(Token {
                word,
                span: at..at + length,
            });
            at += length;
            continue;
        }
        if first == '"' || first == '\'' {
            match rest[1..].find(first) {
                Some(length) => {
                    out.push(Token {
                        word: Word::Text(rest[1..1 + length].into()),
                        span: at..at + length + 2,
                    });
                    at += length + 2;
                }
                None => {
                    wrong(
                        at..source.len(),
                        "this label has no closing quotation mark".into(),
                        "opened here",
                        None,
                    );
                    at = source.len();
                }
            }
            continue;
        }
        for (sign, advice) in FOREIGN {
            if rest.starts_with(sign) {
                wrong(
                    at..at + sign.len(),
                    format!("`{sign}` is not a sign of formulas"),
                    "unknown sign",
                    Some((*advice).into()),
                );
                at += sign.len();
                continue 'words;
            }
        }
        for (sign, word) in SIGNS {
            if rest.starts_with(sign) {
                out.push(Token {
                    word: word.clone(),
                    span: at..at + sign.len(),
                });
                at += sign.len();
                continue 'words;
            }
        }
        let help = match first {
            '!' => Some("write `not`".to_string()),
            '&' => Some("write `and`".to_string()),
            '|' => Some("write `or`".to_string()),
            '~' => Some("laws are given under [model.unknown] and [model.observed]".to_string()),
            '{' | '}' => Some("use round brackets".to_string()),
            c if c.is_alphabetic() => {
                Some("names consist of the letters a to z, digits and _".to_string())
            }
            _ => None,
        };
        wrong(
            at..at + first.len_utf8(),
            format!("`{first}` is not a sign of formulas"),
            "unknown sign",
            help,
        );
        at += first.len_utf8();
    }
    if !good {
        return None;
    }
    out.push(Token {
        word: Word::End,
        span: source.len()..source.len(),
    });
    Some(out)
}

/// Bytes of the number at the start: digits, a point, digits, an exponent.
fn number_length(text: &str) -> usize {
    let bytes = text.as_bytes();
    let digits = |mut at: usize| {
        while at < bytes.len() && bytes[at].is_ascii_digit() {
            at += 1;
        }
        at
    };
    let mut at = digits(0);
    if bytes.get(at) == Some(&b'.') {
        at = digits(at + 1);
    }
    if matches!(bytes.get(at), Some(b'e' | b'E')) {
        let sign = usize::from(matches!(bytes.get(at + 1), Some(b'+' | b'-')));
        if bytes.get(at + 1 + sign).is_some_and(u8::is_ascii_digit) {
            at = digits(at + 1 + sign);
        }
    }
    at
}
