//! Unknowns whose law reaches beyond the values that a law built on them can take.

use super::declared::Declared;
use super::posterior::Posterior;
use crate::formula::{Call, Expr, Form};
use crate::laws::{self, Domain};

/// One sentence for each unknown that stands, by itself, as a parameter whose domain is narrower than the unknown's
/// own support: outside it the density is 0, so that its law is in effect cut there.
pub fn narrowed(declared: &Declared, posterior: &Posterior) -> Vec<String> {
    let mut found = Vec::new();
    let unknowns = declared.unknowns.iter().map(|entry| &entry.law);
    let observed = declared.observed.iter().map(|entry| &entry.law);
    for law in unknowns.chain(observed) {
        law.visit(&mut |part| {
            if let Form::Call(call) = &part.form {
                found.extend(of_call(call, posterior));
            }
        });
    }
    found.sort();
    found.dedup();
    found
}

fn of_call(call: &Call, posterior: &Posterior) -> Vec<String> {
    let names: Vec<&str> = call.named.iter().map(|(name, ..)| name.as_str()).collect();
    let Some(law) = laws::find(&call.name, &names) else {
        return Vec::new();
    };
    let sentence = |(name, _, value): &(String, _, Expr)| {
        let unknown = bare(value)?;
        let unknown = posterior.unknowns.iter().find(|u| u.name == unknown)?;
        let parameter = law.parameters().iter().find(|p| p.name == name)?;
        let (lower, upper) = ends(parameter.domain)?;
        let wider = unknown.ends.0 < lower || unknown.ends.1 > upper;
        wider.then(|| {
            format!(
                "the law of `{}` reaches beyond what `{name}` of {} may be ({}): it is cut to that, and its mass \
                 beyond is lost",
                unknown.name,
                law.name(),
                parameter.domain.words()
            )
        })
    };
    call.named.iter().filter_map(sentence).collect()
}

/// The unknown's name in `p` and `p[…]`.
fn bare(value: &Expr) -> Option<&str> {
    match &value.form {
        Form::Name(name) => Some(name),
        Form::Index { of, .. } => bare(of),
        _ => None,
    }
}

fn ends(domain: Domain) -> Option<(f64, f64)> {
    match domain {
        Domain::Real | Domain::Probabilities => None,
        Domain::Positive | Domain::NonNegative | Domain::Count => Some((0.0, f64::INFINITY)),
        Domain::Unit | Domain::PositiveUnit => Some((0.0, 1.0)),
    }
}
