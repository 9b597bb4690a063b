//! The loop at one value of the knob, with what is computed of it kept for the next question.

use super::delayed::{self, Delayed, Numerators};
use super::frequency::Frequency;
use super::modes::{Modes, Peaks};
use super::motion::Motion;
use super::open_loop::OpenLoop;
use crate::exact::complex_roots::{enclose_all, polished};
use crate::exact::half_plane::count;
use crate::exact::{ExactError, IntPoly};
use crate::model::{BlockAt, Loop};
use crate::sampled::{Answers, SampledAt, SampledRanges};
use alloc::rc::Rc;
use alloc::vec::Vec;
use core::cell::OnceCell;
use dashu_int::IBig;
use dashu_ratio::RBig;
use nalgebra::Complex;

/// Poles whose real part is below this part of the imaginary one are enclosed anew, with the two precisions in turn until
/// the real parts are told: the polished ones are right to about 1e-30 of their magnitude.
const NEAR_AXIS: f64 = 1e-18;
const NEAR_AXIS_BITS: [i64; 2] = [160, 640];

/// A real part is told where the disc's radius is below this part of it.
const TOLD: f64 = 1e-12;

/// An answer over time, as far as there is one.
#[derive(Debug)]
pub enum Answer {
    /// The answer and its extremes.
    Found(Motion, Peaks),
    /// The loop is unstable, or the answer contains an impulse.
    Undefined,
    /// The extremes were not found within the cap on steps.
    NotComputed,
}

impl Answer {
    /// The answer and its extremes, where there are any.
    pub fn found(&self) -> Option<(&Motion, &Peaks)> {
        match self {
            Self::Found(motion, peaks) => Some((motion, peaks)),
            _ => None,
        }
    }
}

impl From<Motion> for Answer {
    fn from(motion: Motion) -> Self {
        match motion.peaks() {
            Some(peaks) => Self::Found(motion, peaks),
            None => Self::NotComputed,
        }
    }
}

/// A loop with what does not change with the knob.
#[derive(Clone, Copy, Debug)]
pub struct Setup<'a> {
    /// The loop as built.
    pub model: &'a Loop,
    /// What is known of it where its controller samples.
    pub sampled: Option<&'a Rc<SampledRanges>>,
}

impl<'a> From<&'a Loop> for Setup<'a> {
    /// Of a loop whose controller works continuously.
    fn from(model: &'a Loop) -> Self {
        Self { model, sampled: None }
    }
}

/// The loop at one value of the knob.
#[derive(Debug)]
pub struct LoopAt {
    /// The knob.
    pub knob: RBig,
    controller: BlockAt,
    plant: BlockAt,
    sensor: BlockAt,
    /// N and D of the open loop.
    pub(super) open: BlockAt,
    /// D ± N; not reduced.
    pub(super) closed: IntPoly,
    /// Of the loop without dead time; empty where it has some.
    rational_poles: Vec<Complex<f64>>,
    delayed: Option<Delayed>,
    sampled: Option<SampledAt>,
    stable: OnceCell<bool>,
    output: OnceCell<Answer>,
    load: OnceCell<Answer>,
    control: OnceCell<Answer>,
    frequency: OnceCell<Frequency>,
}

impl LoopAt {
    /// The loop at a knob value that is known to be stable.
    ///
    /// # Errors
    /// As [`Self::new`].
    pub fn known_stable(setup: Setup<'_>, knob: RBig) -> Result<Self, ExactError> {
        let at = Self::new(setup, knob)?;
        at.stable.get_or_init(|| true);
        if let Some(sampled) = &at.sampled {
            sampled.is_known_stable();
        }
        Ok(at)
    }

    /// The loop at a knob value.
    ///
    /// # Errors
    /// From the exact methods, where the poles cannot be found.
    pub fn new(setup: Setup<'_>, knob: RBig) -> Result<Self, ExactError> {
        let model = setup.model;
        let [controller, plant, sensor] = [0, 1, 2].map(|i| model.blocks[i].at(&knob));
        let product = |parts: [&IntPoly; 3]| parts[0].times(parts[1]).times(parts[2]);
        let open = BlockAt {
            above: product([&controller.above, &plant.above, &sensor.above]),
            below: product([&controller.below, &plant.below, &sensor.below]),
        };
        let sign = model.feedback_sign();
        let closed = open.below.combined(&IBig::ONE, &open.above, &sign);
        // For positive feedback L below is −(controller·plant·sensor), so that 1 + L stays the denominator.
        let open =
            BlockAt { above: IntPoly::new(open.above.coefficients().iter().map(|c| c * &sign).collect()), ..open };
        let sampled = setup.sampled.map(|whole| SampledAt::new(whole, knob.clone())).transpose()?;
        let times = model.blocks.each_ref().map(|block| block.dead_time.at(&knob));
        let delayed = if sampled.is_none() { Delayed::new(times) } else { None };
        let continuous = sampled.is_none() && delayed.is_none();
        let rational_poles = if continuous { poles(&closed)? } else { Vec::new() };
        Ok(Self {
            knob,
            controller,
            plant,
            sensor,
            open,
            closed,
            rational_poles,
            delayed,
            sampled,
            stable: OnceCell::new(),
            output: OnceCell::new(),
            load: OnceCell::new(),
            control: OnceCell::new(),
            frequency: OnceCell::new(),
        })
    }

    /// The sampled loop, where the controller samples.
    pub fn sampled(&self) -> Option<&SampledAt> {
        self.sampled.as_ref()
    }

