//! Running a sampled loop period by period.
//!
//! One period moves all that the loop remembers by one matrix. Where only slow modes are still alive, many periods are
//! skipped by a power of it, and the cubic of the trace, with the mean slopes of the periods beside, bridges them.

use super::response::{Event, Excitation, Machine, Part};
use crate::response::TracePoint;
use alloc::vec;
use alloc::vec::Vec;

/// The first periods are run one by one.
const FIRST_PERIODS: usize = 64;

/// A mode that has decayed to e^−this no longer keeps periods from being skipped.
const FORGOTTEN: f64 = 21.0;

/// Radians, or decay, of the fastest mode alive that are skipped at once: the cubic is right to 1e-6 of it.
const SKIPPED: f64 = 0.2;

/// Doublings of the matrix of one period.
const DOUBLINGS_CAP: usize = 30;

/// Periods run one by one before the run ends early; reached only where modes hardly decay.
const RUN_CAP: usize = 60_000;

/// The recorded points.
pub(super) struct Run {
    pub(super) output: Vec<TracePoint>,
    pub(super) control: Vec<TracePoint>,
}

/// All that the loop remembers.
#[derive(Clone, Debug)]
struct State {
    x: Vec<f64>,
    held: f64,
    /// The load that has arrived at the plant.
    pushed: f64,
    command: f64,
    /// Latest first.
    errors: Vec<f64>,
    /// Latest first.
    controls: Vec<f64>,
}

impl State {
    fn at_rest(machine: &Machine, command: f64) -> Self {
        let memory = || vec![0.0; machine.remembered];
        Self { x: vec![0.0; machine.order], held: 0.0, pushed: 0.0, command, errors: memory(), controls: memory() }
    }

    fn to_list(&self) -> Vec<f64> {
        let numbers = [self.held, self.pushed, self.command];
        self.x.iter().chain(&numbers).chain(&self.errors).chain(&self.controls).copied().collect()
    }

    fn set(&mut self, list: &[f64]) {
        let (x, rest) = list.split_at(self.x.len());
        self.x.copy_from_slice(x);
        (self.held, self.pushed, self.command) = (rest[0], rest[1], rest[2]);
        let (errors, controls) = rest[3..].split_at(self.errors.len());
        self.errors.copy_from_slice(errors);
        self.controls.copy_from_slice(controls);
    }
}

/// Runs the loop from rest.
pub(super) fn run(machine: &Machine, periods: usize, excitation: Excitation) -> Run {
    let (command, load) = match excitation {
        Excitation::Command => (1.0, 0.0),
        Excitation::Load => (0.0, 1.0),
    };
    let mut state = State::at_rest(machine, command);
    let mut record = Recorder {
        machine,
        output: Vec::new(),
        control: vec![flat(0.0, 0.0)],
        early: Vec::new(),
        bridge: None,
        begun: [0; 2],
    };
    for _ in 0..machine.early {
        machine.control(&mut state, 0.0, 0.0);
        record.early.push(state.controls[0]);
    }
    let mut skips = Skips { machine, powers: Vec::new() };
    let first = FIRST_PERIODS + machine.remembered;
    let mut k = 0;
    for _ in 0..RUN_CAP {
        if k >= periods {
            break;
        }
        record.period(&mut state, k, load);
        k += 1;
        // Two periods between two skips tell how the mean slope changes.
        if k >= first && record.two_since_skip() {
            record.bridged();
            let skipped = machine.skippable(k).min(periods - k);
            if skipped > 0 {
                k += skips.skip(&mut state, skipped);
                record.resume(k, &state);
            }
        }
    }
    let last = (k + machine.early) as f64 * machine.period + machine.computation;
    record.control.push(flat(last, state.controls[0]));
    Run { output: record.output, control: record.control }
}

fn flat(time: f64, value: f64) -> TracePoint {
    TracePoint { time, value, slope: 0.0 }
}

