//! Tables of the ziggurat (Marsaglia & Tsang 2000): a decreasing density under 256 layers of equal area.

use crate::maths;

pub(super) const LAYERS: usize = 256;

/// Layer i reaches from 0 to `x[i]` and from `f[i]` up to `f[i + 1]`; layer 0 is the base with the tail, as
/// wide as a rectangle of its area would be. `x[256]` is 0.
pub(super) struct Table {
    pub x: [f64; LAYERS + 1],
    pub f: [f64; LAYERS + 1],
}

impl Table {
    /// From where the tail starts, the area of a layer, the density (1 at 0), its inverse.
    pub fn new(
        tail: f64,
        area: f64,
        density: impl Fn(f64) -> f64,
        inverse: impl Fn(f64) -> f64,
    ) -> Table {
        let mut x = [0.0; LAYERS + 1];
        x[0] = area / density(tail);
        x[1] = tail;
        for i in 2..LAYERS {
            x[i] = inverse(density(x[i - 1]) + area / x[i - 1]);
        }
        let mut f = x.map(density);
        f[LAYERS] = 1.0;
        Table { x, f }
    }
}

/// e^-x
pub(super) fn falling(x: f64) -> f64 {
    maths::exp(-x)
}

#[cfg(test)]
mod tests {
    use super::Table;
    use crate::random::exponential::EXPONENTIAL;
    use crate::random::normal::NORMAL;
    use sha2::{Digest, Sha256};

    fn digest(table: &Table) -> String {
        let mut hash = Sha256::new();
        for number in table.x.iter().chain(&table.f) {
            hash.update(number.to_bits().to_le_bytes());
        }
        let bytes: [u8; 32] = hash.finalize().into();
        bytes[..8]
            .iter()
            .map(|byte| format!("{byte:02x}"))
            .collect()
    }

    #[test]
    fn tables_are_the_same_everywhere() {
        assert_eq!(digest(&NORMAL), "ac30bb141b5294c1");
        assert_eq!(digest(&EXPONENTIAL), "f3fc9696fdda90bf");
    }

    #[test]
    fn layers_have_equal_areas_and_close_at_the_top() {
        for (table, area) in [
            (&NORMAL, 0.004_928_673_233_974_655),
            (&EXPONENTIAL, 0.003_949_659_822_581_557),
        ] {
            for i in 1..256 {
                let layer = table.x[i] * (table.f[i + 1] - table.f[i]);
                assert!((layer / area - 1.0).abs() < 1e-10, "layer {i}: {layer}");
            }
        }
    }
}
