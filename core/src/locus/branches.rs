//! Whole branches, put together from the stretches between meetings.

use super::meetings::Encounters;
use super::system::System;
use super::track::{Arrival, Cluster, End, Lost, Stretch, Track, middle, track};
use super::view::Pixels;
use super::{Branch, BranchPoint};
use crate::exact::complex_roots::{ROOT_BITS, approximations, enclose_all};
use crate::exact::real_roots::count_real;
use crate::exact::{Dyadic, IntPoly};
use crate::numerics::magnitude;
use crate::ranges::{Contact, Family, Partition, Place};
use crate::record::{KnobSign, Root, View};
use alloc::vec::Vec;
use nalgebra::{Complex, ComplexField};

/// Two knob values nearer to each other than this part of them are one end: f64 has no number between.
const SAME_KNOB: f64 = 2.0 * f64::EPSILON;

/// What the tracking needs to know about a loop.
pub struct LocusInput<'a> {
    /// The moving part and the fixed one.
    pub family: &'a Family,
    /// Places of the knob.
    pub partition: &'a Partition,
    /// Where branches meet and come near each other.
    pub encounters: &'a Encounters,
    /// Fixed modes.
    pub fixed: &'a [Root],
    /// Roots of the moving part at knob 0.
    pub poles: &'a [Root],
    /// Roots of the moving part at infinite knob.
    pub zeros: &'a [Root],
    /// The default view.
    pub view: View,
}

/// The branches of one half of the locus, those that stand still included. None where they could not be followed with
/// certainty.
pub fn branches(input: &LocusInput<'_>, sign: KnobSign) -> Option<Vec<Branch>> {
    let mut all = standing(input.fixed, sign);
    let moves = input.family.knob_degree() > 0 && input.family.moving_order() > 0;
    if moves {
        all.extend(moving(input, sign)?);
    }
    Some(all)
}

/// Fixed modes: the same point at every knob value.
fn standing(fixed: &[Root], sign: KnobSign) -> Vec<Branch> {
    let branch = |root: &Root| {
        let point = |knob: f64| BranchPoint { re: root.re, im: root.im, knob };
        Branch { sign, points: [point(0.0), point(sign.factor() * f64::INFINITY)].into() }
    };
    fixed.iter().flat_map(|root| core::iter::repeat_n(branch(root), root.multiplicity)).collect()
}

fn moving(input: &LocusInput<'_>, sign: KnobSign) -> Option<Vec<Branch>> {
    let family = input.family;
    let system = match family.affine() {
        Some((d, n)) => System::factored(d, n, input.poles, input.zeros, sign.factor()),
        None => System::expanded(family, sign.factor())?,
    };
    let pixels = Pixels::new(input.view);
    let ends = ends(input, sign);
    let mut tracks = Vec::with_capacity(ends.len() - 1);
    for pair in ends.windows(2) {
        tracks.push(followed(input, &system, &pixels, (&pair[0], &pair[1]), sign).ok()?);
    }
    Some(Weaver { ends: &ends, tracks: &tracks, sign }.weave())
}

/// Follows one stretch: from f64 approximations, and where these are too poor from enclosed roots.
fn followed(
    input: &LocusInput<'_>,
    system: &System,
    pixels: &Pixels,
    ends: (&End, &End),
    sign: KnobSign,
) -> Result<Track, Lost> {
    let mut stretch = Stretch { inner: ends.0.clone(), outer: ends.1.clone(), real: 0, stops: Vec::new() };
    let knob = middle(system, &stretch);
    let signed = sign.factor() * knob;
    let inside = |q: f64| q > ends.0.knob && q < ends.1.knob;
    let wanted = input.partition.places.iter().map(Place::value).chain(input.encounters.close_calls.iter().copied());
    stretch.stops = wanted.map(|q| sign.factor() * q).filter(|q| inside(*q)).collect();
    let polynomial = input.family.at_dyadic(&Dyadic::from_f64(signed).ok_or(Lost)?);
    stretch.real = real_poles(input, signed).ok_or(Lost)?;
    let (stripped, zeros) = polynomial.without_zero_roots();
    let mut first = approximations(&stripped);
    first.resize(first.len() + zeros, Complex::new(0.0, 0.0));
    track(system, &stretch, pixels, &first).or_else(|Lost| {
        let discs = enclose_all(&polynomial, ROOT_BITS).map_err(|_| Lost)?;
        let enclosed: Vec<Complex<f64>> = discs.iter().map(|disc| disc.center.to_f64()).collect();
        track(system, &stretch, pixels, &enclosed)
    })
}

/// The number of moving real poles at a knob value between two meetings.
fn real_poles(input: &LocusInput<'_>, knob: f64) -> Option<usize> {
    let index = input.partition.places.iter().filter(|place| place.value() < knob).count();
    input.partition.ranges[index].real.checked_sub(count_real(&input.family.fixed).ok()?)
}

