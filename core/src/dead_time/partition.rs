//! Ranges of the knob with their counts, from proven crossings of the axis and one proven count.

use super::DeadTimeError;
use crate::exact::dyadic::{exact_text, rational_bracket};
use crate::ranges::{Contact, Place, merge, samples};
use crate::record::{CharacterName, Edge, EdgeKind, StabilityRange};
use alloc::vec::Vec;
use dashu_ratio::RBig;

/// Digits of the bracket's decimals; the brackets themselves are narrower than that.
const BRACKET_DIGITS: u32 = 19;

/// What is known of a range, or of a place.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Default)]
pub struct Count {
    /// Poles in the open right half plane.
    pub right: usize,
    /// Poles on the axis.
    pub axis: usize,
}

/// A place where poles reach the axis, with what that does to the count of unstable poles.
#[derive(Clone, Debug)]
pub(super) struct Crossing {
    /// Where and how.
    pub(super) place: Place,
    /// Unstable poles just above minus just below.
    pub(super) change: i64,
    /// Poles on the axis exactly here.
    pub(super) axis: usize,
    /// Those of them that are in the right half plane just below; None where that is not told by `change`.
    pub(super) from_right: Option<usize>,
}

impl Crossing {
    /// A simple pair crosses at ±jω, or a simple pole at the origin.
    pub(super) fn simple(place: Place, change: i64) -> Self {
        let axis = change.unsigned_abs() as usize;
        Self { place, change, axis, from_right: Some(if change < 0 { axis } else { 0 }) }
    }
}

/// The line of the knob in ranges of constant count. `ranges` has one entry more than `places`.
#[derive(Clone, Debug)]
pub struct DeadTimePartition {
    /// Where poles reach the axis, ascending.
    pub places: Vec<Place>,
    /// Before the first place, between neighbours, behind the last.
    pub ranges: Vec<Count>,
    /// Exactly at each place.
    pub at_places: Vec<Count>,
    /// True where places before the first one were left out: the count of the first range is then the smallest on it,
    /// reached next to the place, and never 0.
    pub open_below: bool,
    /// As `open_below`, behind the last place.
    pub open_above: bool,
}

impl DeadTimePartition {
    /// From all crossings, in any order, and a count at some value of the knob in none of their brackets.
    ///
    /// # Errors
    /// What `count` meets.
    pub(super) fn new(
        crossings: Vec<Crossing>,
        count: impl Fn(&RBig) -> Result<Count, DeadTimeError>,
    ) -> Result<Self, DeadTimeError> {
        let groups = grouped(crossings);
        let places: Vec<Place> = groups.iter().map(|(place, _)| place.clone()).collect();
        let samples = samples(&places);
        // Where few poles are moved by the knob the count is cheapest.
        let nearest =
            (0..samples.len()).min_by(|a, b| distance(&samples[*a]).cmp(&distance(&samples[*b]))).unwrap_or(0);
        let known = count(&samples[nearest])?;
        let mut partition = Self::from_known(&groups, nearest, known)?;
        for (here, (place, group)) in partition.at_places.iter_mut().zip(&groups) {
            if let Some(q) = place.exact.as_ref().filter(|_| group.iter().any(|c| c.from_right.is_none())) {
                *here = count(q)?;
            }
        }
        Ok(partition)
    }

    /// From all crossings, in any order, and the count before the first.
    ///
    /// # Errors
    /// Where the counts contradict each other.
    pub(super) fn from_first(crossings: Vec<Crossing>, first: Count) -> Result<Self, DeadTimeError> {
        Self::from_known(&grouped(crossings), 0, first)
    }

    fn from_known(groups: &[(Place, Vec<Crossing>)], nearest: usize, known: Count) -> Result<Self, DeadTimeError> {
        let places: Vec<Place> = groups.iter().map(|(place, _)| place.clone()).collect();
        let change = |i: usize| groups[i].1.iter().map(|c| c.change).sum::<i64>();
        let mut right = alloc::vec![known.right as i64; places.len() + 1];
        for i in nearest..places.len() {
            right[i + 1] = right[i] + change(i);
        }
        for i in (0..nearest).rev() {
            right[i] = right[i + 1] - change(i);
        }
        if right.iter().any(|r| *r < 0) {
            // Impossible but for a fault in the method: better no answer than a wrong one.
            return Err(DeadTimeError::CrossingsNotSeparated);
        }
        let at = |right: i64, axis: usize| Count { right: right as usize, axis: axis + known.axis };
        let at_places = groups.iter().enumerate().map(|(i, (_, group))| {
            let axis = group.iter().map(|c| c.axis).sum();
            let gone: usize = group.iter().map(|c| c.from_right.unwrap_or(0)).sum();
            at((right[i] - gone as i64).max(0), axis)
        });
        let at_places = at_places.collect();
        let ranges = right.iter().map(|r| at(*r, 0)).collect();
        Ok(Self { places, ranges, at_places, open_below: false, open_above: false })
    }

