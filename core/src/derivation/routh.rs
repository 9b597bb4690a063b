//! The Routh array of a polynomial in s whose coefficients are polynomials in the knob.
//!
//! E. J. Routh, A Treatise on the Stability of a Given State of Motion, Macmillan 1877; as in F. R. Gantmacher, The Theory
//! of Matrices, vol. 2, Chelsea 1959, chapter XV. Every element is a ratio of polynomials in the knob, kept exact. Special
//! cases: a row of zeros is replaced by the derivative of the auxiliary polynomial, the row above it; where only the first
//! element is zero the array ends, and that of (s + a)·F(s), which has the same unstable poles, is used instead (from
//! memory; common in textbooks).

use crate::exact::IntPoly;
use crate::exact::dyadic::sign_of;
use crate::exact::gcd::gcd;
use alloc::vec::Vec;
use core::ops::Range;
use dashu_int::IBig;
use dashu_int::ops::Gcd;

/// The numbers a tried in (s + a)·F(s). One of few is always enough in practice; where none is, the array stays without
/// an end, and says so.
const ADDED_POLES: Range<i64> = 1..9;

/// A row of the array.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Row {
    /// The power of s that the row begins with.
    pub power: usize,
    /// Numerators of the elements, polynomials in the knob.
    pub numerators: Vec<IntPoly>,
    /// The common denominator of the elements, not zero; its leading coefficient is positive.
    pub denominator: IntPoly,
    /// What is special about the row.
    pub special: Option<Special>,
}

/// A special case of the array.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Special {
    /// The row was zero; it was replaced by the derivative of the auxiliary polynomial, the row above.
    ZeroRow,
    /// The first element is zero and another one is not: the array ends here.
    ZeroFirstElement,
}

/// A Routh array.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Array {
    /// The added pole a, where the array is that of (s + a)·F(s).
    pub added_pole: Option<i64>,
    /// The rows, highest power first; of a polynomial of degree n there are n + 1 unless the first element of the last one
    /// is zero.
    pub rows: Vec<Row>,
}

/// Poles by half plane as the first column tells them.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Told {
    /// Changes of sign in the first column: poles right of the axis.
    pub changes: usize,
    /// Poles on the axis, from the auxiliary polynomial of the first zero row.
    pub on_axis: usize,
}

/// The arrays of a polynomial with coefficients lowest power first, the last of them not zero: its own one, and where that
/// ends early the one that is used instead.
pub fn arrays(coefficients: &[IntPoly]) -> Vec<Array> {
    let own = array(coefficients, None);
    let mut found: Vec<Array> = [own].into();
    if !found[0].is_complete() {
        found.extend(ADDED_POLES.map(|a| array(&with_pole(coefficients, a), Some(a))).find(Array::is_complete));
    }
    found
}

/// (s + a)·F(s).
fn with_pole(coefficients: &[IntPoly], a: i64) -> Vec<IntPoly> {
    let at = |i: Option<usize>| i.and_then(|i| coefficients.get(i)).cloned().unwrap_or_default();
    (0..=coefficients.len()).map(|i| at(i.checked_sub(1)).combined(&IBig::ONE, &at(Some(i)), &IBig::from(a))).collect()
}

fn array(coefficients: &[IntPoly], added_pole: Option<i64>) -> Array {
    let degree = coefficients.len().saturating_sub(1);
    let typed = |power: usize| Row {
        power,
        numerators: coefficients[..=power].iter().rev().step_by(2).cloned().collect(),
        denominator: IntPoly::from_i64(&[1]),
        special: None,
    };
    let mut rows: Vec<Row> = [typed(degree)].into();
    for power in (0..degree).rev() {
        let above = &rows[rows.len() - 1];
        let row = if power + 1 == degree { typed(power) } else { eliminated(&rows[rows.len() - 2], above) };
        let row = settled(row, above);
        let ends = row.special == Some(Special::ZeroFirstElement);
        rows.push(row);
        if ends {
            break;
        }
    }
    Array { added_pole, rows }
}

/// The row below two others: r_j = u_(j+1) − u_0·v_(j+1)/v_0.
fn eliminated(upper: &Row, above: &Row) -> Row {
    let power = above.power - 1;
    let element = |row: &Row, j: usize| row.numerators.get(j).cloned().unwrap_or_default();
    let numerators = (0..=power / 2)
        .map(|j| {
            let first = element(above, 0).times(&element(upper, j + 1));
            first.minus(&element(upper, 0).times(&element(above, j + 1)))
        })
        .collect();
    // u is over its own denominator, and v's one cancels in v_(j+1)/v_0.
    let denominator = upper.denominator.times(&above.numerators[0]);
    reduced(Row { power, numerators, denominator, special: None })
}

