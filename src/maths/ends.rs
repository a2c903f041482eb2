//! What the branch-free functions give at the ends of their ranges.

use super::*;

const INF: f64 = f64::INFINITY;

fn same(got: f64, want: f64) {
    let equal = got.to_bits() == want.to_bits() || (got.is_nan() && want.is_nan());
    assert!(equal, "{got:?} for {want:?}");
}

#[test]
fn infinities_and_zeros() {
    for (f, at_minus, at_minus_zero, at_zero, at_plus) in [
        (exp as fn(f64) -> f64, 0.0, 1.0, 1.0, INF),
        (expm1, -1.0, -0.0, 0.0, INF),
        (ln, f64::NAN, -INF, -INF, INF),
        (log1p, f64::NAN, -0.0, 0.0, INF),
        (tanh, -1.0, -0.0, 0.0, 1.0),
        (sin, f64::NAN, -0.0, 0.0, f64::NAN),
        (cos, f64::NAN, 1.0, 1.0, f64::NAN),
        (logistic, 0.0, 0.5, 0.5, 1.0),
        (normal_cdf, 0.0, 0.5, 0.5, 1.0),
        (normal_quantile, f64::NAN, -INF, -INF, f64::NAN),
        (ln_gamma, INF, INF, INF, INF),
        (round, -INF, -0.0, 0.0, INF),
        (sign, -1.0, -0.0, 0.0, 1.0),
    ] {
        same(f(-INF), at_minus);
        same(f(-0.0), at_minus_zero);
        same(f(0.0), at_zero);
        same(f(INF), at_plus);
        same(f(f64::NAN), f64::NAN);
    }
    same(softplus(-INF), 0.0);
    same(softplus(INF), INF);
    same(softplus(f64::NAN), f64::NAN);
    same(ln_normal_cdf(-INF), -INF);
    same(ln_normal_cdf(INF).abs(), 0.0);
    same(ln_normal_cdf(f64::NAN), f64::NAN);
}

#[test]
fn where_ranges_end() {
    assert!(exp(709.782712893384).is_finite());
    same(exp(709.7827128933841), INF);
    same(exp(-745.2), 0.0);
    same(expm1(709.7827128933841), INF);
    same(expm1(-1e300), -1.0);
    same(ln(-1e-300), f64::NAN);
    same(log1p(-1.0), -INF);
    same(log1p(-1.0000000000000002), f64::NAN);
    same(ln_gamma(1.0), 0.0);
    same(ln_gamma(2.0), 0.0);
    same(ln_gamma(-3.0), INF);
    same(normal_quantile(0.5), 0.0);
    same(normal_quantile(1.0), INF);
    same(normal_quantile(-1e-300), f64::NAN);
    same(normal_quantile(1.1), f64::NAN);
    same(digamma(-2.0), f64::NAN);
}

#[test]
fn whole_numbers_and_extremes() {
    same(round(2.5), 3.0);
    same(round(-2.5), -3.0);
    same(round(0.49999999999999994), 0.0);
    same(round(-0.3), -0.0);
    same(round(9007199254740993.0), 9007199254740992.0);
    same(minimum(1.0, 2.0), 1.0);
    same(minimum(f64::NAN, 2.0), f64::NAN);
    same(minimum(2.0, f64::NAN), f64::NAN);
    same(maximum(f64::NAN, 2.0), f64::NAN);
    same(maximum(2.0, f64::NAN), f64::NAN);
    same(maximum(1.0, 2.0), 2.0);
}

#[test]
fn binomial_coefficients() {
    let near =
        |got: f64, want: f64| assert!((got - want).abs() <= 4e-15 * want, "{got} for {want}");
    near(ln_choose(5.0, 2.0), ln(10.0));
    near(ln_choose(52.0, 5.0), ln(2598960.0));
    near(ln_choose(49.0, 6.0), ln(13983816.0));
    same(ln_choose(7.0, 7.0), 0.0);
    same(ln_choose(7.0, 8.0), -INF);
    same(ln_choose(f64::NAN, 8.0), f64::NAN);
}
