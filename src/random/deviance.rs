//! Poisson and binomial probabilities in saddle-point form (Loader 2000): no large terms cancel, so that
//! acceptance tests stay exact for means up to the largest doubles.

use crate::maths;

const LN_TAU: f64 = 1.837_877_066_409_345_3;

/// ln k! less Stirling's (k + 1/2) ln k - k + ln(2 π) / 2, for k >= 1.
fn stirling_rest(k: f64) -> f64 {
    if k < 16.0 {
        return maths::ln_gamma(k + 1.0) - (k + 0.5) * maths::ln(k) + k - 0.5 * LN_TAU;
    }
    let r = 1.0 / k;
    let s = r * r;
    r * (1.0 / 12.0
        - s * (1.0 / 360.0 - s * (1.0 / 1260.0 - s * (1.0 / 1680.0 - s * (1.0 / 1188.0)))))
}

/// k ln(k / m) + m - k
fn deviance(k: f64, m: f64) -> f64 {
    let r = (m - k) / k;
    k * (r - maths::log1p(r))
}

/// ln of the Poisson probability of a whole number k >= 0.
pub(super) fn ln_poisson(k: f64, mean: f64) -> f64 {
    if k == 0.0 {
        return -mean;
    }
    -stirling_rest(k) - deviance(k, mean) - 0.5 * (LN_TAU + maths::ln(k))
}

/// ln of the binomial probability of a whole number 0 <= k <= n; 0 < p < 1.
pub(super) fn ln_binomial(k: f64, n: f64, p: f64) -> f64 {
    if k == 0.0 {
        return n * maths::log1p(-p);
    }
    let rest = n - k;
    if rest == 0.0 {
        return n * maths::ln(p);
    }
    stirling_rest(n)
        - stirling_rest(k)
        - stirling_rest(rest)
        - deviance(k, n * p)
        - deviance(rest, n * (1.0 - p))
        - 0.5 * (LN_TAU + maths::ln(k) + maths::log1p(-k / n))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn agrees_with_the_plain_forms() {
        for k in 0..60 {
            let k = f64::from(k);
            let plain = k * maths::ln(12.5) - 12.5 - maths::ln_gamma(k + 1.0);
            assert!((ln_poisson(k, 12.5) - plain).abs() < 1e-13 * (1.0 + plain.abs()));
            let plain =
                maths::ln_choose(59.0, k) + k * maths::ln(0.3) + (59.0 - k) * maths::ln(0.7);
            assert!((ln_binomial(k, 59.0, 0.3) - plain).abs() < 1e-13 * (1.0 + plain.abs()));
        }
    }

    #[test]
    fn keeps_its_digits_for_large_means() {
        // At k = mean, Stirling's series alone: -ln(sqrt(2 pi k)) - 1 / (12 k).
        let k = 1e15;
        let exact = -0.5 * (LN_TAU + maths::ln(k)) - 1.0 / (12.0 * k);
        assert!((ln_poisson(k, k) - exact).abs() < 1e-14);
        // One standard deviation off: half a unit less, up to the skewness of order k^-1/2.
        let off = ln_poisson(k + maths::sqrt(k), k);
        assert!((off - exact + 0.5).abs() < 1e-7);
    }
}
