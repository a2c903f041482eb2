//! What a careful programmer would take for a loop of their own: a fast scalar generator
//! (xoshiro256++; Blackman & Vigna 2021) and normal variates by the ziggurat (Marsaglia & Tsang 2000) in its
//! usual form with 256 layers, on std's functions.

#![expect(
    clippy::disallowed_methods,
    reason = "the plain loop uses std's functions: that is what it is compared for"
)]

pub struct Generator {
    state: [u64; 4],
    layers: Box<Layers>,
}

struct Layers {
    x: [f64; LAYERS + 1],
    density: [f64; LAYERS + 1],
}

const LAYERS: usize = 256;
/// Right edge of the base strip and area of a layer, for 256 layers.
const EDGE: f64 = 3.654_152_885_361_009;
const AREA: f64 = 0.004_928_673_233_974_655;

impl Layers {
    fn new() -> Layers {
        let f = |x: f64| (-0.5 * x * x).exp();
        let mut x = [0.0; LAYERS + 1];
        x[0] = AREA / f(EDGE);
        x[1] = EDGE;
        for i in 2..LAYERS {
            x[i] = (-2.0 * (AREA / x[i - 1] + f(x[i - 1])).ln()).sqrt();
        }
        x[LAYERS] = 0.0;
        Layers {
            x,
            density: x.map(f),
        }
    }
}

impl Generator {
    pub fn new(seed: u64) -> Generator {
        // SplitMix64 spreads the seed over the state (Steele, Lea & Flood 2014).
        let mut z = seed;
        let state = std::array::from_fn(|_| {
            z = z.wrapping_add(0x9e37_79b9_7f4a_7c15);
            let mut y = z;
            y = (y ^ (y >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
            y = (y ^ (y >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
            y ^ (y >> 31)
        });
        Generator {
            state,
            layers: Box::new(Layers::new()),
        }
    }

    #[inline]
    pub fn word(&mut self) -> u64 {
        let s = &mut self.state;
        let word = s[0].wrapping_add(s[3]).rotate_left(23).wrapping_add(s[0]);
        let t = s[1] << 17;
        s[2] ^= s[0];
        s[3] ^= s[1];
        s[1] ^= s[2];
        s[0] ^= s[3];
        s[2] ^= t;
        s[3] = s[3].rotate_left(45);
        word
    }

    /// In [0, 1).
    #[inline]
    pub fn unit(&mut self) -> f64 {
        (self.word() >> 11) as f64 * (1.0 / (1_u64 << 53) as f64)
    }

    #[inline]
    pub fn normal(&mut self) -> f64 {
        loop {
            let word = self.word();
            let layer = (word & 0xff) as usize;
            let u = 2.0 * ((word >> 11) as f64 * (1.0 / (1_u64 << 53) as f64)) - 1.0;
            let x = u * self.layers.x[layer];
            if x.abs() < self.layers.x[layer + 1] {
                return x;
            }
            if layer == 0 {
                return self.tail(u < 0.0);
            }
            let (low, high) = (self.layers.density[layer], self.layers.density[layer + 1]);
            if low + self.unit() * (high - low) < (-0.5 * x * x).exp() {
                return x;
            }
        }
    }

    #[cold]
    fn tail(&mut self, negative: bool) -> f64 {
        loop {
            let x = (1.0 - self.unit()).ln() / EDGE;
            let y = (1.0 - self.unit()).ln();
            if -2.0 * y >= x * x {
                return if negative { x - EDGE } else { EDGE - x };
            }
        }
    }
}
