//! Answers over time, between the samples too, by exact stepping.
//!
//! Between two events (a sample is taken, the hold changes) the plant moves by the exponential of its matrix, so that every
//! point is exact but for the rounding of f64. The controller's difference equation is solved sample by sample. A period
//! is cut at its events; each part is stepped evenly, finely enough for the slower modes, and the first step of a part in
//! ever finer halves for modes that are gone long before it ends.

use super::at::SampledAt;
use super::factored::Factored;
use super::plant::{Companion, direct_part};
use super::stepping::run;
use crate::exact::complex_roots::approximations;
use crate::exact::{Dyadic, IntPoly};
use crate::numerics::magnitude;
use crate::response::{Trace, TracePoint};
use alloc::rc::Rc;
use alloc::vec;
use alloc::vec::Vec;
use dashu_ratio::RBig;
use nalgebra::Complex;

/// Bits of the matrix exponentials, which become f64.
const BITS: usize = 128;

/// Steps for one radian of a mode, roughly: the cubic between two points is then right to 1e-4 of the mode.
const STEPS_PER_RADIAN: f64 = 3.0;

/// Even steps of one part of a period. Modes that would need more are followed only while they are fresh.
const EVEN_STEPS_CAP: f64 = 32.0;

/// Halvings of the first step; the fastest mode followed is this power of two faster.
const HALVINGS_CAP: usize = 14;

/// Steps taken at the end of each halving.
const STEPS_EACH_HALVING: usize = 4;

/// Simulated until the slowest pole has decayed to this.
const SETTLED: f64 = 1e-5;

/// The deviation from the final value, over the last tenth, that is still settled, as a part of the largest.
const REMAINING: f64 = 1e-4;

/// Sample periods before an answer is given up: the sampling is then far faster than the loop, or the loop nearly unstable.
const PERIODS_CAP: f64 = 1e9;

/// Answers to a unit step of the command.
#[derive(Debug)]
pub struct Answers {
    /// Of the output, in the command's units.
    pub output: Trace,
    /// Of the hold's output: a staircase.
    pub control: Trace,
}

/// Periods until the loop has settled. None where there are too many.
fn periods(at: &SampledAt) -> Option<usize> {
    let input = &at.whole.input;
    let decay = libm::log(SETTLED) / libm::log(at.spectral_radius().clamp(1e-3, 1.0 - 1e-12));
    let lead = (input.delay() / &input.period).to_f64().value();
    // Repeated poles decay more slowly at first.
    let periods = libm::ceil(1.25 * decay + 2.0 * lead + 2.0 * at.poles.len() as f64) + 2.0;
    (periods <= PERIODS_CAP).then_some(periods as usize)
}

/// The answers of a stable loop to the command.
pub(super) fn answers(at: &SampledAt) -> Option<Answers> {
    let sensor = at_rest(&at.whole.input.sensor.above, &at.whole.input.sensor.below);
    let found = run(&Machine::new(at)?, periods(at)?, Excitation::Command);
    let output: Vec<TracePoint> = found.output.iter().map(|p| scaled(p, sensor.unwrap_or(1.0))).collect();
    let final_output = if sensor.is_some() { at.final_measured() } else { last(&output) };
    Some(Answers { output: settled(final_output, output)?, control: settled(at.final_control(), found.control)? })
}

/// The answer of the output of a stable loop, in its own units, to a unit step at the plant's input.
pub(super) fn load(at: &SampledAt) -> Option<Trace> {
    let sensor = at_rest(&at.whole.input.sensor.above, &at.whole.input.sensor.below);
    let found = run(&Machine::new(at)?, periods(at)?, Excitation::Load).output;
    let final_load = sensor.map_or_else(|| last(&found), |gain| at.final_load() / gain);
    settled(final_load, found)
}

fn last(points: &[TracePoint]) -> f64 {
    points.last().map_or(0.0, |p| p.value)
}

fn scaled(p: &TracePoint, factor: f64) -> TracePoint {
    TracePoint { time: p.time, value: factor * p.value, slope: factor * p.slope }
}

/// The trace, if its last tenth has come to rest.
fn settled(final_value: f64, points: Vec<TracePoint>) -> Option<Trace> {
    let off = |p: &TracePoint| (p.value - final_value).abs();
    let largest = points.iter().map(off).fold(final_value.abs(), f64::max);
    let tail = 0.9 * points.last().map_or(0.0, |p| p.time);
    let moving = points.iter().any(|p| p.time >= tail && off(p) > REMAINING * largest);
    if moving { None } else { Trace::new(final_value, points) }
}

/// The static gain, where it is finite and not zero.
fn at_rest(above: &IntPoly, below: &IntPoly) -> Option<f64> {
    let (a, b) = (above.coefficient(0), below.coefficient(0));
    (!a.is_zero() && !b.is_zero()).then(|| RBig::from_parts_signed(a, b).to_f64().value())
}

/// What acts.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Excitation {
    Command,
    Load,
}

