//! Small laws in closed form: density, exact draws, and numbers that are uniform when the law is right.

use odograph::course::{Coordinate, CoordinateKind, Target};
use odograph::maths;
use odograph::random::Stream;

/// A law that can be drawn from exactly.
pub trait Law: Sync {
    fn kinds(&self) -> Vec<CoordinateKind>;
    fn log_density(&self, x: &[f64]) -> f64;
    fn draw(&self, stream: &mut Stream) -> Vec<f64>;
    /// Uniform on (0, 1), each, if `x` has the law.
    fn uniforms(&self, x: &[f64], stream: &mut Stream) -> Vec<f64>;
}

/// A law as a target of several lanes.
pub struct Lockstep<'a> {
    law: &'a dyn Law,
    lanes: usize,
    coordinates: Vec<Coordinate>,
    point: Vec<f64>,
}

impl<'a> Lockstep<'a> {
    pub fn new(law: &'a dyn Law, lanes: usize) -> Lockstep<'a> {
        let coordinates = coordinates(law);
        Lockstep {
            law,
            lanes,
            point: vec![0.0; coordinates.len()],
            coordinates,
        }
    }
}

pub fn coordinates(law: &dyn Law) -> Vec<Coordinate> {
    let name = |(unknown, kind)| Coordinate {
        name: format!("x{unknown}"),
        unknown,
        kind,
    };
    law.kinds().into_iter().enumerate().map(name).collect()
}

impl Target for Lockstep<'_> {
    fn lanes(&self) -> usize {
        self.lanes
    }
    fn coordinates(&self) -> &[Coordinate] {
        &self.coordinates
    }
    fn log_density(&mut self, position: &[f64], out: &mut [f64]) {
        for (lane, out) in out.iter_mut().enumerate() {
            for (c, x) in self.point.iter_mut().enumerate() {
                *x = position[c * self.lanes + lane];
            }
            *out = self.law.log_density(&self.point);
        }
    }
}

pub fn normal(stream: &mut Stream) -> f64 {
    maths::normal_quantile(stream.open())
}

/// Normal, independent, of unit variance.
pub struct Standard(pub usize);

impl Law for Standard {
    fn kinds(&self) -> Vec<CoordinateKind> {
        vec![CoordinateKind::Real; self.0]
    }
    fn log_density(&self, x: &[f64]) -> f64 {
        let mut squares = 0.0;
        for x in x {
            squares += x * x;
        }
        -0.5 * squares
    }
    fn draw(&self, stream: &mut Stream) -> Vec<f64> {
        (0..self.0).map(|_| normal(stream)).collect()
    }
    fn uniforms(&self, x: &[f64], _: &mut Stream) -> Vec<f64> {
        let radius: f64 = -2.0 * self.log_density(x);
        let mut all = vec![maths::gamma_p(self.0 as f64 / 2.0, radius / 2.0)];
        all.extend(x.iter().map(|&x| maths::normal_cdf(x)));
        all
    }
}

/// Two normal coordinates of sds 1 and 3 and correlation 0.8.
pub struct Correlated;

const RHO: f64 = 0.8;

impl Law for Correlated {
    fn kinds(&self) -> Vec<CoordinateKind> {
        vec![CoordinateKind::Real; 2]
    }
    fn log_density(&self, x: &[f64]) -> f64 {
        let (a, b) = (x[0], x[1] / 3.0);
        -0.5 * (a * a - 2.0 * RHO * a * b + b * b) / (1.0 - RHO * RHO)
    }
    fn draw(&self, stream: &mut Stream) -> Vec<f64> {
        let a = normal(stream);
        let b = RHO * a + (1.0 - RHO * RHO).sqrt() * normal(stream);
        vec![a, 3.0 * b]
    }
    fn uniforms(&self, x: &[f64], _: &mut Stream) -> Vec<f64> {
        let (a, b) = (x[0], x[1] / 3.0);
        let rest = (b - RHO * a) / (1.0 - RHO * RHO).sqrt();
        [a, b, rest].map(maths::normal_cdf).to_vec()
    }
}

/// 0.7 normal(0, 1) + 0.3 normal(4, 0.5).
pub struct TwoHumps;

impl TwoHumps {
    fn part(x: f64, mean: f64, sd: f64) -> f64 {
        maths::exp(-0.5 * ((x - mean) / sd) * ((x - mean) / sd)) / sd
    }
}

