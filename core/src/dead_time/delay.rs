//! The dead time as the knob: D(s) + N(s)·e^(−s·T), every T ≥ 0.
//!
//! Method: K. Walton and J. E. Marshall, "Direct method for TDS stability analysis", IEE Proceedings D 134 (1987): a pair
//! can be on the axis only where |D|² = |N|², a polynomial condition on x = ω²; it is there for T = (φ + 2πj)/ω with
//! e^(jφ) = −N/D, and crosses to the right where |D|² − |N|² rises through zero, to the left where it falls, whatever j.
//! Between T = 0, where the count is that of a polynomial, and any other T the count follows by signed crossings.

use super::partition::Crossing;
use super::trigonometry::Trigonometry;
use super::{Count, DeadTimeError, DeadTimePartition};
use crate::exact::gcd::{gcd, squarefree_factors};
use crate::exact::half_plane::{self, HalfPlaneCount};
use crate::exact::real_roots::positive_roots;
use crate::exact::{Dyadic, ExactError, IntPoly, Interval, RealRoot};
use crate::ranges::{Contact, EDGE_BITS, Place};
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_int::ops::{BitTest, SquareRoot};
use dashu_ratio::RBig;

/// Significant bits of enclosures on the way.
pub(super) const WORKING_BITS: usize = 256;

/// Angles are enclosed to 2^-this.
const ANGLE_BITS: i64 = 100;

/// Bits of refinement of a frequency before its angle is given up.
const FREQUENCY_BITS_CAP: i64 = 4096;

/// Crossings listed before a last range is given up: loops whose destabilising and stabilising frequencies nearly coincide
/// gain and lose stability this often.
const CROSSING_CAP: usize = 3000;

/// Edges kept behind the last stable range.
const EDGES_BEYOND: usize = 4;

/// A frequency at which poles are on the axis for some dead times.
struct AxisFrequency {
    omega: Interval,
    /// ωT for the smallest T ≥ 0, in [0, 2π).
    angle: Interval,
    /// True where the pair is on the axis at T = 0 exactly.
    at_start: bool,
    /// Unstable poles gained when T grows past a crossing: 2, −2, or 0 for a touch.
    change: i64,
}

/// The count of unstable poles of D + N·e^(−sT) at one T ≥ 0, proven; deg N < deg D.
///
/// # Errors
/// A pole pair on the axis at this very T, but for common roots of D and N, is [`DeadTimeError::CrossingsNotSeparated`]; a
/// pole at the origin that is not common to both [`DeadTimeError::AlwaysAtOrigin`].
pub fn count_at(d: &IntPoly, n: &IntPoly, dead_time: &RBig) -> Result<Count, DeadTimeError> {
    let (common, d, n) = without_common(d, n)?;
    let fixed = half_plane::count(&common)?;
    let start = half_plane::count(&d.plus(&n))?;
    if n.is_zero() {
        // Without delay, poles on the axis are told as well.
        let all = fixed.plus(start);
        return Ok(Count { right: all.right, axis: all.axis });
    }
    let time = Interval::around(dead_time, WORKING_BITS);
    let trigonometry = Trigonometry::new();
    let mut right = start.right as i64;
    for frequency in axis_frequencies(&d, &n, &trigonometry)? {
        let turn = trigonometry.full_turn();
        let way = frequency.omega.times(&time).plus(&frequency.angle.negated());
        let turns = way.over(&turn, WORKING_BITS).ok_or(DeadTimeError::CrossingsNotSeparated)?;
        let (low, high) = (floor(&turns.low), floor(&turns.high));
        if low != high {
            return Err(DeadTimeError::CrossingsNotSeparated);
        }
        let passed = i64::try_from(low + 1).map_err(|_| DeadTimeError::TooManySteps { cap: CROSSING_CAP })?.max(0);
        // What is on the axis at T = 0 was counted neither left nor right: leaving to the left changes nothing.
        let uncounted = i64::from(frequency.at_start && frequency.change < 0);
        if frequency.at_start && frequency.change == 0 {
            return Err(DeadTimeError::CrossingsNotSeparated);
        }
        right += frequency.change * (passed - uncounted);
    }
    let right = usize::try_from(right).map_err(|_| DeadTimeError::CrossingsNotSeparated)?;
    Ok(Count { right: right + fixed.right, axis: fixed.axis })
}

