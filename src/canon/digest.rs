//! SHA-256 as lower-case hexadecimal.

use sha2::{Digest as _, Sha256};

use super::Json;

impl Json {
    /// SHA-256 of the canonical text, in hexadecimal.
    pub fn digest(&self) -> String {
        sha256_hex(self.canonical().as_bytes())
    }
}

/// The 32 bytes of 64 hexadecimal digits, as [`hex`] writes them.
pub fn unhex(text: &str) -> Option<[u8; 32]> {
    let mut bytes = [0; 32];
    let whole = text.len() == 64 && text.bytes().all(|b| matches!(b, b'0'..=b'9' | b'a'..=b'f'));
    if !whole {
        return None;
    }
    for (byte, pair) in bytes.iter_mut().zip(text.as_bytes().chunks_exact(2)) {
        let pair = std::str::from_utf8(pair).ok()?;
        *byte = u8::from_str_radix(pair, 16).ok()?;
    }
    Some(bytes)
}

/// SHA-256 of bytes, in hexadecimal.
pub fn sha256_hex(bytes: &[u8]) -> String {
    hex(&Sha256::digest(bytes).into())
}

/// SHA-256 over a tag and the canonical text, each with its length before it.
pub fn tagged(tag: &str, json: &Json) -> [u8; 32] {
    let mut hash = Sha256::new();
    for field in [tag.as_bytes(), json.canonical().as_bytes()] {
        hash.update((field.len() as u64).to_le_bytes());
        hash.update(field);
    }
    hash.finalize().into()
}

/// The 64 hexadecimal digits of 32 bytes.
pub fn hex(bytes: &[u8; 32]) -> String {
    bytes.iter().map(|b| format!("{b:02x}")).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    /// FIPS 180-4 example "abc" (from memory).
    #[test]
    fn known_digest() {
        assert_eq!(
            sha256_hex(b"abc"),
            "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"
        );
        let abc = Sha256::digest(b"abc").into();
        assert_eq!(unhex(&hex(&abc)), Some(abc));
        assert_eq!(unhex("é"), None);
        assert_eq!(unhex(&"G".repeat(64)), None);
        assert_eq!(Json::text("abc").digest(), sha256_hex(b"\"abc\""));
    }
}
