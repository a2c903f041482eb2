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
