//! SHA-256 as lower-case hexadecimal.

use sha2::{Digest as _, Sha256};

use super::Json;

impl Json {
    /// SHA-256 of the canonical text, in hexadecimal.
    pub fn digest(&self) -> String {
        sha256_hex(self.canonical().as_bytes())
    }
}

/// SHA-256 of bytes, in hexadecimal.
pub fn sha256_hex(bytes: &[u8]) -> String {
    hex(&Sha256::digest(bytes).into())
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
        assert_eq!(Json::text("abc").digest(), sha256_hex(b"\"abc\""));
    }
}
