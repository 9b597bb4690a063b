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

#[cfg(test)]
mod tests;

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
