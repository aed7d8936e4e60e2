//! Singular values and right singular vectors of a matrix with widely spread rows and columns, each to high
//! RELATIVE accuracy.
//!
//! A QR factorisation with column pivoting and row exchanges (row-wise stable: Cox and Higham 1998) gives a
//! triangle whose rows fall in size; one-sided Jacobi rotations on its transpose then find every singular value to
//! a relative accuracy that the spread of the scales does not spoil (Demmel and Veselic 1992; Drmac and Veselic
//! 2008). A symmetric eigensolver on B^T B would lose the small rates in the rounding of the large ones.

use super::CircuitError;

/// A dense matrix, rows one after the other.
#[derive(Debug, Clone)]
pub(super) struct Matrix {
    pub rows: usize,
    pub columns: usize,
    data: Vec<f64>,
}

impl Matrix {
    pub fn zeros(rows: usize, columns: usize) -> Self {
        Matrix { rows, columns, data: vec![0.0; rows * columns] }
    }

    pub fn row(&self, i: usize) -> &[f64] {
        &self.data[i * self.columns..(i + 1) * self.columns]
    }

    pub fn row_mut(&mut self, i: usize) -> &mut [f64] {
        &mut self.data[i * self.columns..(i + 1) * self.columns]
    }

    fn swap_rows(&mut self, i: usize, j: usize) {
        if i != j {
            let (low, high) = (i.min(j), i.max(j));
            let (head, tail) = self.data.split_at_mut(high * self.columns);
            head[low * self.columns..(low + 1) * self.columns].swap_with_slice(&mut tail[..self.columns]);
        }
    }
}

/// A singular value and its right singular vector.
#[derive(Debug, Clone)]
pub(super) struct Singular {
    pub value: f64,
    pub vector: Vec<f64>,
}

/// The `rank` largest singular values of `matrix` with their right singular vectors, the smallest first. `rank`
/// is known from the structure of the network; what is beyond it is exactly zero and never looked at.
pub(super) fn singular(matrix: Matrix, rank: usize) -> Result<Vec<Singular>, CircuitError> {
    let mut columns = triangle_rows(matrix, rank);
    orthogonalise(&mut columns)?;
    let mut found: Vec<Singular> = columns
        .into_iter()
        .map(|mut vector| {
            let value = norm(&vector);
            vector.iter_mut().for_each(|x| *x /= value);
            Singular { value, vector }
        })
        .collect();
    found.sort_by(|a, b| a.value.total_cmp(&b.value));
    Ok(found)
}

/// The first `rank` rows of the triangular factor of a pivoted QR factorisation, in the original order of columns.
fn triangle_rows(mut a: Matrix, rank: usize) -> Vec<Vec<f64>> {
    let (m, n) = (a.rows, a.columns);
    let mut order: Vec<usize> = (0..n).collect();
    let mut rows = Vec::with_capacity(rank);
    for k in 0..rank.min(m) {
        let norms: Vec<f64> = order[k..].iter().map(|j| (k..m).map(|i| a.row(i)[*j].powi(2)).sum()).collect();
        let pivot = (0..norms.len()).max_by(|x, y| norms[*x].total_cmp(&norms[*y])).unwrap_or(0);
        order.swap(k, k + pivot);
        let column = order[k];
        let top = (k..m).max_by(|x, y| a.row(*x)[column].abs().total_cmp(&a.row(*y)[column].abs())).unwrap_or(k);
        a.swap_rows(k, top);
        reflect(&mut a, k, &order);
        let mut row = vec![0.0; n];
        for j in &order[k..] {
            row[*j] = a.row(k)[*j];
        }
        rows.push(row);
    }
    rows
}