/// Every range of T ≥ 0 with its count. The first range begins at T = 0 and has no lower end. What is left out behind the
/// last place is never stable.
///
/// # Errors
/// As [`count_at`], and where destabilising and stabilising crossings follow each other too long.
pub fn ranges(d: &IntPoly, n: &IntPoly) -> Result<DeadTimePartition, DeadTimeError> {
    let (common, d, n) = without_common(d, n)?;
    let fixed = half_plane::count(&common)?;
    let start = half_plane::count(&d.plus(&n))?;
    let trigonometry = Trigonometry::new();
    let frequencies = if n.is_zero() { Vec::new() } else { axis_frequencies(&d, &n, &trigonometry)? };
    let first = first_count(start, &frequencies)?;
    let outer = outer_time(first, &frequencies);
    let mut crossings = Vec::new();
    for frequency in &frequencies {
        frequency.crossings(&trigonometry, outer, &mut crossings)?;
    }
    let mut all = DeadTimePartition::from_first(crossings, Count { right: first, axis: 0 })?;
    all.open_above = frequencies.iter().any(|f| f.change != 0);
    all.keep_to_last_stable(EDGES_BEYOND);
    all.add(Count { right: fixed.right, axis: fixed.axis });
    Ok(all)
}

/// The places of a partition in T as places of a knob q with T = fixed + per_knob·q; the order turns around where
/// per_knob < 0. None where it is 0.
pub fn in_knob(mut partition: DeadTimePartition, fixed: &RBig, per_knob: &RBig) -> Option<DeadTimePartition> {
    let (offset, slope) = (Interval::around(&-fixed.clone(), WORKING_BITS), Interval::around(per_knob, WORKING_BITS));
    for place in &mut partition.places {
        place.bracket = place.bracket.plus(&offset).over(&slope, WORKING_BITS)?;
    }
    if slope.sign() == Some(-1) {
        partition.places.reverse();
        partition.ranges.reverse();
        partition.at_places.reverse();
        core::mem::swap(&mut partition.open_below, &mut partition.open_above);
    }
    Some(partition)
}

/// The common factor, and D and N without it.
fn without_common(d: &IntPoly, n: &IntPoly) -> Result<(IntPoly, IntPoly, IntPoly), DeadTimeError> {
    if d.is_zero() {
        return Err(DeadTimeError::AlwaysZero);
    }
    if !n.is_zero() && n.degree() >= d.degree() {
        return Err(DeadTimeError::NotRetarded { delayed: n.degree(), undelayed: d.degree() });
    }
    let common = if n.is_zero() { IntPoly::from_i64(&[1]) } else { gcd(d, n) };
    let over = |p: &IntPoly| p.exactly_over(&common).unwrap_or_else(|| p.clone());
    let (d, n) = (over(d), over(n));
    if !n.is_zero() && (d.coefficient(0) + n.coefficient(0)).is_zero() {
        return Err(DeadTimeError::AlwaysAtOrigin);
    }
    Ok((common, d, n))
}

/// Unstable poles for T just above 0.
fn first_count(start: HalfPlaneCount, frequencies: &[AxisFrequency]) -> Result<usize, DeadTimeError> {
    let mut right = start.right;
    for frequency in frequencies.iter().filter(|f| f.at_start) {
        match frequency.change {
            2 => right += 2,
            -2 => {}
            _ => return Err(DeadTimeError::CrossingsNotSeparated),
        }
    }
    Ok(right)
}

/// A dead time from which on the count is surely not zero; infinite where it never changes.
///
/// Each frequency has crossed between (ωT − φ)/2π and one more times, so that the count is at least
/// first + Σ change·(ωT − φ)/2π − 2·(number of stabilising frequencies).
fn outer_time(first: usize, frequencies: &[AxisFrequency]) -> f64 {
    let (mut rate, mut offset) = (0.0, first as f64);
    for frequency in frequencies {
        let (omega, angle) = (frequency.omega.midpoint().to_f64(), frequency.angle.midpoint().to_f64());
        let weight = frequency.change as f64 / core::f64::consts::TAU;
        rate += weight * omega;
        offset -= weight * angle;
        if frequency.change < 0 {
            offset -= 2.0;
        }
    }
    // The count is even or odd throughout; one more than zero is enough. The factor covers all rounding here.
    if rate > 0.0 {
        (1.0 - offset).max(0.0) / rate * 1.01 + 1.01 * core::f64::consts::TAU / rate
    } else {
        f64::INFINITY
    }
}

