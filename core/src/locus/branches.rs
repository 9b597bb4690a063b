//! Whole branches, put together from the stretches between meetings.

use super::meetings::Encounters;
use super::position::Position;
use super::stretch::{Arrival, Cluster, End, Lost, Row, Stretch, Track};
use super::system::System;
use super::track::{middle, track};
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

/// Two knob values nearer to each other than this part of them are one end: too few numbers of f64 are between them to
/// follow anything.
const SAME_KNOB: f64 = 1e-14;

/// Part of the knob at an end below which f64 hardly tells the distance from it.
const BLUR: f64 = 8.0 * f64::EPSILON;

/// Meetings at one end that are nearer to each other than this part of their size are one.
const SAME_PLACE: f64 = 1e-6;

/// Poles and zeros nearer to each other than this part of their size are found anew to [`CROWDED_BITS`].
const CROWDED: f64 = 1e-5;

/// Relative radius of crowded poles and zeros, in bits: what a [`Position`] holds, and a little more.
const CROWDED_BITS: i64 = 110;

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
    let open_loop = OpenLoop::new(input)?;
    let system = match family.affine() {
        Some((d, n)) => {
            System::factored(d, n, written_out(&open_loop.poles), written_out(&open_loop.zeros), sign.factor())
        }
        None => System::expanded(family, sign.factor())?,
    };
    let pixels = Pixels::new(input.view);
    let ends = ends(input, &open_loop, sign);
    let mut tracks = Vec::with_capacity(ends.len() - 1);
    for pair in ends.windows(2) {
        tracks.push(followed(input, &system, &pixels, (&pair[0], &pair[1]), sign).ok()?);
    }
    Some(Weaver { ends: &ends, tracks: &tracks, sign }.weave())
}

/// Where the branches begin and end, with multiplicities.
struct OpenLoop {
    poles: Vec<(Position, usize)>,
    zeros: Vec<(Position, usize)>,
}

impl OpenLoop {
    /// The places as they are known; anew and more precisely where two of them are near each other.
    fn new(input: &LocusInput<'_>) -> Option<Self> {
        let family = input.family;
        let all: Vec<&Root> = input.poles.iter().chain(input.zeros).collect();
        let crowded = all.iter().enumerate().any(|(i, a)| {
            all[..i].iter().any(|b| (a.re - b.re).abs() + (a.im - b.im).abs() < CROWDED * (a.re.abs() + a.im.abs()))
        });
        let places = |part: &IntPoly, roots: &[Root]| -> Option<Vec<(Position, usize)>> {
            if crowded {
                let discs = enclose_all(part, CROWDED_BITS).ok()?;
                return Some(discs.iter().map(|disc| (Position::nearest(&disc.center), disc.multiplicity)).collect());
            }
            Some(roots.iter().map(|r| (Position::new(Complex::new(r.re, r.im)), r.multiplicity)).collect())
        };
        let (first, last) = (&family.parts[0], &family.parts[family.knob_degree()]);
        Some(Self { poles: places(first, input.poles)?, zeros: places(last, input.zeros)? })
    }
}

/// Every place as often as it counts.
fn written_out(places: &[(Position, usize)]) -> Vec<Position> {
    places.iter().flat_map(|(s, multiplicity)| core::iter::repeat_n(*s, *multiplicity)).collect()
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
    let inside = |q: f64| q > ends.0.knob + ends.0.blur && q < ends.1.knob - ends.1.blur;
    let wanted = input.partition.places.iter().map(Place::value).chain(input.encounters.close_calls.iter().copied());
    stretch.stops = wanted.map(|q| sign.factor() * q).filter(|q| inside(*q)).collect();
    let polynomial = input.family.at_dyadic(&Dyadic::from_f64(signed).ok_or(Lost)?);
    stretch.real = real_poles(input, signed).ok_or(Lost)?;
    let (stripped, zeros) = polynomial.without_zero_roots();
    let mut first = approximations(&stripped);
    first.resize(first.len() + zeros, Complex::new(0.0, 0.0));
    let first: Vec<Position> = first.into_iter().map(Position::new).collect();
    track(system, &stretch, pixels, &first).or_else(|Lost| {
        let discs = enclose_all(&polynomial, ROOT_BITS).map_err(|_| Lost)?;
        let enclosed: Vec<Position> = discs.iter().map(|disc| Position::nearest(&disc.center)).collect();
        track(system, &stretch, pixels, &enclosed)
    })
}

/// The number of moving real poles at a knob value between two meetings.
fn real_poles(input: &LocusInput<'_>, knob: f64) -> Option<usize> {
    let index = input.partition.places.iter().filter(|place| place.value() < knob).count();
    input.partition.ranges[index].real.checked_sub(count_real(&input.family.fixed).ok()?)
}