/// The ends of all stretches, from knob 0 to infinity.
fn ends(input: &LocusInput<'_>, sign: KnobSign) -> Vec<End> {
    let family = input.family;
    let order = family.moving_order();
    let at_infinity = |part: &IntPoly| order - part.degree();
    let of_roots = |roots: &[Root]| -> Vec<Cluster> {
        let upper = roots.iter().filter(|r| r.im >= 0.0);
        upper.map(|r| Cluster { s: Complex::new(r.re, r.im), multiplicity: r.multiplicity, turn: 0.0 }).collect()
    };
    let (first, last) = (&family.parts[0], &family.parts[family.knob_degree()]);
    let mut ends = Vec::new();
    let end = |knob: f64, clusters: Vec<Cluster>, at_infinity: usize, others_stay: bool| End {
        knob,
        clusters,
        others_stay,
        at_infinity,
    };
    // F(s, 0) vanishes where the knob is a factor of the whole; the poles then come from infinity or nowhere.
    ends.push(end(0.0, of_roots(input.poles), at_infinity(first), false));
    let mut inner: Vec<End> = Vec::new();
    for meeting in &input.encounters.meetings {
        let knob = sign.factor() * meeting.knob;
        let turn = sign.factor() * meeting.miss;
        let cluster = Cluster { s: meeting.s, multiplicity: meeting.multiplicity, turn };
        inner.push(end(knob, [cluster].into(), 0, true));
    }
    for place in &input.partition.places {
        if place.contacts.iter().any(|c| matches!(c, Contact::DegreeDrop)) {
            let left = place.exact.as_ref().map_or(order - 1, |q| family.at(q).degree());
            inner.push(end(sign.factor() * place.value(), Vec::new(), order - left, true));
        }
    }
    inner.retain(|e| e.knob > 0.0 && e.knob.is_finite());
    inner.sort_by(|a, b| a.knob.total_cmp(&b.knob));
    for next in inner {
        match ends.last_mut() {
            Some(last) if last.knob > 0.0 && next.knob - last.knob <= SAME_KNOB * next.knob => {
                last.clusters.extend(next.clusters);
                last.at_infinity += next.at_infinity;
            }
            _ => ends.push(next),
        }
    }
    ends.push(end(f64::INFINITY, of_roots(input.zeros), at_infinity(last), false));
    ends
}

/// A pole of one stretch with its mirror told apart.
#[derive(Clone, Copy, PartialEq)]
struct Strand {
    carried: usize,
    mirrored: bool,
}

/// Joins the stretches' tracks to branches.
struct Weaver<'a> {
    ends: &'a [End],
    tracks: &'a [Track],
    sign: KnobSign,
}

impl Weaver<'_> {
    fn weave(&self) -> Vec<Branch> {
        let mut finished = Vec::new();
        let mut open: Vec<(Strand, Branch)> = Vec::new();
        for (k, track) in self.tracks.iter().enumerate() {
            open = self.joined(k, track, open, &mut finished);
            for (strand, branch) in &mut open {
                branch
                    .points
                    .extend(track.rows.iter().map(|row| self.point(row.poles[strand.carried].s, *strand, row.knob)));
            }
        }
        let last = self.ends.len() - 1;
        if let Some(track) = self.tracks.last() {
            for (strand, branch) in &mut open {
                branch.points.extend(self.end_point(last, track.outer[strand.carried], *strand));
            }
        }
        finished.extend(open.into_iter().map(|(_, branch)| branch));
        finished
    }

    /// The branches that enter stretch k, each with its strand there and its vertex at the end between.
    fn joined(
        &self,
        k: usize,
        track: &Track,
        mut open: Vec<(Strand, Branch)>,
        finished: &mut Vec<Branch>,
    ) -> Vec<(Strand, Branch)> {
        let mut entering = Vec::new();
        for strand in strands(track) {
            let arrival = track.inner[strand.carried];
            let matching = if k == 0 { None } else { self.best_match(k, &open, arrival, strand) };
            let mut branch = match matching {
                Some(i) => open.swap_remove(i).1,
                None => Branch { sign: self.sign, points: Vec::new() },
            };
            branch.points.extend(self.end_point(k, arrival, strand));
            entering.push((strand, branch));
        }
        // What finds no continuation has gone to infinity.
        finished.extend(open.into_iter().map(|(_, branch)| branch));
        entering
    }

    /// Among the branches of the stretch before end k, the one that arrives there where this strand begins.
    fn best_match(&self, k: usize, open: &[(Strand, Branch)], arrival: Arrival, strand: Strand) -> Option<usize> {
        let before = &self.tracks[k - 1];
        let distance = |(i, (other, _)): (usize, &(Strand, Branch))| -> Option<(usize, f64)> {
            match (before.outer[other.carried], arrival) {
                // At a point off the axis mirrored strands belong to the mirrored point.
                (Arrival::Cluster(a), Arrival::Cluster(b)) if a == b => {
                    let cluster = self.ends[k].clusters[a];
                    let same_side = cluster.s.im == 0.0 || other.mirrored == strand.mirrored;
                    same_side.then(|| (i, self.turned_away(k, &cluster, other.carried, strand.carried)))
                }
                (Arrival::Place(a), Arrival::Place(b)) if other.mirrored == strand.mirrored => {
                    Some((i, magnitude(a - b)))
                }
                _ => None,
            }
        };
        open.iter().enumerate().filter_map(distance).min_by(|a, b| a.1.total_cmp(&b.1)).map(|(i, _)| i)
    }

    /// How badly two strands through a near miss fit together: the angle, in radians, by which the way out differs from
    /// the way in turned by a quarter. q − q* turns by half a circle on one side of 0, and the distance of the two poles
    /// goes like its root. At a true meeting every pairing is as good as another.
    fn turned_away(&self, k: usize, cluster: &Cluster, before: usize, after: usize) -> f64 {
        let ends = (self.tracks[k - 1].rows.last(), self.tracks[k].rows.first());
        let (Some(last), Some(first)) = ends else { return 0.0 };
        if cluster.turn == 0.0 {
            return 0.0;
        }
        let way_in = last.poles[before].s - cluster.s;
        let way_out = first.poles[after].s - cluster.s;
        let quarter = Complex::new(0.0, libm::copysign(1.0, cluster.turn));
        (way_out / (way_in * quarter)).argument().abs()
    }

    fn end_point(&self, end: usize, arrival: Arrival, strand: Strand) -> Option<BranchPoint> {
        let end = &self.ends[end];
        match arrival {
            Arrival::Cluster(number) => Some(self.point(end.clusters[number].s, strand, end.knob)),
            Arrival::Place(s) => Some(self.point(s, strand, end.knob)),
            Arrival::Infinity => None,
        }
    }

    fn point(&self, s: Complex<f64>, strand: Strand, knob: f64) -> BranchPoint {
        let im = if strand.mirrored { -s.im } else { s.im };
        // Plus zero, so that the negative half begins at 0 and not at −0.
        BranchPoint { re: s.re, im, knob: self.sign.factor() * knob + 0.0 }
    }
}