impl Law for TwoHumps {
    fn kinds(&self) -> Vec<CoordinateKind> {
        vec![CoordinateKind::Real]
    }
    fn log_density(&self, x: &[f64]) -> f64 {
        maths::ln(0.7 * Self::part(x[0], 0.0, 1.0) + 0.3 * Self::part(x[0], 4.0, 0.5))
    }
    fn draw(&self, stream: &mut Stream) -> Vec<f64> {
        let far = stream.unit() < 0.3;
        let z = normal(stream);
        vec![if far { 4.0 + 0.5 * z } else { z }]
    }
    fn uniforms(&self, x: &[f64], _: &mut Stream) -> Vec<f64> {
        vec![0.7 * maths::normal_cdf(x[0]) + 0.3 * maths::normal_cdf((x[0] - 4.0) / 0.5)]
    }
}

/// The logarithm of a gamma law of shape 2 and rate 1; the Jacobian of the logarithm can be left out.
pub struct LogGamma {
    pub jacobian: bool,
}

impl Law for LogGamma {
    fn kinds(&self) -> Vec<CoordinateKind> {
        vec![CoordinateKind::Real]
    }
    fn log_density(&self, x: &[f64]) -> f64 {
        let of_gamma = x[0] - maths::exp(x[0]);
        if self.jacobian {
            of_gamma + x[0]
        } else {
            of_gamma
        }
    }
    fn draw(&self, stream: &mut Stream) -> Vec<f64> {
        vec![maths::ln(
            -maths::ln(stream.open()) - maths::ln(stream.open()),
        )]
    }
    fn uniforms(&self, x: &[f64], _: &mut Stream) -> Vec<f64> {
        vec![maths::gamma_p(2.0, maths::exp(x[0]))]
    }
}

/// Poisson of mean 3.5.
pub struct Counts;

pub const MEAN: f64 = 3.5;

impl Law for Counts {
    fn kinds(&self) -> Vec<CoordinateKind> {
        vec![CoordinateKind::Integer {
            lower: Some(0),
            upper: None,
        }]
    }
    fn log_density(&self, x: &[f64]) -> f64 {
        if x[0] < 0.0 {
            return f64::NEG_INFINITY;
        }
        x[0] * maths::ln(MEAN) - maths::ln_gamma(x[0] + 1.0)
    }
    fn draw(&self, stream: &mut Stream) -> Vec<f64> {
        let mut product = stream.open();
        let mut count = 0.0;
        while product > maths::exp(-MEAN) {
            product *= stream.open();
            count += 1.0;
        }
        vec![count]
    }
    fn uniforms(&self, x: &[f64], stream: &mut Stream) -> Vec<f64> {
        let below = |k: f64| {
            if k < 0.0 {
                0.0
            } else {
                maths::gamma_q(k + 1.0, MEAN)
            }
        };
        let (low, high) = (below(x[0] - 1.0), below(x[0]));
        vec![low + stream.unit() * (high - low)]
    }
}

/// A class 0 .. 3 with chances 0.1, 0.4, 0.2, 0.3, and a normal of unit variance about it; the class
/// can be read from the far side of a gap when `gap` is set: classes 0, 1, 5, 6.
pub struct Classes {
    pub gap: bool,
}

const CHANCES: [f64; 4] = [0.1, 0.4, 0.2, 0.3];

impl Classes {
    fn values(&self) -> [f64; 4] {
        if self.gap {
            [0.0, 1.0, 5.0, 6.0]
        } else {
            [0.0, 1.0, 2.0, 3.0]
        }
    }
}

impl Law for Classes {
    fn kinds(&self) -> Vec<CoordinateKind> {
        let upper = Some(self.values()[3] as i64);
        vec![
            CoordinateKind::Integer {
                lower: Some(0),
                upper,
            },
            CoordinateKind::Real,
        ]
    }
    fn log_density(&self, x: &[f64]) -> f64 {
        match self.values().iter().position(|&value| value == x[0]) {
            Some(k) => maths::ln(CHANCES[k]) - 0.5 * (x[1] - x[0]) * (x[1] - x[0]),
            None => f64::NEG_INFINITY,
        }
    }
    fn draw(&self, stream: &mut Stream) -> Vec<f64> {
        let u = stream.unit();
        let k = [0.1, 0.5, 0.7, 1.0]
            .iter()
            .position(|&c| u < c)
            .unwrap_or(3);
        let class = self.values()[k];
        vec![class, class + normal(stream)]
    }
    fn uniforms(&self, x: &[f64], stream: &mut Stream) -> Vec<f64> {
        let k = self
            .values()
            .iter()
            .position(|&value| value == x[0])
            .unwrap_or(0);
        let below: f64 = CHANCES[..k].iter().sum();
        let mut marginal = 0.0;
        for (value, chance) in self.values().iter().zip(CHANCES) {
            marginal += chance * maths::normal_cdf(x[1] - value);
        }
        vec![
            below + stream.unit() * CHANCES[k],
            marginal,
            maths::normal_cdf(x[1] - x[0]),
        ]
    }
}
