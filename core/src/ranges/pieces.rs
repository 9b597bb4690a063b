//! Arithmetic on sets of knob values that are unions of intervals.

use crate::exact::{Dyadic, Interval};
use crate::record::Cause;
use alloc::vec::Vec;
use core::cmp::Ordering;
use dashu_ratio::RBig;

/// A finite end of an interval.
#[derive(Clone, Debug, PartialEq)]
pub struct Border {
    /// The knob lies in this bracket.
    pub bracket: Interval,
    /// Whether the bracket is proven.
    pub proven: bool,
    /// What fails behind it.
    pub cause: Cause,
}

impl Border {
    fn at(&self) -> Dyadic {
        self.bracket.midpoint()
    }

    /// The knob in f64.
    pub fn value(&self) -> f64 {
        self.at().to_f64()
    }
}

/// An open interval; None is an infinite end.
#[derive(Clone, Debug, PartialEq)]
pub struct Piece {
    /// The lower end.
    pub from: Option<Border>,
    /// The upper end.
    pub to: Option<Border>,
}

impl Piece {
    /// The whole line.
    pub const WHOLE: Self = Self { from: None, to: None };

    /// Whether a knob value lies inside, whatever the true ends are within their brackets. An end that is known exactly
    /// and is no edge of stability belongs to the piece.
    pub fn surely_holds(&self, knob: &RBig) -> bool {
        let closed = |b: &Border| b.cause != Cause::Stability && b.bracket.low == b.bracket.high;
        let above =
            |b: &Border| b.bracket.high.to_rational() < *knob || (closed(b) && b.bracket.high.to_rational() == *knob);
        let below =
            |b: &Border| *knob < b.bracket.low.to_rational() || (closed(b) && b.bracket.low.to_rational() == *knob);
        self.from.as_ref().is_none_or(above) && self.to.as_ref().is_none_or(below)
    }

    /// Whether a knob value in f64 lies inside.
    pub fn holds(&self, knob: f64) -> bool {
        self.from.as_ref().is_none_or(|b| b.value() < knob) && self.to.as_ref().is_none_or(|b| knob < b.value())
    }
}

/// The common part of two sets; both ascending and of disjoint pieces. Where two ends coincide the first set's is kept.
pub fn intersection(a: &[Piece], b: &[Piece]) -> Vec<Piece> {
    let mut common = Vec::new();
    let (mut i, mut j) = (0, 0);
    while i < a.len() && j < b.len() {
        let from = later(&a[i].from, &b[j].from, Ordering::Greater);
        let to = later(&a[i].to, &b[j].to, Ordering::Less);
        let empty = matches!((&from, &to), (Some(from), Some(to)) if from.bracket.high >= to.bracket.low);
        if !empty {
            common.push(Piece { from, to });
        }
        // The piece that ends first is done with.
        match (&a[i].to, &b[j].to) {
            (Some(end), other) if other.as_ref().is_none_or(|other| end.at() <= other.at()) => i += 1,
            (_, Some(_)) => j += 1,
            _ => break,
        }
    }
    common
}

/// The end that is `wanted` (Greater: the larger lower end) of two; an infinite end gives way to a finite one.
fn later(a: &Option<Border>, b: &Option<Border>, wanted: Ordering) -> Option<Border> {
    match (a, b) {
        (None, None) => None,
        (Some(end), None) | (None, Some(end)) => Some(end.clone()),
        (Some(x), Some(y)) => {
            // Brackets that meet are the same end.
            let take_second = !x.bracket.meets(&y.bracket) && y.at().cmp(&x.at()) == wanted;
            Some(if take_second { y.clone() } else { x.clone() })
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn border(x: f64) -> Option<Border> {
        let at = Dyadic::from_f64(x).expect("finite");
        Some(Border { bracket: Interval::point(at), proven: true, cause: Cause::Stability })
    }

    fn set(ends: &[(f64, f64)]) -> Vec<Piece> {
        let end = |x: f64| if x.is_finite() { border(x) } else { None };
        ends.iter().map(|(a, b)| Piece { from: end(*a), to: end(*b) }).collect()
    }

    fn ends(pieces: &[Piece]) -> Vec<(f64, f64)> {
        let end = |b: &Option<Border>, open: f64| b.as_ref().map_or(open, Border::value);
        pieces.iter().map(|p| (end(&p.from, f64::NEG_INFINITY), end(&p.to, f64::INFINITY))).collect()
    }

    #[test]
    fn common_parts_are_found() {
        let infinity = f64::INFINITY;
        let a = set(&[(-infinity, -2.0), (0.0, 5.0), (7.0, infinity)]);
        let b = set(&[(-3.0, 1.0), (4.0, 8.0), (9.0, 10.0)]);
        assert_eq!(ends(&intersection(&a, &b)), [(-3.0, -2.0), (0.0, 1.0), (4.0, 5.0), (7.0, 8.0), (9.0, 10.0)]);
        assert_eq!(ends(&intersection(&set(&[(0.0, 1.0)]), &set(&[(1.0, 2.0)]))), []);
    }
}
