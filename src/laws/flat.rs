//! A flat law on the reals: no probability law, since its mass is not finite.

use super::algebra::{Algebra, Value};
use super::law::{Law, Parameter, Support};

pub(super) struct Flat;

impl Law for Flat {
    fn name(&self) -> &'static str {
        "flat"
    }
    fn about(&self) -> &'static str {
        "1 on the reals; improper"
    }
    fn parameters(&self) -> &'static [Parameter] {
        &[]
    }
    fn support(&self) -> Support {
        Support::REALS
    }
    fn proper(&self) -> bool {
        false
    }
    fn log_density(&self, a: &mut dyn Algebra, _x: Value, _p: &[Value]) -> Value {
        // The same everywhere: a number, whatever the shape of x.
        a.constant(0.0)
    }
}
