//! The plant as the sampled controller sees it: behind a zero-order hold, with any dead time, exactly.
//!
//! Between two samples the hold's output is constant, so that the state moves by the exponential of the augmented system
//! matrix (K. J. Åström, B. Wittenmark, Computer-Controlled Systems, Prentice Hall, chapter on sampling of systems). With
//! the whole delay d·h + ε, 0 ≤ ε < h, the older of two values acts for ε and the newer for h − ε of each period:
//! x⁺ = Φ x + (Γ(h) − Γ(h − ε)) u₋ + Γ(h − ε) u, Γ(t) the integral of e^(As)·b. The poles are never computed; every
//! number carries a bound of its error.

use super::enclosed::{Enclosed, Unit};
use super::factored::Factored;
use super::fixed::{Matrix, Resolvent, fixed, resolvent};
use super::ranges::zones;
use crate::exact::gcd::{squarefree_factors, squarefree_part};
use crate::exact::half_plane::count;
use crate::exact::{Dyadic, IntPoly};
use alloc::vec;
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_int::ops::BitTest;
use dashu_ratio::RBig;

/// Rounds of balancing; each is cheap, and few change anything after the third.
const BALANCING_ROUNDS: usize = 8;

/// A continuous system with one input, in balanced companion form.
#[derive(Clone, Debug)]
pub struct Companion {
    /// The denominator.
    below: IntPoly,
    /// The scale of each state, and of the input in front, as powers of two.
    scales: Vec<i64>,
    input_scale: i64,
}

/// The sampled transfer function above/below.
#[derive(Clone, Debug)]
pub struct Held {
    /// The numerator.
    pub above: Factored,
    /// The denominator.
    pub below: Factored,
}

impl Companion {
    /// Of a denominator of degree 1 or more; `period` sets the unit of time.
    pub fn new(below: &IntPoly, period: &RBig) -> Self {
        let order = below.degree();
        let unit = -log2(period);
        // The state derivatives grow by one unit of time each; the last one has scale 0.
        let mut scales: Vec<i64> = (0..order).map(|i| (i as i64 + 1 - order as i64) * unit).collect();
        for _ in 0..BALANCING_ROUNDS {
            balance(below, &mut scales);
        }
        Self { below: below.clone(), scales, input_scale: unit }
    }

    /// The number of states.
    pub fn order(&self) -> usize {
        self.below.degree()
    }

    /// The matrix of the balanced states and the constant input, times t: `order` + 1 rows.
    fn augmented(&self, t: &RBig) -> Vec<RBig> {
        let order = self.order();
        let size = order + 1;
        let mut entries = vec![RBig::ZERO; size * size];
        for i in 0..order - 1 {
            entries[i * size + i + 1] = power_of_two(self.scales[i + 1] - self.scales[i]) * t;
        }
        let last = self.scales[order - 1];
        let leading = RBig::from(self.below.leading());
        for (i, c) in self.below.coefficients().iter().take(order).enumerate() {
            entries[(order - 1) * size + i] =
                -RBig::from(c.clone()) / &leading * power_of_two(self.scales[i] - last) * t;
        }
        entries[(order - 1) * size + order] = power_of_two(self.input_scale) * t;
        entries
    }

    /// e^(At) and Γ(t) for the balanced states.
    pub fn transition(&self, t: &RBig, bits: usize) -> (Matrix, Matrix) {
        let order = self.order();
        let both = Matrix::from_rationals(order + 1, &self.augmented(t), bits).exponential();
        (both.block(0..order, 0..order), both.block(0..order, order..order + 1))
    }

