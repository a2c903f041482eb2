//! The canonical form: JSON by RFC 8785 with the house rules, and SHA-256 over it.

mod digest;
mod read;
mod write;

use std::collections::BTreeMap;

pub use digest::{hex, sha256_hex, tagged, unhex};

/// A JSON value of the canonical form.
#[derive(Debug, Clone, PartialEq)]
pub enum Json {
    Null,
    Bool(bool),
    /// A count, at most 2^53 - 1 in size.
    Count(u64),
    /// Built by [`Json::real`] only.
    Real(f64),
    Text(String),
    Array(Vec<Json>),
    Object(BTreeMap<String, Json>),
}

impl Json {
    /// The one constructor for reals: -0 becomes 0, infinities become the strings "inf" and "-inf".
    ///
    /// # Panics
    /// On NaN, which has no place in a plan or a summary (callers write `Json::Null` with a reason).
    pub fn real(value: f64) -> Json {
        assert!(!value.is_nan(), "NaN has no canonical form");
        if value == f64::INFINITY {
            Json::Text("inf".into())
        } else if value == f64::NEG_INFINITY {
            Json::Text("-inf".into())
        } else {
            Json::Real(value + 0.0)
        }
    }
    pub fn text(value: impl Into<String>) -> Json {
        Json::Text(value.into())
    }
    pub fn object<K: Into<String>>(members: impl IntoIterator<Item = (K, Json)>) -> Json {
        Json::Object(members.into_iter().map(|(k, v)| (k.into(), v)).collect())
    }
    pub fn array(items: impl IntoIterator<Item = Json>) -> Json {
        Json::Array(items.into_iter().collect())
    }
}
