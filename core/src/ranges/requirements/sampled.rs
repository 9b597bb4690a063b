//! Requirements on responses: judged at many knob values of every stable range, edges refined between them.

use super::super::pieces::{Border, Piece, intersection};
use super::{Ground, Lane, Limit, at_least};
use crate::exact::{Dyadic, ExactError, Interval};
use crate::record::Cause;
use crate::response::{Figure, LoopAt, Setup};
use alloc::collections::BTreeMap;
use alloc::rc::Rc;
use alloc::vec::Vec;
use core::cell::RefCell;

/// ln τ of the sampled knob values, τ as in [`Course`]: close enough that a figure rarely has two turns between two.
const FIRST: f64 = -9.0;
const SPACING: f64 = 0.5;
const COUNT: usize = 37;

/// More values on each side, near a finite end.
const NEAR_ENDS: [f64; 2] = [13.0, 20.0];

/// More values towards an infinite end or knob 0, where a loop may change its ways many decades out.
const FAR_ENDS: [f64; 8] = [12.0, 16.0, 20.0, 26.0, 34.0, 44.0, 56.0, 70.0];

/// How often a gap between two samples is halved: down to 3e-5 of the knob.
const HALVINGS: usize = 14;

/// In the first halvings, a gap is doubtful too where the nearer neighbour's room is below this part of the change between
/// the two, whatever lies beside them.
const COARSE_HALVINGS: usize = 5;
const TURNING: f64 = 0.5;

/// Likewise for settling times, which jump by half an oscillation.
const JUMPING: f64 = 2.0;

/// Samples added to one course at most.
const ADDED_CAP: usize = 160;

/// Loops kept between the first samples of one course; limits that are changed again and again would gather more.
const KEPT: usize = 512;

/// Edges are refined to this relative width; a tenth of what is promised.
const EDGE_WIDTH: f64 = 1e-7;

/// Knob values are rounded to this many bits, far below [`EDGE_WIDTH`]: short numbers keep the exact polynomials short.
const KNOB_BITS: usize = 36;

/// Refinement steps of one edge; bisection alone needs 27.
const REFINEMENT_CAP: usize = 60;

/// The loop at many knob values of every stable range, computed once.
pub struct Samples {
    courses: Vec<(Course, Vec<(f64, LoopAt)>)>,
}

impl Samples {
    /// Samples every stable range.
    ///
    /// # Errors
    /// From the exact methods, where poles cannot be found.
    pub fn new(setup: Setup<'_>, stable: &[Piece]) -> Result<Self, ExactError> {
        let mut courses = Vec::new();
        for piece in stable.iter().flat_map(cut_at_zero) {
            let course = Course { piece, between: RefCell::default() };
            let mut samples = Vec::new();
            for v in course.values() {
                if let Some(at) = course.loop_at(setup, v)? {
                    samples.push((v, at));
                }
            }
            courses.push((course, samples));
        }
        Ok(Self { courses })
    }
}

/// The parts of a range left and right of knob 0: figures are even in a logarithm of the knob, on each side of 0.
fn cut_at_zero(piece: &Piece) -> Vec<Piece> {
    if !piece.holds(0.0) {
        return [piece.clone()].into();
    }
    let left = Piece { from: piece.from.clone(), to: Some(zero()) };
    let right = Piece { from: Some(zero()), to: piece.to.clone() };
    [left, right].into()
}

/// The cut at knob 0, which is no end of the range.
fn zero() -> Border {
    Border { bracket: Interval::point(Dyadic::ZERO), proven: true, cause: Cause::Controller }
}

fn is_cut(border: Option<&Border>) -> bool {
    border.is_some_and(|b| *b == zero())
}

/// A range of one sign run through by v = ln τ, τ = (q − a)/(b − q); τ = (q − a)/|a| where b is infinite, and alike.
struct Course {
    piece: Piece,
    /// The loop between the first samples, by the bits of v: gaps are halved in the same places for several kinds.
    between: RefCell<BTreeMap<u64, Option<Rc<LoopAt>>>>,
}

impl Course {
    fn ends(&self) -> (Option<f64>, Option<f64>) {
        (self.piece.from.as_ref().map(Border::value), self.piece.to.as_ref().map(Border::value))
    }