    /// The row that reads y from the balanced states where y = Σ above_i·(d/dt)^i of 1/below·u, times 2^−exponent, and
    /// that exponent.
    pub fn output(&self, above: &[RBig], bits: usize) -> (Matrix, i64) {
        let order = self.order();
        let leading = RBig::from(self.below.leading());
        // y = Σ c_i/a_n·2^(scale_i)·ξ_i, and one unit of the balanced input is 2^(last + input) units of u.
        let entries: Vec<RBig> = above.iter().map(|c| c / &leading).collect();
        let sizes = entries.iter().zip(&self.scales).filter(|(c, _)| !c.is_zero());
        let top = sizes.map(|(c, scale)| log2(c) + scale).max().unwrap_or(0);
        let row: Vec<RBig> =
            entries.into_iter().zip(&self.scales).map(|(c, scale)| c * power_of_two(scale - top)).collect();
        (Matrix::from_rationals(order, &row, bits), top - self.scales[order - 1] - self.input_scale)
    }

    /// The row of [`Self::output`] in f64.
    pub fn output_f64(&self, above: &[RBig], bits: usize) -> Vec<f64> {
        let (row, exponent) = self.output(above, bits);
        row.entries.iter().map(|e| Dyadic::new(e.clone(), exponent - bits as i64).to_f64()).collect()
    }

    /// The derivative of a signal read by a row, as a row and what the input adds to it.
    pub fn derivative(&self, row: &[f64]) -> (Vec<f64>, f64) {
        let order = self.order();
        let matrix: Vec<f64> = self.augmented(&RBig::ONE).iter().map(|e| e.to_f64().value()).collect();
        let column = |j: usize| (0..order).map(|i| row[i] * matrix[i * (order + 1) + j]).sum::<f64>();
        ((0..order).map(column).collect(), column(order))
    }
}

/// 2^exponent.
fn power_of_two(exponent: i64) -> RBig {
    let power = RBig::from(IBig::ONE << (exponent.unsigned_abs() as usize));
    if exponent >= 0 { power } else { RBig::ONE / power }
}

/// About log2 of the size of a rational other than zero.
fn log2(value: &RBig) -> i64 {
    value.numerator().bit_len() as i64 - value.denominator().bit_len() as i64
}

/// One round of balancing rows against columns by powers of two (E. E. Osborne, "On pre-conditioning of matrices",
/// Journal of the ACM 7, 1960), with the largest entry as the norm.
fn balance(below: &IntPoly, scales: &mut [i64]) {
    let order = scales.len();
    let leading = below.leading().bit_len() as i64;
    let entry = |i: usize, j: usize, scales: &[i64]| -> Option<i64> {
        let size = if i + 1 < order {
            (j == i + 1).then_some(0)
        } else {
            let c = below.coefficient(j);
            (!c.is_zero()).then(|| c.bit_len() as i64 - leading)
        };
        size.map(|s| s + scales[j] - scales[i])
    };
    for i in 0..order {
        let others = || (0..order).filter(move |j| *j != i);
        let row = others().filter_map(|j| entry(i, j, scales)).max();
        let column = others().filter_map(|j| entry(j, i, scales)).max();
        if let (Some(row), Some(column)) = (row, column) {
            scales[i] += (row - column) / 2;
        }
    }
}

/// The sampled transfer function of above/below, no common factor, behind a hold and a delay, seen every `period`.
/// The numerator's degree is at most the denominator's.
pub fn hold(above: &IntPoly, below: &IntPoly, period: &RBig, delay: &RBig, bits: usize) -> Held {
    let whole = (delay / period).floor();
    let fraction = delay - RBig::from(whole.clone()) * period;
    let whole = usize::try_from(&whole).unwrap_or(usize::MAX / 2);
    let late = !fraction.is_zero();
    if below.degree() == 0 {
        return static_gain(above, below, whole + usize::from(late));
    }
    let system = Companion::new(below, period);
    let (phi, gamma) = system.transition(period, bits);
    let found = resolvent(&phi);
    let characteristic = characteristic(&found, bits);
    let (direct, remainder) = direct_part(above, below);
    let (row, exponent) = system.output(&remainder, bits);
    let read = |gamma: &Matrix| numerator(&row, &found.adjugate, gamma, exponent);
    let direct = characteristic.times(&Enclosed {
        center: IntPoly::new([fixed(&direct, bits)].into()),
        radius: IntPoly::from_i64(&[i64::from(!direct.is_zero())]),
        exponent: -(bits as i64),
    });
    let sum = if late {
        let (_, newer) = system.transition(&(period - &fraction), bits);
        let older = gamma.minus(&newer);
        read(&newer).times_exact(&IntPoly::from_i64(&[0, 1])).plus(&read(&older))
    } else {
        read(&gamma)
    };
    Held {
        above: known_zeros(sum.plus(&direct), above, below, &(&fraction / period)),
        below: known_poles(characteristic, below, period, whole + usize::from(late)),
    }
}

