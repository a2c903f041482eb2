//! Small dense kernels of fixed order: Cholesky factor, triangular solves and products. Matrices are
//! row-major, n by n; a lower factor is read below and on its diagonal only.

/// Replaces the lower triangle of a symmetric matrix by its Cholesky factor L, A = L L^T; the upper triangle
/// becomes 0. False (and `a` half done) when a pivot is not positive and finite.
pub fn cholesky(a: &mut [f64], n: usize) -> bool {
    assert_eq!(a.len(), n * n, "a square matrix");
    for i in 0..n {
        for j in 0..=i {
            let mut rest = a[i * n + j];
            for k in 0..j {
                rest -= a[i * n + k] * a[j * n + k];
            }
            if i > j {
                a[i * n + j] = rest / a[j * n + j];
            } else {
                if !(rest > 0.0 && rest < f64::INFINITY) {
                    return false;
                }
                a[i * n + i] = rest.sqrt();
            }
        }
        a[i * n + i + 1..(i + 1) * n].fill(0.0);
    }
    true
}

/// Solves L x = b in place.
pub fn solve_lower(l: &[f64], n: usize, b: &mut [f64]) {
    for i in 0..n {
        let mut rest = b[i];
        for k in 0..i {
            rest -= l[i * n + k] * b[k];
        }
        b[i] = rest / l[i * n + i];
    }
}

/// Solves L^T x = b in place.
pub fn solve_lower_transposed(l: &[f64], n: usize, b: &mut [f64]) {
    for i in (0..n).rev() {
        b[i] /= l[i * n + i];
        for k in 0..i {
            b[k] -= l[i * n + k] * b[i];
        }
    }
}

/// out = L z.
pub fn multiply_lower(l: &[f64], n: usize, z: &[f64], out: &mut [f64]) {
    for i in 0..n {
        let mut total = 0.0;
        for k in 0..=i {
            total += l[i * n + k] * z[k];
        }
        out[i] = total;
    }
}

/// out = L^T z.
pub fn multiply_lower_transposed(l: &[f64], n: usize, z: &[f64], out: &mut [f64]) {
    out[..n].fill(0.0);
    for i in 0..n {
        for k in 0..=i {
            out[k] += l[i * n + k] * z[i];
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const L: [f64; 9] = [2.0, 0.0, 0.0, -1.0, 3.0, 0.0, 4.0, 0.5, 1.0];

    /// L L^T, exact in doubles.
    fn product() -> [f64; 9] {
        let mut a = [0.0; 9];
        for (i, j, k) in (0..27).map(|m| (m / 9, m / 3 % 3, m % 3)) {
            a[i * 3 + j] += L[i * 3 + k] * L[j * 3 + k];
        }
        a
    }

    #[test]
    fn factor_of_a_product() {
        let mut a = product();
        assert!(cholesky(&mut a, 3));
        assert_eq!(a, L);
    }

    #[test]
    fn no_factor_without_positive_pivots() {
        for bad in [0.0, -1.0, f64::NAN, f64::INFINITY] {
            let mut a = product();
            a[4] = bad;
            assert!(!cholesky(&mut a, 3), "{bad}");
        }
    }

    #[test]
    fn solves_undo_products() {
        let z = [1.0, -2.0, 5.0];
        let mut b = [0.0; 3];
        multiply_lower(&L, 3, &z, &mut b);
        assert_eq!(b, [2.0, -7.0, 8.0]);
        solve_lower(&L, 3, &mut b);
        assert_eq!(b, z);
        multiply_lower_transposed(&L, 3, &z, &mut b);
        assert_eq!(b, [24.0, -3.5, 5.0]);
        solve_lower_transposed(&L, 3, &mut b);
        assert_eq!(b, z);
    }
}