/// The row, replaced where it is zero, and marked where it begins with a zero.
fn settled(row: Row, above: &Row) -> Row {
    if row.numerators.iter().all(IntPoly::is_zero) {
        let derived = |(j, element): (usize, &IntPoly)| {
            let power = above.power - 2 * j;
            IntPoly::new(element.coefficients().iter().map(|c| c * IBig::from(power)).collect())
        };
        let numerators = above.numerators.iter().enumerate().take(row.power / 2 + 1).map(derived).collect();
        let denominator = above.denominator.clone();
        return Row { power: row.power, numerators, denominator, special: Some(Special::ZeroRow) };
    }
    let special = row.numerators[0].is_zero().then_some(Special::ZeroFirstElement);
    Row { special, ..row }
}

/// Over the common divisor of all numerators and the denominator.
fn reduced(mut row: Row) -> Row {
    let mut common = row.denominator.clone();
    for numerator in row.numerators.iter().filter(|numerator| !numerator.is_zero()) {
        common = gcd(&common, numerator);
    }
    let parts = || row.numerators.iter().chain([&row.denominator]);
    // A primitive common divisor divides each over the integers.
    let divided: Option<Vec<IntPoly>> = parts().map(|p| p.exactly_over(&common)).collect();
    let divided = divided.unwrap_or_else(|| parts().cloned().collect());
    let mut content = IBig::ZERO;
    for part in divided.iter().filter(|part| !part.is_zero()) {
        content = if content.is_zero() { part.content() } else { (&content).gcd(&part.content()).into() };
    }
    if divided.last().is_some_and(|denominator| denominator.leading_sign() < 0) {
        content = -content;
    }
    let over = |p: &IntPoly| IntPoly::new(p.coefficients().iter().map(|c| c / &content).collect());
    row.numerators = divided.iter().map(over).collect();
    row.denominator = row.numerators.pop().unwrap_or_default();
    row
}

impl Row {
    /// An element in lowest terms.
    pub fn element(&self, j: usize) -> (IntPoly, IntPoly) {
        let numerator = self.numerators.get(j).cloned().unwrap_or_default();
        if numerator.is_zero() {
            return (numerator, IntPoly::from_i64(&[1]));
        }
        let single = Self { numerators: [numerator].into(), ..self.clone() };
        let mut row = reduced(single);
        (row.numerators.pop().unwrap_or_default(), row.denominator)
    }

    /// The sign of the first element, where the array is one of numbers.
    fn sign(&self) -> i32 {
        sign_of(&self.numerators[0].leading()) * sign_of(&self.denominator.leading())
    }
}

impl Array {
    /// False where the array ends at a zero first element.
    pub fn is_complete(&self) -> bool {
        self.rows.last().is_some_and(|row| row.special != Some(Special::ZeroFirstElement))
    }

    /// What the first column tells, where the array is one of numbers and complete.
    pub fn told(&self) -> Option<Told> {
        let numbers = self.rows.iter().all(|row| row.numerators[0].degree() == 0 && row.denominator.degree() == 0);
        if !(numbers && self.is_complete()) {
            return None;
        }
        let signs: Vec<i32> = self.rows.iter().map(Row::sign).collect();
        let changes = |signs: &[i32]| signs.windows(2).filter(|pair| pair[0] * pair[1] < 0).count();
        // The auxiliary polynomial is even or odd: of its roots as many lie left of the axis as right.
        let zero_row = self.rows.iter().position(|row| row.special == Some(Special::ZeroRow));
        let on_axis = zero_row.map_or(0, |i| self.rows[i - 1].power - 2 * changes(&signs[i - 1..]));
        Some(Told { changes: changes(&signs), on_axis })
    }
}

