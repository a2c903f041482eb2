//! The checks find what is wrong with a law.

use super::walk::{Trial, whole};
use crate::laws::{Algebra, Law, Parameter, Support, Value, find};
use crate::maths::Binary;
use crate::random::Stream;

#[derive(Clone, Copy, PartialEq, Debug)]
enum Fault {
    None,
    /// A normalising constant off by a millionth.
    Density,
    /// Survival and distribution taken for each other.
    Swapped,
    /// A logarithm of the wrong side.
    LnSurvival,
    Quantile,
    UpperQuantile,
    /// Draws 2 % too wide.
    Draw,
}

/// A law of the table with something wrong.
struct Planted {
    law: &'static dyn Law,
    fault: Fault,
}

impl Planted {
    fn times(
        &self,
        a: &mut dyn Algebra,
        x: Option<Value>,
        fault: Fault,
        factor: f64,
    ) -> Option<Value> {
        if self.fault != fault {
            return x;
        }
        let factor = a.constant(factor);
        Some(a.binary(Binary::Multiply, x?, factor))
    }
}

impl Law for Planted {
    fn name(&self) -> &'static str {
        self.law.name()
    }
    fn about(&self) -> &'static str {
        self.law.about()
    }
    fn parameters(&self) -> &'static [Parameter] {
        self.law.parameters()
    }
    fn support(&self) -> Support {
        self.law.support()
    }
    fn log_density(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Value {
        let density = self.law.log_density(a, x, p);
        if self.fault != Fault::Density {
            return density;
        }
        let off = a.constant(1e-6);
        a.binary(Binary::Add, density, off)
    }
    fn distribution(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Option<Value> {
        if self.fault == Fault::Swapped {
            return self.law.survival(a, x, p);
        }
        self.law.distribution(a, x, p)
    }
    fn survival(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Option<Value> {
        self.law.survival(a, x, p)
    }
    fn ln_distribution(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Option<Value> {
        self.law.ln_distribution(a, x, p)
    }
    fn ln_survival(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Option<Value> {
        if self.fault == Fault::LnSurvival {
            return self.law.ln_distribution(a, x, p);
        }
        self.law.ln_survival(a, x, p)
    }
    fn quantile(&self, a: &mut dyn Algebra, q: Value, p: &[Value]) -> Option<Value> {
        let x = self.law.quantile(a, q, p);
        self.times(a, x, Fault::Quantile, 1.0 + 1e-8)
    }
    fn upper_quantile(&self, a: &mut dyn Algebra, s: Value, p: &[Value]) -> Option<Value> {
        let x = self.law.upper_quantile(a, s, p);
        self.times(a, x, Fault::UpperQuantile, 1.0 + 1e-8)
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> Option<f64> {
        let x = self.law.draw(stream, p)?;
        Some(if self.fault == Fault::Draw {
            1.02 * x
        } else {
            x
        })
    }
}

#[test]
fn a_wrong_law_is_caught() {
    let laws: [(&str, &[&str], &[f64]); 2] = [
        ("gamma", &["shape", "rate"], &[2.0, 1.0]),
        ("poisson", &["mean"], &[2.5]),
    ];
    for (name, arguments, p) in laws {
        let law = find(name, arguments).expect("in the table");
        let trial = Trial {
            integer: law.support().integer,
            cut: false,
            draws: 200_000,
        };
        let faults = [
            Fault::Density,
            Fault::Swapped,
            Fault::LnSurvival,
            Fault::Quantile,
            Fault::UpperQuantile,
            Fault::Draw,
        ];
        let judge = |fault| {
            let planted: &dyn Law = &Planted { law, fault };
            whole(planted.at(p), trial)
        };
        assert_eq!(judge(Fault::None), Ok(()));
        for fault in faults {
            assert!(judge(fault).is_err(), "{name}: {fault:?} was not seen");
        }
    }
}
