//! The ranges of the knob of a sampled loop: where poles reach the unit circle, and how many lie outside of it.
//!
//! With z = (1 + v)/(1 − v) the unit circle is the imaginary axis of v, and its outside the right half plane; a pole at
//! infinity is one at v = 1, which is outside, as it should be. Coefficients are enclosed, so that two things differ from
//! the exact ranges of a continuous loop:
//!
//! - The polynomial in x = tan²(θ/2) whose roots are the crossings lies between two integer polynomials. Where both have
//!   the same sign nothing happens; the remaining zones are narrow, and each is a crossing if the signs beside it differ.
//! - A count holds for every member of an enclosure if it holds for the middle and no member has a root on the axis, for
//!   roots move continuously: |F(jw)|² ≥ (error)² for all w, which one more count of real roots shows.

use super::enclosed::Enclosed;
use super::factored::Factored;
use super::family::{FIRST_BITS, MAXIMUM_BITS, SampledFamily, SampledLoop, Trouble, at};
use crate::exact::complex_roots::roots;
use crate::exact::gcd::squarefree_part;
use crate::exact::half_plane::{HalfPlaneCount, count};
use crate::exact::real_roots::positive_roots;
use crate::exact::{Dyadic, IntPoly, Interval, RealRoot};
use crate::ranges::{Contact, Partition, Place, Verdict, merge, samples};
use crate::record::CharacterName;
use alloc::vec;
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_ratio::RBig;

/// Edges are enclosed at least this narrowly, relative to their value: below the last bit of f64.
const EDGE_BITS: i64 = 60;

/// Bits of the middles from which poles and curves are computed: digits enough for eight poles within 1e-4 of each other.
const DRAWN_BITS: usize = 256;

/// Zones of x are refined to these many bits, one after the other, until the edge is narrow.
const ZONE_BITS: [i64; 4] = [80, 120, 200, 400];

/// Up to this order the poles are counted in every range, which needs no theorem on crossings; above, in the first and the
/// last one, with the crossings between (a count at order 40 takes some milliseconds).
const DIRECT_ORDER: usize = 12;

/// A pole of the middle polynomial nearer to the unit circle than this is on it, at an edge where something must be.
const ON_CIRCLE: f64 = 1e-9;

/// Two poles on the circle nearer than this are one that is repeated.
const REPEATED: f64 = 1e-6;

/// The ranges, and the family they were found from.
#[derive(Clone, Debug)]
pub struct SampledRanges {
    /// The line of the knob; the half planes of its verdicts are outside of the circle (`right`) and on it (`axis`).
    pub partition: Partition,
    /// The characteristic polynomial.
    pub family: SampledFamily,
    /// Knob values, in f64, at which a pair comes so near to the circle that touching could not be told from passing by.
    pub unresolved: Vec<f64>,
    /// Bits of the fixed point that were needed.
    pub bits: usize,
    /// The loop.
    pub input: SampledLoop,
    /// The parts of the family with the unit circle as the imaginary axis.
    pub on_the_axis: Vec<Enclosed>,
    /// The middles of the parts in z over one power of two, for what is drawn.
    pub in_z: Vec<IntPoly>,
    /// The middle of the factor that no knob moves.
    pub fixed_in_z: IntPoly,
}

/// Finds the ranges.
///
/// # Errors
/// Bad input; a cap; or [`Trouble::Undecided`] where even the highest precision leaves a sign open.
pub fn ranges(input: &SampledLoop) -> Result<SampledRanges, Trouble> {
    ranges_from(input, FIRST_BITS)
}

/// The same, with fewer bits of the fixed point at the first try.
pub(super) fn ranges_from(input: &SampledLoop, first_bits: usize) -> Result<SampledRanges, Trouble> {
    let mut bits = first_bits;
    loop {
        match ranges_at(input, bits) {
            Err(Trouble::Undecided) if 2 * bits <= MAXIMUM_BITS => bits *= 2,
            // A contact that more digits did not resolve is reported as such.
            Ok(found) if !found.unresolved.is_empty() && 2 * bits <= MAXIMUM_BITS => bits *= 2,
            other => return other,
        }
    }
}

