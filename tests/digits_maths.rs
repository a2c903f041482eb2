//! The bits of every operation over a fixed set of arguments, as golden digests: another target, optimisation
//! level or instruction set must give the same. And a loop over slices gives the bits of the single call,
//! for each place in the slice and under each instruction set that this machine has.

use odograph::maths::{self, Binary, Ternary, Unary};
use sha2::{Digest, Sha256};

/// SplitMix64 (Steele, Lea & Flood 2014).
struct Words(u64);

impl Words {
    fn next(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e3779b97f4a7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58476d1ce4e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d049bb133111eb);
        z ^ (z >> 31)
    }

    /// In [0, 1).
    fn unit(&mut self) -> f64 {
        (self.next() >> 11) as f64 / 9007199254740992.0
    }

    /// A number of either sign, its size between 2^-low and 2^high.
    fn scaled(&mut self, low: u64, high: u64) -> f64 {
        let word = self.next();
        let exponent = 1023 - low + self.next() % (low + high);
        f64::from_bits((word & 0x800f_ffff_ffff_ffff) | (exponent << 52))
    }
}

const SPECIAL: [f64; 14] = [
    0.0,
    -0.0,
    1.0,
    -1.0,
    0.5,
    2.0,
    1e-310,
    1e300,
    -1e300,
    745.0,
    -745.0,
    f64::INFINITY,
    f64::NEG_INFINITY,
    f64::NAN,
];

/// Arguments for operations on one number: special ones, ordinary ones, some of every size.
fn singles() -> Vec<f64> {
    let mut words = Words(1);
    let mut x = SPECIAL.to_vec();
    for _ in 0..1000 {
        x.push(words.unit());
        x.push(words.scaled(10, 10));
        x.push(words.scaled(60, 30));
    }
    x
}

/// Shapes, counts and the like: positive, of moderate size; and anything.
fn positive(words: &mut Words, n: usize, first: usize) -> Vec<f64> {
    let mut x: Vec<f64> = (0..n).map(|_| words.scaled(8, 12).abs()).collect();
    for (x, special) in x
        .iter_mut()
        .step_by(17)
        .zip(SPECIAL.iter().cycle().skip(first))
    {
        *x = *special;
    }
    x
}

fn digest(values: &[f64]) -> String {
    let mut hash = Sha256::new();
    for v in values {
        let v = if v.is_nan() { f64::NAN } else { *v };
        hash.update(v.to_bits().to_le_bytes());
    }
    hash.finalize()
        .iter()
        .take(8)
        .map(|b| format!("{b:02x}"))
        .collect()
}

#[multiversion::multiversion(targets(
    "x86_64+avx512f+avx512dq+avx512vl+avx512bw+avx2+fma",
    "x86_64+avx2+fma"
))]
fn wide_unary(op: Unary, a: &[f64], out: &mut [f64]) {
    op.slice(a, out);
}

#[multiversion::multiversion(targets(
    "x86_64+avx512f+avx512dq+avx512vl+avx512bw+avx2+fma",
    "x86_64+avx2+fma"
))]
fn wide_binary(op: Binary, a: &[f64], b: &[f64], out: &mut [f64]) {
    op.slice(a, b, out);
}

fn same_bits(name: &str, got: &[f64], want: &[f64]) {
    for (i, (g, w)) in got.iter().zip(want).enumerate() {
        assert!(
            g.to_bits() == w.to_bits() || (g.is_nan() && w.is_nan()),
            "{name}: element {i}: {g:e} for {w:e}"
        );
    }
}

/// Each piece of the arguments again, begun at each place of a register and of each short length.
fn pieces(n: usize) -> impl Iterator<Item = std::ops::Range<usize>> {
    (0..9).flat_map(move |from| [1, 2, 3, 5, 8, 13, 33, 200].map(|len| from..(from + len).min(n)))
}

