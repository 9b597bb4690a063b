//! Matrices in fixed point with one common error radius, and their exponential.
//!
//! An entry is (integer ± radius)·2^−bits. The exponential is Taylor's series after scaling, then squaring (C. Moler, C.
//! Van Loan, "Nineteen dubious ways to compute the exponential of a matrix, twenty-five years later", SIAM Review 45,
//! 2003, method 3); every rounding and the rest of the series go into the radius.

use crate::exact::Dyadic;
use alloc::vec;
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_int::ops::{Abs, BitTest};
use dashu_ratio::RBig;

/// The norm to which the argument is scaled before the series: 2^−this. Larger saves terms (cheap, the matrices are
/// sparse) and costs squarings.
const SCALED_NORM_BITS: i64 = 1;

/// A matrix with enclosed entries.
#[derive(Clone, Debug)]
pub struct Matrix {
    /// The number of rows.
    pub rows: usize,
    /// The number of columns.
    pub columns: usize,
    /// Row by row, in units of 2^−bits.
    pub entries: Vec<IBig>,
    /// The largest error of an entry, in the same units.
    pub radius: IBig,
    /// The position of the binary point.
    pub bits: usize,
}

impl Matrix {
    /// From rationals, row by row.
    pub fn from_rationals(columns: usize, entries: &[RBig], bits: usize) -> Self {
        let exact = entries.iter().all(RBig::is_zero);
        Self {
            rows: entries.len() / columns.max(1),
            columns,
            entries: entries.iter().map(|e| fixed(e, bits)).collect(),
            radius: if exact { IBig::ZERO } else { IBig::ONE },
            bits,
        }
    }

    /// The unit matrix.
    pub fn unit(order: usize, bits: usize) -> Self {
        let mut entries = vec![IBig::ZERO; order * order];
        for i in 0..order {
            entries[i * order + i] = IBig::ONE << bits;
        }
        Self { rows: order, columns: order, entries, radius: IBig::ZERO, bits }
    }

    /// The entry in a row and a column.
    pub fn at(&self, row: usize, column: usize) -> &IBig {
        &self.entries[row * self.columns + column]
    }

    /// The entries rounded to f64.
    pub fn to_f64(&self) -> Vec<f64> {
        self.entries.iter().map(|e| Dyadic::new(e.clone(), -(self.bits as i64)).to_f64()).collect()
    }

    /// Some rows and columns of it.
    pub fn block(&self, rows: core::ops::Range<usize>, columns: core::ops::Range<usize>) -> Self {
        let entries =
            rows.clone().flat_map(|i| columns.clone().map(move |j| (i, j))).map(|(i, j)| self.at(i, j).clone());
        let (rows, columns, entries) = (rows.len(), columns.len(), entries.collect());
        Self { rows, columns, entries, radius: self.radius.clone(), bits: self.bits }
    }

    /// Product.
    pub fn times(&self, other: &Self) -> Self {
        let mut entries = vec![IBig::ZERO; self.rows * other.columns];
        for i in 0..self.rows {
            for k in 0..self.columns {
                let a = self.at(i, k);
                if a.is_zero() {
                    continue;
                }
                for j in 0..other.columns {
                    let b = other.at(k, j);
                    if !b.is_zero() {
                        entries[i * other.columns + j] += a * b;
                    }
                }
            }
        }
        for entry in &mut entries {
            *entry >>= self.bits;
        }
        // |Σ a_ik·b_kj| errs by at most ‖row‖₁·r_b + ‖column‖₁·r_a + n·r_a·r_b, and by one for the rounding.
        let error = self.largest_row_sum() * &other.radius
            + other.largest_column_sum() * &self.radius
            + &self.radius * &other.radius * self.columns;
        let radius = (error >> self.bits) + 2;
        Self { rows: self.rows, columns: other.columns, entries, radius, bits: self.bits }
    }

    /// Sum of two of the same shape.
    pub fn plus(&self, other: &Self) -> Self {
        let entries = self.entries.iter().zip(&other.entries).map(|(a, b)| a + b).collect();
        Self { entries, radius: &self.radius + &other.radius, ..*self }
    }

    /// Difference of two of the same shape.
    pub fn minus(&self, other: &Self) -> Self {
        let entries = self.entries.iter().zip(&other.entries).map(|(a, b)| a - b).collect();
        Self { entries, radius: &self.radius + &other.radius, ..*self }
    }

    /// The matrix over a positive integer.
    fn over(mut self, divisor: usize) -> Self {
        for entry in &mut self.entries {
            *entry /= divisor;
        }
        self.radius = self.radius / divisor + 2;
        self
    }

    fn largest_row_sum(&self) -> IBig {
        let sum = |i: usize| (0..self.columns).map(|j| self.at(i, j).abs()).sum::<IBig>();
        (0..self.rows).map(sum).max().unwrap_or(IBig::ZERO)
    }

    fn largest_column_sum(&self) -> IBig {
        let sum = |j: usize| (0..self.rows).map(|i| self.at(i, j).abs()).sum::<IBig>();
        (0..self.columns).map(sum).max().unwrap_or(IBig::ZERO)
    }