fn ranges_at(input: &SampledLoop, bits: usize) -> Result<SampledRanges, Trouble> {
    let family = input.family(bits)?;
    let parts = family.on_the_axis();
    let period = input.period.to_f64().value();
    let mut found = match &parts[..] {
        [_] => Places::default(),
        [d, n] => affine(&family, d, n, period)?,
        _ => super::knob_powers::places(&family, &parts, period)?,
    };
    let places = merge(core::mem::take(&mut found.places));
    let fixed = family.fixed_count();
    let counted = |q: &RBig| Ok::<_, Trouble>(certain_count(&at(&parts, q))?.plus(fixed));
    let samples = samples(&places);
    let by_crossings = if family.order() > DIRECT_ORDER && !found.steps.is_empty() {
        let (first, last) = (counted(&samples[0])?, counted(&samples[samples.len() - 1])?);
        counts_by_crossings(&places, &found.steps, first, last)
    } else {
        None
    };
    let between = match by_crossings {
        Some(counts) => counts,
        None => samples.iter().map(counted).collect::<Result<Vec<_>, _>>()?,
    };
    let at_places = places
        .iter()
        .enumerate()
        .map(|(i, place)| verdict_at(&family, place, between[i], between[i + 1]))
        .collect::<Result<Vec<_>, _>>()?;
    let proven = places.iter().map(|place| found.proven && !place.meets_any(&found.unresolved)).collect();
    let ranges = between.into_iter().map(|count| verdict(count, false)).collect();
    let unresolved = found.unresolved.iter().map(|bracket| bracket.midpoint().to_f64()).collect();
    let partition = Partition::from_parts(places, ranges, at_places, proven);
    let in_z = drawn(&family.parts);
    let fixed_in_z = family.fixed_in_z();
    Ok(SampledRanges {
        partition,
        family,
        unresolved,
        bits,
        input: input.clone(),
        on_the_axis: parts,
        in_z,
        fixed_in_z,
    })
}

/// The middles over one power of two.
pub(super) fn drawn(parts: &[Factored]) -> Vec<IntPoly> {
    let middles: Vec<_> = parts.iter().map(|part| part.middle(DRAWN_BITS)).collect();
    let exponent = middles.iter().filter(|(p, _)| !p.is_zero()).map(|(_, e)| *e).min().unwrap_or(0);
    let aligned = |(p, e): &(IntPoly, i64)| {
        if p.is_zero() {
            IntPoly::default()
        } else {
            p.times(&IntPoly::new([IBig::ONE << ((e - exponent) as usize)].into()))
        }
    };
    middles.iter().map(aligned).collect()
}

impl SampledRanges {
    /// Poles outside of the unit circle (`right`) and on it (`axis`) at a knob value that is not exactly an edge; proven.
    ///
    /// # Errors
    /// [`Trouble::Undecided`] too near to an edge.
    pub fn count_at(&self, q: &RBig) -> Result<HalfPlaneCount, Trouble> {
        Ok(certain_count(&at(&self.on_the_axis, q))?.plus(self.family.fixed_count()))
    }

    /// F in z at a knob value, times a positive number; middles only.
    pub fn characteristic_at(&self, q: &RBig) -> IntPoly {
        let parts: Vec<Enclosed> = self.in_z.iter().cloned().map(Enclosed::exact).collect();
        at(&parts, q).center.times(&self.fixed_in_z)
    }
}

