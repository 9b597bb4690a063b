//! The characteristic polynomial in z as a family over the knob, F(z, q) = Σ q^k·parts\[k\](z), with enclosed coefficients.

use super::controller::{Controller, Given, KnobRatio, Method, Unmatched, controller};
use super::enclosed::Enclosed;
use super::factored::Factored;
use super::plant::{Held, hold};
use crate::exact::gcd::gcd;
use crate::exact::half_plane::{HalfPlaneCount, count};
use crate::exact::{ExactError, IntPoly};
use crate::model::{BlockAt, Loop, Ratio, Sampling};
use crate::project::Discretisation;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_ratio::RBig;

/// Bits of the fixed point at the first try. Enough for most loops of order 10; see [`MAXIMUM_BITS`].
pub const FIRST_BITS: usize = 192;

/// Bits at the last try. Doubled from [`FIRST_BITS`] on while a sign stays open.
pub const MAXIMUM_BITS: usize = 1024;

/// A hundred times the largest product of frequency and period for prewarping, π rounded down.
const PREWARP_LIMIT: u32 = 314;

/// The longest delay that is treated, in sample periods: every period adds a pole.
const MAXIMUM_DELAY_PERIODS: u32 = 40;

/// Everything about a loop with a sampled controller.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct SampledLoop {
    /// The controller as typed.
    pub controller: KnobRatio,
    /// Whether it is typed in z, or how it gets there.
    pub given: Given,
    /// The plant in s.
    pub plant: BlockAt,
    /// The sensor in s.
    pub sensor: BlockAt,
    /// s, above zero.
    pub period: RBig,
    /// Sample periods, from a sample to the hold's new value.
    pub computation: RBig,
    /// s, of the controller, beside its computation.
    pub controller_delay: RBig,
    /// s, of the plant.
    pub plant_delay: RBig,
    /// s, of the sensor.
    pub sensor_delay: RBig,
    /// 1 for negative feedback, −1 for positive.
    pub feedback: IBig,
}

/// Why a loop is not treated.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Trouble {
    /// Bad input: what must be changed, a sentence.
    Refused(String),
    /// A sign stayed open at this precision; more may decide it.
    Undecided,
    /// A cap of the exact methods.
    Exact(ExactError),
}

impl From<ExactError> for Trouble {
    fn from(error: ExactError) -> Self {
        Self::Exact(error)
    }
}

/// F(z, q) without what no knob moves, and that.
#[derive(Clone, Debug)]
pub struct SampledFamily {
    /// By powers of the knob; the last one is not zero without doubt.
    pub parts: Vec<Factored>,
    /// Factors that no knob moves, and how many of their roots lie outside of the unit circle and on it.
    pub fixed: Vec<(Factored, HalfPlaneCount)>,
    /// The sampled controller.
    pub controller: Controller,
    /// The plant as the controller sees it.
    pub plant: Held,
}

impl SampledLoop {
    /// Of a loop with sampling.
    ///
    /// # Errors
    /// What must be changed.
    pub fn new(model: &Loop, sampling: &Sampling) -> Result<Self, Trouble> {
        let refused = |text: &str| Trouble::Refused(text.to_string());
        let [controller, plant, sensor] = &model.blocks;
        let has_knob = |ratio: &Ratio| {
            let mut factors = ratio.numerator.iter().chain(&ratio.denominator);
            factors.any(|factor| factor.polynomial.knob_degree() > 0) || !ratio.dead_time.per_knob.is_zero()
        };
        if has_knob(plant) || has_knob(sensor) || !controller.dead_time.per_knob.is_zero() {
            return Err(refused("with sampled control the knob must stand in the controller, and not in a dead time"));
        }
        let (above, below) =
            controller.multiplied_out().ok_or_else(|| refused("the numbers of the controller are out of range"))?;
        let method = match (sampling.method, &sampling.prewarp) {
            (Discretisation::TustinPrewarped, Some(omega)) => Method::Prewarped(omega.clone()),
            (Discretisation::Tustin | Discretisation::TustinPrewarped, _) => Method::Tustin,
            (Discretisation::BackwardDifference, _) => Method::BackwardDifference,
            (Discretisation::Matched, _) => Method::Matched,
        };
        Ok(Self {
            controller: KnobRatio::new(&above, &below),
            given: if sampling.controller_in_z { Given::InZ } else { Given::InS(method) },
            plant: plant.at(&RBig::ZERO),
            sensor: sensor.at(&RBig::ZERO),
            period: sampling.period.clone(),
            computation: sampling.delay.clone(),
            controller_delay: controller.dead_time.fixed.clone(),
            plant_delay: plant.dead_time.fixed.clone(),
            sensor_delay: sensor.dead_time.fixed.clone(),
            feedback: model.feedback_sign(),
        })
    }