    /// Adds poles that no knob moves.
    pub(super) fn add(&mut self, fixed: Count) {
        for count in self.ranges.iter_mut().chain(&mut self.at_places) {
            count.right += fixed.right;
            count.axis += fixed.axis;
        }
    }

    /// Drops places more than `beyond` behind the end of the last stable range. What remains behind the last place must never
    /// be stable.
    pub(super) fn keep_to_last_stable(&mut self, beyond: usize) {
        let stable = self.ranges.iter().rposition(|count| count.right == 0);
        let keep = stable.map_or(0, |i| i + 1) + beyond;
        // Never a last range that the dropped places could show to be stable.
        if self.open_above && keep < self.places.len() {
            self.places.truncate(keep);
            self.at_places.truncate(keep);
            self.ranges.truncate(keep + 1);
        }
    }

    /// The ranges as the record has them.
    pub fn stability(&self) -> Vec<StabilityRange> {
        (0..self.ranges.len())
            .map(|i| {
                let Count { right, axis } = self.ranges[i];
                StabilityRange {
                    from: i.checked_sub(1).map(|k| self.edge(k)),
                    to: (i < self.places.len()).then(|| self.edge(i)),
                    unstable_poles: right,
                    axis_poles: axis,
                    at_least: (i == 0 && self.open_below) || (i == self.places.len() && self.open_above),
                    stable: right == 0 && axis == 0,
                }
            })
            .collect()
    }

    /// The index of the range that holds a value, or of the place whose bracket does.
    pub fn locate(&self, knob: &RBig) -> Result<usize, usize> {
        for (i, place) in self.places.iter().enumerate() {
            if *knob < place.bracket.low.to_rational() {
                return Ok(i);
            }
            if *knob <= place.bracket.high.to_rational() {
                return Err(i);
            }
        }
        Ok(self.places.len())
    }

    fn edge(&self, i: usize) -> Edge {
        let (place, here) = (&self.places[i], self.at_places[i]);
        let omega = |contact: &Contact| match contact {
            Contact::Axis { omega } => Some(*omega),
            _ => None,
        };
        let mut omegas: Vec<f64> = place.contacts.iter().filter_map(omega).collect();
        omegas.sort_by(f64::total_cmp);
        let kind = if omegas.is_empty() { EdgeKind::OriginCrossing } else { EdgeKind::AxisCrossing };
        let name = if here.right == 0 { CharacterName::MarginallyStable } else { CharacterName::Unstable };
        Edge {
            value: place.value(),
            bracket: match &place.exact {
                Some(q) => rational_bracket(q, BRACKET_DIGITS),
                None => place.bracket.decimal_bracket(BRACKET_DIGITS),
            },
            exact: place.exact.as_ref().map(exact_text),
            proven: true,
            kind,
            omega: omegas.first().copied(),
            omegas,
            touching: self.ranges[i] == self.ranges[i + 1],
            unstable_poles: here.right,
            axis_poles: here.axis,
            name,
        }
    }
}

/// |q|, and after it the smaller denominator.
fn distance(q: &RBig) -> (RBig, dashu_int::UBig) {
    let negative = q.numerator().sign() == dashu_int::Sign::Negative;
    (if negative { -q.clone() } else { q.clone() }, q.denominator().clone())
}

/// Crossings whose brackets meet, in order, each group with its common place.
fn grouped(mut crossings: Vec<Crossing>) -> Vec<(Place, Vec<Crossing>)> {
    crossings.sort_by(|a, b| a.place.bracket.low.cmp(&b.place.bracket.low));
    let mut groups: Vec<(Place, Vec<Crossing>)> = Vec::new();
    for crossing in crossings {
        match groups.last_mut() {
            Some((place, group)) if place.bracket.meets(&crossing.place.bracket) => {
                let mut merged = merge([place.clone(), crossing.place.clone()].into());
                *place = merged.swap_remove(0);
                group.push(crossing);
            }
            _ => groups.push((crossing.place.clone(), [crossing].into())),
        }
    }
    groups
}