impl AxisFrequency {
    /// The crossings with 0 < T ≤ `until`.
    fn crossings(
        &self,
        trigonometry: &Trigonometry,
        until: f64,
        crossings: &mut Vec<Crossing>,
    ) -> Result<(), DeadTimeError> {
        let turn = trigonometry.full_turn();
        let omega = self.omega.midpoint().to_f64();
        let mut angle = if self.at_start { self.angle.plus(&turn) } else { self.angle.clone() };
        let finite = until.is_finite();
        // A frequency that only touches the axis has no outer time of its own: its first few touches are shown.
        for shown in 0.. {
            let time = angle.over(&self.omega, WORKING_BITS).ok_or(DeadTimeError::CrossingsNotSeparated)?;
            if (finite && time.low.to_f64() > until) || (!finite && shown >= EDGES_BEYOND) {
                return Ok(());
            }
            if crossings.len() >= CROSSING_CAP {
                return Err(DeadTimeError::TooManySteps { cap: CROSSING_CAP });
            }
            let place = Place::within(time, Contact::Axis { omega });
            crossings.push(match self.change {
                // A touch comes from the left and returns; its two poles are counted nowhere else.
                0 => Crossing { place, change: 0, axis: 2, from_right: Some(0) },
                change => Crossing::simple(place, change),
            });
            angle = angle.plus(&turn);
        }
        Ok(())
    }
}

/// The positive roots of |D|² − |N|² with their angles; D and N have no common root.
fn axis_frequencies(
    d: &IntPoly,
    n: &IntPoly,
    trigonometry: &Trigonometry,
) -> Result<Vec<AxisFrequency>, DeadTimeError> {
    let difference = squared(d).minus(&squared(n));
    let sum = d.plus(n).axis_parts();
    let at_start = gcd(&sum.0, &sum.1);
    let mut found: Vec<(RealRoot, IntPoly, usize)> = Vec::new();
    for (factor, multiplicity) in squarefree_factors(&difference) {
        for root in positive_roots(&factor)? {
            found.push((root, factor.clone(), multiplicity));
        }
    }
    order(&mut found)?;
    // From the largest root down: |D|² is the larger one beyond all of them.
    let mut above = 1;
    let mut frequencies = Vec::with_capacity(found.len());
    for (mut root, factor, multiplicity) in found.into_iter().rev() {
        let below = if multiplicity % 2 == 1 { -above } else { above };
        let change = i64::from(above - below);
        above = below;
        let (omega, angle) = enclosed_angle(d, n, &factor, &mut root, trigonometry)?;
        let mut frequency = AxisFrequency { omega, angle, at_start: false, change };
        if frequency.angle.sign() != Some(1) {
            frequency.at_start = has_root_within(&at_start, &root);
            if !frequency.at_start {
                return Err(DeadTimeError::Exact(ExactError::EdgeNotNarrow));
            }
            frequency.angle = Interval::point(Dyadic::ZERO);
        }
        frequencies.push(frequency);
    }
    Ok(frequencies)
}

/// Sorts roots of pairwise coprime factors.
fn order(roots: &mut [(RealRoot, IntPoly, usize)]) -> Result<(), DeadTimeError> {
    for (root, factor, _) in roots.iter_mut() {
        root.refine_to(factor, EDGE_BITS)?;
    }
    roots.sort_by(|a, b| a.0.bracket.low.cmp(&b.0.bracket.low));
    let apart = roots.windows(2).all(|pair| pair[0].0.bracket.high < pair[1].0.bracket.low);
    if apart { Ok(()) } else { Err(DeadTimeError::CrossingsNotSeparated) }
}

/// Whether a factor of the polynomial behind `root` has that very root.
fn has_root_within(p: &IntPoly, root: &RealRoot) -> bool {
    let (low, high) = (p.sign_at(&root.bracket.low), p.sign_at(&root.bracket.high));
    p.degree() > 0 && (low * high < 0 || (low == 0 && root.is_exact()))
}

