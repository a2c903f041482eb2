//! A flat law on the positive numbers: no probability law, since its mass is not finite.

use super::algebra::{Algebra, Value};
use super::law::{Law, Parameter, Support};
use super::term::Pen;

pub(super) struct FlatPositive;

impl Law for FlatPositive {
    fn name(&self) -> &'static str {
        "flat_positive"
    }
    fn about(&self) -> &'static str {
        "1 on (0, inf); improper"
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
        inside.select(x.constant(0.0), f64::NEG_INFINITY).value
    }
}
