//! How a law of finite mass is written down, and the guards that all of them share: parameters outside
//! their domain, points outside the support, the ends of quantiles.

use super::algebra::{Algebra, Value};
use super::law::{Bound, Domain, Law, Parameter, Support};
use super::plain::Plain;
use super::term::{Pen, Term};
use crate::random::Stream;

/// The log density at a point inside the support, as a sum of three parts.
pub(super) struct Parts<'p> {
    /// Of the point alone (for integer laws with a bound that is a parameter: of the point and that bound).
    pub point: Option<Term<'p>>,
    /// Of both.
    pub mixed: Option<Term<'p>>,
    /// Of the parameters alone.
    pub parameters: Term<'p>,
}

/// The formulas of a law, for parameters inside their domain and points inside the support (distribution and
/// survival: also at its ends).
pub(super) trait Written: Sync + Send {
    const NAME: &'static str;
    const ABOUT: &'static str;
    const PARAMETERS: &'static [Parameter];
    const SUPPORT: Support;

    /// What must hold beyond the domain of each parameter.
    fn condition<'p>(&self, _p: &[Term<'p>]) -> Option<Term<'p>> {
        None
    }
    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p>;
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p>;
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p>;
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        self.distribution(x, p).ln()
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        self.survival(x, p).ln()
    }
    /// For 0 < q < 1.
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p>;
    /// For 0 < s < 1.
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p>;
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64;
}

/// Whether a parameter lies in its domain, and a number to go on with where it does not.
fn domain<'p>(domain: Domain, p: Term<'p>) -> Option<(Term<'p>, f64)> {
    let between = |low: f64, high: f64| p.constant(low).less_equal(p).and(p.less_equal(high));
    Some(match domain {
        Domain::Real => return None,
        Domain::Positive => (between(f64::MIN_POSITIVE, f64::MAX), 1.0),
        Domain::NonNegative => (between(0.0, f64::MAX), 1.0),
        Domain::Unit | Domain::Probabilities => (between(0.0, 1.0), 0.5),
        Domain::PositiveUnit => (between(f64::MIN_POSITIVE, 1.0), 0.5),
        Domain::Count => (between(0.0, f64::MAX).and(p.floor().equals(p)), 1.0),
    })
}

struct Guarded<'p> {
    /// Whether all parameters are in order; `None` where nothing can be out of order.
    ok: Option<Term<'p>>,
    /// The parameters, or harmless ones.
    p: Vec<Term<'p>>,
}

impl<'p> Guarded<'p> {
    fn or(&self, value: Term<'p>, otherwise: f64) -> Term<'p> {
        match self.ok {
            Some(ok) => ok.select(value, otherwise),
            None => value,
        }
    }
}

fn and<'p>(a: Option<Term<'p>>, b: Term<'p>) -> Option<Term<'p>> {
    Some(match a {
        Some(a) => a.and(b),
        None => b,
    })
}

fn guard<'p, L: Written>(law: &L, p: &[Term<'p>]) -> Guarded<'p> {
    let mut ok = None;
    let mut safe = Vec::with_capacity(p.len());
    for (index, &term) in p.iter().enumerate() {
        let parameter = L::PARAMETERS[index.min(L::PARAMETERS.len() - 1)];
        match domain(parameter.domain, term) {
            Some((holds, otherwise)) => {
                ok = and(ok, holds);
                safe.push(holds.select(term, otherwise));
            }
            None => safe.push(term),
        }
    }
    if let Some(condition) = law.condition(p) {
        ok = and(ok, condition);
    }
    Guarded { ok, p: safe }
}

fn bound<'p>(bound: Bound, p: &[Term<'p>]) -> Option<Term<'p>> {
    match bound {
        Bound::Infinite => None,
        Bound::At(value) => Some(p[0].constant(value)),
        Bound::Parameter(index) => Some(p[index]),
        Bound::Length => Some(p[0].constant(p.len() as f64)),
    }
}

/// Whether a point lies in the support (`None`: the whole line), and a point inside.
fn inside<'p, L: Written>(x: Term<'p>, p: &[Term<'p>]) -> (Option<Term<'p>>, Term<'p>) {
    let support = L::SUPPORT;
    let (lower, upper) = (bound(support.lower, p), bound(support.upper, p));
    if lower.is_none() && upper.is_none() {
        return (None, x);
    }
    let order = |a: Term<'p>, b: Term<'p>| {
        if support.closed {
            a.less_equal(b)
        } else {
            a.less(b)
        }
    };
    let mut holds = match upper {
        Some(upper) => order(x, upper),
        None => x.less(f64::INFINITY),
    };
    if let Some(lower) = lower {
        holds = order(lower, x).and(holds);
    }
    if support.integer {
        holds = holds.and(x.floor().equals(x));
    }
    let within = match (support.lower, support.upper, lower) {
        (_, _, Some(lower)) if support.closed => lower,
        (Bound::At(a), Bound::At(b), _) => x.constant(0.5 * (a + b)),
        _ => x.constant(1.0),
    };
    (Some(holds), holds.select(x, within))
}

/// A function of a point, with its values below and above the support.
fn over_support<'p, L: Written>(
    x: Term<'p>,
    p: &[Term<'p>],
    below: f64,
    above: f64,
    function: impl Fn(Term<'p>) -> Term<'p>,
) -> Term<'p> {
    let x = if L::SUPPORT.integer { x.floor() } else { x };
    let (lower, upper) = (bound(L::SUPPORT.lower, p), bound(L::SUPPORT.upper, p));
    let mut safe = x;
    // Below nothing, above everything: the ends themselves included where the value there is known.
    let under = match lower {
        Some(lower) => x.less(lower),
        None => x.less_equal(f64::NEG_INFINITY),
    };
    let over = match upper {
        Some(upper) => upper.less_equal(x),
        None => x.constant(f64::INFINITY).less_equal(x),
    };
    let within = match (L::SUPPORT.lower, lower) {
        (_, Some(lower)) => lower,
        _ => x.constant(0.0),
    };
    safe = under.or(over).select(within, safe);
    under.select(below, over.select(above, function(safe)))
}