/// ω and the angle of −N/D at jω, in [0, 2π) but for its width.
fn enclosed_angle(
    d: &IntPoly,
    n: &IntPoly,
    factor: &IntPoly,
    root: &mut RealRoot,
    trigonometry: &Trigonometry,
) -> Result<(Interval, Interval), DeadTimeError> {
    let mut bits = EDGE_BITS;
    while bits <= FREQUENCY_BITS_CAP {
        root.refine_to(factor, bits)?;
        let omega = square_root(&root.bracket);
        if let Some(angle) = angle_of_quotient(d, n, &root.bracket, &omega, trigonometry)
            && (&angle.high - &angle.low).magnitude().is_none_or(|m| m < -ANGLE_BITS)
        {
            return Ok((omega, angle));
        }
        bits *= 2;
    }
    Err(DeadTimeError::Exact(ExactError::EdgeNotNarrow))
}

fn angle_of_quotient(d: &IntPoly, n: &IntPoly, x: &Interval, omega: &Interval, t: &Trigonometry) -> Option<Interval> {
    let d = ComplexInterval::at(d, x, omega);
    // −N·conj D/|D|² has magnitude 1 here.
    let above = ComplexInterval::at(n, x, omega).times(&d.conjugate());
    let size = d.re.times(&d.re).plus(&d.im.times(&d.im)).rounded(WORKING_BITS);
    let re = above.re.negated().over(&size, WORKING_BITS)?;
    let im = above.im.negated().over(&size, WORKING_BITS)?;
    let near = libm::atan2(im.midpoint().to_f64(), re.midpoint().to_f64());
    let start = Interval::point(Dyadic::from_f64(near)?);
    let (cos, sin) = t.cos_sin(&start);
    // The sine of what is missing: e^(j·angle)·e^(−j·near).
    let missing = im.times(&cos).plus(&re.times(&sin).negated());
    let largest = missing.low.magnitude().max(missing.high.magnitude())?;
    // |asin y − y| ≤ |y|³ for small y.
    let error = Dyadic::new(IBig::ONE, 3 * largest);
    let angle = start.plus(&missing).plus(&Interval { low: -error.clone(), high: error });
    let angle = if angle.sign() == Some(-1) { angle.plus(&t.full_turn()) } else { angle };
    Some(angle.rounded(WORKING_BITS))
}

/// |p(jω)|² as a polynomial in x = ω².
pub(super) fn squared(p: &IntPoly) -> IntPoly {
    let (even, odd) = p.axis_parts();
    even.times(&even).plus(&odd.times(&odd).times(&IntPoly::from_i64(&[0, 1])))
}

/// A complex number in a rectangle.
#[derive(Clone, Debug)]
pub(super) struct ComplexInterval {
    pub(super) re: Interval,
    pub(super) im: Interval,
}

impl ComplexInterval {
    /// p(jω), x = ω².
    pub(super) fn at(p: &IntPoly, x: &Interval, omega: &Interval) -> Self {
        let (even, odd) = p.axis_parts();
        Self { re: over(&even, x), im: over(&odd, x).times(omega).rounded(WORKING_BITS) }
    }

    pub(super) fn conjugate(&self) -> Self {
        Self { re: self.re.clone(), im: self.im.negated() }
    }

    pub(super) fn times(&self, other: &Self) -> Self {
        Self {
            re: self.re.times(&other.re).plus(&self.im.times(&other.im).negated()).rounded(WORKING_BITS),
            im: self.re.times(&other.im).plus(&self.im.times(&other.re)).rounded(WORKING_BITS),
        }
    }

    pub(super) fn plus(&self, other: &Self) -> Self {
        Self { re: self.re.plus(&other.re), im: self.im.plus(&other.im) }
    }
}

/// An enclosure of a polynomial's values, to [`WORKING_BITS`].
pub(super) fn over(p: &IntPoly, x: &Interval) -> Interval {
    let mut value = Interval::point(Dyadic::ZERO);
    for c in p.coefficients().iter().rev() {
        value = value.times(x).plus(&Interval::point(Dyadic::new(c.clone(), 0))).rounded(WORKING_BITS);
    }
    value
}

