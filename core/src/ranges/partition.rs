//! The real line of the knob, cut into ranges with a verdict on each range and on each place between two.

use super::place::{Contact, Place, merge, samples, short_rational};
use super::verdict::{Verdict, name, verdict};
use super::{Family, affine, polynomial};
use crate::exact::complex_roots::{ROOT_BITS, enclose_all};
use crate::exact::gcd::gcd;
use crate::exact::half_plane::{HalfPlaneCount, count};
use crate::exact::{ExactError, IntPoly, Interval};
use crate::numerics::magnitude;
use crate::record::{CharacterName, CharacterRange, Edge, EdgeKind, StabilityRange};
use alloc::vec::Vec;
use dashu_ratio::RBig;
use nalgebra::Complex;

/// At a bracket of 2^−200 poles that meet, or are on the axis, at the place itself are computed within this fraction of
/// their magnitude of each other, or of it: three that meet are split by 2^−66.
const ON_AXIS: f64 = 1e-14;

/// A pole at the origin is computed there within this part of the largest pole.
const ORIGIN: f64 = 1e-25;

/// Digits of the bracket's decimals: one more than 1e-17 relative needs. Where two places are nearer than that, more.
const BRACKET_DIGITS: u32 = 19;

/// The partition. `ranges` has one entry more than `places`.
#[derive(Clone, Debug)]
pub struct Partition {
    /// What happens where, ascending.
    pub places: Vec<Place>,
    /// The verdict before the first place, between neighbours, and behind the last.
    pub ranges: Vec<Verdict>,
    /// The verdict at each place.
    pub at_places: Vec<Verdict>,
    /// Whether places where real poles meet have been looked for; without them `real` and `pairs` mean nothing.
    pub with_meetings: bool,
    /// Whether what is said of a place is proven.
    proven: Vec<bool>,
}

impl Partition {
    /// Cuts the line; without the meetings of real poles where those cannot be told.
    ///
    /// # Errors
    /// From the exact methods, when a cap is met.
    pub fn new(family: &Family) -> Result<Self, ExactError> {
        let mut places = match family.affine() {
            Some((d, n)) => affine::stability_places(d, n)?,
            None if family.knob_degree() == 0 => Vec::new(),
            None => polynomial::stability_places(family)?,
        };
        let meetings = real_meetings(family);
        let with_meetings = meetings.is_ok();
        places.extend(meetings.unwrap_or_default());
        let mut places = merge(places);
        let ranges =
            samples(&places).iter().map(|q| verdict(&family.at(q), &family.fixed)).collect::<Result<Vec<_>, _>>()?;
        let mut at_places = Vec::with_capacity(places.len());
        for (i, place) in places.iter_mut().enumerate() {
            if place.exact.is_none() {
                place.exact = short_rational(&place.bracket).filter(|q| happens_at(family, place, q));
            }
            at_places.push(match &place.exact {
                Some(q) => {
                    place.bracket = Interval::around(q, super::EDGE_BITS as usize);
                    verdict(&family.at(q).times(&family.fixed), &IntPoly::from_i64(&[1]))?
                }
                None => between(family, place, &ranges[i], &ranges[i + 1])?,
            });
        }
        // Of a family of higher degree in the knob an irrational touching edge is told from a near miss by 100 bits, not by
        // proof.
        let affine = family.knob_degree() < 2;
        let touching = |i: usize| places[i].is_of_stability() && ranges[i].half_plane == ranges[i + 1].half_plane;
        let proven = places.iter().enumerate().map(|(i, p)| affine || !touching(i) || p.exact.is_some()).collect();
        Ok(Self { places, ranges, at_places, with_meetings, proven })
    }

    /// From places found elsewhere, without those where real poles meet; `proven` has one entry for each place.
    pub fn from_parts(places: Vec<Place>, ranges: Vec<Verdict>, at_places: Vec<Verdict>, proven: Vec<bool>) -> Self {
        Self { places, ranges, at_places, with_meetings: false, proven }
    }

    /// Whether what is said of a place is proven.
    pub fn is_proven(&self, place: usize) -> bool {
        self.proven[place]
    }

