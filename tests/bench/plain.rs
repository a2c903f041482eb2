//! The plain loops: random-walk Metropolis as one writes it by hand for one task, draws kept in memory.

#![expect(
    clippy::disallowed_methods,
    reason = "the plain loop uses std's functions: that is what it is compared for"
)]

use crate::generator::Generator;

/// A walk with independent normal steps of one scale; `density` gives the log density. Returns the draws,
/// one after another.
fn walk<const D: usize>(
    generator: &mut Generator,
    start: [f64; D],
    scale: f64,
    steps: usize,
    mut density: impl FnMut(&[f64; D]) -> f64,
) -> Vec<f64> {
    let mut draws = Vec::with_capacity(steps * D);
    let mut x = start;
    let mut current = density(&x);
    for _ in 0..steps {
        let mut y = x;
        for coordinate in &mut y {
            *coordinate += scale * generator.normal();
        }
        let proposed = density(&y);
        if proposed >= current || generator.unit() < (proposed - current).exp() {
            x = y;
            current = proposed;
        }
        draws.extend_from_slice(&x);
    }
    draws
}

/// The banana of Haario, Saksman & Tamminen (1999) with b = 0.03.
pub fn banana(generator: &mut Generator, steps: usize) -> Vec<f64> {
    walk(generator, [0.0, 0.0], 3.0, steps, |x| {
        let bent = x[1] - 0.03 * (100.0 - x[0] * x[0]);
        -x[0] * x[0] / 200.0 - 0.5 * bent * bent
    })
}

/// A normal law in ten dimensions with this precision matrix, row by row.
pub fn normal(generator: &mut Generator, precision: &[[f64; 10]; 10], steps: usize) -> Vec<f64> {
    walk(generator, [0.0; 10], 0.6, steps, |x| {
        let mut form = 0.0;
        for (row, xi) in precision.iter().zip(x) {
            let mut product = 0.0;
            for (p, xj) in row.iter().zip(x) {
                product += p * xj;
            }
            form += xi * product;
        }
        -0.5 * form
    })
}

/// Logistic regression on rows of 25 columns, coefficients normal(0, 2.5).
pub fn logistic(
    generator: &mut Generator,
    rows: &[[f64; 25]],
    answers: &[f64],
    steps: usize,
) -> Vec<f64> {
    walk(generator, [0.0; 25], 0.03, steps, |beta| {
        let mut log_density = 0.0;
        for b in beta {
            log_density -= 0.5 * (b / 2.5) * (b / 2.5);
        }
        for (row, y) in rows.iter().zip(answers) {
            let mut odds = 0.0;
            for (x, b) in row.iter().zip(beta) {
                odds += x * b;
            }
            // ln(1 + e^odds) without overflow.
            let soft = if odds > 0.0 {
                odds + (-odds).exp().ln_1p()
            } else {
                odds.exp().ln_1p()
            };
            log_density += y * odds - soft;
        }
        log_density
    })
}