impl Machine {
    /// Periods that may be skipped after the k-th.
    fn skippable(&self, k: usize) -> usize {
        let alive = self.rates.iter().filter(|(decay, _)| -decay * k as f64 <= FORGOTTEN);
        let fastest = alive.map(|(_, rate)| *rate).fold(0.0, f64::max);
        if fastest > 0.0 { (SKIPPED / fastest) as usize } else { usize::MAX }
    }

    /// The next output of the controller; `direct` is what of it the sensor shows at once.
    fn control(&self, state: &mut State, quiet: f64, direct: f64) {
        let past = |list: &[f64], c: &[f64]| c.iter().skip(1).zip(list).map(|(c, v)| c * v).sum::<f64>();
        let known = past(&state.errors, &self.b) - past(&state.controls, &self.a);
        // u = known + b0·(r − f·(quiet + direct·u)).
        let free = known + self.b[0] * (state.command - self.feedback * quiet);
        let u = free / (1.0 + self.b[0] * self.feedback * direct);
        let error = state.command - self.feedback * (quiet + direct * u);
        for (list, value) in [(&mut state.errors, error), (&mut state.controls, u)] {
            list.rotate_right(1);
            list[0] = value;
        }
    }

    /// The events of a part; `load` where its step arrives in this period. `sampled` says whether the period's sample has
    /// been taken.
    fn events(&self, part: &Part, state: &mut State, k: usize, load: f64, sampled: &mut bool) {
        for event in &part.events {
            match event {
                Event::Load(after) if *after == k => state.pushed = load,
                Event::Load(_) => {}
                Event::Hold(ago) => {
                    // The latest output belongs to the sample `early` periods ahead, or to the one before.
                    let age = self.early + ago + usize::from(*sampled);
                    state.held = age.checked_sub(1).map_or(state.held, |age| state.controls[age]);
                }
                Event::Sample(_) => {
                    let here = self.early == 0 && part.events.contains(&Event::Hold(0));
                    let input = if here { state.pushed } else { state.held + state.pushed };
                    let quiet = self.measured.read(&state.x, input);
                    self.control(state, quiet, if here { self.measured.direct } else { 0.0 });
                    *sampled = true;
                }
            }
        }
    }

    /// One period long after the load has arrived.
    fn silently(&self, state: &mut State) {
        let mut next = state.x.clone();
        let mut sampled = false;
        for part in &self.parts {
            self.events(part, state, usize::MAX, 0.0, &mut sampled);
            for step in &part.steps {
                step.moves.apply(&state.x, state.held + state.pushed, &mut next);
                core::mem::swap(&mut state.x, &mut next);
            }
        }
    }
}

/// Matrices of 1, 2, 4, … periods.
struct Skips<'a> {
    machine: &'a Machine,
    powers: Vec<Vec<f64>>,
}

impl Skips<'_> {
    /// Skips the largest power of two of periods up to `wanted`; returns their number.
    fn skip(&mut self, state: &mut State, wanted: usize) -> usize {
        let doublings = (wanted.ilog2() as usize).min(DOUBLINGS_CAP);
        let size = state.to_list().len();
        while self.powers.len() <= doublings {
            let next = match self.powers.last() {
                None => self.one_period(state),
                Some(last) => product(last, last, size),
            };
            self.powers.push(next);
        }
        let list = product(&self.powers[doublings], &state.to_list(), size);
        state.set(&list);
        1 << doublings
    }

    /// The matrix of one period, column by column.
    fn one_period(&self, state: &State) -> Vec<f64> {
        let size = state.to_list().len();
        let mut matrix = vec![0.0; size * size];
        for j in 0..size {
            let mut unit = vec![0.0; size];
            unit[j] = 1.0;
            let mut moved = state.clone();
            moved.set(&unit);
            self.machine.silently(&mut moved);
            for (i, value) in moved.to_list().into_iter().enumerate() {
                matrix[i * size + j] = value;
            }
        }
        matrix
    }
}

/// The product of a square matrix with another one, or with a column.
fn product(a: &[f64], b: &[f64], size: usize) -> Vec<f64> {
    let columns = b.len() / size;
    let mut c = vec![0.0; b.len()];
    for i in 0..size {
        for k in 0..size {
            let factor = a[i * size + k];
            for j in 0..columns {
                c[i * columns + j] += factor * b[k * columns + j];
            }
        }
    }
    c
}