    /// The verdict at a knob value; in the bracket of a place that of the place.
    pub fn verdict_at(&self, knob: &RBig) -> &Verdict {
        let below = |place: &Place| place.bracket.high.to_rational() < *knob;
        let i = self.places.partition_point(below);
        match self.places.get(i) {
            Some(place) if place.bracket.low.to_rational() <= *knob => &self.at_places[i],
            _ => &self.ranges[i],
        }
    }

    /// The ranges of constant counts of unstable poles.
    pub fn stability(&self) -> Vec<StabilityRange> {
        let cuts = self.stability_places();
        ranges_between(&cuts, |from, to, first| StabilityRange {
            from: from.map(|i| self.edge(i)),
            to: to.map(|i| self.edge(i)),
            unstable_poles: self.ranges[first].half_plane.right,
            axis_poles: self.ranges[first].half_plane.axis,
            at_least: false,
            stable: self.ranges[first].half_plane.is_stable(),
        })
    }

    /// The ranges of constant character; empty where it could not be told.
    pub fn character(&self) -> Vec<CharacterRange> {
        if !self.with_meetings {
            return Vec::new();
        }
        let kind = |v: &Verdict| (v.real, v.pairs, v.name);
        // A character that is met only exactly at the place is a change, too.
        let cuts = self.cuts(|i| {
            let (below, here, above) = (kind(&self.ranges[i]), kind(&self.at_places[i]), kind(&self.ranges[i + 1]));
            below != above || (here.0, here.2) != (below.0, below.2)
        });
        ranges_between(&cuts, |from, to, first| CharacterRange {
            from: from.map(|i| self.edge(i)),
            to: to.map(|i| self.edge(i)),
            real_poles: self.ranges[first].real,
            pairs: self.ranges[first].pairs,
            name: self.ranges[first].name,
        })
    }

    /// Indices of the places where poles reach the axis, the origin or infinity.
    pub fn stability_places(&self) -> Vec<usize> {
        self.cuts(|i| self.is_stability_place(i))
    }

    fn cuts(&self, keep: impl Fn(usize) -> bool) -> Vec<usize> {
        (0..self.places.len()).filter(|i| keep(*i)).collect()
    }

    fn is_stability_place(&self, i: usize) -> bool {
        self.places[i].is_of_stability()
    }

    /// The record of a place.
    pub fn edge(&self, i: usize) -> Edge {
        let (place, here) = (&self.places[i], &self.at_places[i]);
        let mut omegas: Vec<f64> = place.contacts.iter().filter_map(Contact::omega).collect();
        omegas.sort_by(f64::total_cmp);
        let (below, above) = (self.ranges[i].half_plane, self.ranges[i + 1].half_plane);
        let touching = self.is_stability_place(i) && below == above;
        let digits = self.bracket_digits(i);
        Edge {
            value: place.value(),
            bracket: match &place.exact {
                Some(q) => crate::exact::dyadic::rational_bracket(q, digits),
                None => place.bracket.decimal_bracket(digits),
            },
            exact: place.exact.as_ref().map(crate::exact::dyadic::exact_text),
            proven: self.proven[i],
            kind: self.kind(i),
            omega: omegas.first().copied(),
            omegas,
            touching,
            unstable_poles: here.half_plane.right,
            axis_poles: here.half_plane.axis,
            name: here.name,
        }
    }

    /// As many digits as keep the printed bracket of a place off those of its neighbours.
    fn bracket_digits(&self, i: usize) -> u32 {
        let gaps = [i.checked_sub(1).map(|before| (before, i)), (i + 1 < self.places.len()).then_some((i, i + 1))];
        gaps.into_iter()
            .flatten()
            .filter_map(|(lower, upper)| {
                let (lower, upper) = (&self.places[lower].bracket.high, &self.places[upper].bracket.low);
                let size = lower.magnitude().max(upper.magnitude())?;
                Some(size - (upper - lower).magnitude()?)
            })
            // A bit is less than a third of a digit; the two printed ends may each be off by a whole one, and the size by a bit.
            .map(|bits| (bits.max(0) / 3 + 3) as u32)
            .fold(BRACKET_DIGITS, u32::max)
    }

