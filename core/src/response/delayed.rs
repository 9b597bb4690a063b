//! A loop with dead time at one value of the knob.

use super::loop_at::Answer;
use super::motion::Motion;
use super::open_loop::OpenLoop;
use crate::dead_time::delay::count_at;
use crate::dead_time::frequency::DelayFrequency;
use crate::dead_time::response::{Output, settles_soon, to_step};
use crate::dead_time::{Quasi, poles};
use crate::exact::IntPoly;
use crate::model::BlockAt;
use crate::numerics::magnitude;
use alloc::vec::Vec;
use core::cell::OnceCell;
use dashu_ratio::RBig;
use nalgebra::Complex;

/// The dead times of controller, plant and sensor, s.
#[derive(Debug)]
pub(super) struct Delayed {
    controller: RBig,
    plant: RBig,
    /// All three.
    pub(super) total: RBig,
    poles: OnceCell<Vec<Complex<f64>>>,
    answers: OnceCell<Option<[Motion; 3]>>,
    frequency: OnceCell<DelayFrequency>,
}

/// The numerators, over the characteristic function, of what is asked: output, load, controller output.
pub(super) struct Numerators {
    pub(super) output: IntPoly,
    pub(super) load: IntPoly,
    pub(super) control: IntPoly,
}

impl Delayed {
    /// None without dead time.
    pub(super) fn new([controller, plant, sensor]: [RBig; 3]) -> Option<Self> {
        let total = &controller + &plant + &sensor;
        (total > RBig::ZERO).then(|| Self {
            controller,
            plant,
            total,
            poles: OnceCell::new(),
            answers: OnceCell::new(),
            frequency: OnceCell::new(),
        })
    }

    /// Whether every pole lies left of the axis; proven.
    pub(super) fn is_stable(&self, open: &BlockAt) -> bool {
        count_at(&open.below, &open.above, &self.total).is_ok_and(|count| count.right == 0 && count.axis == 0)
    }

    /// The poles that shape the answers, and every one as slow as they are; empty where they were not found.
    pub(super) fn poles(&self, open: &BlockAt) -> &[Complex<f64>] {
        self.poles.get_or_init(|| {
            let f = Quasi::new(&open.below, &open.above, &self.total);
            let Ok(dominant) = poles::dominant(&f) else { return Vec::new() };
            let place = |root: &crate::record::Root| Complex::new(root.re, root.im);
            let slowest = dominant.iter().map(|root| magnitude(place(root))).fold(f64::INFINITY, f64::min);
            // Whatever is nearer to the origin lies right of this line.
            let reach = dominant.iter().map(|root| root.re).fold(-slowest, f64::min);
            match poles::right_of(&f, reach) {
                Ok(all) if slowest.is_finite() => all.iter().map(place).collect(),
                _ => dominant.iter().map(place).collect(),
            }
        })
    }

    /// The open loop over frequency; `transfer` is the numerator of command to output.
    pub(super) fn frequency(&self, open: &BlockAt, transfer: impl FnOnce() -> IntPoly) -> &dyn OpenLoop {
        self.frequency.get_or_init(|| {
            let poles = self.poles(open).iter().copied();
            DelayFrequency::new(&open.above, &open.below, &self.total, &transfer(), poles)
        })
    }

    /// Output, load and controller output after a unit step. None where the answers do not settle in time.
    pub(super) fn answers(&self, open: &BlockAt, wanted: impl FnOnce() -> Numerators) -> Option<&[Motion; 3]> {
        let found = self.answers.get_or_init(|| {
            // Beside an edge, or at next to no gain, nobody waits for the end.
            let decay = -self.poles(open).iter().map(|pole| pole.re).fold(f64::NEG_INFINITY, f64::max);
            if !settles_soon(&open.below, &open.above, &self.total, decay) {
                return None;
            }
            let Numerators { output, load, control } = wanted();
            let lag = |time: &RBig| time.to_f64().value();
            let outputs = [
                Output { above: output, lag: lag(&(&self.controller + &self.plant)) },
                Output { above: load, lag: lag(&self.plant) },
                Output { above: control, lag: lag(&self.controller) },
            ];
            let traces = to_step(&open.below, &open.above, &self.total, &outputs).ok()?;
            let motions: Vec<Motion> = traces.into_iter().map(Motion::Trace).collect();
            motions.try_into().ok()
        });
        found.as_ref()
    }
}

/// One of the answers.
pub(super) fn answer(motion: Option<&Motion>) -> Answer {
    motion.map_or(Answer::NotComputed, |motion| motion.clone().into())
}