/// Collects the points.
struct Recorder<'a> {
    machine: &'a Machine,
    output: Vec<TracePoint>,
    control: Vec<TracePoint>,
    /// Outputs computed before the first period.
    early: Vec<f64>,
    /// The point at the end of a skip, which waits for the mean slope behind it.
    bridge: Option<usize>,
    /// The points at which the latest two periods begin.
    begun: [usize; 2],
}

impl Recorder<'_> {
    fn point(&self, time: f64, state: &State) -> TracePoint {
        let u = state.held + state.pushed;
        let (output, slope) = (&self.machine.output, &self.machine.slope);
        TracePoint { time, value: output.read(&state.x, u), slope: slope.read(&state.x, u) }
    }

    /// One period, point by point.
    fn period(&mut self, state: &mut State, k: usize, load: f64) {
        let machine = self.machine;
        let mut next = state.x.clone();
        let mut sampled = false;
        self.begun = [self.begun[1], self.output.len().saturating_sub(1)];
        for part in &machine.parts {
            let time = k as f64 * machine.period + part.offset;
            let (before, had) = (self.point(time, state), sampled);
            machine.events(part, state, k, load, &mut sampled);
            let after = self.point(time, state);
            if self.output.is_empty() {
                self.output.push(after);
            } else if after != before {
                self.output.extend([before, after]);
            }
            if sampled && !had {
                self.stair(k + machine.early, state.controls[1], state.controls[0]);
            }
            let mut t = time;
            // The next part begins exactly where this one ends.
            let end = part.end.map_or((k + 1) as f64 * machine.period, |end| k as f64 * machine.period + end);
            for (i, step) in part.steps.iter().enumerate() {
                step.moves.apply(&state.x, state.held + state.pushed, &mut next);
                core::mem::swap(&mut state.x, &mut next);
                t = if i + 1 == part.steps.len() { end } else { (t + step.length).min(end) };
                self.output.push(self.point(t, state));
            }
        }
    }

    fn two_since_skip(&self) -> bool {
        self.bridge.is_none_or(|bridge| self.begun[0] == bridge)
    }

    /// The mean slopes at the start and the end of the latest two periods, extrapolated by half a period each.
    fn mean_slopes(&self) -> Option<(f64, f64)> {
        let at = |i: usize| self.output.get(i).copied();
        let (start, middle, end) = (at(self.begun[0])?, at(self.begun[1])?, self.output.last().copied()?);
        let slope = |a: TracePoint, b: TracePoint| (b.value - a.value) / (b.time - a.time);
        let (one, two) = (slope(start, middle), slope(middle, end));
        Some((1.5 * one - 0.5 * two, 1.5 * two - 0.5 * one))
    }

    /// Gives the end of the latest skip its slope.
    fn bridged(&mut self) -> Option<f64> {
        let (start, end) = self.mean_slopes()?;
        if let Some(bridge) = self.bridge.filter(|bridge| self.begun[0] == *bridge) {
            self.output[bridge].slope = start;
            self.bridge = None;
        }
        Some(end)
    }

    /// The loop stands at the start of period k after a skip: the points beside it get mean slopes.
    fn resume(&mut self, k: usize, state: &State) {
        if let (Some(slope), Some(last)) = (self.bridged(), self.output.last().copied()) {
            self.output.push(TracePoint { slope, ..last });
        }
        self.bridge = Some(self.output.len());
        self.output.push(self.point(k as f64 * self.machine.period, state));
    }

    /// The hold goes from one value to the next when sample `n` has been computed.
    fn stair(&mut self, n: usize, before: f64, after: f64) {
        let at = |n: usize| n as f64 * self.machine.period + self.machine.computation;
        let mut last = 0.0;
        for (i, value) in core::mem::take(&mut self.early).into_iter().enumerate() {
            self.control.extend([flat(at(i), last), flat(at(i), value)]);
            last = value;
        }
        self.control.extend([flat(at(n), before), flat(at(n), after)]);
    }
}
