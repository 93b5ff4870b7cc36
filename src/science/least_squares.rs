//! Small dense systems: least squares by Householder reflections, and symmetric positive definite solves.
//! Matrices are stored row by row.

/// A general least-squares fit.
#[derive(Clone, Debug, PartialEq)]
pub struct Fit {
    /// Estimated coefficients.
    pub coefficients: Vec<f64>,
    /// Their standard errors; none without residual degrees of freedom.
    pub standard_errors: Option<Vec<f64>>,
    /// Residual sum of squares.
    pub sse: f64,
    /// Residual degrees of freedom.
    pub df: usize,
}

/// Fits y on the columns of `rows` (n rows of `columns` numbers). `None` if the sizes do not fit, a number is
/// not finite, there are fewer rows than columns, or the columns depend on one another.
pub fn fit(rows: &[f64], columns: usize, y: &[f64]) -> Option<Fit> {
    let n = y.len();
    if columns == 0 || n < columns || rows.len() != n * columns {
        return None;
    }
    let mut a = rows.to_vec();
    let mut b = y.to_vec();
    // Columns are brought to unit length, so that "dependent" means the same for every unit.
    let lengths: Vec<f64> =
        (0..columns).map(|j| (0..n).map(|i| a[i * columns + j].powi(2)).sum::<f64>().sqrt()).collect();
    if lengths.iter().any(|length| !(length.is_finite() && *length > 0.0)) {
        return None;
    }
    for (i, value) in a.iter_mut().enumerate() {
        *value /= lengths[i % columns];
    }
    reduce(&mut a, columns, &mut b)?;
    let mut coefficients = back_substitute(&a, columns, &b);
    let sse: f64 = b[columns..].iter().map(|r| r * r).sum();
    let df = n - columns;
    let standard_errors = (df > 0).then(|| {
        let s = (sse / df as f64).sqrt();
        inverse_row_lengths(&a, columns).iter().zip(&lengths).map(|(r, length)| s * r / length).collect()
    });
    for (value, length) in coefficients.iter_mut().zip(&lengths) {
        *value /= length;
    }
    let finite = coefficients.iter().all(|value| value.is_finite()) && sse.is_finite();
    finite.then_some(Fit { coefficients, standard_errors, sse, df })
}

/// Turns a into its upper triangle in place and applies the same reflections to b.
fn reduce(a: &mut [f64], columns: usize, b: &mut [f64]) -> Option<()> {
    let n = b.len();
    let mut reflector = vec![0.0; n];
    for k in 0..columns {
        let length = (k..n).map(|i| a[i * columns + k].powi(2)).sum::<f64>().sqrt();
        if length < 1e-13 {
            return None;
        }
        let pivot = -length.copysign(a[k * columns + k]);
        for i in k..n {
            reflector[i] = a[i * columns + k];
        }
        reflector[k] -= pivot;
        let square: f64 = reflector[k..].iter().map(|v| v * v).sum();
        if square > 0.0 {
            for j in k..columns {
                let dot: f64 = (k..n).map(|i| reflector[i] * a[i * columns + j]).sum();
                for i in k..n {
                    a[i * columns + j] -= 2.0 * dot / square * reflector[i];
                }
            }
            let dot: f64 = (k..n).map(|i| reflector[i] * b[i]).sum();
            for i in k..n {
                b[i] -= 2.0 * dot / square * reflector[i];
            }
        }
    }
    Some(())
}

fn back_substitute(a: &[f64], columns: usize, b: &[f64]) -> Vec<f64> {
    let mut x = vec![0.0; columns];
    for i in (0..columns).rev() {
        let known: f64 = (i + 1..columns).map(|j| a[i * columns + j] * x[j]).sum();
        x[i] = (b[i] - known) / a[i * columns + i];
    }
    x
}

/// Lengths of the rows of R⁻¹: standard errors in units of s.
fn inverse_row_lengths(a: &[f64], columns: usize) -> Vec<f64> {
    let mut squares = vec![0.0; columns];
    for unit in 0..columns {
        let mut e = vec![0.0; columns];
        e[unit] = 1.0;
        for (square, value) in squares.iter_mut().zip(back_substitute(a, columns, &e)) {
            *square += value * value;
        }
    }
    squares.iter().map(|square| square.sqrt()).collect()
}

/// The Cholesky factor of a symmetric positive definite matrix.
#[derive(Clone, Debug)]
pub struct Cholesky {
    lower: Vec<f64>,
    size: usize,
}

impl Cholesky {
    /// `None` unless the matrix is positive definite.
    pub fn of(matrix: &[f64], size: usize) -> Option<Self> {
        let mut lower = matrix.to_vec();
        for j in 0..size {
            for i in j..size {
                let dot: f64 = (0..j).map(|k| lower[i * size + k] * lower[j * size + k]).sum();
                let rest = lower[i * size + j] - dot;
                if i == j {
                    if !(rest > 0.0 && rest.is_finite()) {
                        return None;
                    }
                    lower[j * size + j] = rest.sqrt();
                } else {
                    lower[i * size + j] = rest / lower[j * size + j];
                }
            }
        }
        Some(Self { lower, size })
    }

    /// Solves A x = b.
    pub fn solve(&self, b: &[f64]) -> Vec<f64> {
        let (l, n) = (&self.lower, self.size);
        let mut x = b.to_vec();
        for i in 0..n {
            let known: f64 = (0..i).map(|k| l[i * n + k] * x[k]).sum();
            x[i] = (x[i] - known) / l[i * n + i];
        }
        for i in (0..n).rev() {
            let known: f64 = (i + 1..n).map(|k| l[k * n + i] * x[k]).sum();
            x[i] = (x[i] - known) / l[i * n + i];
        }
        x
    }

    /// A⁻¹, row by row.
    pub fn inverse(&self) -> Vec<f64> {
        let n = self.size;
        let mut inverse = vec![0.0; n * n];
        for j in 0..n {
            let mut e = vec![0.0; n];
            e[j] = 1.0;
            for (i, value) in self.solve(&e).into_iter().enumerate() {
                inverse[i * n + j] = value;
            }
        }
        inverse
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn dependent_or_short_columns_are_refused() {
        assert_eq!(fit(&[1.0, 2.0, 2.0, 4.0, 3.0, 6.0], 2, &[1.0, 2.0, 3.0]), None);
        assert_eq!(fit(&[1.0, 2.0], 2, &[1.0]), None);
        assert!(Cholesky::of(&[1.0, 2.0, 2.0, 1.0], 2).is_none());
    }

    #[test]
    fn a_small_system() {
        let inverse = Cholesky::of(&[4.0, 2.0, 2.0, 3.0], 2).unwrap().inverse();
        for (got, want) in inverse.iter().zip([0.375, -0.25, -0.25, 0.5]) {
            assert!((got - want).abs() < 1e-15);
        }
    }
}