/// What happens at a cut of the period.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Event {
    /// The plant's input takes the controller's value of so many periods ago.
    Hold(usize),
    /// The sensor's signal is read; it belongs to the sample so many periods ahead.
    Sample(usize),
    /// The load's step arrives, after so many periods.
    Load(usize),
}

/// A part of a period: its event at the start, and the steps to the next one.
#[derive(Debug)]
pub(super) struct Part {
    /// s, from the period's start.
    pub(super) offset: f64,
    /// s, where the next part begins; None with the next period.
    pub(super) end: Option<f64>,
    pub(super) events: Vec<Event>,
    pub(super) steps: Vec<Step>,
}

/// One step of the plant.
#[derive(Clone, Debug)]
pub(super) struct Step {
    pub(super) length: f64,
    pub(super) moves: Rc<Moves>,
}

/// x⁺ = Φ x + Γ u.
#[derive(Clone, Debug, Default)]
pub(super) struct Moves {
    phi: Vec<f64>,
    gamma: Vec<f64>,
}

impl Moves {
    pub(super) fn apply(&self, x: &[f64], u: f64, next: &mut [f64]) {
        let order = x.len();
        for (i, value) in next.iter_mut().enumerate() {
            let row = &self.phi[i * order..(i + 1) * order];
            *value = row.iter().zip(x).map(|(a, x)| a * x).sum::<f64>() + self.gamma[i] * u;
        }
    }

    /// Two steps at once.
    fn doubled(&self) -> Self {
        let order = self.gamma.len();
        let phi = (0..order * order)
            .map(|k| (0..order).map(|j| self.phi[k / order * order + j] * self.phi[j * order + k % order]).sum())
            .collect();
        let gamma = (0..order)
            .map(|i| (0..order).map(|j| self.phi[i * order + j] * self.gamma[j]).sum::<f64>() + self.gamma[i])
            .collect();
        Self { phi, gamma }
    }
}

/// A row that reads a signal from the plant.
#[derive(Debug)]
pub(super) struct Row {
    pub(super) state: Vec<f64>,
    pub(super) direct: f64,
}

impl Row {
    pub(super) fn read(&self, x: &[f64], u: f64) -> f64 {
        self.state.iter().zip(x).map(|(c, x)| c * x).sum::<f64>() + self.direct * u
    }
}

/// The loop, ready to run.
#[derive(Debug)]
pub(super) struct Machine {
    pub(super) order: usize,
    pub(super) parts: Vec<Part>,
    pub(super) output: Row,
    pub(super) slope: Row,
    pub(super) measured: Row,
    /// u_k = Σ b_i·e_(k−i) − Σ a_i·u_(k−i), i from 0 and from 1.
    pub(super) b: Vec<f64>,
    pub(super) a: Vec<f64>,
    pub(super) feedback: f64,
    pub(super) period: f64,
    /// From a sample to the hold, s.
    pub(super) computation: f64,
    /// ln|z| and |ln z| of the poles of the closed loop.
    pub(super) rates: Vec<(f64, f64)>,
    /// Samples whose signal left the plant before the step.
    pub(super) early: usize,
    /// Outputs of the controller that are remembered.
    pub(super) remembered: usize,
}

impl Machine {
    fn new(at: &SampledAt) -> Option<Self> {
        let input = &at.whole.input;
        let below = input.plant.below.times(&input.sensor.below);
        let system = if below.degree() > 0 { Some(Companion::new(&below, &input.period)) } else { None };
        let row = |above: &IntPoly| {
            let (direct, remainder) = direct_part(above, &below);
            let state = system.as_ref().map_or_else(Vec::new, |s| s.output_f64(&remainder, BITS));
            Row { state, direct: direct.to_f64().value() }
        };
        let output = row(&input.plant.above.times(&input.sensor.below));
        let measured = row(&input.plant.above.times(&input.sensor.above));
        let slope = system.as_ref().map_or(Row { state: Vec::new(), direct: 0.0 }, |s| {
            let (state, direct) = s.derivative(&output.state);
            Row { state, direct }
        });
        let (b, a) = difference_equation(&at.controller)?;
        let poles: Vec<f64> = approximations(&below.without_zero_roots().0).into_iter().map(magnitude).collect();
        let parts = parts(at, system.as_ref(), &poles);
        let events = || parts.iter().flat_map(|part| &part.events);
        let early = events().map(|event| if let Event::Sample(ahead) = event { *ahead } else { 0 }).sum();
        let ago = events().map(|event| if let Event::Hold(ago) = event { *ago } else { 0 }).max().unwrap_or(0);
        let rate = |z: &Complex<f64>| {
            let size = libm::log(magnitude(*z).max(f64::MIN_POSITIVE));
            (size, libm::hypot(size, libm::atan2(z.im, z.re)))
        };
        Some(Self {
            order: below.degree(),
            rates: at.poles.iter().map(rate).collect(),
            early,
            remembered: a.len().max(early + ago + 2),
            parts,
            output,
            slope,
            measured,
            b,
            a,
            feedback: input.feedback.to_f64().value(),
            period: input.period.to_f64().value(),
            computation: input.hold_delay().to_f64().value(),
        })
    }
}

