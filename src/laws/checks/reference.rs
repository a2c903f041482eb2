//! Against values computed outside at 60 digits; the file says how.

use crate::laws::find;
use crate::maths;

const REFERENCE: &str = include_str!("../../../tests/reference/laws.csv");

/// Largest error allowed: of a log density or log probability against 1 plus its size, of a probability
/// against itself.
const LOG: f64 = 2e-13;
const PLAIN: f64 = 1e-11;

#[test]
fn laws_agree_with_outside_values() {
    let mut faults = Vec::new();
    let mut rows = 0;
    for line in REFERENCE
        .lines()
        .skip_while(|line| line.starts_with('#'))
        .skip(1)
    {
        rows += 1;
        let cells: Vec<&str> = line.split(',').collect();
        let numbers = |cell: &str| -> Vec<f64> {
            cell.split(' ')
                .map(|n| n.parse().expect("a number"))
                .collect()
        };
        let names: Vec<&str> = cells[1].split(' ').collect();
        let law = find(cells[0], &names).expect("in the table");
        let p = numbers(cells[2]);
        let at = law.at(&p);
        let x = numbers(cells[3])[0];
        let [density, below, above] = [4, 5, 6].map(|column| numbers(cells[column])[0]);
        let logs = [
            ("log density", Some(at.log_density(x)), density),
            ("ln distribution", at.ln_distribution(x), below),
            ("ln survival", at.ln_survival(x), above),
        ];
        for (what, found, expected) in logs {
            let found = found.expect("a proper law");
            // Of counts the terms that cancel grow with the count.
            let size = 1.0 + expected.abs() + if law.support().integer { 1e-3 * x } else { 0.0 };
            let error = (found - expected).abs() / size;
            if !(error <= LOG || found == expected) {
                faults.push(format!(
                    "{line}\n    {what} {found:e}, expected {expected:e}: {error:.1e}"
                ));
            }
        }
        let plain = [
            ("distribution", at.distribution(x), below),
            ("survival", at.survival(x), above),
        ];
        for (what, found, ln) in plain {
            let (found, expected) = (found.expect("a proper law"), maths::exp(ln));
            let error = (found - expected).abs() / expected;
            if !(error <= PLAIN || expected < 1e-300 && found < 1e-299) {
                faults.push(format!(
                    "{line}\n    {what} {found:e}, expected {expected:e}: {error:.1e}"
                ));
            }
        }
    }
    assert!(rows > 800);
    assert!(
        faults.is_empty(),
        "{} faults\n{}",
        faults.len(),
        faults.join("\n")
    );
}