/// A plant without dynamics: a number, and delay.
fn static_gain(above: &IntPoly, below: &IntPoly, delay: usize) -> Held {
    let constant = |p: &IntPoly| Factored::plain(Enclosed::exact(IntPoly::new([p.coefficient(0)].into())));
    Held { above: constant(above), below: Factored { zeros: delay, ..constant(below) } }
}

/// above = direct·below + remainder.
pub fn direct_part(above: &IntPoly, below: &IntPoly) -> (RBig, Vec<RBig>) {
    let order = below.degree();
    let direct = RBig::from_parts_signed(above.coefficient(order), below.leading());
    let remainder = (0..order).map(|i| RBig::from(above.coefficient(i)) - &direct * RBig::from(below.coefficient(i)));
    let remainder = remainder.collect();
    (direct, remainder)
}

/// row·adj(zI − Φ)·gamma·2^exponent.
fn numerator(row: &Matrix, adjugate: &[Matrix], gamma: &Matrix, exponent: i64) -> Enclosed {
    let values: Vec<Matrix> = adjugate.iter().rev().map(|m| row.times(&m.times(gamma))).collect();
    Enclosed {
        center: IntPoly::new(values.iter().map(|v| v.entries[0].clone()).collect()),
        radius: IntPoly::new(values.iter().map(|v| v.radius.clone()).collect()),
        exponent: exponent - row.bits as i64,
    }
}

/// The poles that are known without error: integrators, delays, repeated ones, and undamped pairs, which stay on the circle.
fn known_poles(characteristic: Enclosed, below: &IntPoly, period: &RBig, delays: usize) -> Factored {
    let (rest, integrators) = below.without_zero_roots();
    if squarefree_part(&rest).degree() < rest.degree() {
        return Factored {
            zeros: delays,
            ones: integrators,
            ..taken_along(&rest, period, -characteristic.exponent as usize)
        };
    }
    let plain = Factored { zeros: delays, ..Factored::plain(characteristic) };
    let found = (0..integrators).fold(plain, |p, _| p.with_root(Unit::Plus));
    Factored { circle_pairs: undamped_pairs(&rest), ..found }
}

/// The polynomial with a root e^(r h) for every root r of p, which does not vanish at 0; leading coefficient 1.
pub fn taken_along(p: &IntPoly, period: &RBig, bits: usize) -> Factored {
    let mut factors = Vec::new();
    for (factor, multiplicity) in squarefree_factors(p) {
        let (phi, _) = Companion::new(&factor, period).transition(period, bits);
        factors.extend(vec![characteristic(&resolvent(&phi), bits); multiplicity]);
    }
    if factors.is_empty() {
        factors.push(Enclosed::one());
    }
    Factored { zeros: 0, ones: 0, minus_ones: 0, factors, circle_pairs: undamped_pairs(p) }
}

/// Different pairs of roots on the imaginary axis away from 0.
fn undamped_pairs(p: &IntPoly) -> usize {
    count(&squarefree_part(p)).map_or(0, |count| count.axis / 2)
}

/// det(zI − Φ).
fn characteristic(found: &Resolvent, bits: usize) -> Enclosed {
    let mut center = found.coefficients.clone();
    center.push(IBig::ONE << bits);
    Enclosed { center: IntPoly::new(center), radius: IntPoly::new(found.radii.clone()), exponent: -(bits as i64) }
}

