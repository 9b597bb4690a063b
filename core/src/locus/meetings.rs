//! Every point where branches meet at a real, finite, non-zero knob: breakaway and break-in points, real and complex.

use crate::exact::complex_roots::{ComplexDyadic, approximations, enclose, negative_ratio_at};
use crate::exact::gcd::{squarefree_factors, without_common_roots};
use crate::exact::{ExactError, IntPoly};
use crate::numerics::magnitude;
use crate::ranges::{Contact, Family, Partition, affine, polynomial};
use alloc::vec::Vec;
use nalgebra::Complex;

/// The knob at a candidate is first looked at in f64: beyond this relative imaginary part it is surely not real. The
/// knob is stationary at these points, so that it is far more precise than the point itself.
const SURELY_COMPLEX: f64 = 1e-3;

/// A knob computed to 30 digits or more with a relative imaginary part below this is real.
const SURELY_REAL: f64 = 1e-25;

/// Below this relative imaginary part of the knob two branches pass each other within about its square root, 3e-7: nearer
/// than tracking in f64 can follow.
const JUST_MISSED: f64 = 1e-13;

/// Up to this relative imaginary part of the knob branches pass each other near enough that a row is wanted there.
const CLOSE_CALL: f64 = 0.5;

/// Nearer to the real axis than this part of its magnitude a point has its mirror image too near for two branches alone.
const AWAY: f64 = 1e-3;

/// A close call this near to a true meeting, as a part of the knob, is the meeting itself seen in f64.
const KNOWN: f64 = 1e-7;

/// Bits to which candidates are enclosed for that decision.
const CANDIDATE_BITS: i64 = 128;

/// Branches meet here.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Meeting {
    /// In the closed upper half plane; the imaginary part is exactly 0 on the real axis.
    pub s: Complex<f64>,
    /// The knob; not 0.
    pub knob: f64,
    /// How many branches meet.
    pub multiplicity: usize,
    /// Whether real poles become fewer, or stay as many, as |knob| grows; true away from the axis.
    pub leaves_axis: bool,
    /// The imaginary part of the knob at which the poles would meet; 0 for a true meeting. Two branches that just miss each
    /// other turn by a quarter, to the side that its sign tells, nearer together than f64 can follow.
    pub miss: f64,
}

impl Meeting {
    /// Whether the branches really meet.
    pub fn is_true(&self) -> bool {
        self.miss == 0.0
    }
}

/// All meetings, by growing knob.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub fn meetings(family: &Family, partition: &Partition) -> Result<Vec<Meeting>, ExactError> {
    let mut found = Vec::new();
    for (i, place) in partition.places.iter().enumerate() {
        let sign = place.bracket.midpoint().signum();
        for contact in place.contacts.iter().filter(|_| sign != 0) {
            if let Contact::RealMeeting { s, multiplicity } = contact {
                found.push(Meeting {
                    s: Complex::new(*s, 0.0),
                    knob: place.value(),
                    multiplicity: *multiplicity,
                    leaves_axis: partition.loses_real_poles(i, sign),
                    miss: 0.0,
                });
            }
        }
    }
    match family.affine() {
        Some((d, n)) => found.extend(complex_meetings(d, n)?),
        None if family.knob_degree() == 0 => {}
        None => found.extend(polynomial::meetings(family)?.into_iter().filter(|m| m.s.im > 0.0).filter_map(|m| {
            let knob = m.bracket.midpoint().to_f64();
            (knob != 0.0).then_some(Meeting {
                s: m.s,
                knob,
                multiplicity: m.multiplicity,
                leaves_axis: true,
                miss: 0.0,
            })
        })),
    }
    found.sort_by(|a, b| a.knob.total_cmp(&b.knob));
    Ok(found)
}

/// The complex roots of W = D′N − DN′ at which q = −D/N is real; the others are the false candidates of dq/ds = 0.
fn complex_meetings(d: &IntPoly, n: &IntPoly) -> Result<Vec<Meeting>, ExactError> {
    let mut found = Vec::new();
    for (factor, order) in squarefree_factors(&affine::meeting_polynomial(d, n)) {
        let factor = without_common_roots(&without_common_roots(&factor, n), d);
        if factor.degree() < 2 || !may_have_real_knob(&factor, d, n) {
            continue;
        }
        for disc in enclose(&factor, CANDIDATE_BITS)? {
            let s = disc.center.to_f64();
            let Some(knob) = negative_ratio_at(d, n, &disc.center).filter(|_| s.im > 0.0) else { continue };
            let meets = knob.im.abs() <= SURELY_REAL * knob.re.abs();
            let just_misses = order == 1 && knob.im.abs() <= JUST_MISSED * knob.re.abs() && s.im > AWAY * magnitude(s);
            if meets || just_misses {
                let miss = if meets { 0.0 } else { knob.im };
                found.push(Meeting { s, knob: knob.re, multiplicity: order + 1, leaves_axis: true, miss });
            }
        }
    }
    Ok(found)
}

/// Knob values at which branches come near each other without meeting, good enough to stop there and look: without a row
/// in between, two poles that turn away from each other look like two that pass straight on.
pub fn close_calls(family: &Family, meetings: &[Meeting]) -> Vec<f64> {
    let Some((d, n)) = family.affine() else { return Vec::new() };
    let (factor, _) = affine::meeting_polynomial(d, n).without_zero_roots();
    let knobs =
        approximations(&factor).into_iter().filter_map(|s| negative_ratio_at(d, n, &ComplexDyadic::from_f64(s)?));
    let known = |q: f64| meetings.iter().any(|m| (m.knob - q).abs() <= KNOWN * q.abs());
    let mut calls: Vec<f64> = knobs
        .filter(|q| q.re.is_finite() && q.im.abs() <= CLOSE_CALL * q.re.abs())
        .map(|q| q.re)
        .filter(|q| !known(*q))
        .collect();
    calls.sort_by(f64::total_cmp);
    calls.dedup_by(|a, b| (*a - *b).abs() <= KNOWN * b.abs());
    calls
}

/// A quick look in f64 that spares most loops the enclosing.
fn may_have_real_knob(factor: &IntPoly, d: &IntPoly, n: &IntPoly) -> bool {
    approximations(factor).iter().any(|s| {
        let upper = s.im > 1e-9 * s.re.abs();
        let knob = ComplexDyadic::from_f64(*s).and_then(|s| negative_ratio_at(d, n, &s));
        upper && knob.is_none_or(|q| q.im.abs() <= SURELY_COMPLEX * q.re.abs())
    })
}