/// All poles of a track, mirrored ones included.
fn strands(track: &Track) -> Vec<Strand> {
    let Some(row) = track.rows.first() else { return Vec::new() };
    let mut strands = Vec::new();
    for (carried, pole) in row.poles.iter().enumerate() {
        strands.push(Strand { carried, mirrored: false });
        if pole.s.im > 0.0 {
            strands.push(Strand { carried, mirrored: true });
        }
    }
    strands
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::exact::complex_roots::roots;
    use crate::locus::{encounters, view};
    use crate::record::Point;

    /// The branches of D + q·N, as (start, end) pairs, of one sign.
    fn followed_branches(d: &[i64], n: &[i64], sign: KnobSign) -> Vec<Branch> {
        let family = Family::new([IntPoly::from_i64(d), IntPoly::from_i64(n)].into()).expect("not zero");
        let partition = Partition::new(&family).expect("cut");
        let encounters = encounters(&family, &partition).expect("found");
        let (poles, zeros) = (roots(&family.parts[0]).expect("poles"), roots(&family.parts[1]).expect("zeros"));
        let points = poles.iter().chain(&zeros).map(|r| Point { re: r.re, im: r.im });
        let view = view::frame(points);
        let input = LocusInput {
            family: &family,
            partition: &partition,
            encounters: &encounters,
            fixed: &[],
            poles: &poles,
            zeros: &zeros,
            view,
        };
        branches(&input, sign).expect("followed")
    }

    #[test]
    fn branches_that_turn_away_from_each_other_are_not_joined_across_the_gap() {
        // 10^5 (s + 1.00001)/((s + 1)(s + 2)(s + 5)), negative knob: no pole is ever between −1.00001 and −1.
        let d = IntPoly::from_i64(&[10, 17, 8, 1]).times(&IntPoly::from_i64(&[100_000]));
        let coefficients: Vec<i64> =
            d.coefficients().iter().map(|c| i64::try_from(c.clone()).expect("short")).collect();
        for branch in followed_branches(&coefficients, &[100_001, 100_000], KnobSign::Negative) {
            let real: Vec<f64> = branch.points.iter().filter(|p| p.im == 0.0).map(|p| p.re).collect();
            let crosses = real.windows(2).any(|pair| (pair[0] < -1.000_005) != (pair[1] < -1.000_005));
            assert!(!crosses, "{real:?}");
        }
    }

    #[test]
    fn a_zero_next_to_a_pole_takes_its_branch_on_both_signs() {
        // 1000 (s + 1.001)/((s + 1)(s + 2)(s + 5))
        for sign in KnobSign::BOTH {
            assert_eq!(followed_branches(&[10, 17, 8, 1], &[1001, 1000], sign).len(), 3);
        }
    }
}