    /// e^M of a square matrix.
    pub fn exponential(&self) -> Self {
        // ‖M‖ < 2^norm_bits, errors included.
        let norm = self.largest_row_sum() + &self.radius * self.columns;
        let norm_bits = norm.bit_len() as i64 - self.bits as i64;
        let squarings = (norm_bits + SCALED_NORM_BITS).max(0) as usize;
        let mut scaled = self.clone();
        for entry in &mut scaled.entries {
            *entry >>= squarings;
        }
        scaled.radius = (&scaled.radius >> squarings) + if squarings > 0 { 1 } else { 0 };
        let mut power = series(&scaled);
        for _ in 0..squarings {
            power = power.times(&power);
        }
        power
    }
}

/// Taylor's series of e^M for ‖M‖ ≤ 1/2.
fn series(m: &Matrix) -> Matrix {
    let mut term = Matrix::unit(m.rows, m.bits);
    let mut sum = term.clone();
    // The k-th term is below 2^−k/k!; this many make it smaller than one unit.
    let mut size_bits = 0.0;
    for k in 1..=m.bits + 1 {
        term = m.times(&term).over(k);
        sum = sum.plus(&term);
        size_bits += 1.0 + libm::log2(k as f64);
        if size_bits > m.bits as f64 + 2.0 {
            break;
        }
    }
    // All later terms together are below the last one.
    sum.radius += 1;
    sum
}

/// The coefficients of det(zI − Φ), lowest power first and without the leading 1, with Σ_k z^(n−k)·M_k = adj(zI − Φ).
pub struct Resolvent {
    /// Coefficients of z^0 … z^(n−1), in units of 2^−bits.
    pub coefficients: Vec<IBig>,
    /// The errors of these.
    pub radii: Vec<IBig>,
    /// M_1 … M_n.
    pub adjugate: Vec<Matrix>,
}

/// The method of Faddeev and LeVerrier (F. R. Gantmacher, The Theory of Matrices, vol. 1, Chelsea 1959, chapter IV,
/// section 5).
pub fn resolvent(phi: &Matrix) -> Resolvent {
    let order = phi.rows;
    let mut coefficients = vec![IBig::ZERO; order];
    let mut radii = vec![IBig::ZERO; order];
    let mut adjugate: Vec<Matrix> = Vec::with_capacity(order);
    let mut m = Matrix::unit(order, phi.bits);
    for k in 1..=order {
        let product = phi.times(&m);
        let trace: IBig = (0..order).map(|i| product.at(i, i).clone()).sum();
        let coefficient = -trace / k;
        let radius = &product.radius * order / k + 2;
        adjugate.push(m);
        m = product;
        for i in 0..order {
            m.entries[i * order + i] += &coefficient;
        }
        m.radius += &radius;
        coefficients[order - k] = coefficient;
        radii[order - k] = radius;
    }
    Resolvent { coefficients, radii, adjugate }
}

/// The rational rounded down to a multiple of 2^−bits.
pub fn fixed(value: &RBig, bits: usize) -> IBig {
    (RBig::from(IBig::ONE << bits) * value).floor()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn rational(n: i64, d: u64) -> RBig {
        RBig::from_parts(n.into(), d.into())
    }

    fn value(m: &Matrix, i: usize, j: usize) -> f64 {
        Dyadic::new(m.at(i, j).clone(), -(m.bits as i64)).to_f64()
    }

    #[test]
    fn the_exponential_of_a_turn_is_cosine_and_sine() {
        let angle = rational(22, 7);
        let turn =
            Matrix::from_rationals(2, &[RBig::ZERO, -angle.clone(), angle.clone(), RBig::ZERO], 128).exponential();
        let x = 22.0 / 7.0;
        assert!((value(&turn, 0, 0) - libm::cos(x)).abs() < 1e-15);
        assert!((value(&turn, 1, 0) - libm::sin(x)).abs() < 1e-15);
        assert!(turn.radius.bit_len() < 16, "{}", turn.radius);
    }

    #[test]
    fn the_radius_holds_what_more_digits_show() {
        // A stiff and an unstable mode, coupled.
        let entries = [rational(-900, 7), rational(31, 3), rational(5, 11), rational(17, 9)];
        for bits in [96, 160] {
            let rough = Matrix::from_rationals(2, &entries, bits).exponential();
            let fine = Matrix::from_rationals(2, &entries, bits + 200).exponential();
            for (a, b) in rough.entries.iter().zip(&fine.entries) {
                let off = (a << 200) - b;
                assert!(off.clone().abs() <= ((&rough.radius << 200) + &fine.radius), "{bits}: {off}");
            }
            assert!(rough.radius.bit_len() < 60, "{}", rough.radius.bit_len());
        }
    }

    #[test]
    fn the_characteristic_polynomial_of_a_known_matrix() {
        // Eigenvalues 2 and 3, and 5.
        let entries = [2, 1, 4, 0, 3, 7, 0, 0, 5].map(|k| rational(k, 1));
        let found = resolvent(&Matrix::from_rationals(3, &entries, 64));
        let rounded: Vec<i64> =
            found.coefficients.iter().map(|c| libm::round(Dyadic::new(c.clone(), -64).to_f64()) as i64).collect();
        assert_eq!(rounded, [-30, 31, -10]);
    }
}
