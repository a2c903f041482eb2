//! What the incomplete gamma and beta functions share: deviances, tails as integrals, and pairs of a
//! probability and its complement.

use super::exponential::{exp, expm1};
use super::logarithm::{ln, log1p};
use super::pairs::{ODD, polynomial};

/// A probability and its complement, and the logarithms of both.
#[derive(Debug, Clone, Copy)]
pub(super) struct Split {
    pub lower: f64,
    pub upper: f64,
    pub ln_lower: f64,
    pub ln_upper: f64,
}

impl Split {
    pub const NAN: Split = Split {
        lower: f64::NAN,
        upper: f64::NAN,
        ln_lower: f64::NAN,
        ln_upper: f64::NAN,
    };
    /// All mass above.
    pub const ABOVE: Split = Split {
        lower: 0.0,
        upper: 1.0,
        ln_lower: f64::NEG_INFINITY,
        ln_upper: 0.0,
    };

    /// Of a law with all its mass at one place, seen from `distance` below it.
    pub fn step(distance: f64) -> Split {
        if distance > 0.0 {
            Split::ABOVE
        } else if distance < 0.0 {
            Split::ABOVE.turned()
        } else {
            Split::from_ln_lower(-std::f64::consts::LN_2)
        }
    }

    /// From the logarithm of the lower probability.
    pub fn from_ln_lower(ln_lower: f64) -> Split {
        let ln_lower = if ln_lower > 0.0 { 0.0 } else { ln_lower };
        let lower = exp(ln_lower);
        let upper = if ln_lower > -0.5 {
            -expm1(ln_lower)
        } else {
            1.0 - lower
        };
        let ln_upper = if ln_lower > -0.5 {
            ln(upper)
        } else {
            log1p(-lower)
        };
        Split {
            lower,
            upper,
            ln_lower,
            ln_upper,
        }
    }

    /// From h and s, where the lower probability is e^h (1 + s): good on both sides also where it is near 1.
    pub fn from_power_series(h: f64, s: f64) -> Split {
        let upper = -expm1(h) - s * exp(h);
        if upper > 0.5 {
            return Split::from_ln_lower(h + log1p(s));
        }
        let upper = if upper < 0.0 { 0.0 } else { upper };
        Split {
            lower: 1.0 - upper,
            upper,
            ln_lower: log1p(-upper),
            ln_upper: ln(upper),
        }
    }

    /// The sides changed.
    pub fn turned(self) -> Split {
        Split {
            lower: self.upper,
            upper: self.lower,
            ln_lower: self.ln_upper,
            ln_upper: self.ln_lower,
        }
    }
}

/// x ln(x / m) + m - x without cancellation, where `d` is x - m (Loader 2000).
pub(super) fn deviance(x: f64, m: f64, d: f64) -> f64 {
    if d.abs() < 0.1 * (x + m) {
        let v = d / (x + m);
        let z = v * v;
        // d v + 2 x v (z/3 + z^2/5 + ...)
        return d * v + 2.0 * x * v * z * polynomial(z, &ODD);
    }
    x * ln(x / m) - d
}

/// ln(1 + v) - v for |v| at most 0.35.
#[inline(always)]
fn log1p_less_linear(v: f64) -> f64 {
    let s = v / (2.0 + v);
    let z = s * s;
    2.0 * s * z * polynomial(z, &ODD) - s * v
}

/// The integral over u > 0 of (1 + u/x)^a (1 - u/y)^b e^(-slope u + (b/y - a/x) u): a tail of a density that
/// is nearly normal over its last eight standard deviations, divided by the density where the tail begins.
/// x (or y) is negative where the tail runs down; `b` may be 0.
///
/// Gauss-Legendre rule of 32 points up to where the integrand is below e^-38.
pub(super) fn tail_integral(a: f64, x: f64, b: f64, y: f64, slope: f64) -> f64 {
    let curvature = (a / x) / x + (b / y) / y;
    let end = 76.0 / (slope + (slope * slope + 76.0 * curvature).sqrt());
    let value =
        |u: f64| exp(a * log1p_less_linear(u / x) + b * log1p_less_linear(-u / y) - slope * u);
    let mut total = 0.0;
    for (node, weight) in LEGENDRE {
        let low = value(0.5 * end * (1.0 - node));
        let high = value(0.5 * end * (1.0 + node));
        total += weight * (low + high);
    }
    0.5 * end * total
}

/// Nodes (of both signs) and weights of the Gauss-Legendre rule of 32 points on [-1, 1].
const LEGENDRE: [(f64, f64); 16] = [
    (0.9972638618494816, 0.007018610009470096),
    (0.9856115115452684, 0.01627439473090567),
    (0.9647622555875064, 0.02539206530926206),
    (0.9349060759377397, 0.03427386291302143),
    (0.8963211557660521, 0.04283589802222668),
    (0.84936761373257, 0.050998059262376175),
    (0.7944837959679424, 0.058684093478535544),
    (0.7321821187402897, 0.06582222277636185),
    (0.6630442669302152, 0.0723457941088485),
    (0.5877157572407623, 0.07819389578707031),
    (0.5068999089322294, 0.08331192422694675),
    (0.42135127613063533, 0.08765209300440381),
    (0.33186860228212767, 0.09117387869576389),
    (0.23928736225213706, 0.09384439908080457),
    (0.1444719615827965, 0.09563872007927486),
    (0.04830766568773832, 0.0965400885147278),
];
