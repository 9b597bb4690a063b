//! Requirements on responses: judged at many knob values of every stable range, edges refined between them.

use super::super::pieces::{Border, Piece, intersection};
use super::{Ground, Lane, Limit, at_least};
use crate::exact::{Dyadic, ExactError, Interval};
use crate::model::Loop;
use crate::record::Cause;
use crate::response::{Figure, LoopAt};
use alloc::vec::Vec;

/// ln τ of the sampled knob values, τ as in [`Course`]: close enough that a figure rarely has two turns between two.
const FIRST: f64 = -9.0;
const SPACING: f64 = 0.5;
const COUNT: usize = 37;

/// Two more values on each side, near the ends.
const NEAR_ENDS: [f64; 2] = [13.0, 20.0];

/// Edges are refined to this relative width; a tenth of what is promised.
const EDGE_WIDTH: f64 = 1e-7;

/// Knob values are rounded to this many bits, far below [`EDGE_WIDTH`]: short numbers keep the exact polynomials short.
const KNOB_BITS: usize = 36;

/// Refinement steps of one edge; bisection alone needs 27.
const REFINEMENT_CAP: usize = 60;

/// The loop at many knob values of every stable range, computed once.
pub struct Samples {
    /// One entry for every stable range.
    ranges: Vec<Vec<(f64, LoopAt)>>,
}

impl Samples {
    /// Samples every stable range.
    ///
    /// # Errors
    /// From the exact methods, where poles cannot be found.
    pub fn new(model: &Loop, stable: &[Piece]) -> Result<Self, ExactError> {
        let mut ranges = Vec::with_capacity(stable.len());
        for piece in stable {
            let course = Course::new(piece);
            let mut values: Vec<f64> = (0..COUNT).map(|k| FIRST + SPACING * k as f64).collect();
            for v in NEAR_ENDS {
                values.insert(0, -v);
                values.push(v);
            }
            let mut samples = Vec::with_capacity(values.len());
            for v in values {
                if let Some(at) = course.loop_at(model, v)? {
                    samples.push((v, at));
                }
            }
            ranges.push(samples);
        }
        Ok(Self { ranges })
    }
}

/// A stable range run through by v = ln τ, τ = (q − a)/(b − q); τ = (q − a)/|a| where b is infinite, and alike.
struct Course<'a> {
    piece: &'a Piece,
    from: Option<f64>,
    to: Option<f64>,
}

impl<'a> Course<'a> {
    fn new(piece: &'a Piece) -> Self {
        Self { piece, from: piece.from.as_ref().map(Border::value), to: piece.to.as_ref().map(Border::value) }
    }

    fn knob(&self, v: f64) -> f64 {
        let tau = libm::exp(v);
        let unit = |a: f64| if a == 0.0 { 1.0 } else { a.abs() };
        match (self.from, self.to) {
            (Some(a), Some(b)) if tau < 1.0 => a + (b - a) * (tau / (1.0 + tau)),
            (Some(a), Some(b)) => b - (b - a) / (1.0 + tau),
            (Some(a), None) => a + unit(a) * tau,
            (None, Some(b)) => b - unit(b) / tau,
            (None, None) => libm::sinh(v),
        }
    }

    /// The loop at v. None where it is not stable in spite of all: so near to the end that f64 rounds the knob past it.
    fn loop_at(&self, model: &Loop, v: f64) -> Result<Option<LoopAt>, ExactError> {
        let Some(knob) = Dyadic::from_f64(self.knob(v)) else { return Ok(None) };
        let knob = knob.round_down(KNOB_BITS).to_rational();
        if !self.piece.surely_holds(&knob) {
            return Ok(None);
        }
        LoopAt::known_stable(model, knob).map(Some)
    }
}

/// How far a figure is on the good side of its limit.
#[derive(Clone, Copy)]
enum Room {
    /// Positive is good.
    By(f64),
    /// Infinitely good or bad.
    Met(bool),
}

impl Room {
    fn is_met(self) -> bool {
        match self {
            Self::By(room) => room >= 0.0,
            Self::Met(met) => met,
        }
    }
}

pub(super) fn lane(ground: &Ground<'_>, limit: &Limit) -> Result<Lane, ExactError> {
    let judge = Judge { limit, value: limit.value.to_f64().value() };
    let mut pieces = Vec::new();
    let mut defined = false;
    for (piece, samples) in ground.stable.iter().zip(&ground.samples.ranges) {
        let course = Course::new(piece);
        let mut points: Vec<(f64, Room)> = Vec::with_capacity(samples.len());
        for (v, at) in samples {
            let figure = at.figure(limit.kind);
            defined |= figure != Figure::Undefined;
            points.push((*v, judge.room(figure)));
        }
        judge.look_into_turns(ground.model, &course, &mut points)?;
        pieces.extend(judge.pieces(ground.model, &course, piece, &points)?);
    }
    let remark = (!defined && !ground.stable.is_empty()).then(|| undefined(limit).into());
    Ok(Lane { pieces, proven: false, remark })
}