/// Householder reflection that clears column `order[k]` below row `k`.
fn reflect(a: &mut Matrix, k: usize, order: &[usize]) {
    let column = order[k];
    let mut v: Vec<f64> = (k..a.rows).map(|i| a.row(i)[column]).collect();
    let length = norm(&v);
    if length == 0.0 {
        return;
    }
    let alpha = if v[0] > 0.0 { -length } else { length };
    v[0] -= alpha;
    // v^T v = 2 length (length + |v0|), free of cancellation because v0 and alpha have opposite signs.
    let beta = (length * v[0].abs()).recip();
    for j in &order[k + 1..] {
        let dot: f64 = v.iter().enumerate().map(|(i, x)| x * a.row(k + i)[*j]).sum();
        let factor = beta * dot;
        for (i, x) in v.iter().enumerate() {
            a.row_mut(k + i)[*j] -= factor * x;
        }
    }
    a.row_mut(k)[column] = alpha;
    for i in k + 1..a.rows {
        a.row_mut(i)[column] = 0.0;
    }
}

/// Rotates pairs of vectors until all are orthogonal to rounding.
fn orthogonalise(vectors: &mut [Vec<f64>]) -> Result<(), CircuitError> {
    const MOST_SWEEPS: usize = 100;
    let count = vectors.len();
    let strict = f64::EPSILON * vectors.first().map_or(1.0, |v| (v.len() as f64).sqrt());
    for sweep in 0..MOST_SWEEPS {
        // Equal columns can go on turning in the rounding of their dot products: a few roundings more are let pass
        // then, but not before, since stiff networks need the last digits.
        let tolerance = if sweep < 20 { strict } else { 8.0 * strict };
        let mut rotated = false;
        for p in 0..count {
            for q in p + 1..count {
                let (head, tail) = vectors.split_at_mut(q);
                rotated |= rotate(&mut head[p], &mut tail[0], tolerance);
            }
        }
        if !rotated {
            return Ok(());
        }
    }
    Err(CircuitError::RatesNotFound)
}

/// One rotation that makes `x` and `y` orthogonal, the longer one first; false where they were already.
fn rotate(x: &mut Vec<f64>, y: &mut Vec<f64>, tolerance: f64) -> bool {
    let (mut xx, mut yy, mut xy) = (0.0, 0.0, 0.0);
    for (a, b) in x.iter().zip(y.iter()) {
        xx += a * a;
        yy += b * b;
        xy += a * b;
    }
    if yy > xx {
        std::mem::swap(x, y);
        std::mem::swap(&mut xx, &mut yy);
    }
    if xy == 0.0 || xy.abs() <= tolerance * xx.sqrt() * yy.sqrt() {
        return false;
    }
    let zeta = (yy - xx) / (2.0 * xy);
    let tangent = zeta.signum() / (zeta.abs() + zeta.hypot(1.0));
    let cosine = tangent.hypot(1.0).recip();
    let sine = cosine * tangent;
    for (a, b) in x.iter_mut().zip(y.iter_mut()) {
        (*a, *b) = (cosine * *a - sine * *b, sine * *a + cosine * *b);
    }
    true
}

fn norm(vector: &[f64]) -> f64 {
    vector.iter().map(|x| x * x).sum::<f64>().sqrt()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_graded_matrix_keeps_its_small_singular_values() {
        // diag(1e6, 1, 1e-6) times a matrix of small integers times diag(1, 1e-4, 1e-8). For this grading the
        // singular values are those of the leading minors' quotients to about 1e-8; the product of all three is
        // the determinant, exact: det = 1 * 1e-12 * det(K), det(K) = 4.
        let k = [[2.0, 1.0, 1.0], [1.0, 2.0, 1.0], [1.0, 1.0, 2.0]];
        let (d, e) = ([1e6, 1.0, 1e-6], [1.0, 1e-4, 1e-8]);
        let rows: Vec<Vec<f64>> = (0..3).map(|i| (0..3).map(|j| d[i] * k[i][j] * e[j]).collect()).collect();
        let mut matrix = Matrix::zeros(3, 3);
        rows.iter().enumerate().for_each(|(i, row)| matrix.row_mut(i).copy_from_slice(row));
        let found = singular(matrix, 3).expect("converges");
        let product: f64 = found.iter().map(|s| s.value).product();
        approx::assert_relative_eq!(product, 4e-12, max_relative = 1e-14);
        approx::assert_relative_eq!(found[2].value, 2e6, max_relative = 1e-6);
        approx::assert_relative_eq!(found[0].value, 4.0 / 3.0 * 1e-14, max_relative = 1e-6);
    }
}