    fn kind(&self, i: usize) -> EdgeKind {
        let has = |wanted: fn(&Contact) -> bool| self.places[i].contacts.iter().any(wanted);
        if has(|c| matches!(c, Contact::DegreeDrop)) {
            EdgeKind::DegreeDrop
        } else if has(|c| matches!(c, Contact::Axis { .. })) {
            EdgeKind::AxisCrossing
        } else if has(|c| matches!(c, Contact::Alternation)) {
            EdgeKind::AlternationCrossing
        } else if has(|c| matches!(c, Contact::Origin)) {
            EdgeKind::OriginCrossing
        } else {
            match self.places[i].bracket.midpoint().signum() {
                0 => EdgeKind::RepeatedPole,
                sign if self.loses_real_poles(i, sign) => EdgeKind::Breakaway,
                _ => EdgeKind::BreakIn,
            }
        }
    }

    /// Whether real poles become fewer, or stay as many, as |knob| grows past the place.
    pub fn loses_real_poles(&self, i: usize, sign: i32) -> bool {
        let (inner, outer) = if sign >= 0 { (i, i + 1) } else { (i + 1, i) };
        self.ranges[inner].real >= self.ranges[outer].real
    }
}

fn real_meetings(family: &Family) -> Result<Vec<Place>, ExactError> {
    match family.affine() {
        Some((d, n)) => affine::real_meetings(d, n),
        None if family.knob_degree() == 0 => Ok(Vec::new()),
        None => Ok(polynomial::meetings(family)?
            .into_iter()
            .filter(|meeting| meeting.s.im == 0.0)
            .map(|meeting| {
                let contact = Contact::RealMeeting { s: meeting.s.re, multiplicity: meeting.multiplicity };
                Place::within(meeting.bracket, contact)
            })
            .collect()),
    }
}

/// Builds one range for every gap between the chosen places; `make` gets the places' and the first range's indices.
fn ranges_between<T>(cuts: &[usize], make: impl Fn(Option<usize>, Option<usize>, usize) -> T) -> Vec<T> {
    (0..=cuts.len())
        .map(|k| {
            let from = k.checked_sub(1).map(|j| cuts[j]);
            make(from, cuts.get(k).copied(), from.map_or(0, |i| i + 1))
        })
        .collect()
}

/// Whether what a place says happens exactly at a rational number in its bracket.
fn happens_at(family: &Family, place: &Place, q: &RBig) -> bool {
    let p = family.at(q);
    let on_axis = || count(&p).is_ok_and(|count| count.axis > 0);
    let repeated = || gcd(&p, &p.derivative()).degree() > 0;
    place.contacts.iter().all(|contact| match contact {
        Contact::Axis { .. } => on_axis(),
        Contact::RealMeeting { .. } => repeated(),
        Contact::Origin => p.coefficient(0).is_zero(),
        Contact::DegreeDrop => p.degree() < family.moving_order(),
        // No place of a continuous loop.
        Contact::Alternation => false,
    })
}

/// The verdict at an irrational place, from its contacts and the verdicts on both sides.
fn between(family: &Family, place: &Place, below: &Verdict, above: &Verdict) -> Result<Verdict, ExactError> {
    let (low, high) = (below.half_plane, above.half_plane);
    match &place.contacts[..] {
        // Poles meet on the real axis away from the origin: they are all real there, and nothing else changes.
        [Contact::RealMeeting { multiplicity, .. }] if low == high && low.axis == 0 => {
            // Of an odd number one is real on both sides; of an even number none, or two, depending on the side.
            let joined = multiplicity - multiplicity % 2;
            let real = below.real.min(above.real) + joined;
            let pairs = (below.real + 2 * below.pairs - real) / 2;
            Ok(Verdict { half_plane: low, real, pairs, name: name(low, pairs, pairs == 0) })
        }
        // One pair crosses: it is on the axis, and the others are where they are on the better side.
        [Contact::Axis { .. }] if low.right.abs_diff(high.right) == 2 && low.axis == 0 => {
            let half_plane = HalfPlaneCount { right: low.right.min(high.right), axis: 2 };
            let (real, pairs) = (below.real, below.pairs);
            Ok(Verdict { half_plane, real, pairs, name: name(half_plane, pairs, false) })
        }
        _ => looked_at(family, place),
    }
}

