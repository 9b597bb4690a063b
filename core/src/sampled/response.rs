//! Answers over time, between the samples too, by exact stepping.
//!
//! Between two events (a sample is taken, the hold changes) the plant moves by the exponential of its matrix, so that every
//! point is exact but for the rounding of f64. The controller's difference equation is solved sample by sample. A period
//! is cut at its events; each part is stepped evenly, finely enough for the slower modes, and the first step of a part in
//! ever finer halves for modes that are gone long before it ends.

use super::at::SampledAt;
use super::factored::Factored;
use super::plant::{Companion, direct_part};
use crate::exact::complex_roots::approximations;
use crate::exact::{Dyadic, IntPoly};
use crate::numerics::magnitude;
use crate::response::{Trace, TracePoint};
use alloc::rc::Rc;
use alloc::vec;
use alloc::vec::Vec;
use dashu_ratio::RBig;

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
const PERIODS_CAP: f64 = 300_000.0;

/// Points of one answer that are kept. Where there would be more, whole periods are left out evenly behind the first ones.
const POINTS_KEPT: usize = 60_000;

/// The first periods, in which fast modes are alive, are kept in any case.
const FIRST_PERIODS: usize = 200;

/// Answers to unit steps.
#[derive(Debug)]
pub struct Answers {
    /// Of the output, in the command's units, to the command.
    pub output: Trace,
    /// Of the hold's output to the command: a staircase.
    pub control: Trace,
    /// Of the output, in its own units, to a step at the plant's input.
    pub load: Trace,
}

/// The answers of a stable loop.
pub(super) fn answers(at: &SampledAt) -> Option<Answers> {
    let machine = Machine::new(at)?;
    let periods = libm::log(SETTLED) / libm::log(at.spectral_radius().clamp(1e-3, 1.0 - 1e-12));
    let input = &at.whole.input;
    let lead = (input.delay() / &input.period).to_f64().value();
    // Repeated poles decay more slowly at first.
    let periods = libm::ceil(1.25 * periods + 2.0 * lead + 2.0 * at.poles.len() as f64) + 2.0;
    if periods > PERIODS_CAP {
        return None;
    }
    let sensor = at_rest(&input.sensor.above, &input.sensor.below);
    let scale = sensor.unwrap_or(1.0);
    let command = machine.run(periods as usize, Excitation::Command);
    let load = machine.run(periods as usize, Excitation::Load);
    let last = |points: &[TracePoint]| points.last().map_or(0.0, |p| p.value);
    let output: Vec<TracePoint> = command.output.iter().map(|p| scaled(p, scale)).collect();
    let final_output = if sensor.is_some() { at.final_measured() } else { last(&output) };
    let final_load = sensor.map_or_else(|| last(&load.output), |gain| at.final_load() / gain);
    Some(Answers {
        output: settled(final_output, output)?,
        control: settled(at.final_control(), command.control)?,
        load: settled(final_load, load.output)?,
    })
}

fn scaled(p: &TracePoint, factor: f64) -> TracePoint {
    TracePoint { time: p.time, value: factor * p.value, slope: factor * p.slope }
}

/// The trace, if its last tenth has come to rest.
fn settled(final_value: f64, points: Vec<TracePoint>) -> Option<Trace> {
    let off = |p: &TracePoint| (p.value - final_value).abs();
    let largest = points.iter().map(off).fold(final_value.abs(), f64::max);
    let tail = &points[points.len() - points.len() / 10..];
    if tail.iter().any(|p| off(p) > REMAINING * largest) { None } else { Trace::new(final_value, points) }
}

/// The static gain, where it is finite and not zero.
fn at_rest(above: &IntPoly, below: &IntPoly) -> Option<f64> {
    let (a, b) = (above.coefficient(0), below.coefficient(0));
    (!a.is_zero() && !b.is_zero()).then(|| RBig::from_parts_signed(a, b).to_f64().value())
}

/// What acts.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Excitation {
    Command,
    Load,
}

/// What happens at a cut of the period.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Event {
    /// The plant's input takes the controller's value of so many periods ago.
    Hold(usize),
    /// The sensor's signal is read; it belongs to the sample so many periods ahead.
    Sample(usize),
    /// The load's step arrives, after so many periods.
    Load(usize),
}

/// A part of a period: its event at the start, and the steps to the next one.
#[derive(Debug)]
struct Part {
    /// s, from the period's start.
    offset: f64,
    /// s, where the next part begins; None with the next period.
    end: Option<f64>,
    events: Vec<Event>,
    steps: Vec<Step>,
}

/// One step of the plant.
#[derive(Clone, Debug)]
struct Step {
    length: f64,
    moves: Rc<Moves>,
}

/// x⁺ = Φ x + Γ u.
#[derive(Clone, Debug, Default)]
struct Moves {
    phi: Vec<f64>,
    gamma: Vec<f64>,
}