/// The zeros that are known without error. A zero at s = 0 stays one at z = 1. A strictly proper plant with G(−s) = ±G(s)
/// keeps a symmetry: G(1/z) = ±z·G(z) without delay, and ∓z²·G(z) with half a period of it. Where the sign so demands,
/// it vanishes at z = −1, and zeros that lie on the unit circle cannot leave it one by one.
fn known_zeros(sum: Enclosed, above: &IntPoly, below: &IntPoly, fraction: &RBig) -> Factored {
    let plain = Factored::plain(sum);
    let blocks_constants = above.coefficient(0).is_zero() && !above.is_zero();
    let with_one = |p: Factored| if blocks_constants { p.with_root(Unit::Plus) } else { p };
    let half = *fraction == RBig::from_parts(IBig::ONE, 2u8.into());
    if above.degree() >= below.degree() || !(fraction.is_zero() || half) {
        return with_one(plain);
    }
    let mirrored = above.mirrored().times(below);
    let own = above.times(&below.mirrored());
    let (even, odd) = (mirrored == own, mirrored == own.negated());
    if !even && !odd {
        return with_one(plain);
    }
    let found = with_one(if even != half { plain.with_root(Unit::Minus) } else { plain });
    // What remains is symmetric: an even polynomial in v.
    let (in_x, _) = found.rest().from_circle(found.rest().degree()).axis_parts();
    let pairs = zones(&in_x).map_or(0, |zones| zones.iter().filter(|zone| zone.crosses).count());
    Factored { circle_pairs: pairs, ..found }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::exact::Interval;

    fn p(c: &[i64]) -> IntPoly {
        IntPoly::from_i64(c)
    }

    fn rational(n: i64, d: u64) -> RBig {
        RBig::from_parts(n.into(), d.into())
    }

    /// The coefficients, divided by the denominator's leading one, in f64; and the widest relative error.
    fn coefficients(held: &Held) -> (Vec<f64>, Vec<f64>, f64) {
        let (above, below) = (held.above.expanded(), held.below.expanded());
        let lead = below.coefficient(below.degree()).midpoint().to_f64();
        let mut worst = 0.0_f64;
        let mut of = |p: &Enclosed| {
            (0..=p.degree())
                .map(|i| {
                    let Interval { low, high } = p.coefficient(i);
                    worst = worst.max((&high - &low).to_f64());
                    low.to_f64() / lead
                })
                .collect::<Vec<f64>>()
        };
        let (a, b) = (of(&above), of(&below));
        (a, b, worst)
    }

    fn close(found: &[f64], expected: &[f64]) {
        assert_eq!(found.len(), expected.len(), "{found:?} {expected:?}");
        for (a, b) in found.iter().zip(expected) {
            assert!((a - b).abs() < 1e-14 * (1.0 + b.abs()), "{found:?} {expected:?}");
        }
    }

    #[test]
    fn a_lag_becomes_its_decay() {
        // 3/(s + 2) every 1/4: 1.5 (1 − a)/(z − a), a = e^(−1/2).
        let held = hold(&p(&[3]), &p(&[2, 1]), &rational(1, 4), &RBig::ZERO, 192);
        let a = libm::exp(-0.5);
        let (above, below, worst) = coefficients(&held);
        close(&above, &[1.5 * (1.0 - a)]);
        close(&below, &[-a, 1.0]);
        assert!(worst < 1e-50, "{worst}");
    }

    #[test]
    fn a_double_integrator_has_its_zero_at_minus_one_exactly() {
        let held = hold(&p(&[1]), &p(&[0, 0, 1]), &rational(1, 3), &RBig::ZERO, 192);
        assert_eq!((held.above.minus_ones, held.below.ones), (1, 2));
        let (above, below, _) = coefficients(&held);
        close(&above, &[1.0 / 18.0, 1.0 / 18.0]);
        close(&below, &[1.0, -2.0, 1.0]);
    }

    #[test]
    fn an_integrator_half_a_period_late_averages() {
        // 1/s, h = 2, delay 3: h/2·(z + 1)/(z²·(z − 1)).
        let held = hold(&p(&[1]), &p(&[0, 1]), &rational(2, 1), &rational(3, 1), 192);
        assert_eq!((held.above.minus_ones, held.below.zeros, held.below.ones), (1, 2, 1));
        close(&coefficients(&held).0, &[1.0, 1.0]);
    }

    #[test]
    fn a_delayed_lag_splits_its_input() {
        // 1/(s + 1), h = 1, delay 1.3: ((1 − e^−0.7) z + e^−0.7 − e^−1)/(z² (z − e^−1)).
        let held = hold(&p(&[1]), &p(&[1, 1]), &rational(1, 1), &rational(13, 10), 192);
        let (e7, e1) = (libm::exp(-0.7), libm::exp(-1.0));
        let (above, below, _) = coefficients(&held);
        close(&above, &[e7 - e1, 1.0 - e7]);
        close(&below, &[0.0, 0.0, -e1, 1.0]);
    }

    #[test]
    fn a_direct_path_is_kept() {
        // (s + 3)/(s + 1) = 1 + 2/(s + 1), h = 1: (z − a + 2(1 − a))/(z − a); with delay 1/2 the direct path is one late.
        let a = libm::exp(-1.0);
        let held = hold(&p(&[3, 1]), &p(&[1, 1]), &rational(1, 1), &RBig::ZERO, 192);
        close(&coefficients(&held).0, &[2.0 - 3.0 * a, 1.0]);
        let late = hold(&p(&[3, 1]), &p(&[1, 1]), &rational(1, 1), &rational(1, 2), 192);
        let b = libm::exp(-0.5);
        close(&coefficients(&late).0, &[2.0 * (b - a) - a, 2.0 * (1.0 - b) + 1.0]);
    }

    #[test]
    fn wide_spread_poles_keep_their_digits() {
        // 1/((s + 1)(s/1000 + 1)(s/100000 + 1)), h = 1/100, against partial fractions.
        let below = p(&[1, 1]).times(&p(&[1000, 1])).times(&p(&[100_000, 1]));
        let above = p(&[100_000_000]);
        let held = hold(&above, &below, &rational(1, 100), &RBig::ZERO, 192);
        let (above, below, worst) = coefficients(&held);
        let dc = above.iter().sum::<f64>() / below.iter().sum::<f64>();
        assert!((dc - 1.0).abs() < 1e-12, "{dc}");
        assert!((below[2] + libm::exp(-0.01) + libm::exp(-10.0)).abs() < 1e-15);
        assert!(worst < 1e-40, "{worst}");
    }

    #[test]
    fn zeros_of_a_symmetric_plant_stay_on_the_circle() {
        // (s² + 4)/(s² (s² + 1)): a pair of zeros on the circle, and one at −1.
        let held = hold(&p(&[4, 0, 1]), &p(&[0, 0, 1, 0, 1]), &rational(1, 5), &RBig::ZERO, 192);
        assert_eq!((held.above.circle_pairs, held.above.minus_ones), (1, 1));
        // (s² + 4)/(s (s² + 1)): without the one at −1.
        let held = hold(&p(&[4, 0, 1]), &p(&[0, 1, 0, 1]), &rational(1, 5), &RBig::ZERO, 192);
        assert_eq!((held.above.circle_pairs, held.above.minus_ones), (1, 0));
    }

    #[test]
    fn undamped_pairs_and_blocked_constants_are_known() {
        // s/(s² + 4): a zero at z = 1, a pair on the circle.
        let held = hold(&p(&[0, 1]), &p(&[4, 0, 1]), &rational(1, 2), &RBig::ZERO, 192);
        assert_eq!((held.above.ones, held.below.circle_pairs), (1, 1));
        close(&coefficients(&held).0, &[-libm::sin(1.0) / 2.0, libm::sin(1.0) / 2.0]);
    }
}