/// Several things at once, or a touch: the roots at the middle of the bracket show what is on the axis.
fn looked_at(family: &Family, place: &Place) -> Result<Verdict, ExactError> {
    let p = family.at_dyadic(&place.bracket.midpoint()).times(&family.fixed);
    let mut roots: Vec<(Complex<f64>, usize)> = Vec::new();
    for disc in enclose_all(&p, ROOT_BITS)? {
        // What coincides at the place itself coincides here within rounding.
        let z = disc.center.to_f64();
        match roots.iter_mut().find(|(known, _)| magnitude(*known - z) <= ON_AXIS * magnitude(z)) {
            Some((_, multiplicity)) => *multiplicity += disc.multiplicity,
            None => roots.push((z, disc.multiplicity)),
        }
    }
    // At the origin the knob's own rounding remains, far below every other pole.
    let largest = roots.iter().map(|(z, _)| magnitude(*z)).fold(0.0, f64::max);
    let at_origin = place.contacts.contains(&Contact::Origin);
    let is_origin = |z: &Complex<f64>| magnitude(*z) == 0.0 || (at_origin && magnitude(*z) <= ORIGIN * largest);
    let on_axis = |z: &Complex<f64>| is_origin(z) || libm::fabs(z.re) <= ON_AXIS * magnitude(*z);
    let sum =
        |wanted: &dyn Fn(&Complex<f64>) -> bool| roots.iter().filter(|(z, _)| wanted(z)).map(|(_, m)| m).sum::<usize>();
    let axis = sum(&|z| on_axis(z));
    let real = sum(&|z| is_origin(z) || libm::fabs(z.im) <= ON_AXIS * magnitude(*z));
    let half_plane = HalfPlaneCount { right: sum(&|z| !on_axis(z) && z.re > 0.0), axis };
    let pairs = (p.degree() - real) / 2;
    let repeated = roots.iter().any(|(z, m)| *m > 1 && (axis == 0 || on_axis(z)));
    Ok(Verdict { half_plane, real, pairs, name: name(half_plane, pairs, repeated) })
}

impl Contact {
    /// rad/s, of a pair on the axis.
    pub fn omega(&self) -> Option<f64> {
        match self {
            Self::Axis { omega } => Some(*omega),
            _ => None,
        }
    }
}

