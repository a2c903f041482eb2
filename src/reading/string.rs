//! The way back from the characters of a TOML string to the bytes of the file.

/// Offsets (relative to the start of `raw`) of each byte of the decoded string, and one past its end.
/// `raw` is the string as written, quotes included; `None` unless decoding it here gives `decoded`.
pub(super) fn offsets(raw: &str, decoded: &str) -> Option<Vec<usize>> {
    let (quote, fence) = match raw.as_bytes() {
        [b'"', b'"', b'"', ..] if raw.len() >= 6 => (b'"', 3),
        [b'\'', b'\'', b'\'', ..] if raw.len() >= 6 => (b'\'', 3),
        [b'"', ..] if raw.len() >= 2 => (b'"', 1),
        [b'\'', ..] if raw.len() >= 2 => (b'\'', 1),
        // A bare key.
        _ if raw == decoded => return Some((0..=raw.len()).collect()),
        _ => return None,
    };
    let end = raw.len() - fence;
    // One that the file leaves open has no end of its own.
    if !raw.as_bytes()[end..].iter().all(|&byte| byte == quote) {
        return None;
    }
    let mut at = fence;
    let mut text = String::with_capacity(decoded.len());
    let mut offsets = Vec::with_capacity(decoded.len() + 1);
    if fence == 3 {
        // A line end right after the opening quotes is not part of the text.
        if raw[at..end].starts_with("\r\n") {
            at += 2;
        } else if raw[at..end].starts_with('\n') {
            at += 1;
        }
    }
    while at < end {
        let c = raw.get(at..end)?.chars().next()?;
        let (out, length) = if c == '\\' && quote == b'"' {
            escape(&raw[at..end])?
        } else {
            (Some(c), c.len_utf8())
        };
        if let Some(out) = out {
            text.push(out);
            // Bytes of a character written as itself map one to one, those of an escape to its start.
            for byte in 0..out.len_utf8() {
                offsets.push(if out == c { at + byte } else { at });
            }
        }
        at += length;
    }
    offsets.push(end);
    (text == decoded).then_some(offsets)
}

/// The character that an escape stands for (`None`: a line end that is skipped) and its length in bytes.
fn escape(rest: &str) -> Option<(Option<char>, usize)> {
    let kind = rest[1..].chars().next()?;
    let hex = |digits: usize| {
        let code = u32::from_str_radix(rest.get(2..2 + digits)?, 16).ok()?;
        Some((Some(char::from_u32(code)?), 2 + digits))
    };
    match kind {
        'b' => Some((Some('\u{8}'), 2)),
        't' => Some((Some('\t'), 2)),
        'n' => Some((Some('\n'), 2)),
        'f' => Some((Some('\u{c}'), 2)),
        'r' => Some((Some('\r'), 2)),
        'e' => Some((Some('\u{1b}'), 2)),
        '"' => Some((Some('"'), 2)),
        '\\' => Some((Some('\\'), 2)),
        'x' => hex(2),
        'u' => hex(4),
        'U' => hex(8),
        ' ' | '\t' | '\n' | '\r' => {
            let skipped =
                rest[1..].len() - rest[1..].trim_start_matches([' ', '\t', '\n', '\r']).len();
            Some((None, 1 + skipped))
        }
        _ => None,
    }
}