/// The square root of an interval of positive numbers.
pub(super) fn square_root(x: &Interval) -> Interval {
    let below = |value: &Dyadic| {
        let shift = 2 * WORKING_BITS as i64 - value.mantissa.bit_len() as i64;
        // An even exponent is left.
        let shift = if (value.exponent - shift) % 2 == 0 { shift } else { shift + 1 };
        let scaled =
            if shift >= 0 { &value.mantissa << (shift as usize) } else { &value.mantissa >> (-shift as usize) };
        let (_, magnitude) = scaled.into_parts();
        Dyadic::new(IBig::from(magnitude.sqrt()), (value.exponent - shift) / 2)
    };
    let low = below(&x.low);
    let high = below(&x.high);
    // Two units: one for the root, one for a right shift.
    let unit = Dyadic::new(IBig::from(2), high.exponent);
    Interval { low: low.clone(), high: &high + &unit }
}

/// The largest integer that is not above.
fn floor(x: &Dyadic) -> IBig {
    if x.exponent >= 0 { &x.mantissa << (x.exponent as usize) } else { &x.mantissa >> (-x.exponent as usize) }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn cut(d: &[i64], n: &[i64]) -> (Vec<f64>, Vec<usize>) {
        let partition = ranges(&IntPoly::from_i64(d), &IntPoly::from_i64(n)).expect("cut");
        assert!(partition.places.iter().all(|place| place.bracket.narrow(53)));
        (partition.places.iter().map(Place::value).collect(), partition.ranges.iter().map(|c| c.right).collect())
    }

    fn near(found: f64, expected: f64) -> bool {
        (found - expected).abs() <= 2e-15 * expected
    }

    #[test]
    fn a_loop_regains_stability_with_more_dead_time() {
        // K. Walton and J. E. Marshall 1987 (attribution uncertain), shared/checks L07: e^(−sT)/(s³ + s² + 2s + 1) is stable
        // for π/2 < T < √2·π and 5π/2 < T < 2√2·π.
        let (places, right) = cut(&[1, 2, 1, 1], &[1]);
        let pi = core::f64::consts::PI;
        let root = core::f64::consts::SQRT_2;
        for (i, expected) in [0.5 * pi, root * pi, 2.5 * pi, 2.0 * root * pi].into_iter().enumerate() {
            assert!(near(places[i], expected), "{places:?}");
        }
        assert_eq!(right[..5], [2, 0, 2, 0, 2]);
        assert!(right[4..].iter().all(|r| *r > 0));
    }

    #[test]
    fn a_lag_has_one_range() {
        // shared/checks L11: x′ = −2x − 5x(t − T), T = acos(−2/5)/√21.
        let (places, right) = cut(&[2, 1], &[5]);
        assert!(near(places[0], libm::acos(-0.4) / libm::sqrt(21.0)), "{places:?}");
        assert_eq!(right[..2], [0, 2]);
    }

    #[test]
    fn a_loop_without_crossing_keeps_its_count() {
        assert_eq!(cut(&[3, 1], &[1]), ([].into(), [0].into()));
        assert_eq!(cut(&[-3, 1], &[1]), ([].into(), [1].into()));
    }

    #[test]
    fn a_pair_on_the_axis_without_dead_time_goes_its_way() {
        // s³ + s² + s + (1 without delay): the pair ±j of s³ + s² + s + 1 moves right with any delay.
        let (places, right) = cut(&[0, 1, 1, 1], &[1]);
        assert_eq!(right[0], 2);
        assert!(places.iter().all(|t| *t > 0.0));
    }

    #[test]
    fn knobs_that_shorten_the_dead_time_turn_the_order_around() {
        let partition = ranges(&IntPoly::from_i64(&[0, 1]), &IntPoly::from_i64(&[1])).expect("cut");
        let turned = in_knob(partition, &RBig::from(3), &RBig::from(-2)).expect("moves");
        let last = turned.places.last().map(Place::value).expect("a place");
        assert!(near(last, 0.5 * (3.0 - core::f64::consts::FRAC_PI_2)), "{last}");
        assert_eq!(turned.ranges.last().map(|c| c.right), Some(0));
        assert!(turned.open_below && !turned.open_above);
    }

    #[test]
    fn counts_follow_the_dead_time() {
        let count = |t: i64| {
            let (d, n) = (IntPoly::from_i64(&[1, 2, 1, 1]), IntPoly::from_i64(&[1]));
            count_at(&d, &n, &RBig::from(t)).map(|c| c.right)
        };
        assert_eq!([0, 1, 2, 4, 5, 8, 9].map(count).map(Result::ok), [2, 2, 0, 0, 2, 0, 2].map(Some));
    }
}