/// Places, before they are put in order.
#[derive(Debug)]
pub(super) struct Places {
    pub(super) places: Vec<Place>,
    /// Where a pair touches the circle or just misses it.
    pub(super) unresolved: Vec<Interval>,
    /// How many poles leave the circle as the knob grows past a bracket; empty where that is not known.
    pub(super) steps: Vec<(Interval, i64)>,
    /// Whether every place is proven, and that there is no other.
    pub(super) proven: bool,
}

impl Default for Places {
    fn default() -> Self {
        Self { places: Vec::new(), unresolved: Vec::new(), steps: Vec::new(), proven: true }
    }
}

impl Place {
    fn meets_any(&self, brackets: &[Interval]) -> bool {
        brackets.iter().any(|bracket| bracket.meets(&self.bracket))
    }
}

/// The counts in all ranges from those in the first one: every crossing adds or takes away its poles. None where the last
/// one does not agree.
fn counts_by_crossings(
    places: &[Place],
    steps: &[(Interval, i64)],
    first: HalfPlaneCount,
    last: HalfPlaneCount,
) -> Option<Vec<HalfPlaneCount>> {
    let mut counts = vec![first];
    let mut right = first.right as i64;
    for place in places {
        right += steps.iter().filter(|(bracket, _)| bracket.meets(&place.bracket)).map(|(_, step)| step).sum::<i64>();
        counts.push(HalfPlaneCount { right: usize::try_from(right).ok()?, axis: first.axis });
    }
    (counts.last() == Some(&last)).then_some(counts)
}

/// The places of D + q·N, given on the axis.
fn affine(family: &SampledFamily, d: &Enclosed, n: &Enclosed, period: f64) -> Result<Places, Trouble> {
    let mut found = Places::default();
    let order = family.order();
    let ((de, d_odd), (ne, no)) = (d.axis_parts(), n.axis_parts());
    let crossing = d_odd.times(&ne).minus(&de.times(&no));
    // As q grows past its value there, a pair leaves to the right where the crossing polynomial falls through zero; at the
    // ends of the axis one pole by its sign beside them.
    let (lowest, leading) = (crossing.center.lowest_sign(), crossing.center.leading_sign());
    let mut at_end = |d: &Enclosed, n: &Enclosed, i: usize, contact: Contact, step: i32| {
        if let Some(place) = quotient_place(d, n, i, contact)? {
            found.steps.push((place.bracket.clone(), i64::from(step)));
            found.places.push(place);
        }
        Ok::<_, Trouble>(())
    };
    at_end(d, n, 0, Contact::Origin, -lowest)?;
    if order > 0 {
        at_end(d, n, order, Contact::Alternation, leading)?;
        let in_z = [0, 1].map(|k| family.parts[k].expanded());
        at_end(&in_z[0], &in_z[1], order, Contact::DegreeDrop, 0)?;
    }
    let quotients = [(&de, &ne), (&d_odd, &no)];
    let mut at_zero = 0;
    let mut at_infinity = 0;
    for mut zone in zones(&crossing)? {
        let step = if zone.crosses { 2 * i64::from(zone.sign_before) } else { 0 };
        match zone.knob(&quotients)? {
            Knob::Finite(bracket) => {
                if !zone.crosses {
                    found.unresolved.push(bracket.clone());
                }
                found.steps.push((bracket.clone(), step));
                found.places.push(Place::within(bracket, zone.contact(period)));
            }
            Knob::Zero => {
                at_zero += 1;
                let place = Place::exactly(RBig::ZERO, zone.contact(period));
                found.steps.push((place.bracket.clone(), step));
                found.places.push(place);
            }
            Knob::Infinite => at_infinity += 1,
        }
    }
    // The roots that D and N are known to have on the circle are among those found: where the numbers agree they are these,
    // and the knob is zero, or infinite, without doubt.
    let [d, n] = [&family.parts[0], &family.parts[1]];
    if at_zero == d.circle_pairs && at_infinity == n.circle_pairs { Ok(found) } else { Err(Trouble::Undecided) }
}

