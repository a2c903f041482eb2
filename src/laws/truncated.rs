//! A law given that its value lies between two bounds, both included.

use super::algebra::{Algebra, Value};
use super::law::Law;
use super::search;
use super::term::{Pen, Term};
use crate::maths;
use crate::random::Stream;
use std::f64::consts::LN_2;

/// A law of finite mass, cut to `from <= X <= to`; either bound may be absent and both may be vectors or
/// depend on unknowns. Where the bounds leave no mass, log densities are minus infinity and everything else
/// is NaN.
#[derive(Clone, Copy)]
pub struct Truncated<'a> {
    pub(super) law: &'a dyn Law,
    pub(super) from: Option<Value>,
    pub(super) to: Option<Value>,
}

/// Below this log mass, quantiles by the tails of the law itself would underflow.
const FAR: f64 = -690.0;

/// Rejection is used where at least this share of the law lies inside: four tries a draw at most on average.
const SHARE: f64 = 0.25;

impl<'a> Truncated<'a> {
    /// `None` for the flat laws, which have no finite mass to cut.
    pub fn new(law: &'a dyn Law, from: Option<Value>, to: Option<Value>) -> Option<Truncated<'a>> {
        law.proper().then_some(Truncated { law, from, to })
    }

    fn whole(&self) -> bool {
        self.from.is_none() && self.to.is_none()
    }

    /// The largest value that the lower bound cuts off: for integer laws the whole number below it.
    fn below(&self, a: &mut dyn Algebra) -> Option<Value> {
        let from = self.from?;
        if !self.law.support().integer {
            return Some(from);
        }
        let pen = Pen::new(a);
        Some((pen.term(from).ceil() - 1.0).value)
    }

    /// ln P(from <= X <= to) under the law itself; `None` without bounds.
    fn ln_mass(&self, a: &mut dyn Algebra, p: &[Value]) -> Option<Value> {
        match (self.below(a), self.to) {
            (None, None) => None,
            (Some(below), None) => self.law.ln_survival(a, below, p),
            (None, Some(to)) => self.law.ln_distribution(a, to, p),
            (Some(below), Some(to)) => self.law.ln_between(a, below, to, p),
        }
    }

    /// Log density at `x`, renormalised; see [`Law::log_density`].
    pub fn log_density(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Value {
        let density = self.law.log_density(a, x, p);
        let Some(mass) = self.ln_mass(a, p) else {
            return density;
        };
        let pen = Pen::new(a);
        let (density, mass, x) = (pen.term(density), pen.term(mass), pen.term(x));
        let mut inside = x.equals(x);
        if let Some(from) = self.from {
            inside = inside.and(pen.term(from).less_equal(x));
        }
        if let Some(to) = self.to {
            inside = inside.and(x.less_equal(pen.term(to)));
        }
        let point = inside.select(0.0, f64::NEG_INFINITY);
        (density + point + some(mass).select(-mass, f64::NEG_INFINITY)).value
    }

    /// ln P(lower < X <= upper)
    pub fn ln_between(
        &self,
        a: &mut dyn Algebra,
        lower: Value,
        upper: Value,
        p: &[Value],
    ) -> Option<Value> {
        if self.whole() {
            return self.law.ln_between(a, lower, upper, p);
        }
        let lower = match self.below(a) {
            Some(below) => later(a, lower, below),
            None => lower,
        };
        let upper = match self.to {
            Some(to) => sooner(a, upper, to),
            None => upper,
        };
        let part = self.law.ln_between(a, lower, upper, p)?;
        self.share(a, part, p)
    }

    /// The logarithm of a part of the mass, relative to the whole of it.
    fn share(&self, a: &mut dyn Algebra, part: Value, p: &[Value]) -> Option<Value> {
        let Some(mass) = self.ln_mass(a, p) else {
            return Some(part);
        };
        let pen = Pen::new(a);
        let (part, mass) = (pen.term(part), pen.term(mass));
        // Rounding may make a part that is the whole a little more than the whole.
        let share = (part - mass).at_most(0.0);
        let empty = part
            .equals(f64::NEG_INFINITY)
            .or(mass.equals(f64::NEG_INFINITY));
        Some(empty.select(f64::NEG_INFINITY, share).value)
    }

    /// ln P(X <= x)
    pub fn ln_distribution(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Option<Value> {
        if self.from.is_some() {
            let lowest = a.constant(f64::NEG_INFINITY);
            return self.ln_between(a, lowest, x, p);
        }
        let x = match self.to {
            Some(to) => sooner(a, x, to),
            None => x,
        };
        let part = self.law.ln_distribution(a, x, p)?;
        self.share(a, part, p)
    }

    /// ln P(X > x)
    pub fn ln_survival(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Option<Value> {
        if self.to.is_some() {
            let highest = a.constant(f64::INFINITY);
            return self.ln_between(a, x, highest, p);
        }
        let x = match self.below(a) {
            Some(below) => later(a, x, below),
            None => x,
        };
        let part = self.law.ln_survival(a, x, p)?;
        self.share(a, part, p)
    }

    /// P(X <= x)
    pub fn distribution(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Option<Value> {
        if self.whole() {
            return self.law.distribution(a, x, p);
        }
        let ln = self.ln_distribution(a, x, p)?;
        self.where_some(a, p, ln)
    }

    /// P(X > x)
    pub fn survival(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Option<Value> {
        if self.whole() {
            return self.law.survival(a, x, p);
        }
        let ln = self.ln_survival(a, x, p)?;
        self.where_some(a, p, ln)
    }

    /// e^ln, and NaN where no mass is left.
    fn where_some(&self, a: &mut dyn Algebra, p: &[Value], ln: Value) -> Option<Value> {
        let mass = self.ln_mass(a, p)?;
        let pen = Pen::new(a);
        let mass = pen.term(mass);
        Some(some(mass).select(pen.term(ln).exp(), f64::NAN).value)
    }

    /// The smallest x with P(X <= x) >= q. NaN also where the law itself has less than e^-690 of its mass
    /// between the bounds.
    pub fn quantile(&self, a: &mut dyn Algebra, q: Value, p: &[Value]) -> Option<Value> {
        if self.whole() {
            return self.law.quantile(a, q, p);
        }
        let rest = {
            let pen = Pen::new(a);
            (1.0 - pen.term(q)).value
        };
        self.inverse(a, rest, q, p)
    }

    /// The smallest x with P(X > x) <= s, with the same limit.
    pub fn upper_quantile(&self, a: &mut dyn Algebra, s: Value, p: &[Value]) -> Option<Value> {
        if self.whole() {
            return self.law.upper_quantile(a, s, p);
        }
        let rest = {
            let pen = Pen::new(a);
            (1.0 - pen.term(s)).value
        };
        self.inverse(a, s, rest, p)
    }

    /// The x with the share `above` of the mass above it and the share `below` below it.
    fn inverse(
        &self,
        a: &mut dyn Algebra,
        above: Value,
        below: Value,
        p: &[Value],
    ) -> Option<Value> {
        let (zero, one) = (a.constant(0.0), a.constant(1.0));
        let (lower_from, upper_from) = match self.below(a) {
            Some(from) => (
                self.law.distribution(a, from, p)?,
                self.law.survival(a, from, p)?,
            ),
            None => (zero, one),
        };
        let (lower_to, upper_to) = match self.to {
            Some(to) => (
                self.law.distribution(a, to, p)?,
                self.law.survival(a, to, p)?,
            ),
            None => (one, zero),
        };
        let mass = self.ln_mass(a, p)?;
        let (lower, upper) = {
            let pen = Pen::new(a);
            let mix = |from: Value, to: Value| {
                pen.term(from) * pen.term(above) + pen.term(to) * pen.term(below)
            };
            (
                mix(lower_from, lower_to).value,
                mix(upper_from, upper_to).value,
            )
        };
        let from_below = self.law.quantile(a, lower, p)?;
        let from_above = self.law.upper_quantile(a, upper, p)?;
        let integer = self.law.support().integer;
        let pen = Pen::new(a);
        let mut x = pen
            .term(lower)
            .less_equal(0.5)
            .select(pen.term(from_below), pen.term(from_above));
        if let Some(from) = self.from {
            let from = pen.term(from);
            x = x.at_least(if integer { from.ceil() } else { from });
        }
        if let Some(to) = self.to {
            let to = pen.term(to);
            x = x.at_most(if integer { to.floor() } else { to });
        }
        let (above, below) = (pen.term(above), pen.term(below));
        let shares = above
            .constant(0.0)
            .less_equal(above)
            .and(below.constant(0.0).less_equal(below));
        let within = shares.and(pen.term(mass).constant(FAR).less_equal(pen.term(mass)));
        Some(within.select(x, f64::NAN).value)
    }
}

/// Whether there is any mass, from its logarithm.
fn some(mass: Term<'_>) -> Term<'_> {
    mass.constant(f64::NEG_INFINITY).less(mass)
}

fn later(a: &mut dyn Algebra, x: Value, y: Value) -> Value {
    let pen = Pen::new(a);
    pen.term(x).at_least(pen.term(y)).value
}

fn sooner(a: &mut dyn Algebra, x: Value, y: Value) -> Value {
    let pen = Pen::new(a);
    pen.term(x).at_most(pen.term(y)).value
}

/// A draw from the law between the bounds: by rejection where a good part of the law lies there, else by
/// inversion on the better tail; far out, by a search on the logarithm of that tail. Which, depends on the
/// parameters and bounds alone. `None` for the flat laws, NaN where there is no law.
pub(super) fn draw(
    law: &dyn Law,
    stream: &mut Stream,
    p: &[f64],
    from: Option<f64>,
    to: Option<f64>,
) -> Option<f64> {
    if from.is_none() && to.is_none() {
        return law.draw(stream, p);
    }
    let cut = law.at(p).truncated(from, to);
    let (lowest, highest) = (
        from.unwrap_or(f64::NEG_INFINITY),
        to.unwrap_or(f64::INFINITY),
    );
    let integer = law.support().integer;
    let below = if integer {
        maths::ceil(lowest) - 1.0
    } else {
        lowest
    };
    let mass = law.at(p).ln_between(below, highest)?;
    if mass.is_nan() || mass == f64::NEG_INFINITY {
        return Some(f64::NAN);
    }
    if mass >= maths::ln(SHARE) {
        loop {
            let x = law.draw(stream, p)?;
            if x.is_nan() || (lowest <= x && x <= highest) {
                return Some(x);
            }
        }
    }
    let q = stream.open();
    if mass >= FAR {
        return cut.quantile(q);
    }
    Some(far(law, p, [below, highest], q))
}

/// The quantile of the part of a law between two bounds that lie far out on one side.
fn far(law: &dyn Law, p: &[f64], [below, highest]: [f64; 2], q: f64) -> f64 {
    let at = law.at(p);
    let (lower, upper) = law.support().ends(p);
    let lower = maths::maximum(lower, below);
    let upper = maths::minimum(upper, highest);
    // ln((1 - w) e^a + w e^b) for a >= b
    let mix = |a: f64, b: f64, w: f64| a + maths::ln((1.0 - w) + w * maths::exp(b - a));
    let never = f64::NAN;
    let above = at.ln_survival(below).unwrap_or(never);
    if above < -LN_2 {
        let target = mix(above, at.ln_survival(highest).unwrap_or(never), q);
        let reached = |x: f64| at.ln_survival(x).unwrap_or(never) <= target;
        search::smallest(lower, upper, law.support().integer, reached)
    } else {
        let target = mix(
            at.ln_distribution(highest).unwrap_or(never),
            at.ln_distribution(below).unwrap_or(never),
            1.0 - q,
        );
        let reached = |x: f64| at.ln_distribution(x).unwrap_or(never) >= target;
        search::smallest(lower, upper, law.support().integer, reached)
    }
}