fn values() -> Vec<(String, String)> {
    let mut all = Vec::new();
    let x = singles();
    for op in Unary::ALL {
        let name = format!("{op:?}");
        let single: Vec<f64> = x.iter().map(|x| op.apply(*x)).collect();
        let mut out = vec![0.0; x.len()];
        for apply in [Unary::slice, wide_unary] {
            apply(*op, &x, &mut out);
            same_bits(&name, &out, &single);
            for piece in pieces(x.len()) {
                apply(*op, &x[piece.clone()], &mut out[piece.clone()]);
            }
            same_bits(&name, &out, &single);
        }
        all.push((name, digest(&single)));
    }
    let mut words = Words(2);
    let a = positive(&mut words, 600, 0);
    let mut b = positive(&mut words, 600, 3);
    for op in Binary::ALL {
        let name = format!("{op:?}");
        if *op == Binary::GammaQuantile {
            b = (0..600).map(|_| words.unit()).collect();
        }
        if matches!(
            op,
            Binary::GammaP | Binary::GammaQ | Binary::LnGammaP | Binary::LnGammaQ
        ) {
            b = a.iter().map(|a| a * 4.0 * words.unit()).collect();
        }
        let single: Vec<f64> = a.iter().zip(&b).map(|(a, b)| op.apply(*a, *b)).collect();
        let mut out = vec![0.0; a.len()];
        for apply in [Binary::slice, wide_binary] {
            apply(*op, &a, &b, &mut out);
            same_bits(&name, &out, &single);
        }
        all.push((name, digest(&single)));
    }
    let b = positive(&mut words, 600, 8);
    let c: Vec<f64> = a
        .iter()
        .zip(&b)
        .enumerate()
        .map(|(i, (a, b))| {
            if i % 2 == 0 {
                words.unit()
            } else {
                a / (a + b) * (0.9 + 0.2 * words.unit())
            }
        })
        .collect();
    for op in Ternary::ALL {
        let name = format!("{op:?}");
        let single: Vec<f64> = (0..a.len()).map(|i| op.apply(a[i], b[i], c[i])).collect();
        let mut out = vec![0.0; a.len()];
        op.slice(&a, &b, &c, &mut out);
        same_bits(&name, &out, &single);
        all.push((name, digest(&single)));
    }
    let sums: Vec<f64> = (0..3000)
        .step_by(7)
        .map(|n| maths::sum(&x[14..14 + n]))
        .collect();
    all.push(("sum".into(), digest(&sums)));
    let spread: Vec<f64> = (2..300)
        .flat_map(|n| [maths::mean(&x[14..14 + n]), maths::variance(&x[14..14 + n])])
        .collect();
    all.push(("mean and variance".into(), digest(&spread)));
    all
}

#[test]
fn golden_digests() {
    let got = values();
    let text: String = got
        .iter()
        .map(|(name, d)| format!("{name} {d}\n"))
        .collect();
    assert_eq!(
        text, GOLDEN,
        "another digit somewhere; raise NUMERICS if it is meant"
    );
}

const GOLDEN: &str = "\
Negate 14bb82c380f0e1da
Absolute a7945bcc6adbc8ce
Sign 2d8e986c7f24f95c
Square c63d3fe8c974b7ca
Sqrt b56a1ff3d417f6f9
Exp 399363d714fda218
Expm1 60f67aad092de1d5
Ln 142cdddfbac60faf
Log1p 44212d8d74fe14a2
Sin 039099191f85a370
Cos 84c6e5ab08d83623
Tan 171f34c86efd0bbb
Asin 180a1186cb46b8a5
Acos 1319836dd67c4acd
Atan b1cf765ebf559d0c
Sinh 4f928b30dba330da
Cosh 9fe9c1c2f3f614c6
Tanh 97624798cde9f5f3
Floor 9ec3c6481a78755a
Ceil 08a219e2f8b4c209
Round 6718beb0e364ffec
Not 6a87a269bb926b97
LnGamma f9b1b93065748169
Digamma 6685aefc958ede2d
Erf 1756798abbdf0671
Erfc 81e89a7d84329712
NormalCdf c5e1d11799eee810
LnNormalCdf 2595d0b3e427cdf9
NormalQuantile d7dc072d0dd0efdd
Softplus d2801d4f96674d92
Logistic 59fae5e725af7d34
Add 5704bae6f8f5a5f0
Subtract f42ec32cdbaed400
Multiply 272885b9bb65bff7
Divide 48b455eb258d8189
Power 37c602fd1d7ff1f6
Minimum 3c2e80ce9e96d931
Maximum 9646b2b0bc214b6a
Less 6cc8c9075a321cf0
LessEqual 6cc8c9075a321cf0
Equal 24ddaa4710480313
NotEqual 65aa9b204ae2370e
And eb008e5dc97d8ebc
Or 65aa9b204ae2370e
GammaP f6d584269d13415b
GammaQ 83088ffb4e94cd8d
LnGammaP 20a6b42ac11e7867
LnGammaQ ecd04d58f1c7a241
GammaQuantile 1539b78062499f41
LnBeta 540eab038bb51187
Select 4c784300e24d97a4
BetaI db2280ae2b39d23c
BetaIc da5cb1e05fd36ec6
LnBetaI e0a6b50ae9e85d38
LnBetaIc 5252a994fd8db14b
BetaQuantile f31530ebae5747c1
sum 02661222aa6a990c
mean and variance 74d6ba1a6ea64986
";
