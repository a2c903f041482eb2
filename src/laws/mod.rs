//! Laws: support, log density, distribution function, quantile, draw; one law a file, one table.
//!
//! What a formula may need of a law is written once, on an [`Algebra`]: the formula compiler runs it to
//! get operations of its tape, [`Plain`] runs it to get a number.
//!
//! ```
//! let gamma = odograph::laws::find("gamma", &["shape", "rate"]).unwrap();
//! let density = gamma.at(&[2.0, 1.0]).log_density(3.0);
//! assert!((density - (3.0_f64.ln() - 3.0)).abs() < 1e-15);
//! ```

#[cfg(test)]
mod checks;

mod algebra;
mod between;
mod inside;
mod law;
mod plain;
mod search;
mod term;
mod truncated;
mod written;

mod bernoulli;
mod beta;
mod binomial;
mod categorical;
mod cauchy;
mod exponential;
mod flat;
mod flat_positive;
mod gamma;
mod geometric;
mod gumbel;
mod half_cauchy;
mod half_normal;
mod inverse_gamma;
mod laplace;
mod logistic;
mod lognormal;
mod negative_binomial;
mod normal;
mod poisson;
mod student;
mod uniform;
mod weibull;

pub use algebra::{Algebra, Function, Value};
pub use law::{Bound, Domain, Law, Parameter, Support};
pub use plain::{At, Plain};
pub use truncated::Truncated;

/// In order of name; of the forms of one law, the usual one first.
static TABLE: [&dyn Law; 31] = [
    &bernoulli::ByProbability,
    &bernoulli::ByLogOdds,
    &beta::Beta,
    &binomial::ByProbability,
    &binomial::ByLogOdds,
    &categorical::Categorical,
    &cauchy::Cauchy,
    &exponential::ByRate,
    &exponential::ByMean,
    &flat::Flat,
    &flat_positive::FLAT_POSITIVE,
    &gamma::ByRate,
    &gamma::ByScale,
    &gamma::ByMoments,
    &geometric::Geometric,
    &gumbel::Gumbel,
    &half_cauchy::HalfCauchy,
    &half_normal::HalfNormal,
    &inverse_gamma::InverseGamma,
    &laplace::Laplace,
    &flat_positive::LOG_FLAT,
    &logistic::Logistic,
    &lognormal::Lognormal,
    &negative_binomial::ByMean,
    &negative_binomial::BySuccesses,
    &normal::BySd,
    &normal::ByPrecision,
    &poisson::Poisson,
    &student::Student,
    &uniform::Uniform,
    &weibull::Weibull,
];

/// The table of laws, in order of name.
pub fn table() -> &'static [&'static dyn Law] {
    &TABLE
}

/// The forms of a law: one for each choice of parameters, none for an unknown name.
pub fn forms(name: &str) -> impl Iterator<Item = &'static dyn Law> {
    table()
        .iter()
        .copied()
        .filter(move |law| law.name() == name)
}

/// The law with this name whose parameters have these names, in any order.
pub fn find(name: &str, arguments: &[&str]) -> Option<&'static dyn Law> {
    forms(name).find(|law| {
        let parameters = law.parameters();
        parameters.len() == arguments.len()
            && parameters
                .iter()
                .all(|parameter| arguments.contains(&parameter.name))
    })
}
