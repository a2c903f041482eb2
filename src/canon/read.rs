//! Reading JSON back: our own files, which may have been through other hands.

use super::Json;
use std::collections::BTreeMap;

/// How deep arrays and objects may stand in one another.
const DEEPEST: usize = 64;
/// Bytes that the values read may take in memory, about: text of few bytes may hold many empty objects.
const ROOM: usize = 1 << 30;
/// Bytes of an item of an array, of an object, and of each of its members, about; room for growth included.
const ITEM: usize = 64;
const OBJECT: usize = 640;
const MEMBER: usize = 128;
/// The largest count.
const LARGEST: u64 = (1 << 53) - 1;

impl Json {
    /// Reads JSON text. A number without sign, point and exponent is a count while it is small enough,
    /// else a real. Fails with what is wrong and the byte where.
    pub fn read(text: &str) -> Result<Json, String> {
        let mut reader = Reader {
            text,
            at: 0,
            room: ROOM,
        };
        let value = reader.value(0)?;
        reader.space();
        if reader.at < text.len() {
            return Err(reader.wrong("something after the end"));
        }
        Ok(value)
    }

    /// The member of an object; `None` of anything else.
    pub fn get(&self, key: &str) -> Option<&Json> {
        match self {
            Json::Object(members) => members.get(key),
            _ => None,
        }
    }

    /// The items of an array; none of anything else.
    pub fn items(&self) -> &[Json] {
        match self {
            Json::Array(items) => items,
            _ => &[],
        }
    }

    /// A count.
    pub fn as_count(&self) -> Option<u64> {
        match self {
            Json::Count(count) => Some(*count),
            _ => None,
        }
    }

    /// A number: what was written as a real is read as a count where it is whole and small.
    pub fn as_real(&self) -> Option<f64> {
        match self {
            Json::Real(value) => Some(*value),
            Json::Count(count) => Some(*count as f64),
            _ => None,
        }
    }

    /// The text of a string.
    pub fn as_text(&self) -> Option<&str> {
        match self {
            Json::Text(text) => Some(text),
            _ => None,
        }
    }
}

struct Reader<'a> {
    text: &'a str,
    at: usize,
    room: usize,
}