    /// The poles of the closed loop in the s-plane, in f64; none of a sampled one; with dead time those that shape its answers. Empty where they were not found.
    pub fn poles(&self) -> &[Complex<f64>] {
        match &self.delayed {
            Some(delayed) => delayed.poles(&self.open),
            None => &self.rational_poles,
        }
    }

    /// Whether every pole lies left of the axis; exact.
    pub fn is_stable(&self) -> bool {
        *self.stable.get_or_init(|| match (&self.sampled, &self.delayed) {
            (Some(sampled), _) => sampled.is_stable(),
            (_, Some(delayed)) => delayed.is_stable(&self.open),
            _ => count(&self.closed).is_ok_and(|count| count.is_stable()),
        })
    }

    /// The answer of the output, in the command's units, to a unit step of the command.
    pub fn output(&self) -> &Answer {
        self.output.get_or_init(|| self.answer(0, || self.output_transfer()))
    }

    /// The answer of the output to a unit step at the plant's input.
    pub fn load(&self) -> &Answer {
        self.load.get_or_init(|| self.answer(1, || self.over_closed(self.load_numerator())))
    }

    /// The controller's output after a unit step of the command.
    pub fn control(&self) -> &Answer {
        self.control.get_or_init(|| self.answer(2, || self.over_closed(self.control_numerator())))
    }

    fn load_numerator(&self) -> IntPoly {
        self.plant.above.times(&self.controller.below).times(&self.sensor.below)
    }

    fn control_numerator(&self) -> IntPoly {
        self.controller.above.times(&self.plant.below).times(&self.sensor.below)
    }

    fn over_closed(&self, above: IntPoly) -> BlockAt {
        BlockAt { above, below: self.closed.clone() }
    }

    /// The open loop over frequency. None where the closed loop is unstable.
    pub fn frequency(&self) -> Option<&dyn OpenLoop> {
        if !self.is_stable() {
            return None;
        }
        if let Some(sampled) = &self.sampled {
            return sampled.frequency().map(|found| found as &dyn OpenLoop);
        }
        if let Some(delayed) = &self.delayed {
            return Some(delayed.frequency(&self.open, || self.output_transfer().above));
        }
        let own =
            || Frequency::of(self.open.clone(), self.output_transfer(), &self.closed, self.rational_poles.clone());
        Some(self.frequency.get_or_init(own))
    }

    /// An answer; of a loop with dead time the one of that number.
    fn answer(&self, number: usize, transfer: impl FnOnce() -> BlockAt) -> Answer {
        if !self.is_stable() {
            return Answer::Undefined;
        }
        if let Some(sampled) = &self.sampled {
            let pick = |all: &Answers| [&all.output, &all.load, &all.control][number].clone();
            return delayed::answer(sampled.answers().map(pick).map(Motion::Trace).as_ref());
        }
        if let Some(delayed) = &self.delayed {
            return delayed::answer(delayed.answers(&self.scaled_open(), || self.numerators()).map(|all| &all[number]));
        }
        let Some(modes) = Modes::of_step(&transfer(), &self.rational_poles) else { return Answer::Undefined };
        Motion::Modes(modes).into()
    }

    /// N and D of the open loop, both times the factor by which [`Self::output_transfer`] scales its denominator.
    fn scaled_open(&self) -> BlockAt {
        let (_, scale) = self.output_scale();
        BlockAt { above: times(&self.open.above, &scale), below: times(&self.open.below, &scale) }
    }

    fn numerators(&self) -> Numerators {
        let (_, scale) = self.output_scale();
        Numerators {
            output: self.output_transfer().above,
            load: times(&self.load_numerator(), &scale),
            control: times(&self.control_numerator(), &scale),
        }
    }

    /// h and g of the sensor's static gain h/g; 1 where it has none.
    fn output_scale(&self) -> (IBig, IBig) {
        let (gain, scale) = (self.sensor.above.coefficient(0), self.sensor.below.coefficient(0));
        if gain.is_zero() || scale.is_zero() { (IBig::ONE, IBig::ONE) } else { (gain, scale) }
    }

    /// N·h and F·g of command to output: the output is scaled by the sensor's static gain h/g where it has one, so that
    /// 1 means no error.
    pub(super) fn output_transfer(&self) -> BlockAt {
        let above = self.controller.above.times(&self.plant.above).times(&self.sensor.below);
        let (gain, scale) = self.output_scale();
        BlockAt { above: times(&above, &gain), below: times(&self.closed, &scale) }
    }
}

fn times(p: &IntPoly, factor: &IBig) -> IntPoly {
    IntPoly::new(p.coefficients().iter().map(|c| c * factor).collect())
}

/// The poles, with real parts that keep their digits however near to the axis.
fn poles(closed: &IntPoly) -> Result<Vec<Complex<f64>>, ExactError> {
    let mut poles = polished(closed)?;
    for bits in NEAR_AXIS_BITS {
        if !poles.iter().any(|p| p.re.abs() < NEAR_AXIS * p.im.abs()) {
            break;
        }
        let discs = enclose_all(closed, bits)?;
        poles = discs.iter().flat_map(|d| core::iter::repeat_n(d.center.to_f64(), d.multiplicity)).collect();
        if discs.iter().all(|disc| disc.radius <= TOLD * disc.center.to_f64().re.abs()) {
            break;
        }
    }
    Ok(poles)
}