    /// Plant times sensor without their common factor, and that.
    fn path(&self) -> (BlockAt, IntPoly) {
        let above = self.plant.above.times(&self.sensor.above);
        let below = self.plant.below.times(&self.sensor.below);
        let common = gcd(&above, &below);
        let over = |p: &IntPoly| p.exactly_over(&common).unwrap_or_else(|| p.clone());
        (BlockAt { above: over(&above), below: over(&below) }, common)
    }

    /// From the hold's input to the sample, in s.
    pub fn delay(&self) -> RBig {
        self.hold_delay() + &self.plant_delay + &self.sensor_delay
    }

    /// From a sample to the hold, s.
    pub fn hold_delay(&self) -> RBig {
        &self.computation * &self.period + &self.controller_delay
    }

    /// The same loop with another sample period. A controller in z keeps its numbers.
    pub fn at_period(&self, period: RBig) -> Self {
        Self { period, ..self.clone() }
    }

    /// What keeps the loop from being treated.
    fn refusal(&self) -> Option<&'static str> {
        let improper = |above: &IntPoly, below: &IntPoly| above.degree() > below.degree();
        let (path, _) = self.path();
        if improper(&self.plant.above, &self.plant.below) {
            return Some(
                "a hold in front of a plant with more zeros than poles has no output: add filter poles to the plant",
            );
        }
        if improper(&path.above, &path.below) {
            return Some("a step of the hold makes an impulse at the sensor: add filter poles to the sensor");
        }
        if let Given::InS(Method::Prewarped(omega)) = &self.given
            && omega * &self.period >= RBig::from_parts(PREWARP_LIMIT.into(), 100u8.into())
        {
            return Some(
                "the frequency of the conversion must stay below half the sampling frequency, π over the period",
            );
        }
        if self.delay() > &self.period * RBig::from(MAXIMUM_DELAY_PERIODS) {
            return Some("the dead time is longer than 40 sample periods: type a longer sample period");
        }
        None
    }

    /// The family at a precision.
    ///
    /// # Errors
    /// Bad input, or a cap.
    pub fn family(&self, bits: usize) -> Result<SampledFamily, Trouble> {
        if let Some(text) = self.refusal() {
            return Err(Trouble::Refused(text.to_string()));
        }
        let controller = controller(&self.controller, &self.given, &self.period, bits)?.map_err(unmatched)?;
        let (path, hidden) = self.path();
        let plant = hold(&path.above, &path.below, &self.period, &self.delay(), bits);
        let sign = Enclosed::exact(IntPoly::new([self.feedback.clone()].into()));
        let powers = controller.above.len().max(controller.below.len());
        let zero = Factored::plain(Enclosed::default());
        let mut parts: Vec<Factored> = (0..powers)
            .map(|k| {
                let below = controller.below.get(k).unwrap_or(&zero).times(&plant.below);
                let above = controller.above.get(k).unwrap_or(&zero).times(&plant.above).scaled(&sign);
                below.plus(&above)
            })
            .collect();
        while parts.last().is_some_and(Factored::is_zero) {
            parts.pop();
        }
        if parts.is_empty() {
            return Err(Trouble::Refused(
                "the open loop is the constant that makes every z a closed-loop pole: change a block".to_string(),
            ));
        }
        if controller
            .above
            .iter()
            .any(|p| p.degree() > controller.below.iter().map(Factored::degree).max().unwrap_or(0))
        {
            return Err(Trouble::Refused(
                "the controller needs samples that are not yet taken: give it as many poles as zeros".to_string(),
            ));
        }
        let mut fixed = Vec::new();
        fixed.extend(common_roots(&mut parts));
        if controller.fixed.0.degree() > 0 {
            fixed.push(controller.fixed.clone());
        }
        if hidden.degree() > 0 {
            fixed.push((
                hold(&IntPoly::from_i64(&[1]), &hidden, &self.period, &RBig::ZERO, bits).below,
                count(&hidden)?,
            ));
        }
        Ok(SampledFamily { parts, fixed, controller, plant })
    }
}