impl Moves {
    fn apply(&self, x: &[f64], u: f64, next: &mut [f64]) {
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
struct Row {
    state: Vec<f64>,
    direct: f64,
}

impl Row {
    fn read(&self, x: &[f64], u: f64) -> f64 {
        self.state.iter().zip(x).map(|(c, x)| c * x).sum::<f64>() + self.direct * u
    }
}

/// The loop, ready to run.
#[derive(Debug)]
struct Machine {
    order: usize,
    parts: Vec<Part>,
    output: Row,
    slope: Row,
    measured: Row,
    /// u_k = Σ b_i·e_(k−i) − Σ a_i·u_(k−i), i from 0 and from 1.
    b: Vec<f64>,
    a: Vec<f64>,
    feedback: f64,
    period: f64,
    /// From a sample to the hold, s.
    computation: f64,
}

/// The recorded points.
struct Run {
    output: Vec<TracePoint>,
    control: Vec<TracePoint>,
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
        Some(Self {
            order: below.degree(),
            parts: parts(at, system.as_ref(), &poles),
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

    fn points_in_a_period(&self) -> usize {
        self.parts.iter().map(|part| part.steps.len() + 2).sum()
    }

    fn run(&self, periods: usize, excitation: Excitation) -> Run {
        let (command, load) = match excitation {
            Excitation::Command => (1.0, 0.0),
            Excitation::Load => (0.0, 1.0),
        };
        let mut x = vec![0.0; self.order];
        let mut next = x.clone();
        let (mut held, mut pushed) = (0.0, 0.0);
        let mut errors: Vec<f64> = Vec::with_capacity(periods + 1);
        let mut controls: Vec<f64> = Vec::with_capacity(periods + 1);
        let every = periods * self.points_in_a_period() / POINTS_KEPT + 1;
        let kept = |k: usize| k < FIRST_PERIODS || k.is_multiple_of(every);
        let mut output: Vec<TracePoint> = Vec::with_capacity(periods.div_ceil(every) * self.points_in_a_period());
        for _ in 0..self.early_samples() {
            self.control(command, 0.0, &mut errors, &mut controls);
        }
        for k in 0..periods {
            for part in &self.parts {
                let time = k as f64 * self.period + part.offset;
                let before = held + pushed;
                for event in &part.events {
                    match event {
                        Event::Load(after) if *after == k => pushed = load,
                        Event::Load(_) => {}
                        Event::Hold(ago) => {
                            held = k.checked_sub(*ago).and_then(|j| controls.get(j).copied()).unwrap_or(held);
                        }
                        Event::Sample(_) => {
                            let here = self.parts_hold_now(part, k, controls.len());
                            let quiet = self.measured.read(&x, if here { pushed } else { held + pushed });
                            let direct = if here { self.measured.direct } else { 0.0 };
                            self.control_with(command, quiet, direct, &mut errors, &mut controls);
                        }
                    }
                }
                let input = held + pushed;
                let changed = libm::fabs(input - before) > 0.0;
                if kept(k) && (changed || output.is_empty()) {
                    if !output.is_empty() {
                        output.push(self.point(time, &x, before));
                    }
                    output.push(self.point(time, &x, input));
                }
                let mut t = time;
                // The next part begins exactly where this one ends.
                let end = part.end.map_or((k + 1) as f64 * self.period, |end| k as f64 * self.period + end);
                for (i, step) in part.steps.iter().enumerate() {
                    step.moves.apply(&x, input, &mut next);
                    core::mem::swap(&mut x, &mut next);
                    t = if i + 1 == part.steps.len() { end } else { (t + step.length).min(end) };
                    if kept(k) {
                        output.push(self.point(t, &x, input));
                    }
                }
            }
        }
        Run { output, control: self.staircase(&controls, periods, every) }
    }

    /// Samples whose signal left the plant before the step.
    fn early_samples(&self) -> usize {
        let events = self.parts.iter().flat_map(|part| &part.events);
        events.filter_map(|event| if let Event::Sample(ahead) = event { Some(*ahead) } else { None }).sum()
    }

    /// Whether the value computed from the sample at this very event acts at once: no delay at all.
    fn parts_hold_now(&self, part: &Part, k: usize, sample: usize) -> bool {
        part.events.iter().any(|event| matches!(event, Event::Hold(ago) if k.checked_sub(*ago) == Some(sample)))
    }

    fn point(&self, time: f64, x: &[f64], u: f64) -> TracePoint {
        TracePoint { time, value: self.output.read(x, u), slope: self.slope.read(x, u) }
    }

    fn control(&self, command: f64, measured: f64, errors: &mut Vec<f64>, controls: &mut Vec<f64>) {
        self.control_with(command, measured, 0.0, errors, controls);
    }

    /// The next output of the controller; `direct` is what of it the sensor shows at once.
    fn control_with(&self, command: f64, quiet: f64, direct: f64, errors: &mut Vec<f64>, controls: &mut Vec<f64>) {
        let k = controls.len();
        let past = |list: &[f64], c: &[f64]| -> f64 {
            c.iter().enumerate().skip(1).filter_map(|(i, c)| Some(c * list[k.checked_sub(i)?])).sum()
        };
        let known = past(errors, &self.b) - past(controls, &self.a);
        // u = known + b0·(r − f·(quiet + direct·u)).
        let u = (known + self.b[0] * (command - self.feedback * quiet)) / (1.0 + self.b[0] * self.feedback * direct);
        errors.push(command - self.feedback * (quiet + direct * u));
        controls.push(u);
    }

    /// What the hold puts out.
    fn staircase(&self, controls: &[f64], periods: usize, every: usize) -> Vec<TracePoint> {
        let flat = |time: f64, value: f64| TracePoint { time, value, slope: 0.0 };
        let mut points = vec![flat(0.0, 0.0)];
        let mut before = 0.0;
        let kept = |k: &usize| *k < FIRST_PERIODS || k.is_multiple_of(every);
        for (k, u) in controls.iter().take(periods).enumerate().filter(|(k, _)| kept(k)) {
            let time = k as f64 * self.period + self.computation;
            points.extend([flat(time, before), flat(time, *u)]);
            before = *u;
        }
        points.push(flat(periods as f64 * self.period + self.computation, before));
        points
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
