//! The sampled open loop over frequency, L(e^(jωh)) for 0 ≤ ω ≤ π/h: crossovers, margins, sensitivity, bandwidth.
//!
//! With z = (1 + v)/(1 − v) the upper half of the unit circle is v = jw, w = tan(ωh/2) from 0 to infinity, so that all is
//! found as for a continuous loop in v, and the frequencies are taken back.

use super::at::SampledAt;
use super::enclosed::Enclosed;
use super::factored::Factored;
use super::knob_powers::middles;
use super::plant::hold;
use crate::exact::gcd::gcd;
use crate::exact::{ExactError, IntPoly};
use crate::model::BlockAt;
use crate::record::{FrequencyResponse, GainCrossing, PhaseCrossing};
use crate::response::{Frequency, OpenLoop};
use alloc::vec::Vec;
use dashu_ratio::RBig;
use nalgebra::Complex;

/// Bits of the polynomials in v.
const BITS: usize = 192;

/// The open loop over frequency; each part is computed when first asked for. Frequencies in rad/s.
#[derive(Debug)]
pub struct SampledFrequency {
    in_v: Frequency,
    period: f64,
    /// The sensitivity at z = −1.
    at_nyquist: f64,
}

/// Where a pole or zero of the open loop lies on the circle, its phase jumps: the middles of the enclosures put a crossing
/// there, with a factor beyond these.
const POSSIBLE: core::ops::Range<f64> = 1e-25..1e25;

/// A peak within this part of the sensitivity at z = −1 is there.
const SAME_PEAK: f64 = 1e-9;

impl SampledFrequency {
    /// Of a stable loop.
    pub(super) fn new(at: &SampledAt) -> Self {
        let plant = &at.whole.family.plant;
        let [above, below] = &at.controller;
        let sign = Enclosed::exact(IntPoly::new([at.whole.input.feedback.clone()].into()));
        let open_above = above.times(&plant.above).scaled(&sign);
        let open_below = below.times(&plant.below);
        let order = open_above.degree().max(open_below.degree());
        let parts = [&open_above, &open_below].map(|p| p.from_circle(order));
        let [n, d] = in_v(&parts);
        let closed = n.plus(&d);
        let (output, extra) = output(at);
        let transfer_order = output.degree().max(order + extra.degree());
        let product = |p: &IntPoly, q: &Enclosed| p.times(&q.center);
        let [t] = in_v(&[output.from_circle(transfer_order)]);
        let transfer = BlockAt { above: t, below: product(&closed, &extra.from_circle(transfer_order - order)) };
        let one = Complex::new(1.0, 0.0);
        let poles = at.poles.iter().map(|z| (z - one) / (z + one)).filter(|v| v.re.is_finite() && v.im.is_finite());
        // Not zero: a stable loop has no pole at z = −1.
        let last = closed.coefficient(order);
        let ratio = if last.is_zero() {
            f64::INFINITY
        } else {
            RBig::from_parts_signed(d.coefficient(order), last).to_f64().value()
        };
        let open = BlockAt { above: n, below: d };
        let in_v = Frequency::of(open, transfer, &closed, poles.collect());
        Self { in_v, period: at.period(), at_nyquist: libm::fabs(ratio) }
    }

    /// ω for w = tan(ωh/2).
    fn omega(&self, w: f64) -> f64 {
        2.0 * libm::atan(w) / self.period
    }

    /// rad/s: half the sampling frequency, π/h.
    pub fn nyquist(&self) -> f64 {
        core::f64::consts::PI / self.period
    }
}

impl OpenLoop for SampledFrequency {
    /// Where |L| = 1, ascending. `delay_margin` is the phase margin over the frequency: the time by which the signal at that
    /// frequency alone may come later.
    fn gain_crossings(&self) -> Result<Vec<GainCrossing>, ExactError> {
        let found = self.in_v.gain_crossings()?.into_iter().map(|c| {
            let omega = self.omega(c.omega);
            GainCrossing { omega, phase_margin: c.phase_margin, delay_margin: c.delay_margin * c.omega / omega }
        });
        Ok(found.collect())
    }

    /// Where L is real and negative, ascending, z = 1 and z = −1 included.
    fn phase_crossings(&self) -> Result<Vec<PhaseCrossing>, ExactError> {
        let found = self.in_v.phase_crossings()?.into_iter().filter(|c| POSSIBLE.contains(&c.factor));
        Ok(found.map(|c| PhaseCrossing { omega: self.omega(c.omega), factor: c.factor }).collect())
    }

    fn peak(&self) -> Result<(f64, f64), ExactError> {
        let (w, peak) = self.in_v.peak()?;
        if peak <= self.at_nyquist * (1.0 + SAME_PEAK) {
            return Ok((self.nyquist(), self.at_nyquist));
        }
        Ok((self.omega(w), peak))
    }

    /// rad/s, of the output at the samples; infinite where it does not fall 3 dB below its static gain up to half the
    /// sampling frequency, None where the static gain is zero.
    fn bandwidth(&self) -> Result<Option<f64>, ExactError> {
        Ok(self.in_v.bandwidth()?.map(|w| if w.is_finite() { self.omega(w) } else { w }))
    }

    /// The open loop for drawing, up to half the sampling frequency.
    fn response(&self) -> Result<FrequencyResponse, ExactError> {
        let FrequencyResponse { omega, magnitude, phase } = self.in_v.response()?;
        Ok(FrequencyResponse { omega: omega.into_iter().map(|w| self.omega(w)).collect(), magnitude, phase })
    }
}

/// The middles over one power of two.
fn in_v<const N: usize>(parts: &[Enclosed; N]) -> [IntPoly; N] {
    let mut found = middles(parts, BITS).into_iter();
    core::array::from_fn(|_| found.next().unwrap_or_default())
}

/// The numerator of command to output, times what the second value adds to F as the denominator. The output is in the
/// command's units: what the sensor shows at rest.
fn output(at: &SampledAt) -> (Factored, Factored) {
    let input = &at.whole.input;
    let plant = &at.whole.family.plant;
    let one = Factored::plain(Enclosed::one());
    let sensor = &input.sensor;
    let constant = sensor.above.degree() == 0 && sensor.below.degree() == 0;
    if constant && input.sensor_delay.is_zero() {
        return (at.controller[0].times(&plant.above), one);
    }
    let common = gcd(&input.plant.above, &input.plant.below);
    let over = |p: &IntPoly| p.exactly_over(&common).unwrap_or_else(|| p.clone());
    let delay = input.hold_delay() + &input.plant_delay;
    let own = hold(&over(&input.plant.above), &over(&input.plant.below), &input.period, &delay, BITS);
    let constant = |p: &IntPoly| Enclosed::exact(IntPoly::new([p.coefficient(0)].into()));
    let (gain, scale) = (constant(&sensor.above), constant(&sensor.below));
    let above = at.controller[0].times(&own.above).times(&plant.below);
    if gain.is_zero() || scale.is_zero() {
        return (above, own.below);
    }
    (above.scaled(&gain), own.below.scaled(&scale))
}
