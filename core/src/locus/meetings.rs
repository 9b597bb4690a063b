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

/// Where branches meet, and where they come near each other.
#[derive(Clone, Debug, Default)]
pub struct Encounters {
    /// All meetings, by growing knob.
    pub meetings: Vec<Meeting>,
    /// Knob values at which branches come near each other without meeting, good enough to stop there and look: without a
    /// row in between, two poles that turn away from each other look like two that pass straight on.
    pub close_calls: Vec<f64>,
}

/// All encounters of both halves of the locus.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub fn encounters(family: &Family, partition: &Partition) -> Result<Encounters, ExactError> {
    let mut found = Encounters { meetings: real_meetings(partition), close_calls: Vec::new() };
    match family.affine() {
        Some((d, n)) => {
            for candidates in candidates(d, n) {
                found.meetings.extend(candidates.complex_meetings(d, n)?);
                found.close_calls.extend(candidates.close_calls());
            }
        }
        None if family.knob_degree() == 0 => {}
        None => {
            for meeting in polynomial::meetings(family)?.into_iter().filter(|meeting| meeting.s.im > 0.0) {
                let knob = meeting.bracket.midpoint().to_f64();
                let (s, multiplicity) = (meeting.s, meeting.multiplicity);
                found.meetings.push(Meeting { s, knob, multiplicity, leaves_axis: true, miss: 0.0 });
            }
        }
    }
    found.meetings.retain(|meeting| meeting.knob != 0.0);
    found.meetings.sort_by(|a, b| a.knob.total_cmp(&b.knob));
    let meetings = &found.meetings;
    found.close_calls.retain(|q| !meetings.iter().any(|m| (m.knob - q).abs() <= KNOWN * q.abs()));
    found.close_calls.sort_by(f64::total_cmp);
    found.close_calls.dedup_by(|a, b| (*a - *b).abs() <= KNOWN * b.abs());
    Ok(found)
}

/// Meetings on the real axis are places of the partition.
fn real_meetings(partition: &Partition) -> Vec<Meeting> {
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
    found
}

/// The roots of one square-free factor of W = D′N − DN′, approximately, with q = −D/N there: branches meet where q is
/// real. The others are the false candidates of dq/ds = 0.
struct Candidates {
    factor: IntPoly,
    /// How often the factor divides W.
    order: usize,
    /// Each root in f64 with its knob; the knob is stationary there, so that it is far more precise than the root.
    rough: Vec<(Complex<f64>, Option<Complex<f64>>)>,
}

/// Repeated poles and zeros of the open loop are roots of W too, but of no interest here.
fn candidates(d: &IntPoly, n: &IntPoly) -> Vec<Candidates> {
    let mut all = Vec::new();
    for (factor, order) in squarefree_factors(&affine::meeting_polynomial(d, n)) {
        // What happens at the origin is on the real axis, and known from the partition.
        let (factor, _) = without_common_roots(&without_common_roots(&factor, n), d).without_zero_roots();
        let knob = |s: Complex<f64>| ComplexDyadic::from_f64(s).and_then(|s| negative_ratio_at(d, n, &s));
        let rough = approximations(&factor).into_iter().map(|s| (s, knob(s))).collect();
        all.push(Candidates { factor, order, rough });
    }
    all
}

impl Candidates {
    /// Those in the open upper half plane at which branches meet, or miss each other by less than f64 can follow.
    fn complex_meetings(&self, d: &IntPoly, n: &IntPoly) -> Result<Vec<Meeting>, ExactError> {
        let mut found = Vec::new();
        if !self.may_have_real_knob() {
            return Ok(found);
        }
        for disc in enclose(&self.factor, CANDIDATE_BITS)? {
            let s = disc.center.to_f64();
            let Some(knob) = negative_ratio_at(d, n, &disc.center).filter(|_| s.im > 0.0) else { continue };
            let meets = knob.im.abs() <= SURELY_REAL * knob.re.abs();
            let just_misses =
                self.order == 1 && knob.im.abs() <= JUST_MISSED * knob.re.abs() && s.im > AWAY * magnitude(s);
            if meets || just_misses {
                let miss = if meets { 0.0 } else { knob.im };
                found.push(Meeting { s, knob: knob.re, multiplicity: self.order + 1, leaves_axis: true, miss });
            }
        }
        Ok(found)
    }

    /// A quick look in f64 that spares most loops the enclosing.
    fn may_have_real_knob(&self) -> bool {
        self.rough
            .iter()
            .any(|(s, knob)| s.im > 1e-9 * s.re.abs() && knob.is_none_or(|q| q.im.abs() <= SURELY_COMPLEX * q.re.abs()))
    }

    /// The knobs, where they are nearly real.
    fn close_calls(&self) -> impl Iterator<Item = f64> {
        let knobs = self.rough.iter().filter_map(|(_, knob)| *knob);
        knobs.filter(|q| q.re.is_finite() && q.im.abs() <= CLOSE_CALL * q.re.abs()).map(|q| q.re)
    }
}