impl Reader<'_> {
    fn wrong(&self, what: &str) -> String {
        format!("not JSON: {what} at byte {}", self.at)
    }

    fn takes_room(&mut self, bytes: usize) -> Result<(), String> {
        let left = self.room.checked_sub(bytes);
        self.room = left.ok_or_else(|| self.wrong("more values than fit in memory"))?;
        Ok(())
    }

    fn peek(&self) -> Option<u8> {
        self.text.as_bytes().get(self.at).copied()
    }

    fn space(&mut self) {
        while matches!(self.peek(), Some(b' ' | b'\t' | b'\n' | b'\r')) {
            self.at += 1;
        }
    }

    /// Takes these bytes if they come next.
    fn takes(&mut self, word: &str) -> bool {
        let found = self.text.as_bytes()[self.at..].starts_with(word.as_bytes());
        if found {
            self.at += word.len();
        }
        found
    }

    fn value(&mut self, depth: usize) -> Result<Json, String> {
        if depth > DEEPEST {
            return Err(self.wrong("too many brackets"));
        }
        self.space();
        match self.peek() {
            Some(b'{') => self.object(depth),
            Some(b'[') => self.array(depth),
            Some(b'"') => self.string().map(Json::Text),
            Some(b'-' | b'0'..=b'9') => self.number(),
            _ if self.takes("null") => Ok(Json::Null),
            _ if self.takes("true") => Ok(Json::Bool(true)),
            _ if self.takes("false") => Ok(Json::Bool(false)),
            _ => Err(self.wrong("no value")),
        }
    }

    fn array(&mut self, depth: usize) -> Result<Json, String> {
        self.at += 1;
        let mut items = Vec::new();
        self.space();
        if self.takes("]") {
            return Ok(Json::Array(items));
        }
        loop {
            self.takes_room(ITEM)?;
            items.push(self.value(depth + 1)?);
            self.space();
            if self.takes("]") {
                return Ok(Json::Array(items));
            }
            if !self.takes(",") {
                return Err(self.wrong("no comma between items"));
            }
        }
    }

    fn object(&mut self, depth: usize) -> Result<Json, String> {
        self.at += 1;
        let mut members = BTreeMap::new();
        self.space();
        if self.takes("}") {
            return Ok(Json::Object(members));
        }
        self.takes_room(OBJECT)?;
        loop {
            self.takes_room(MEMBER)?;
            self.space();
            if self.peek() != Some(b'"') {
                return Err(self.wrong("no key"));
            }
            let key = self.string()?;
            self.space();
            if !self.takes(":") {
                return Err(self.wrong("no colon after a key"));
            }
            let value = self.value(depth + 1)?;
            if members.insert(key, value).is_some() {
                return Err(self.wrong("a key for the second time"));
            }
            self.space();
            if self.takes("}") {
                return Ok(Json::Object(members));
            }
            if !self.takes(",") {
                return Err(self.wrong("no comma between members"));
            }
        }
    }

    fn digits(&mut self) -> usize {
        let from = self.at;
        while matches!(self.peek(), Some(b'0'..=b'9')) {
            self.at += 1;
        }
        self.at - from
    }

    fn number(&mut self) -> Result<Json, String> {
        let from = self.at;
        self.takes("-");
        let leading_zero = self.peek() == Some(b'0');
        let whole = self.digits();
        if whole == 0 || leading_zero && whole > 1 {
            return Err(self.wrong("no number"));
        }
        if self.takes(".") && self.digits() == 0 {
            return Err(self.wrong("no digit after the point"));
        }
        if self.takes("e") || self.takes("E") {
            let _ = self.takes("+") || self.takes("-");
            if self.digits() == 0 {
                return Err(self.wrong("no digit in the exponent"));
            }
        }
        let text = &self.text[from..self.at];
        if let Some(count) = text.parse::<u64>().ok().filter(|count| *count <= LARGEST) {
            return Ok(Json::Count(count));
        }
        match text.parse::<f64>() {
            Ok(real) if real.is_finite() => Ok(Json::real(real)),
            _ => Err(self.wrong("a number too large")),
        }
    }

    fn string(&mut self) -> Result<String, String> {
        self.at += 1;
        let mut out = String::new();
        loop {
            let rest = &self.text[self.at..];
            let plain = rest.find(['"', '\\']).unwrap_or(rest.len());
            let piece = &rest[..plain];
            if piece.bytes().any(|byte| byte < 0x20) {
                return Err(self.wrong("a control character in a string"));
            }
            out.push_str(piece);
            self.at += plain;
            if self.takes("\"") {
                return Ok(out);
            }
            if !self.takes("\\") {
                return Err(self.wrong("a string without an end"));
            }
            out.push(self.escaped()?);
        }
    }

    fn escaped(&mut self) -> Result<char, String> {
        let kind = self.peek();
        self.at += 1;
        Ok(match kind {
            Some(b'"') => '"',
            Some(b'\\') => '\\',
            Some(b'/') => '/',
            Some(b'b') => '\u{8}',
            Some(b'f') => '\u{c}',
            Some(b'n') => '\n',
            Some(b'r') => '\r',
            Some(b't') => '\t',
            Some(b'u') => {
                let first = self.unit()?;
                let code = if (0xd800..0xdc00).contains(&first) && self.takes("\\u") {
                    let second = self.unit()?;
                    if !(0xdc00..0xe000).contains(&second) {
                        return Err(self.wrong("half a character"));
                    }
                    0x10000 + ((first - 0xd800) << 10) + (second - 0xdc00)
                } else {
                    first
                };
                char::from_u32(code).ok_or_else(|| self.wrong("half a character"))?
            }
            _ => {
                self.at -= 1;
                return Err(self.wrong("an unknown escape"));
            }
        })
    }

    fn unit(&mut self) -> Result<u32, String> {
        let digits = self.text.as_bytes().get(self.at..self.at + 4);
        let hex = digits.filter(|digits| digits.iter().all(u8::is_ascii_hexdigit));
        let Some(hex) = hex.and_then(|hex| std::str::from_utf8(hex).ok()) else {
            return Err(self.wrong("no four hexadecimal digits"));
        };
        let unit = u32::from_str_radix(hex, 16).map_err(|_| self.wrong("no number"))?;
        self.at += 4;
        Ok(unit)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn any_json() -> impl Strategy<Value = Json> {
        let leaf = prop_oneof![
            Just(Json::Null),
            any::<bool>().prop_map(Json::Bool),
            (0..=LARGEST).prop_map(Json::Count),
            any::<f64>()
                .prop_filter("a number", |x| x.is_finite())
                .prop_map(Json::real),
            any::<String>().prop_map(Json::Text),
        ];
        leaf.prop_recursive(4, 40, 6, |inner| {
            prop_oneof![
                proptest::collection::vec(inner.clone(), 0..6).prop_map(Json::Array),
                proptest::collection::btree_map("[a-z\"\\\\\n]{0,5}", inner, 0..6)
                    .prop_map(Json::Object),
            ]
        })
    }

    proptest! {
        #![proptest_config(ProptestConfig { rng_seed: proptest::test_runner::RngSeed::Fixed(3), ..ProptestConfig::default() })]

        #[test]
        fn what_is_written_is_read(json in any_json()) {
            let text = json.canonical();
            let back = Json::read(&text).expect("our own text");
            prop_assert_eq!(back.canonical(), text);
        }

        #[test]
        fn no_text_is_too_much(text in "[\\[\\]{}\",:0-9eE+\\-.\\\\utrnf a]{0,40}") {
            let ours = Json::read(&text).is_ok();
            let theirs = serde_json::from_str::<serde_json::Value>(&text).is_ok();
            // The only thing we refuse that JSON allows: a key twice.
            prop_assert!(ours == theirs || theirs && text.contains("{"), "{}", text);
        }
    }

    #[test]
    fn deep_nesting_is_refused() {
        assert!(Json::read(&"[".repeat(100_000)).is_err());
    }

    #[test]
    fn escapes_are_read() {
        let read = Json::read(r#""aé\ud83d\ude00\n""#);
        assert_eq!(read, Ok(Json::text("a\u{e9}\u{1f600}\n")));
        assert!(Json::read(r#""\ud83d""#).is_err());
        assert!(Json::read("\"\u{1}\"").is_err());
    }
}