/// The ends of all stretches, from knob 0 to infinity.
fn ends(input: &LocusInput<'_>, open_loop: &OpenLoop, sign: KnobSign) -> Vec<End> {
    let family = input.family;
    let order = family.moving_order();
    let at_infinity = |part: &IntPoly| order - part.degree();
    let of_places = |places: &[(Position, usize)]| -> Vec<Cluster> {
        let upper = places.iter().filter(|(s, _)| s.rounded().im >= 0.0);
        upper.map(|(s, multiplicity)| Cluster { s: *s, multiplicity: *multiplicity, turn: None }).collect()
    };
    let (first, last) = (&family.parts[0], &family.parts[family.knob_degree()]);
    let mut ends = Vec::new();
    let end = |knob: f64, clusters: Vec<Cluster>, at_infinity: usize, others_stay: bool| End {
        knob,
        blur: if knob.is_finite() { BLUR * knob } else { 0.0 },
        clusters,
        others_stay,
        at_infinity,
    };
    // F(s, 0) vanishes where the knob is a factor of the whole; the poles then come from infinity or nowhere.
    ends.push(end(0.0, of_places(&open_loop.poles), at_infinity(first), false));
    let mut inner: Vec<End> = Vec::new();
    for meeting in &input.encounters.meetings {
        let knob = sign.factor() * meeting.knob;
        let turn = (!meeting.is_true()).then(|| if sign.factor() * meeting.miss > 0.0 { 1 } else { -1 });
        let cluster = Cluster { s: Position::new(meeting.s), multiplicity: meeting.multiplicity, turn };
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
                last.blur += 4.0 * (next.knob - last.knob);
                next.clusters.into_iter().for_each(|cluster| join(&mut last.clusters, cluster));
                last.at_infinity += next.at_infinity;
            }
            _ => ends.push(next),
        }
    }
    ends.push(end(f64::INFINITY, of_places(&open_loop.zeros), at_infinity(last), false));
    ends
}

/// Takes one more cluster in. Where poles meet twice in the same place they are the same poles, and come out as they went in.
fn join(clusters: &mut Vec<Cluster>, new: Cluster) {
    let near = |old: &&mut Cluster| magnitude(old.s.minus(new.s)) <= SAME_PLACE * magnitude(new.s.rounded());
    match clusters.iter_mut().find(near) {
        Some(old) => {
            old.multiplicity = old.multiplicity.max(new.multiplicity);
            old.turn = old.turn.zip(new.turn).map(|(a, b)| a + b);
        }
        None => clusters.push(new),
    }
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
                branch.points.extend(
                    track.rows.iter().map(|row| self.point(row.poles[strand.carried].s.rounded(), *strand, row.knob)),
                );
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
                    let same_side = cluster.s.is_real() || other.mirrored == strand.mirrored;
                    same_side.then(|| (i, self.turned_away(k, a, other.carried, strand.carried)))
                }
                (Arrival::Place(a), Arrival::Place(b)) if other.mirrored == strand.mirrored => {
                    Some((i, magnitude(a - b)))
                }
                _ => None,
            }
        };
        open.iter().enumerate().filter_map(distance).min_by(|a, b| a.1.total_cmp(&b.1)).map(|(i, _)| i)
    }

    /// How badly two strands through a near miss fit together: the angle, in radians, between the way to the other pole
    /// behind it and what it should have become. With poles that would meet at q* = q₀ + jε, the square of that way goes like
    /// q − q*, which turns by half a circle on one side of 0, and the way itself by a quarter.
    fn turned_away(&self, k: usize, number: usize, before: usize, after: usize) -> f64 {
        let (tracks, cluster) = ((&self.tracks[k - 1], &self.tracks[k]), &self.ends[k].clusters[number]);
        let (Some(turn), Some(last), Some(first)) = (cluster.turn, tracks.0.rows.last(), tracks.1.rows.first()) else {
            return 0.0;
        };
        let way_to_other = |row: &Row, arrivals: &[Arrival], own: usize| {
            let other = (0..arrivals.len()).find(|i| *i != own && arrivals[*i] == Arrival::Cluster(number))?;
            Some(row.poles[other].s.minus(row.poles[own].s))
        };
        let ways = (way_to_other(last, &tracks.0.outer, before), way_to_other(first, &tracks.1.inner, after));
        let (Some(way_in), Some(way_out)) = ways else { return 0.0 };
        (way_out / (way_in * Complex::new(0.0, 1.0).powi(turn))).argument().abs()
    }

    fn end_point(&self, end: usize, arrival: Arrival, strand: Strand) -> Option<BranchPoint> {
        let end = &self.ends[end];
        match arrival {
            Arrival::Cluster(number) => Some(self.point(end.clusters[number].s.rounded(), strand, end.knob)),
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
        if !pole.s.is_real() {
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
    fn repeated_complex_poles_are_left_on_both_signs() {
        // (s² + 2s + 2)² (s + 3)
        let d = IntPoly::from_i64(&[2, 2, 1]);
        let d = d.times(&d).times(&IntPoly::from_i64(&[3, 1]));
        let coefficients: Vec<i64> =
            d.coefficients().iter().map(|c| i64::try_from(c.clone()).expect("short")).collect();
        for sign in KnobSign::BOTH {
            assert_eq!(followed_branches(&coefficients, &[1], sign).len(), 5);
        }
    }

    #[test]
    fn a_pole_passes_others_that_hardly_move() {
        // 10^18 (s + 1)(s + 2) + 1 + q·10^18 s (s + 1)(s + 2): the pole near −1/q comes within 10^-9 of those near −1 and −2.
        let e18 = 1_000_000_000_000_000_000;
        for sign in KnobSign::BOTH {
            let branches = followed_branches(&[2 * e18 + 1, 3 * e18, e18], &[0, 2 * e18, 3 * e18, e18], sign);
            assert_eq!(branches.len(), 3);
            let ends = branches.iter().filter_map(|branch| branch.points.last());
            let mut places: Vec<f64> = ends.map(|end| libm::round(end.re)).collect();
            places.sort_by(f64::total_cmp);
            assert_eq!(places, [-2.0, -1.0, 0.0]);
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