/// Takes out the known roots that all parts share.
fn common_roots(parts: &mut [Factored]) -> Option<(Factored, HalfPlaneCount)> {
    let shared = |of: fn(&Factored) -> usize| parts.iter().filter(|p| !p.is_zero()).map(of).min().unwrap_or(0);
    let (zeros, ones, minus_ones) = (shared(|p| p.zeros), shared(|p| p.ones), shared(|p| p.minus_ones));
    if zeros + ones + minus_ones == 0 {
        return None;
    }
    for part in parts.iter_mut().filter(|p| !p.is_zero()) {
        *part = part.without(zeros, ones, minus_ones);
    }
    let factor = Factored { zeros, ones, minus_ones, ..Factored::plain(Enclosed::one()) };
    Some((factor, HalfPlaneCount { right: 0, axis: ones + minus_ones }))
}

fn unmatched(reason: Unmatched) -> Trouble {
    let text = match reason {
        Unmatched::KnobInRoots => {
            "matched poles and zeros need the knob as a factor in front: where it moves a pole or a zero of the controller, \
             choose another method or type the controller in z"
        }
        Unmatched::Improper => {
            "matched poles and zeros need at least as many poles as zeros: add filter poles to the controller"
        }
    };
    Trouble::Refused(text.to_string())
}

impl SampledFamily {
    /// The degree of the moving part in z, for all but finitely many knob values.
    pub fn order(&self) -> usize {
        self.parts.iter().map(Factored::degree).max().unwrap_or(0)
    }

    /// Roots of the fixed factors outside of the unit circle and on it.
    pub fn fixed_count(&self) -> HalfPlaneCount {
        self.fixed.iter().fold(HalfPlaneCount::default(), |sum, (_, count)| sum.plus(*count))
    }

    /// The parts with the unit circle as the imaginary axis.
    pub fn on_the_axis(&self) -> Vec<Enclosed> {
        let order = self.order();
        self.parts.iter().map(|part| part.from_circle(order).trimmed()).collect()
    }

    /// F at a rational knob value, times a positive integer, the fixed factors included; middles only.
    pub fn middle_at(&self, q: &RBig) -> IntPoly {
        let parts: Vec<Enclosed> = self.parts.iter().map(Factored::expanded).collect();
        at(&parts, q).center.times(&self.fixed_in_z())
    }

    /// The middle of the factor that no knob moves.
    pub fn fixed_in_z(&self) -> IntPoly {
        self.fixed.iter().fold(IntPoly::from_i64(&[1]), |p, (factor, _)| p.times(&factor.expanded().center))
    }
}

/// Σ q^k·parts\[k\], times a positive integer.
pub fn at(parts: &[Enclosed], q: &RBig) -> Enclosed {
    let numerator = q.numerator();
    let denominator: IBig = q.denominator().clone().into();
    let top = parts.len() - 1;
    parts.iter().enumerate().fold(Enclosed::default(), |sum, (k, part)| {
        sum.plus(&part.scaled(&(numerator.pow(k) * denominator.pow(top - k))))
    })
}
