//! Tables of the ziggurat (Marsaglia & Tsang 2000): a decreasing density under 256 layers of equal area.

use crate::maths;

pub(super) const LAYERS: usize = 256;

/// Layer i reaches from 0 to `x[i]` and from `f[i]` up to `f[i + 1]`; layer 0 is the base with the tail, as
/// wide as a rectangle of its area would be. `x[256]` is 0.
pub(super) struct Table {
    pub x: [f64; LAYERS + 1],
    pub f: [f64; LAYERS + 1],
    /// How far the density can be, sideways, from the chord of its layer's wedge.
    bend: [f64; LAYERS],
}

impl Table {
    /// From where the tail starts, the area of a layer, the density (1 at 0), its inverse, and the size of its
    /// second derivative over the density, which between two points must be largest at one of them.
    pub fn new(
        tail: f64,
        area: f64,
        density: impl Fn(f64) -> f64,
        inverse: impl Fn(f64) -> f64,
        curvature: impl Fn(f64) -> f64,
    ) -> Table {
        let mut x = [0.0; LAYERS + 1];
        x[0] = area / density(tail);
        x[1] = tail;
        for i in 2..LAYERS {
            x[i] = inverse(density(x[i - 1]) + area / x[i - 1]);
        }
        let mut f = x.map(density);
        f[LAYERS] = 1.0;
        // A chord over a width w is at most w^2 / 8 times the greatest second derivative away from the curve.
        // The thousand-millionth of the width is far more than rounding can be in any of the comparisons.
        let bend = std::array::from_fn(|i| {
            let width = x[i] - x[i + 1];
            let (outer, inner) = (curvature(x[i]), curvature(x[i + 1]));
            let curvature = if outer > inner { outer } else { inner };
            let away = width * width / 8.0 * curvature * f[i + 1] / (f[i + 1] - f[i]);
            (away + 1e-9) * width
        });
        Table { x, f, bend }
    }

    /// Whether a point of a layer's wedge, `x` from the middle and the share `unit` of the layer up from its
    /// bottom, is under the density. Only near the curve is the density asked.
    #[inline(always)]
    pub fn under(&self, layer: usize, x: f64, unit: f64, density: impl Fn(f64) -> f64) -> bool {
        let (outer, inner) = (self.x[layer], self.x[layer + 1]);
        let left = (outer - x) - unit * (outer - inner);
        if left > self.bend[layer] {
            return true;
        }
        if left < -self.bend[layer] {
            return false;
        }
        let (low, high) = (self.f[layer], self.f[layer + 1]);
        low + unit * (high - low) < density(x)
    }
}

/// e^-x
pub(super) fn falling(x: f64) -> f64 {
    maths::exp(-x)
}

#[cfg(test)]
mod tests {
    use super::{LAYERS, Table, falling};
    use crate::maths;
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

    /// Points all over the wedges, and many next to the curve.
    #[test]
    fn the_density_is_asked_seldom_and_never_contradicted() {
        for (table, density) in [
            (&*NORMAL, (|x| maths::exp(-0.5 * x * x)) as fn(f64) -> f64),
            (&*EXPONENTIAL, falling),
        ] {
            let (mut points, mut asked) = (0, std::cell::Cell::new(0));
            for layer in 1..LAYERS {
                let (low, high) = (table.f[layer], table.f[layer + 1]);
                let (outer, inner) = (table.x[layer], table.x[layer + 1]);
                for i in 0..64 {
                    let x = inner + (outer - inner) * (f64::from(i) + 0.3) / 64.0;
                    let level = (density(x) - low) / (high - low);
                    let across = (0..64).map(|j| (f64::from(j) + 0.4) / 64.0);
                    let near = (-8..=8).map(|j| level + f64::from(j) * 1e-8);
                    let nearer = (-8..=8).map(|j| level + f64::from(j) * 1e-13);
                    let near = near.chain(nearer).map(|unit| (unit, false));
                    for (unit, counts) in across.map(|unit| (unit, true)).chain(near) {
                        let plain = low + unit * (high - low) < density(x);
                        let under = table.under(layer, x, unit, |x| {
                            asked.set(asked.get() + u32::from(counts));
                            density(x)
                        });
                        points += u32::from(counts);
                        assert_eq!(under, plain, "layer {layer}, {x}, {unit}");
                    }
                }
            }
            let share = f64::from(*asked.get_mut()) / f64::from(points);
            assert!(share < 0.05, "{share}");
        }
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