/// The place q = −d_i/n_i.
fn quotient_place(d: &Enclosed, n: &Enclosed, i: usize, contact: Contact) -> Result<Option<Place>, Trouble> {
    if n.vanishes_at(i) {
        return Ok(None);
    }
    if d.vanishes_at(i) {
        return if n.coefficient(i).sign().is_some() {
            Ok(Some(Place::exactly(RBig::ZERO, contact)))
        } else {
            Err(Trouble::Undecided)
        };
    }
    let bracket = d.coefficient(i).negated().over(&n.coefficient(i), crate::ranges::EDGE_BITS as usize);
    let narrow = bracket.filter(|bracket| bracket.narrow(EDGE_BITS)).ok_or(Trouble::Undecided)?;
    Ok(Some(Place::within(narrow, contact)))
}

/// Where an enclosed polynomial of x > 0 may vanish.
pub(super) struct Zone {
    /// x lies in here.
    x: Interval,
    /// The sign of every member just below.
    sign_before: i32,
    /// Whether every member changes its sign here.
    pub(super) crosses: bool,
    /// The roots of the two bounds that make up the zone.
    roots: Vec<(usize, RealRoot)>,
    /// The square-free bounds.
    bounds: [IntPoly; 2],
}

enum Knob {
    Finite(Interval),
    Zero,
    Infinite,
}

impl Zone {
    fn refine(&mut self, bits: i64) -> Result<(), Trouble> {
        for (which, root) in &mut self.roots {
            root.refine_to(&self.bounds[*which], bits)?;
        }
        let brackets = self.roots.iter().map(|(_, root)| root.bracket.clone());
        if let Some(hull) = brackets.reduce(|a, b| a.hull(&b)) {
            self.x = hull;
        }
        Ok(())
    }

    /// The knob −d/n over the zone; the quotients agree where both are defined.
    fn knob(&mut self, quotients: &[(&Enclosed, &Enclosed)]) -> Result<Knob, Trouble> {
        let mut last = None;
        for bits in ZONE_BITS {
            self.refine(bits)?;
            let values: Vec<_> =
                quotients.iter().map(|(d, n)| (d.over_interval(&self.x), n.over_interval(&self.x))).collect();
            let mut known: Option<Interval> = None;
            for (d, n) in &values {
                if let Some(q) = d.negated().over(n, crate::ranges::EDGE_BITS as usize) {
                    known = Some(known.map_or(q.clone(), |k| if k.meets(&q) { k.common(&q) } else { k }));
                }
            }
            if let Some(q) = known.clone().filter(|q| q.narrow(EDGE_BITS)) {
                return Ok(if q.sign() == Some(0) { Knob::Zero } else { Knob::Finite(q) });
            }
            last = Some((known, values));
        }
        match last {
            Some((Some(q), _)) if q.sign().is_none() => Ok(Knob::Zero),
            Some((None, values)) if values.iter().any(|(d, _)| d.sign().is_some()) => Ok(Knob::Infinite),
            _ => Err(Trouble::Undecided),
        }
    }

    /// A pair at e^(±jθ), x = tan²(θ/2).
    fn contact(&self, period: f64) -> Contact {
        let x = self.x.midpoint().to_f64();
        Contact::Axis { omega: 2.0 * libm::atan(libm::sqrt(x)) / period }
    }
}

/// The zones of x > 0 in which some member of an enclosure vanishes, ascending.
pub(super) fn zones(p: &Enclosed) -> Result<Vec<Zone>, Trouble> {
    if p.is_zero() {
        return Err(Trouble::Undecided);
    }
    // Coefficients that vanish without doubt at both ends say nothing.
    let first = (0..=p.degree()).find(|i| !p.vanishes_at(*i)).unwrap_or(0);
    let outer = [first, p.degree()];
    if outer.iter().any(|i| !matches!(p.coefficient(*i).sign(), Some(1 | -1))) {
        return Err(Trouble::Undecided);
    }
    let bounds = p.bounds();
    let simple = bounds.each_ref().map(squarefree_part);
    let mut all: Vec<(usize, RealRoot)> = Vec::new();
    for (which, bound) in simple.iter().enumerate() {
        for mut root in positive_roots(bound)? {
            root.refine_to(bound, ZONE_BITS[0])?;
            all.push((which, root));
        }
    }
    all.sort_by(|a, b| a.1.bracket.low.cmp(&b.1.bracket.low));
    Ok(grouped(all, &bounds, &simple))
}