    /// The sampled v, ascending.
    fn values(&self) -> Vec<f64> {
        let (from, to) = self.ends();
        let beyond = |end: Option<f64>| if end.is_none_or(|q| q == 0.0) { &FAR_ENDS[..] } else { &NEAR_ENDS[..] };
        let mut values: Vec<f64> = (0..COUNT).map(|k| FIRST + SPACING * k as f64).collect();
        values.extend(beyond(from).iter().map(|v| -v));
        values.extend(beyond(to));
        values.sort_by(f64::total_cmp);
        values
    }

    fn knob(&self, v: f64) -> f64 {
        let tau = libm::exp(v);
        let unit = |a: f64| if a == 0.0 { 1.0 } else { a.abs() };
        match self.ends() {
            (Some(a), Some(b)) if tau < 1.0 => a + (b - a) * (tau / (1.0 + tau)),
            (Some(a), Some(b)) => b - (b - a) / (1.0 + tau),
            (Some(a), None) => a + unit(a) * tau,
            (None, Some(b)) => b - unit(b) / tau,
            // Only a loop that no knob makes unstable has no end at all, and it is cut at 0.
            (None, None) => tau,
        }
    }

    /// The loop at v, kept for the next kind.
    fn kept(&self, setup: Setup<'_>, v: f64) -> Result<Option<Rc<LoopAt>>, ExactError> {
        if let Some(known) = self.between.borrow().get(&v.to_bits()) {
            return Ok(known.clone());
        }
        let found = self.loop_at(setup, v)?.map(Rc::new);
        let mut between = self.between.borrow_mut();
        if between.len() >= KEPT {
            between.clear();
        }
        between.insert(v.to_bits(), found.clone());
        Ok(found)
    }