/// b and a of the controller; None where it does not fit into f64, or needs samples not yet taken.
fn difference_equation([above, below]: &[Factored; 2]) -> Option<(Vec<f64>, Vec<f64>)> {
    let (n, d) = (above.expanded(), below.expanded());
    let order = d.degree();
    let leading = Dyadic::new(d.center.coefficient(order), d.exponent).to_rational();
    if leading.is_zero() || n.degree() > order {
        return None;
    }
    let list = |p: &super::enclosed::Enclosed| -> Vec<f64> {
        let value =
            |i: usize| (Dyadic::new(p.center.coefficient(i), p.exponent).to_rational() / &leading).to_f64().value();
        (0..=order).rev().map(value).collect()
    };
    let (b, a) = (list(&n), list(&d));
    b.iter().chain(&a).all(|c| c.is_finite()).then_some((b, a))
}

/// The parts of a period between its events.
fn parts(at: &SampledAt, system: Option<&Companion>, poles: &[f64]) -> Vec<Part> {
    let input = &at.whole.input;
    let period = &input.period;
    let split = |time: &RBig| {
        let whole = (time / period).floor();
        let rest = time - RBig::from(whole.clone()) * period;
        (usize::try_from(&whole).unwrap_or(0), rest)
    };
    let (ago, hold_at) = split(&(input.hold_delay() + &input.plant_delay));
    let (after, load_at) = split(&input.plant_delay);
    // The sample of period i reads the plant at i·h − T: at offset h·⌈T/h⌉ − T of a period ⌈T/h⌉ before.
    let (whole, rest) = split(&input.sensor_delay);
    let (ahead, sample_at) = if rest.is_zero() { (whole, RBig::ZERO) } else { (whole + 1, period - rest) };
    // At one time the load comes first, then a hold of an older value, then the sample, then a hold of its own value.
    let own_value = ago == 0 && ahead == 0 && hold_at == sample_at;
    let mut events = vec![(load_at, 0, Event::Load(after)), (sample_at.clone(), 2, Event::Sample(ahead))];
    events.push((hold_at, if own_value { 3 } else { 1 }, Event::Hold(ago)));
    events.sort_by(|a, b| a.0.cmp(&b.0).then(a.1.cmp(&b.1)));
    // The first part starts with the period, event or not.
    let mut offsets: Vec<RBig> = [RBig::ZERO].into_iter().chain(events.iter().map(|e| e.0.clone())).collect();
    offsets.dedup();
    let end = |i: usize| offsets.get(i + 1).unwrap_or(period);
    offsets
        .iter()
        .enumerate()
        .map(|(i, offset)| Part {
            offset: offset.to_f64().value(),
            end: offsets.get(i + 1).map(|end| end.to_f64().value()),
            events: events.iter().filter(|e| e.0 == *offset).map(|e| e.2).collect(),
            steps: steps(&(end(i) - offset), system, poles),
        })
        .collect()
}

/// The steps of a part of this length.
fn steps(length: &RBig, system: Option<&Companion>, poles: &[f64]) -> Vec<Step> {
    let whole = length.to_f64().value();
    let wanted = |p: f64| STEPS_PER_RADIAN * p * whole;
    let slow = poles.iter().copied().filter(|p| wanted(*p) <= EVEN_STEPS_CAP).fold(0.0, f64::max);
    let even = libm::ceil(wanted(slow)).clamp(1.0, EVEN_STEPS_CAP) as usize;
    let fastest = poles.iter().copied().fold(0.0, f64::max);
    let halvings = libm::ceil(libm::log2((wanted(fastest) / (even * STEPS_EACH_HALVING) as f64).max(1.0))) as usize;
    let halvings = halvings.min(HALVINGS_CAP);
    let base = length / RBig::from(even);
    if halvings == 0 {
        return vec![step(&base, system); even];
    }
    // The first even step: 4 steps of length/4/2^halvings, then 4 of twice that from the same start on, …: each halving's
    // first half is covered by the finer ones.
    let mut all = Vec::new();
    let mut current = step(&(&base / RBig::from(STEPS_EACH_HALVING << halvings)), system);
    let mut covered = 0;
    for _ in 0..=halvings {
        all.extend(vec![current.clone(); STEPS_EACH_HALVING - covered]);
        covered = STEPS_EACH_HALVING / 2;
        current = Step { length: 2.0 * current.length, moves: current.moves.doubled().into() };
    }
    // The last doubling is half an even step.
    let whole = Step { length: 2.0 * current.length, moves: current.moves.doubled().into() };
    all.extend(vec![whole; even - 1]);
    all
}

fn step(length: &RBig, system: Option<&Companion>) -> Step {
    let moves = system.map_or_else(Moves::default, |system| {
        let (phi, gamma) = system.transition(length, BITS);
        Moves { phi: phi.to_f64(), gamma: gamma.to_f64() }
    });
    Step { length: length.to_f64().value(), moves: moves.into() }
}