/// Puts roots together between which the sign is open.
fn grouped(all: Vec<(usize, RealRoot)>, bounds: &[IntPoly; 2], simple: &[IntPoly; 2]) -> Vec<Zone> {
    let sign_before = |x: &Dyadic| {
        let [low, high] = bounds.each_ref().map(|bound| bound.sign_at(x));
        (low == high && low != 0).then_some(low)
    };
    let mut found: Vec<Zone> = Vec::new();
    // The sign before the current zone; the lowest coefficient gives the first one.
    let mut sign = bounds[0].lowest_sign();
    let mut group: Vec<(usize, RealRoot)> = Vec::new();
    let mut high: Option<Dyadic> = None;
    let close = |group: Vec<(usize, RealRoot)>, sign_before: i32, after: i32| -> Option<Zone> {
        let x = group.iter().map(|(_, root)| root.bracket.clone()).reduce(|a, b| a.hull(&b))?;
        Some(Zone { x, sign_before, crosses: after != sign_before, roots: group, bounds: simple.clone() })
    };
    for (which, root) in all {
        let gap = high.as_ref().filter(|high| **high < root.bracket.low);
        if let Some(next) = gap.and_then(|high| sign_before(&high.midpoint(&root.bracket.low))) {
            found.extend(close(core::mem::take(&mut group), sign, next));
            sign = next;
        }
        let end = root.bracket.high.clone();
        high = Some(high.map_or(end.clone(), |h| h.max(end)));
        group.push((which, root));
    }
    found.extend(close(group, sign, bounds[0].leading_sign()));
    found
}

/// The count of roots right of the axis for every member of an enclosure in v, whose degree is certain.
pub(super) fn certain_count(p: &Enclosed) -> Result<HalfPlaneCount, Trouble> {
    let degree = p.degree();
    let decided = |i: usize| matches!(p.coefficient(i).sign(), Some(1 | -1));
    if !decided(degree) || !decided(0) || !is_clear_of_the_axis(p)? {
        return Err(Trouble::Undecided);
    }
    Ok(count(&p.center)?)
}

/// Whether |center(jw)| is above the largest error for every w: e² + x·o² > (n + 1)·Σ r_i²·x^i, which bounds
/// (Σ r_i·w^i)² by the inequality of Cauchy and Schwarz.
fn is_clear_of_the_axis(p: &Enclosed) -> Result<bool, Trouble> {
    let (even, odd) = p.center.axis_parts();
    let size = even.times(&even).plus(&odd.times(&odd).times(&IntPoly::from_i64(&[0, 1])));
    let terms = p.degree() + 1;
    let error = p.radius.coefficients().iter().map(|r| r * r * terms).collect();
    let difference = size.minus(&IntPoly::new(error));
    let positive = difference.coefficients().first().is_some_and(|c| *c > IBig::ZERO);
    Ok(positive && difference.leading_sign() > 0 && positive_roots(&squarefree_part(&difference))?.is_empty())
}

/// The word for a count of poles outside of the circle and on it. Real poles and pairs are not told apart here.
fn verdict(count: HalfPlaneCount, repeated: bool) -> Verdict {
    let name = match (count.right, count.axis) {
        (0, 0) => CharacterName::Underdamped,
        (0, _) if !repeated => CharacterName::MarginallyStable,
        _ => CharacterName::Unstable,
    };
    Verdict { half_plane: count, real: 0, pairs: 0, name }
}

