//! The root locus of a sampled loop in the z-plane.
//!
//! Branches and landmarks are drawn, not claimed: they are those of the middles of the enclosed polynomials, which are right
//! to far more digits than f64 has. The same methods as in the s-plane follow them.

use super::ranges::SampledRanges;
use crate::exact::complex_roots::roots;
use crate::exact::half_plane::HalfPlaneCount;
use crate::exact::real_roots::count_real;
use crate::exact::{ExactError, IntPoly};
use crate::locus::landmarks::{from_meetings, from_roots, sign_of_knob};
use crate::locus::{Branch, LocusInput, branches, encounters, trade, view};
use crate::ranges::{Contact, Family, Partition, Verdict, affine, merge, samples};
use crate::record::{
    Asymptotes, BothSigns, CharacterName, KnobSign, Landmark, LandmarkKind, Point, Root, Segment, View, equivalent,
};
use alloc::vec::Vec;
use dashu_ratio::RBig;

/// Poles and zeros farther out than this are left out of the default view: sampling zeros may lie anywhere on the negative
/// real axis.
const IN_VIEW: f64 = 1.6;

/// The locus and what belongs to it, in the z-plane.
#[derive(Clone, Debug)]
pub struct SampledLocus {
    /// Both halves of the locus.
    pub branches: Vec<Branch>,
    /// The special points, with their equivalents in s.
    pub landmarks: Vec<Landmark>,
    /// Poles of the open loop, fixed modes included.
    pub poles: Vec<Root>,
    /// Zeros of the open loop, fixed modes included; empty unless affine.
    pub zeros: Vec<Root>,
    /// Where branches go to infinity. None unless affine.
    pub asymptotes: Option<BothSigns<Asymptotes>>,
    /// The parts of the real axis that belong to the locus. None unless affine.
    pub real_axis: Option<BothSigns<Vec<Segment>>>,
    /// Shows the unit circle.
    pub view: View,
    /// The halves whose branches could not be followed with certainty.
    pub lost: Vec<KnobSign>,
}

/// The locus of a loop.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub fn locus(whole: &SampledRanges) -> Result<SampledLocus, ExactError> {
    let nothing = || Family { fixed: IntPoly::default(), parts: [IntPoly::from_i64(&[1])].into() };
    let family = Family::new(whole.in_z.clone()).unwrap_or_else(nothing);
    let partition = partition(&family, &whole.partition)?;
    let encounters = encounters(&family, &partition)?;
    let fixed_factor = family.fixed.times(&whole.fixed_in_z);
    let affine = family.affine();
    let moving_poles = roots(&family.parts[0])?;
    let moving_zeros = if family.knob_degree() > 0 { roots(&family.parts[family.knob_degree()])? } else { Vec::new() };
    let period = whole.input.period.to_f64().value();
    let mut landmarks = from_meetings(&encounters.meetings);
    landmarks.extend(on_the_circle(&whole.partition, period));
    if let Some((d, n)) = affine {
        landmarks.extend(from_roots(d, n, &moving_poles, &moving_zeros));
    }
    for landmark in &mut landmarks {
        landmark.equivalent = equivalent(landmark.s, period);
    }
    let fixed = roots(&fixed_factor)?;
    let with_fixed = |moving: &[Root]| moving.iter().chain(&fixed).copied().collect::<Vec<Root>>();
    let poles = with_fixed(&moving_poles);
    let zeros = if affine.is_some() { with_fixed(&moving_zeros) } else { Vec::new() };
    let view = frame(poles.iter().chain(&zeros).map(|r| Point { re: r.re, im: r.im }));
    let input = LocusInput {
        family: &family,
        partition: &partition,
        encounters: &encounters,
        fixed: &fixed,
        poles: &moving_poles,
        zeros: &moving_zeros,
        view,
    };
    let (mut all, mut lost) = (Vec::new(), Vec::new());
    for sign in KnobSign::BOTH {
        match branches(&input, sign) {
            Some(found) => all.extend(found),
            None => lost.push(sign),
        }
    }
    Ok(SampledLocus {
        branches: all,
        landmarks,
        asymptotes: affine.map(|(d, n)| trade::for_both_signs(|sign| trade::asymptotes(d, n, sign))),
        real_axis: affine
            .map(|(d, n)| trade::for_both_signs(|sign| trade::real_axis(d, n, &moving_poles, &moving_zeros, sign))),
        poles,
        zeros,
        view,
        lost,
    })
}