    /// The loop at v. None where f64 rounds the knob to an end.
    fn loop_at(&self, setup: Setup<'_>, v: f64) -> Result<Option<LoopAt>, ExactError> {
        let Some(knob) = Dyadic::from_f64(self.knob(v)) else { return Ok(None) };
        let knob = knob.round_down(KNOB_BITS).to_rational();
        let at_cut = knob.is_zero();
        if at_cut || !self.piece.surely_holds(&knob) {
            return Ok(None);
        }
        LoopAt::known_stable(setup, knob).map(Some)
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

/// Whether a figure meets its limit.
pub fn meets(limit: &Limit, figure: Figure) -> bool {
    Judge { limit, value: limit.value.to_f64().value() }.room(figure).is_met()
}

pub(super) fn lane(ground: &Ground<'_>, limit: &Limit) -> Result<Lane, ExactError> {
    let judge = Judge { limit, value: limit.value.to_f64().value() };
    let mut pieces: Vec<Piece> = Vec::new();
    let mut defined = false;
    for (course, samples) in &ground.samples.courses {
        let mut points: Vec<(f64, Room)> = Vec::with_capacity(samples.len());
        for (v, at) in samples {
            let figure = at.figure(limit.kind);
            // What could not be computed says nothing: its neighbours decide.
            if figure == Figure::NotComputed {
                continue;
            }
            defined |= figure != Figure::Undefined;
            points.push((*v, judge.room(figure)));
        }
        judge.look_into_gaps(ground.setup, course, &mut points)?;
        for piece in judge.pieces(ground.setup, course, &points)? {
            // What ends at the cut on one side goes on at the other.
            match pieces.last_mut() {
                Some(last) if is_cut(last.to.as_ref()) && is_cut(piece.from.as_ref()) => last.to = piece.to,
                _ => pieces.push(piece),
            }
        }
    }
    for border in pieces.iter_mut().flat_map(|piece| [&mut piece.from, &mut piece.to]).flatten() {
        if *border == zero() {
            border.cause = Cause::Requirement(limit.kind);
            border.proven = false;
        }
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
            Figure::Undefined | Figure::NotComputed => Room::Met(false),
        }
    }

    fn room_at(&self, setup: Setup<'_>, course: &Course, v: f64) -> Result<Room, ExactError> {
        Ok(self.room_of(course.loop_at(setup, v)?.as_ref()))
    }

    fn room_of(&self, at: Option<&LoopAt>) -> Room {
        at.map_or(Room::Met(false), |at| self.room(at.figure(self.limit.kind)))
    }

    /// Halves the gaps in which the figure may pass the limit and come back.
    fn look_into_gaps(
        &self,
        setup: Setup<'_>,
        course: &Course,
        points: &mut Vec<(f64, Room)>,
    ) -> Result<(), ExactError> {
        let (mut left_over, mut left_for_change) = (ADDED_CAP, ADDED_CAP / 2);
        use crate::project::RequirementKind as Kind;
        let nervous = matches!(self.limit.kind, Kind::SettlingTime2 | Kind::SettlingTime5);
        let part = if nervous { JUMPING } else { TURNING };
        for halving in 0..HALVINGS {
            let near = |k: usize| halving < COARSE_HALVINGS && changes_much(points[k - 1].1, points[k].1, part);
            let across: Vec<bool> = (1..points.len()).map(|k| goes_across(points, k)).collect();
            let doubtful: Vec<bool> = (1..points.len()).map(|k| across[k - 1] || near(k)).collect();
            if !doubtful.contains(&true) {
                break;
            }
            let mut finer = Vec::with_capacity(2 * points.len());
            for (k, point) in points.iter().enumerate() {
                // What only changes much has its own share, so that enough is left for what goes across.
                let share = if k > 0 && across[k - 1] { &mut left_over } else { &mut left_for_change };
                if k > 0 && doubtful[k - 1] && *share > 0 {
                    *share -= 1;
                    let middle = 0.5 * (points[k - 1].0 + point.0);
                    finer.push((middle, self.room_of(course.kept(setup, middle)?.as_deref())));
                }
                finer.push(*point);
            }
            *points = finer;
        }
        Ok(())
    }

    /// The pieces of one course.
    fn pieces(&self, setup: Setup<'_>, course: &Course, points: &[(f64, Room)]) -> Result<Vec<Piece>, ExactError> {
        let range = &course.piece;
        let mut pieces = Vec::new();
        // At the range's own ends the sample next to them decides.
        let mut open = points.first().filter(|p| p.1.is_met()).map(|_| Piece { from: range.from.clone(), to: None });
        for pair in points.windows(2) {
            match (pair[0].1.is_met(), pair[1].1.is_met()) {
                (false, true) => {
                    open = Some(Piece { from: Some(self.edge(setup, course, pair[0], pair[1])?), to: None });
                }
                (true, false) => {
                    let to = Some(self.edge(setup, course, pair[0], pair[1])?);
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
        setup: Setup<'_>,
        course: &Course,
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
                (Room::By(x), Room::By(y)) if !halve && (x - y).abs() > 0.0 => {
                    // Not nearer to an end than a thousandth, so that both ends move.
                    (low.0 + width * (x / (x - y))).clamp(low.0 + 1e-3 * width, high.0 - 1e-3 * width)
                }
                _ => 0.5 * (low.0 + high.0),
            };
            let room = self.room_at(setup, course, v)?;
            if room.is_met() == low_met {
                low = (v, room);
            } else {
                high = (v, room);
            }
            halve = high.0 - low.0 > 0.5 * width;
        }
        let (a, b) = (course.knob(low.0), course.knob(high.0));
        let end = |x: f64| Dyadic::from_f64(x).unwrap_or(Dyadic::ZERO);
        let bracket = Interval { low: end(a.min(b)), high: end(a.max(b)) };
        Ok(Border { bracket, proven: false, cause: Cause::Requirement(self.limit.kind) })
    }
}

/// Whether the figure may pass the limit between two neighbours on the same side of it, k − 1 and k: going on from either
/// of them as it came from its other neighbour. So a turn is noticed, and a jump as well, behind which the figure goes on
/// from another value.
fn goes_across(points: &[(f64, Room)], k: usize) -> bool {
    let (left, right) = (points[k - 1], points[k]);
    if left.1.is_met() != right.1.is_met() {
        return false;
    }
    let width = right.0 - left.0;
    let crosses = |here: (f64, Room), before: Option<&(f64, Room)>| match (here.1, before) {
        (Room::By(room), Some((v, Room::By(other)))) => {
            let ahead = room + (room - other) / (here.0 - v).abs() * width;
            (ahead >= 0.0) != (room >= 0.0)
        }
        _ => false,
    };
    crosses(left, k.checked_sub(2).map(|i| &points[i])) || crosses(right, points.get(k + 1))
}

/// Whether the figure changes so much between two neighbours on one side of the limit that it may pass it between them.
fn changes_much(left: Room, right: Room, part: f64) -> bool {
    match (left, right) {
        (Room::By(a), Room::By(b)) => (a >= 0.0) == (b >= 0.0) && (b - a).abs() * part > a.abs().min(b.abs()),
        // Defined on one side only, yet both met or both not.
        (Room::By(_), Room::Met(_)) | (Room::Met(_), Room::By(_)) => left.is_met() == right.is_met(),
        (Room::Met(_), Room::Met(_)) => false,
    }
}
