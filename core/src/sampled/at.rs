//! The sampled loop at one value of the knob: its poles and their figures, static gains, and what else is asked of it.

use super::enclosed::Enclosed;
use super::factored::Factored;
use super::frequency::SampledFrequency;
use super::ranges::SampledRanges;
use super::response::{Answers, answers};
use crate::exact::complex_roots::polished;
use crate::exact::{Dyadic, ExactError, IntPoly};
use crate::numerics::magnitude;
use crate::record::{Point, equivalent};
use alloc::rc::Rc;
use alloc::vec::Vec;
use core::cell::OnceCell;
use dashu_int::IBig;
use dashu_ratio::RBig;
use nalgebra::Complex;

/// A sampled loop at one value of the knob.
#[derive(Debug)]
pub struct SampledAt {
    /// The loop and its ranges.
    pub whole: Rc<SampledRanges>,
    /// The knob.
    pub knob: RBig,
    /// Poles of the closed loop in the z-plane.
    pub poles: Vec<Complex<f64>>,
    /// The controller's numerator and denominator in z here.
    pub(super) controller: [Factored; 2],
    stable: OnceCell<bool>,
    frequency: OnceCell<SampledFrequency>,
    answers: OnceCell<Option<Answers>>,
}

impl SampledAt {
    /// The loop at a knob value.
    ///
    /// # Errors
    /// From the exact methods, where the poles cannot be found.
    pub fn new(whole: &Rc<SampledRanges>, knob: RBig) -> Result<Self, ExactError> {
        let poles = polished(&whole.characteristic_at(&knob))?;
        let Controls { above, below } = controls(whole, &knob);
        Ok(Self {
            whole: Rc::clone(whole),
            knob,
            poles,
            controller: [above, below],
            stable: OnceCell::new(),
            frequency: OnceCell::new(),
            answers: OnceCell::new(),
        })
    }

    /// The loop at a knob value that is known to be stable.
    ///
    /// # Errors
    /// As [`Self::new`].
    pub fn known_stable(whole: &Rc<SampledRanges>, knob: RBig) -> Result<Self, ExactError> {
        let at = Self::new(whole, knob)?;
        at.stable.get_or_init(|| true);
        Ok(at)
    }

    /// Takes it as proven that the loop is stable here.
    pub fn is_known_stable(&self) {
        self.stable.get_or_init(|| true);
    }

    /// Whether every pole lies inside of the unit circle; proven. False where it cannot be decided.
    pub fn is_stable(&self) -> bool {
        *self.stable.get_or_init(|| self.whole.count_at(&self.knob).is_ok_and(|count| count.is_stable()))
    }

    /// s.
    pub fn period(&self) -> f64 {
        self.whole.input.period.to_f64().value()
    }

    /// The smallest damping ratio of a pole's equivalent in s. A pole at z = 0 has ratio 1; a negative real one oscillates
    /// at half the sampling frequency.
    pub fn damping_ratio(&self) -> f64 {
        self.over_equivalents(1.0, |s| -s.re / libm::hypot(s.re, s.im))
    }

    /// 1/s: the slowest decay.
    pub fn decay_rate(&self) -> f64 {
        self.over_equivalents(f64::INFINITY, |s| -s.re)
    }

    /// rad/s: the lowest natural frequency.
    pub fn natural_frequency(&self) -> f64 {
        self.over_equivalents(f64::INFINITY, |s| libm::hypot(s.re, s.im))
    }

    /// The smallest value over all poles; poles at z = 0 have no equivalent and count as `gone`.
    fn over_equivalents(&self, gone: f64, value: impl Fn(Point) -> f64) -> f64 {
        let period = self.period();
        let points = self.poles.iter().map(|z| equivalent(Point { re: z.re, im: z.im }, period));
        points.map(|s| s.map_or(gone, &value)).fold(gone, f64::min)
    }

    /// The static error at the comparison for the command 1, t or t²/2 (`order` 0, 1, 2); infinite where it grows.
    pub fn static_error(&self, order: usize) -> f64 {
        let below = self.controller[1].times(&self.whole.family.plant.below);
        let Some(rest) = below.ones.checked_sub(order) else { return f64::INFINITY };
        let period = self.period();
        let reduced = Factored { ones: rest, ..below };
        self.over_closed(&reduced) * libm::pow(period, order as f64)
    }

    /// Of a unit step of the command: what the sensor shows at last.
    pub fn final_measured(&self) -> f64 {
        self.over_closed(&self.controller[0].times(&self.whole.family.plant.above))
    }

    /// Of a unit step of the command: the controller's last output.
    pub fn final_control(&self) -> f64 {
        self.over_closed(&self.controller[0].times(&self.whole.family.plant.below))
    }

    /// Of a unit step at the plant's input: what the sensor shows at last.
    pub fn final_load(&self) -> f64 {
        self.over_closed(&self.controller[1].times(&self.whole.family.plant.above))
    }

    /// p(1) over the value at z = 1 of D_C·D_G ± N_C·N_G, not reduced.
    fn over_closed(&self, p: &Factored) -> f64 {
        let plant = &self.whole.family.plant;
        let [above, below] = &self.controller;
        let sign = &self.whole.input.feedback;
        let open = at_one(&above.times(&plant.above)) * RBig::from(sign.clone());
        let closed = at_one(&below.times(&plant.below)) + open;
        let own = at_one(p);
        if closed.is_zero() { f64::INFINITY } else { (own / closed).to_f64().value() }
    }

    /// The open loop over frequency. None where the closed loop is unstable.
    pub fn frequency(&self) -> Option<&SampledFrequency> {
        self.is_stable().then(|| self.frequency.get_or_init(|| SampledFrequency::new(self)))
    }

    /// Answers over time. None where the closed loop is unstable, or settles too slowly to be followed.
    pub fn answers(&self) -> Option<&Answers> {
        self.answers.get_or_init(|| if self.is_stable() { answers(self) } else { None }).as_ref()
    }

    /// The largest |z| of a pole.
    pub(super) fn spectral_radius(&self) -> f64 {
        self.poles.iter().map(|z| magnitude(*z)).fold(0.0, f64::max)
    }
}

struct Controls {
    above: Factored,
    below: Factored,
}

/// The controller at a knob value.
fn controls(whole: &SampledRanges, knob: &RBig) -> Controls {
    let controller = &whole.family.controller;
    let powers = controller.above.len().max(controller.below.len());
    let numerator = knob.numerator();
    let denominator: IBig = knob.denominator().clone().into();
    let sum = |parts: &[Factored]| {
        parts.iter().enumerate().fold(Factored::plain(Enclosed::default()), |sum, (k, part)| {
            let factor = numerator.pow(k) * denominator.pow(powers - 1 - k);
            sum.plus(&part.scaled(&Enclosed::exact(IntPoly::new([factor].into()))))
        })
    };
    Controls { above: sum(&controller.above), below: sum(&controller.below) }
}

/// The middle of p(1), exactly 0 where that is known.
fn at_one(p: &Factored) -> RBig {
    if p.ones > 0 {
        return RBig::ZERO;
    }
    let rest = p.rest();
    let sum: IBig = rest.center.coefficients().iter().sum();
    Dyadic::new(sum << p.minus_ones, rest.exponent).to_rational()
}