/// The verdict at a place.
fn verdict_at(
    family: &SampledFamily,
    place: &Place,
    below: HalfPlaneCount,
    above: HalfPlaneCount,
) -> Result<Verdict, Trouble> {
    let outside = below.right.min(above.right);
    let moved = below.right.abs_diff(above.right);
    let one = |on: usize| verdict(HalfPlaneCount { right: outside, axis: below.axis + on }, false);
    match &place.contacts[..] {
        [Contact::DegreeDrop] => Ok(verdict(below, false)),
        [Contact::Axis { .. }] if moved == 2 && below.axis == 0 => Ok(one(2)),
        [Contact::Origin | Contact::Alternation] if moved == 1 && below.axis == 0 => Ok(one(1)),
        _ => looked_at(family, place),
    }
}

/// Several things at once, or a touch: the roots at the middle of the bracket show what is on the circle.
fn looked_at(family: &SampledFamily, place: &Place) -> Result<Verdict, Trouble> {
    let q = place.exact.clone().unwrap_or_else(|| place.bracket.midpoint().to_rational());
    let all = roots(&family.middle_at(&q))?;
    let size = |r: &crate::record::Root| libm::hypot(r.re, r.im);
    let on: Vec<_> = all.iter().filter(|r| libm::fabs(size(r) - 1.0) <= ON_CIRCLE.max(r.radius)).collect();
    let axis = on.iter().map(|r| r.multiplicity).sum();
    let right = all.iter().filter(|r| size(r) > 1.0 + ON_CIRCLE).map(|r| r.multiplicity).sum();
    let near = |a: &crate::record::Root, b: &crate::record::Root| libm::hypot(a.re - b.re, a.im - b.im) < REPEATED;
    let repeated = on.iter().enumerate().any(|(i, a)| a.multiplicity > 1 || on[..i].iter().any(|b| near(a, b)));
    Ok(verdict(HalfPlaneCount { right, axis }, repeated))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::model::BlockAt;
    use crate::record::EdgeKind;
    use crate::sampled::{Given, KnobRatio, Method};

    fn p(c: &[i64]) -> IntPoly {
        IntPoly::from_i64(c)
    }

    fn rational(n: i64, d: u64) -> RBig {
        RBig::from_parts(n.into(), d.into())
    }

    /// K·above/below as the controller in z.
    fn sampled(controller: (&[i64], &[i64]), plant: (&[i64], &[i64]), period: RBig, delay: RBig) -> SampledLoop {
        SampledLoop {
            controller: KnobRatio { above: [p(&[]), p(controller.0)].into(), below: [p(controller.1)].into() },
            given: Given::InZ,
            plant: BlockAt { above: p(plant.0), below: p(plant.1) },
            sensor: BlockAt { above: p(&[1]), below: p(&[1]) },
            computation: delay,
            controller_delay: RBig::ZERO,
            period,
            plant_delay: RBig::ZERO,
            sensor_delay: RBig::ZERO,
            feedback: IBig::ONE,
        }
    }

    /// Edge values with their kinds, and the counts of poles outside in the ranges.
    fn found(input: &SampledLoop) -> (Vec<(f64, EdgeKind)>, Vec<usize>) {
        let stability = ranges(input).expect("found").partition.stability();
        let edges = stability.iter().filter_map(|r| r.to.as_ref());
        let edges = edges.map(|e| {
            assert!(e.proven, "{e:?}");
            (e.value, e.kind)
        });
        (edges.collect(), stability.iter().map(|r| r.unstable_poles).collect())
    }

    #[test]
    fn an_integral_controller_on_a_lag_has_the_published_limits() {
        // K z/(z − 1) and a hold on 1/(s + 1): 0 < K < 2 (1 + e^−T)/(1 − e^−T). I. Kar, Digital Control System, NPTEL
        // course 108103008, IIT Guwahati (read second hand): 8.165, 4.328, 2.626 for T = 0.5, 1, 2; shared/checks J13.
        for (period, limit) in [
            (rational(1, 2), 8.165_976_330_147_193),
            (rational(1, 1), 4.327_906_827_477_306),
            (rational(2, 1), 2.626_070_570_998_663),
        ] {
            let (edges, counts) = found(&sampled((&[0, 1], &[-1, 1]), (&[1], &[1, 1]), period.clone(), RBig::ZERO));
            let t = period.to_f64().value();
            let formula = 2.0 * (1.0 + libm::exp(-t)) / (1.0 - libm::exp(-t));
            assert_eq!(
                (edges[0].0, edges[0].1, edges[1].1),
                (0.0, EdgeKind::OriginCrossing, EdgeKind::AlternationCrossing)
            );
            assert!((edges[1].0 - formula).abs() < 1e-14 * formula && (formula - limit).abs() < 2e-3, "{edges:?}");
            assert_eq!(counts, [1, 0, 1]);
        }
    }

    #[test]
    fn a_motor_with_a_slow_sampler_has_the_published_limit() {
        // 1/(s (s + 1)), T = 2: K = 1.4556788 (R. C. Dorf, R. H. Bishop, Modern Control Systems, table of maximum gain,
        // from memory: 1.45; shared/checks J03-2).
        let (edges, counts) = found(&sampled((&[1], &[1]), (&[1], &[0, 1, 1]), rational(2, 1), RBig::ZERO));
        let crossing = edges.iter().find(|e| e.1 == EdgeKind::AxisCrossing).expect("a crossing");
        assert!((crossing.0 - 1.455_678_841_855_605_4).abs() < 1e-14, "{edges:?}");
        let index = edges.iter().position(|e| e.1 == EdgeKind::AxisCrossing).expect("found");
        assert_eq!((counts[index], counts[index + 1]), (0, 2));
    }

    #[test]
    fn a_double_integrator_with_a_lead_is_resolved_at_zero() {
        // 1/s², h = 1/10, K (z − 0.9)/(z − 0.2): both poles leave z = 1 together.
        let (edges, counts) = found(&sampled((&[-9, 10], &[-2, 10]), (&[1], &[0, 0, 1]), rational(1, 10), RBig::ZERO));
        let zero = edges.iter().position(|e| e.0 == 0.0).expect("an edge at zero");
        assert_eq!((counts[zero], counts[zero + 1]), (1, 0), "{edges:?} {counts:?}");
        // F at z = −1 is 4·(−1.2·…) with the plant's own zero there: no finite knob puts a pole at −1.
        assert!(edges.iter().all(|e| e.1 != EdgeKind::AlternationCrossing), "{edges:?}");
    }

    #[test]
    fn an_undamped_plant_starts_on_the_circle() {
        // 1/(s² + 4) with a delay of half a period.
        let (edges, counts) = found(&sampled((&[1], &[1]), (&[1], &[4, 0, 1]), rational(1, 5), rational(1, 2)));
        let zero = edges.iter().position(|e| e.0 == 0.0).expect("an edge at zero");
        assert_eq!((edges[zero].1, counts[zero], counts[zero + 1]), (EdgeKind::AxisCrossing, 0, 2), "{edges:?}");
    }

    #[test]
    fn published_polynomials_are_counted() {
        // Roots outside and on the unit circle: shared/checks J14 (I. Kar, NPTEL 108103008, read second hand), J15, J16, J18
        // (K. Ogata, Discrete-Time Control Systems, 2nd ed., Prentice Hall 1995); J17.
        let cases: [(&[i64], usize, usize); 5] = [
            (&[1, 4, 1, 4], 0, 2),
            (&[24, -8, -130, 100], 1, 0),
            (&[-8, 30, 7, -120, 100], 0, 0),
            (&[2, -1, -11, 10], 0, 1),
            (&[8, -10, -17, 10], 1, 0),
        ];
        for (c, outside, on) in cases {
            let mapped = p(c).from_circle(&IBig::ONE, &IBig::ONE, c.len() - 1);
            let counted = count(&mapped).expect("counted");
            let missing = c.len() - 1 - mapped.degree();
            assert_eq!((counted.right, counted.axis + missing), (outside, on), "{c:?}");
        }
    }

    #[test]
    fn a_controller_in_s_is_as_good_as_its_image() {
        // Tustin of K (s + 1)/(s + 10) at h = 1/5: s = 10 (z − 1)/(z + 1): K (11 z − 9)/(20 z).
        let typed = SampledLoop {
            controller: KnobRatio { above: [p(&[]), p(&[1, 1])].into(), below: [p(&[10, 1])].into() },
            given: Given::InS(Method::Tustin),
            ..sampled((&[1], &[1]), (&[3], &[2, 3, 1]), rational(1, 5), rational(3, 2))
        };
        let image = sampled((&[-9, 11], &[0, 20]), (&[3], &[2, 3, 1]), rational(1, 5), rational(3, 2));
        let (a, b) = (found(&typed), found(&image));
        assert_eq!((a.1, a.0.len()), (b.1, b.0.len()));
        assert!(a.0.iter().zip(&b.0).all(|(x, y)| (x.0 - y.0).abs() <= 1e-14 * y.0.abs() && x.1 == y.1));
    }

    #[test]
    fn counting_by_crossings_agrees_with_counting_everywhere() {
        // A lag with 20 periods of delay, a lead with a resonance, a direct path, an undamped plant, a double integrator.
        let inputs = [
            sampled((&[1], &[1]), (&[1], &[1, 1]), rational(1, 10), rational(20, 1)),
            sampled((&[-9, 10], &[-2, 10]), (&[7, 1], &[40, 17, 3, 2]), rational(1, 7), rational(3, 2)),
            sampled((&[1], &[1]), (&[2, 1], &[1, 1]), rational(1, 10), RBig::ZERO),
            sampled((&[1], &[1]), (&[1], &[4, 0, 1]), rational(1, 5), rational(1, 2)),
            sampled((&[-9, 10], &[-2, 10]), (&[1], &[0, 0, 1]), rational(1, 10), RBig::ZERO),
        ];
        for input in inputs {
            let family = input.family(FIRST_BITS).expect("found");
            let parts = family.on_the_axis();
            let found = affine(&family, &parts[0], &parts[1], 1.0).expect("found");
            let places = merge(found.places);
            let counted: Vec<_> =
                samples(&places).iter().map(|q| certain_count(&at(&parts, q)).expect("counted")).collect();
            let last = counted[counted.len() - 1];
            assert_eq!(counts_by_crossings(&places, &found.steps, counted[0], last), Some(counted));
        }
    }

    #[test]
    fn a_quadratic_knob_has_the_edges_of_its_square() {
        let square = SampledLoop {
            controller: KnobRatio { above: [p(&[]), p(&[]), p(&[1])].into(), below: [p(&[1])].into() },
            ..sampled((&[1], &[1]), (&[1], &[0, 1, 1]), rational(2, 1), RBig::ZERO)
        };
        let found = ranges(&square).expect("found").partition.stability();
        let edges: Vec<f64> = found.iter().filter_map(|r| r.to.as_ref()).map(|e| e.value).collect();
        let wanted = libm::sqrt(1.455_678_841_855_605_4);
        assert!(edges.iter().any(|e| (e - wanted).abs() < 1e-13), "{edges:?}");
        assert!(found.iter().filter_map(|r| r.to.as_ref()).all(|e| !e.proven));
        assert!(found.iter().any(|r| r.stable && r.to.as_ref().is_some_and(|e| (e.value - wanted).abs() < 1e-13)));
    }
}