/// Why a figure has no value at any setting.
fn undefined(limit: &Limit) -> &'static str {
    use crate::project::RequirementKind as Kind;
    match limit.kind {
        Kind::ControllerPeak => "undefined: the controller is improper, so that a step makes its output infinite",
        Kind::PeakTime => "undefined: the answer to a step has no peak at any setting",
        Kind::Bandwidth => "undefined: the closed loop has no static gain",
        _ => "undefined: the answer to a step has no final value other than zero",
    }
}

struct Judge<'a> {
    limit: &'a Limit,
    value: f64,
}

impl Judge<'_> {
    fn room(&self, figure: Figure) -> Room {
        let at_least = at_least(self.limit.kind);
        match figure {
            Figure::Value(v) if at_least => Room::By(v - self.value),
            Figure::Value(v) => Room::By(self.value - v),
            Figure::Infinite => Room::Met(at_least),
            Figure::Undefined => Room::Met(false),
        }
    }

    fn room_at(&self, model: &Loop, course: &Course<'_>, v: f64) -> Result<Room, ExactError> {
        Ok(course.loop_at(model, v)?.map_or(Room::Met(false), |at| self.room(at.figure(self.limit.kind))))
    }

    /// Where three neighbours turn towards the limit without reaching it, looks at the vertex of their parabola.
    fn look_into_turns(
        &self,
        model: &Loop,
        course: &Course<'_>,
        points: &mut Vec<(f64, Room)>,
    ) -> Result<(), ExactError> {
        let mut found = Vec::new();
        for triple in points.windows(3) {
            let [(v0, Room::By(a)), (v1, Room::By(b)), (v2, Room::By(c))] = triple else { continue };
            let same_side = (*a >= 0.0) == (*b >= 0.0) && (*b >= 0.0) == (*c >= 0.0);
            let turns = if *b >= 0.0 { a > b && c > b } else { a < b && c < b };
            if !(same_side && turns) {
                continue;
            }
            let (left, right) = ((b - a) / (v1 - v0), (c - b) / (v2 - v1));
            let vertex = 0.5 * (v0 + v1) - left * 0.5 * (v2 - v0) / (right - left);
            if vertex > *v0 && vertex < *v2 {
                found.push((vertex, self.room_at(model, course, vertex)?));
            }
        }
        points.extend(found);
        points.sort_by(|a, b| a.0.total_cmp(&b.0));
        Ok(())
    }

    /// The pieces of one stable range.
    fn pieces(
        &self,
        model: &Loop,
        course: &Course<'_>,
        range: &Piece,
        points: &[(f64, Room)],
    ) -> Result<Vec<Piece>, ExactError> {
        let mut pieces = Vec::new();
        // At the range's own ends the sample next to them decides.
        let mut open = points.first().filter(|p| p.1.is_met()).map(|_| Piece { from: range.from.clone(), to: None });
        for pair in points.windows(2) {
            match (pair[0].1.is_met(), pair[1].1.is_met()) {
                (false, true) => {
                    open = Some(Piece { from: Some(self.edge(model, course, pair[0], pair[1])?), to: None })
                }
                (true, false) => {
                    let to = Some(self.edge(model, course, pair[0], pair[1])?);
                    pieces.extend(open.take().map(|piece| Piece { to, ..piece }));
                }
                _ => {}
            }
        }
        pieces.extend(open.map(|piece| Piece { to: range.to.clone(), ..piece }));
        Ok(intersection(core::slice::from_ref(range), &pieces))
    }

    /// The edge between a met and an unmet sample: chord steps where both rooms are finite, halving otherwise and whenever
    /// a chord step did not halve.
    fn edge(
        &self,
        model: &Loop,
        course: &Course<'_>,
        mut low: (f64, Room),
        mut high: (f64, Room),
    ) -> Result<Border, ExactError> {
        let low_met = low.1.is_met();
        let mut halve = false;
        for _ in 0..REFINEMENT_CAP {
            let (a, b) = (course.knob(low.0), course.knob(high.0));
            if (b - a).abs() <= EDGE_WIDTH * a.abs().min(b.abs()) {
                break;
            }
            let width = high.0 - low.0;
            let v = match (low.1, high.1) {
                (Room::By(x), Room::By(y)) if !halve && x != y => {
                    // Not nearer to an end than a thousandth, so that both ends move.
                    (low.0 + width * (x / (x - y))).clamp(low.0 + 1e-3 * width, high.0 - 1e-3 * width)
                }
                _ => 0.5 * (low.0 + high.0),
            };
            let room = self.room_at(model, course, v)?;
            if room.is_met() == low_met {
                low = (v, room)
            } else {
                high = (v, room)
            }
            halve = high.0 - low.0 > 0.5 * width;
        }
        let (a, b) = (course.knob(low.0), course.knob(high.0));
        let end = |x: f64| Dyadic::from_f64(x).unwrap_or(Dyadic::ZERO);
        let bracket = Interval { low: end(a.min(b)), high: end(a.max(b)) };
        Ok(Border { bracket, proven: false, cause: Cause::Requirement(self.limit.kind) })
    }
}