/// What the array of a polynomial with integer coefficients tells; None where no array comes to its end.
pub fn told(p: &IntPoly) -> (Vec<Array>, Option<Told>) {
    let coefficients: Vec<IntPoly> = p.coefficients().iter().map(|c| IntPoly::new([c.clone()].into())).collect();
    let found = arrays(&coefficients);
    let told = found.last().and_then(Array::told);
    (found, told)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::exact::half_plane::count;
    use alloc::vec;
    use proptest::prelude::{prop, proptest};

    /// Highest power first, as the published arrays have them.
    fn falling(coefficients: &[i64]) -> IntPoly {
        let rising: Vec<i64> = coefficients.iter().rev().copied().collect();
        IntPoly::from_i64(&rising)
    }

    fn first_column(array: &Array) -> Vec<f64> {
        let value = |p: &IntPoly| p.leading().to_f64().value();
        array.rows.iter().map(|row| value(&row.numerators[0]) / value(&row.denominator)).collect()
    }

    #[test]
    fn a_zero_row_is_replaced_as_published() {
        // R08: K. Ogata, Modern Control Engineering, 5th ed., Prentice Hall 2010, Ex. 5-13 type (read second hand). The zero
        // row s^3 becomes 8, 96.
        let (found, told) = told(&falling(&[1, 2, 24, 48, -25, -50]));
        let column = first_column(&found[0]);
        let published = [1.0, 2.0, 8.0, 24.0, 112.7, -50.0];
        for (found, published) in column.iter().zip(published) {
            assert!((found - published).abs() < 0.05, "{column:?}");
        }
        assert_eq!(found[0].rows[2].numerators, [IntPoly::from_i64(&[8]), IntPoly::from_i64(&[96])]);
        assert_eq!(found[0].rows[2].special, Some(Special::ZeroRow));
        // R08b: roots −2, ±1, ±5j.
        assert_eq!(told, Some(Told { changes: 1, on_axis: 2 }));
    }

    #[test]
    fn a_plain_array_is_as_published() {
        // R14b: N. S. Nise, Control Systems Engineering, Wiley, 6th ed. 2011, Ex. 6.1 (from memory).
        let (found, told) = told(&falling(&[1, 10, 31, 1030]));
        let column: Vec<i64> = first_column(&found[0]).iter().map(|x| *x as i64).collect();
        assert_eq!(column, [1, 10, -72, 1030]);
        assert_eq!(told, Some(Told { changes: 2, on_axis: 0 }));
    }

    #[test]
    fn published_counts_come_out_of_the_array() {
        // R09, R14: Nise, Ex. 6.2 (zero first element; read second hand), 6.1. R10: Wikipedia, Routh-Hurwitz stability
        // criterion, worked example (read second hand). R11: A. Nagoor Kani, Control Systems, 3rd ed. 2015, Ex. 5.7 (read
        // second hand). R13: Nise, Ex. 6.5 (from memory). R15: R. C. Dorf, R. H. Bishop, Modern Control Systems, Pearson
        // (zero first element; from memory).
        let published: [(&[i64], usize, usize); 6] = [
            (&[1, 2, 3, 6, 5, 3], 2, 0),
            (&[1, 2, 8, 12, 20, 16, 16], 0, 4),
            (&[1, 4, 8, 8, 7, 4], 0, 2),
            (&[1, 1, 12, 22, 39, 59, 48, 38, 20], 2, 4),
            (&[1, 10, 31, 1030], 2, 0),
            (&[1, 2, 2, 4, 11, 10], 2, 0),
        ];
        for (coefficients, changes, on_axis) in published {
            let (_, told) = told(&falling(coefficients));
            assert_eq!(told, Some(Told { changes, on_axis }), "{coefficients:?}");
        }
    }

    #[test]
    fn a_zero_first_element_is_named_and_got_round() {
        // R09.
        let (found, _) = told(&falling(&[1, 2, 3, 6, 5, 3]));
        assert_eq!(found[0].rows.last().and_then(|row| row.special), Some(Special::ZeroFirstElement));
        assert_eq!((found.len(), found[1].added_pole), (2, Some(1)));
    }

    #[test]
    fn the_auxiliary_polynomial_is_as_published() {
        // R10: 2s^4 + 12s^2 + 16.
        let (found, _) = told(&falling(&[1, 2, 8, 12, 20, 16, 16]));
        let zero = found[0].rows.iter().position(|row| row.special == Some(Special::ZeroRow)).expect("a zero row");
        let above = &found[0].rows[zero - 1];
        assert_eq!((above.power, above.denominator.clone()), (4, IntPoly::from_i64(&[1])));
        assert_eq!(above.numerators, [2, 12, 16].map(|c| IntPoly::from_i64(&[c])));
    }

    #[test]
    fn the_last_determinant_but_one_is_orlandos() {
        // R18: L. Orlando, Math. Ann. 71, 1911 (formula; from memory): the Hurwitz determinant D3 of this polynomial is 4420;
        // the product of the first column's second to fourth element is D3.
        let (found, _) = told(&falling(&[1, 7, 24, 58, 40]));
        let product: f64 = first_column(&found[0])[1..4].iter().product();
        assert!((product - 4420.0).abs() < 1e-9, "{product}");
    }

    #[test]
    fn the_knob_stands_in_the_elements() {
        // W01: s³ + 18 s² + 77 s + K: row s^1 is (1386 − K)/18.
        let q = IntPoly::from_i64(&[0, 1]);
        let rows = vec![q, IntPoly::from_i64(&[77]), IntPoly::from_i64(&[18]), IntPoly::from_i64(&[1])];
        let found = arrays(&rows);
        assert_eq!(found[0].rows[2].element(0), (IntPoly::from_i64(&[1386, -1]), IntPoly::from_i64(&[18])));
        assert_eq!(found[0].rows[3].element(0), (IntPoly::from_i64(&[0, 1]), IntPoly::from_i64(&[1])));
    }

    proptest! {
        #[test]
        fn counts_agree_with_the_exact_ones(mut coefficients in prop::collection::vec(-4_i64..5, 2..9)) {
            // Small coefficients make special cases frequent.
            if coefficients[0] == 0 {
                coefficients[0] = 1;
            }
            let p = falling(&coefficients);
            let exact = count(&p).expect("counted");
            if let (_, Some(told)) = told(&p) {
                assert_eq!((told.changes, told.on_axis), (exact.right, exact.axis), "{coefficients:?}");
            }
        }
    }
}
