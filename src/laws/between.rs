//! The mass between two points from the logarithms of both tails.

use super::algebra::{Algebra, Value};
use super::term::{Pen, Term};
use std::f64::consts::LN_2;

/// ln(e^a - e^b) for b <= a; minus infinity where b >= a.
pub(super) fn ln_difference<'p>(a: Term<'p>, b: Term<'p>) -> Term<'p> {
    let empty = a.less_equal(b);
    let gap = empty.select(-1.0, b - a);
    let near = (-gap.expm1()).ln();
    let far = (-gap.exp()).log1p();
    let whole = a + gap.less(-LN_2).select(far, near);
    empty.select(f64::NEG_INFINITY, whole)
}

/// ln P(lower < X <= upper) from `[ln P(X <= lower), ln P(X <= upper)]` and `[ln P(X > lower), ln P(X >
/// upper)]`. Above the median the difference of the upper tails cancels less, elsewhere that of the lower.
pub(super) fn ln_between(a: &mut dyn Algebra, below: [Value; 2], above: [Value; 2]) -> Value {
    let pen = Pen::new(a);
    let [below_lower, below_upper] = below.map(|value| pen.term(value));
    let [above_lower, above_upper] = above.map(|value| pen.term(value));
    let upper_half = above_lower.less(-LN_2);
    upper_half
        .select(
            ln_difference(above_lower, above_upper),
            ln_difference(below_upper, below_lower),
        )
        .value
}