impl Verdict {
    /// Whether this is one of the stable characters.
    pub fn is_stable(&self) -> bool {
        matches!(self.name, CharacterName::Overdamped | CharacterName::CriticallyDamped | CharacterName::Underdamped)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use alloc::string::String;

    fn cut(d: &[i64], n: &[i64]) -> Partition {
        let family = Family::new([IntPoly::from_i64(d), IntPoly::from_i64(n)].into()).expect("not zero");
        Partition::new(&family).expect("cut")
    }

    fn edges(p: &Partition) -> Vec<(String, usize, EdgeKind, usize)> {
        let stability = p.stability();
        stability
            .windows(2)
            .map(|pair| {
                let edge = pair[0].to.clone().expect("an inner edge");
                let text = edge.exact.unwrap_or_else(|| alloc::format!("{:.4}", edge.value));
                (text, pair[0].unstable_poles, edge.kind, pair[1].unstable_poles)
            })
            .collect()
    }

    #[test]
    fn a_third_order_loop_crosses_at_the_root_of_77() {
        // 1/(s (s + 7) (s + 11)): stable for 0 < q < 1386.
        let p = cut(&[0, 77, 18, 1], &[1]);
        assert_eq!(
            edges(&p),
            [("0".into(), 1, EdgeKind::OriginCrossing, 0), ("1386".into(), 0, EdgeKind::AxisCrossing, 2)]
        );
        let edge = p.stability()[1].to.clone().expect("an edge");
        assert!(libm::fabs(edge.omega.expect("a frequency") - libm::sqrt(77.0)) < 1e-12);
        assert_eq!((edge.unstable_poles, edge.axis_poles, edge.name), (0, 2, CharacterName::MarginallyStable));
    }

    #[test]
    fn a_bi_proper_loop_loses_a_pole_at_infinity() {
        // (s − 5)(s − 3)/((s + 1)(s + 2)): stable for −2/15 < q < 3/8; the degree drops at −1.
        let p = cut(&[2, 3, 1], &[15, -8, 1]);
        let kinds: Vec<_> = edges(&p).into_iter().map(|e| (e.0, e.2)).collect();
        assert_eq!(
            kinds,
            [
                ("-1".into(), EdgeKind::DegreeDrop),
                ("-2/15".into(), EdgeKind::OriginCrossing),
                ("3/8".replace("3/8", "0.375"), EdgeKind::AxisCrossing)
            ]
        );
        assert!(p.stability()[2].stable);
    }

    #[test]
    fn even_loops_sit_on_the_axis_until_pairs_meet() {
        // (s² + 1)(s² + 4) + q: on the axis from −4 to 9/4.
        let p = cut(&[4, 0, 5, 0, 1], &[1]);
        let found: Vec<_> = p.stability().iter().map(|r| (r.unstable_poles, r.axis_poles)).collect();
        assert_eq!(found, [(1, 2), (0, 4), (2, 0)]);
        assert_eq!(p.stability()[1].to.clone().expect("an edge").exact.as_deref(), Some("2.25"));
    }

    #[test]
    fn a_touch_without_crossing_is_an_edge() {
        // D + qN with P(x) = (x − 1)²: D = s³ + 2s, N = s² + 1/… chosen so that q touches at w = 1.
        // F = (s² + 1)(s + 1) + (q − 1)·N(s), N = s² + a s + b: dRe/dq = 0 at s = j for N(j)/F'(j) imaginary.
        let d = IntPoly::from_i64(&[1, 1, 1, 1]);
        // F'(j) = 2j(1 + j) = −2 + 2j; N(j) = (b − 1) + ja must be proportional to (−2 + 2j)·j = −2 − 2j: a = b − 1.
        let n = IntPoly::from_i64(&[3, 2, 1]);
        let family = Family::new([d.minus(&n), n].into()).expect("not zero");
        let p = Partition::new(&family).expect("cut");
        let touching: Vec<_> = p.stability().into_iter().filter_map(|r| r.to).filter(|e| e.touching).collect();
        assert_eq!(touching.len(), 1, "{:?}", edges(&p));
        assert_eq!(touching[0].exact.as_deref(), Some("1"));
        assert_eq!(touching[0].axis_poles, 2);
    }

    #[test]
    fn character_changes_where_real_poles_meet() {
        // (s + 1)(s + 3) + q: two real poles below q = 1.
        let p = cut(&[3, 4, 1], &[1]);
        let found: Vec<_> = p.character().into_iter().map(|r| (r.real_poles, r.pairs, r.name)).collect();
        use CharacterName::{Overdamped, Underdamped, Unstable};
        assert_eq!(found, [(2, 0, Unstable), (2, 0, Overdamped), (0, 1, Underdamped)]);
        let edge = p.character()[1].to.clone().expect("an edge");
        assert_eq!(
            (edge.kind, edge.name, edge.exact.as_deref()),
            (EdgeKind::Breakaway, CharacterName::CriticallyDamped, Some("1"))
        );
    }

    #[test]
    fn a_quadratic_knob_has_the_same_edges_as_its_square() {
        // s³ + 18 s² + 77 s + q²: stable for 0 < q² < 1386, so for q in ±(0, √1386).
        let family =
            Family::new([IntPoly::from_i64(&[0, 77, 18, 1]), IntPoly::default(), IntPoly::from_i64(&[1])].into())
                .expect("not zero");
        let p = Partition::new(&family).expect("cut");
        let values: Vec<_> =
            p.stability().iter().filter_map(|r| r.to.as_ref()).map(|e| libm::round(e.value * 1e6) / 1e6).collect();
        assert_eq!(values, [-37.229021, 0.0, 37.229021]);
        let counts: Vec<_> = p.stability().iter().map(|r| r.unstable_poles).collect();
        assert_eq!(counts, [2, 0, 0, 2]);
        assert!(p.with_meetings);
    }
}