/// A quantile function with its ends.
fn over_unit<'p>(
    q: Term<'p>,
    at_zero: Term<'p>,
    at_one: Term<'p>,
    function: impl Fn(Term<'p>) -> Term<'p>,
) -> Term<'p> {
    let inner = q.constant(0.0).less(q).and(q.less(1.0));
    let ends = q
        .equals(0.0)
        .select(at_zero, q.equals(1.0).select(at_one, f64::NAN));
    inner.select(function(inner.select(q, 0.5)), ends)
}

impl<L: Written> Law for L {
    fn name(&self) -> &'static str {
        L::NAME
    }

    fn about(&self) -> &'static str {
        L::ABOUT
    }

    fn parameters(&self) -> &'static [Parameter] {
        L::PARAMETERS
    }

    fn support(&self) -> Support {
        L::SUPPORT
    }

    fn log_density(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Value {
        let pen = Pen::new(a);
        let (x, p) = (pen.term(x), pen.terms(p));
        let guarded = guard(self, &p);
        let (holds, x) = inside::<L>(x, &guarded.p);
        let parts = Written::log_density(self, x, &guarded.p);
        let point = match (holds, parts.point) {
            (Some(holds), point) => {
                let point = point.unwrap_or(x.constant(0.0));
                Some(holds.select(point, f64::NEG_INFINITY))
            }
            (None, point) => point,
        };
        let parameters = guarded.or(parts.parameters, f64::NEG_INFINITY);
        let varying = match (point, parts.mixed) {
            (Some(point), Some(mixed)) => Some(point + mixed),
            (point, mixed) => point.or(mixed),
        };
        match varying {
            Some(varying) => (varying + parameters).value,
            None => parameters.value,
        }
    }

    fn distribution(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Option<Value> {
        let pen = Pen::new(a);
        let guarded = guard(self, &pen.terms(p));
        let value = over_support::<L>(pen.term(x), &guarded.p, 0.0, 1.0, |x| {
            Written::distribution(self, x, &guarded.p)
        });
        Some(guarded.or(value, f64::NAN).value)
    }

    fn survival(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Option<Value> {
        let pen = Pen::new(a);
        let guarded = guard(self, &pen.terms(p));
        let value = over_support::<L>(pen.term(x), &guarded.p, 1.0, 0.0, |x| {
            Written::survival(self, x, &guarded.p)
        });
        Some(guarded.or(value, f64::NAN).value)
    }

    fn ln_distribution(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Option<Value> {
        let pen = Pen::new(a);
        let guarded = guard(self, &pen.terms(p));
        let value = over_support::<L>(pen.term(x), &guarded.p, f64::NEG_INFINITY, 0.0, |x| {
            Written::ln_distribution(self, x, &guarded.p)
        });
        Some(guarded.or(value, f64::NEG_INFINITY).value)
    }

    fn ln_survival(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Option<Value> {
        let pen = Pen::new(a);
        let guarded = guard(self, &pen.terms(p));
        let value = over_support::<L>(pen.term(x), &guarded.p, 0.0, f64::NEG_INFINITY, |x| {
            Written::ln_survival(self, x, &guarded.p)
        });
        Some(guarded.or(value, f64::NEG_INFINITY).value)
    }

    fn quantile(&self, a: &mut dyn Algebra, q: Value, p: &[Value]) -> Option<Value> {
        let pen = Pen::new(a);
        let guarded = guard(self, &pen.terms(p));
        let q = pen.term(q);
        let (lower, upper) = ends::<L>(q, &guarded.p);
        let value = over_unit(q, lower, upper, |q| Written::quantile(self, q, &guarded.p));
        Some(guarded.or(value, f64::NAN).value)
    }

    fn upper_quantile(&self, a: &mut dyn Algebra, s: Value, p: &[Value]) -> Option<Value> {
        let pen = Pen::new(a);
        let guarded = guard(self, &pen.terms(p));
        let s = pen.term(s);
        let (lower, upper) = ends::<L>(s, &guarded.p);
        let value = over_unit(s, upper, lower, |s| {
            Written::upper_quantile(self, s, &guarded.p)
        });
        Some(guarded.or(value, f64::NAN).value)
    }

    fn draw(&self, stream: &mut Stream, p: &[f64]) -> Option<f64> {
        let last = L::PARAMETERS.len() - 1;
        let in_order = p
            .iter()
            .enumerate()
            .all(|(index, &value)| L::PARAMETERS[index.min(last)].domain.holds(value));
        if !in_order || !condition_holds(self, p) {
            return Some(f64::NAN);
        }
        Some(Written::draw(self, stream, p))
    }
}

fn ends<'p, L: Written>(q: Term<'p>, p: &[Term<'p>]) -> (Term<'p>, Term<'p>) {
    (
        bound(L::SUPPORT.lower, p).unwrap_or(q.constant(f64::NEG_INFINITY)),
        bound(L::SUPPORT.upper, p).unwrap_or(q.constant(f64::INFINITY)),
    )
}

fn condition_holds<L: Written>(law: &L, p: &[f64]) -> bool {
    let mut plain = Plain::new();
    let values = plain.numbers(p);
    let condition = {
        let pen = Pen::new(&mut plain);
        law.condition(&pen.terms(&values)).map(|term| term.value)
    };
    condition.is_none_or(|value| plain.number(value) != 0.0)
}
