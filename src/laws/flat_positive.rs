//! Laws on the positive numbers that are flat, or flat in the logarithm: no probability laws, since their mass is not
//! finite.

use super::algebra::{Algebra, Value};
use super::law::{Law, Parameter, Support};
use super::term::{Pen, Term};

/// An improper law on (0, inf).
pub(super) struct FlatPositive {
    name: &'static str,
    about: &'static str,
    /// Of a positive number.
    log_density: for<'p> fn(Term<'p>) -> Term<'p>,
}

pub(super) static FLAT_POSITIVE: FlatPositive = FlatPositive {
    name: "flat_positive",
    about: "1 on (0, inf); improper",
    log_density: |x| x.constant(0.0),
};

pub(super) static LOG_FLAT: FlatPositive = FlatPositive {
    name: "log_flat",
    about: "1 / x on (0, inf): flat in ln(x); improper",
    log_density: |x| -x.ln(),
};

impl Law for FlatPositive {
    fn name(&self) -> &'static str {
        self.name
    }
    fn about(&self) -> &'static str {
        self.about
    }
    fn parameters(&self) -> &'static [Parameter] {
        &[]
    }
    fn support(&self) -> Support {
        Support::POSITIVE
    }
    fn proper(&self) -> bool {
        false
    }
    fn log_density(&self, a: &mut dyn Algebra, x: Value, _p: &[Value]) -> Value {
        let pen = Pen::new(a);
        let x = pen.term(x);
        let inside = x.constant(0.0).less(x).and(x.less(f64::INFINITY));
        let density = (self.log_density)(inside.select(x, 1.0));
        inside.select(density, f64::NEG_INFINITY).value
    }
}