/// The line of the knob cut where real poles meet, and where poles cross the unit circle so that branches get a vertex
/// there; with the number of real poles in every range.
fn partition(family: &Family, sampled: &Partition) -> Result<Partition, ExactError> {
    let Some((d, n)) = family.affine() else { return Partition::new(family) };
    let mut places = affine::real_meetings(d, n)?;
    places.extend(sampled.places.iter().cloned());
    let places = merge(places);
    let fixed = count_real(&family.fixed)?;
    let real = |q: &RBig| {
        let real = count_real(&family.at(q))? + fixed;
        Ok(Verdict { half_plane: HalfPlaneCount::default(), real, pairs: 0, name: CharacterName::Unstable })
    };
    let ranges = samples(&places).iter().map(real).collect::<Result<Vec<_>, ExactError>>()?;
    let at_places = ranges[1..].to_vec();
    let proven = places.iter().map(|_| false).collect();
    Ok(Partition::from_parts(places, ranges, at_places, proven))
}

/// The unit circle with what lies near it.
fn frame(points: impl Iterator<Item = Point>) -> View {
    let circle = [Point { re: -1.0, im: 1.0 }, Point { re: 1.0, im: 1.0 }];
    view::frame(circle.into_iter().chain(points.filter(|p| libm::hypot(p.re, p.im) <= IN_VIEW)))
}

/// Where poles cross the unit circle.
fn on_the_circle(partition: &Partition, period: f64) -> Vec<Landmark> {
    let mut found = Vec::new();
    for place in &partition.places {
        let knob = place.value();
        for contact in &place.contacts {
            let (kind, s) = match contact {
                Contact::Axis { omega } => {
                    let angle = omega * period;
                    (LandmarkKind::AxisCrossing, Point { re: libm::cos(angle), im: libm::sin(angle) })
                }
                Contact::Origin => (LandmarkKind::OriginCrossing, Point { re: 1.0, im: 0.0 }),
                Contact::Alternation => (LandmarkKind::AlternationCrossing, Point { re: -1.0, im: 0.0 }),
                Contact::DegreeDrop | Contact::RealMeeting { .. } => continue,
            };
            found.push(Landmark {
                kind,
                s,
                equivalent: None,
                knob: Some(knob),
                multiplicity: 1,
                angle: None,
                sign: sign_of_knob(knob),
            });
        }
    }
    found
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::sampled::ranges;
    use crate::sampled::tests::in_z;

    #[test]
    fn branches_of_a_sampled_motor_start_at_its_poles_and_cross_where_the_edges_are() {
        let whole = ranges(&in_z((&[1], &[1]), (&[1], &[0, 1, 1]), (2, 1), (0, 1))).expect("found");
        let found = locus(&whole).expect("drawn");
        assert!(found.lost.is_empty());
        assert_eq!(found.branches.len(), 4);
        // Poles at 1 and e^−2.
        let mut starts: Vec<f64> = found.poles.iter().map(|r| r.re).collect();
        starts.sort_by(f64::total_cmp);
        assert!((starts[0] - libm::exp(-2.0)).abs() < 1e-15 && (starts[1] - 1.0).abs() < 1e-30, "{starts:?}");
        let crossing = found.landmarks.iter().find(|l| l.kind == LandmarkKind::AxisCrossing).expect("a crossing");
        assert!((libm::hypot(crossing.s.re, crossing.s.im) - 1.0).abs() < 1e-15);
        // The branch passes there: its nearest vertices on both sides of the circle have the edge's knob between them.
        let knob = crossing.knob.expect("a knob");
        let crosses = found.branches.iter().any(|branch| {
            branch.points.windows(2).any(|pair| {
                let size = |p: &crate::locus::BranchPoint| libm::hypot(p.re, p.im);
                size(&pair[0]) < 1.0 && size(&pair[1]) >= 1.0 && pair[0].knob <= knob && knob <= pair[1].knob
            })
        });
        assert!(crosses);
    }

    #[test]
    fn repeated_poles_and_integrators_stay_together() {
        // 1/((s + 1)² s²) sampled: two poles at e^−h, two at 1.
        let plant: (&[i64], &[i64]) = (&[1], &[0, 0, 1, 2, 1]);
        let whole = ranges(&in_z((&[-9, 10], &[-2, 10]), plant, (1, 5), (1, 1))).expect("found");
        let found = locus(&whole).expect("drawn");
        let multiplicities: Vec<usize> = found.poles.iter().map(|r| r.multiplicity).collect();
        assert_eq!(multiplicities.iter().filter(|m| **m == 2).count(), 2, "{:?}", found.poles);
        assert!(found.lost.is_empty());
    }
}
