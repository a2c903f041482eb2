//! Mean and variance that hold up under cancellation.

use super::sum;

/// Mean and sum of squared deviations of numbers met one by one (Welford 1962), mergeable (Chan, Golub &
/// LeVeque 1983).
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct Spread {
    pub count: u64,
    pub mean: f64,
    /// Sum of squared deviations from the mean.
    pub squares: f64,
}

impl Spread {
    pub fn add(&mut self, x: f64) {
        self.count += 1;
        let delta = x - self.mean;
        self.mean += delta / self.count as f64;
        self.squares += delta * (x - self.mean);
    }

    /// Those of both.
    pub fn merge(&self, other: &Spread) -> Spread {
        if self.count == 0 {
            return *other;
        }
        if other.count == 0 {
            return *self;
        }
        let count = self.count + other.count;
        let share = other.count as f64 / count as f64;
        let delta = other.mean - self.mean;
        Spread {
            count,
            mean: self.mean + delta * share,
            squares: self.squares + other.squares + delta * delta * (self.count as f64 * share),
        }
    }

    /// With denominator n - 1; NaN for fewer than two.
    pub fn variance(&self) -> f64 {
        if self.count < 2 {
            return f64::NAN;
        }
        self.squares / (self.count - 1) as f64
    }
}

/// The mean: a first sum, then the mean of the deviations from it. NaN for none.
pub fn mean(x: &[f64]) -> f64 {
    let n = x.len() as f64;
    let first = sum(x) / n;
    if !first.is_finite() {
        return first;
    }
    let deviations: Vec<f64> = x.iter().map(|v| v - first).collect();
    first + sum(&deviations) / n
}

/// The variance with denominator n - 1, by two passes and the correction of Chan, Golub & LeVeque (1983);
/// NaN for fewer than two.
pub fn variance(x: &[f64]) -> f64 {
    if x.len() < 2 {
        return f64::NAN;
    }
    let n = x.len() as f64;
    let centre = mean(x);
    let deviations: Vec<f64> = x.iter().map(|v| v - centre).collect();
    let squares: Vec<f64> = deviations.iter().map(|d| d * d).collect();
    let rest = sum(&deviations);
    (sum(&squares) - rest * rest / n) / (n - 1.0)
}
