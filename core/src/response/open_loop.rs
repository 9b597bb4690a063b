//! What is asked of an open loop over frequency, whatever kind of loop it is.

use crate::exact::ExactError;
use crate::record::{FrequencyResponse, GainCrossing, PhaseCrossing};
use alloc::vec::Vec;
use nalgebra::{Complex, ComplexField};

/// The open loop L of a stable closed loop, over the frequency ω in rad/s. The smallest margin over all crossings counts.
pub trait OpenLoop {
    /// Where |L| = 1, ascending.
    ///
    /// # Errors
    /// From the exact methods, when a cap is met.
    fn gain_crossings(&self) -> Result<Vec<GainCrossing>, ExactError>;

    /// Where L is real and negative, ascending.
    ///
    /// # Errors
    /// From the exact methods, when a cap is met.
    fn phase_crossings(&self) -> Result<Vec<PhaseCrossing>, ExactError>;

    /// Where the sensitivity peaks, rad/s, and its peak.
    ///
    /// # Errors
    /// From the exact methods, when a cap is met.
    fn peak(&self) -> Result<(f64, f64), ExactError>;

    /// rad/s; infinite where the closed loop never falls 3 dB below its static gain, None where that is zero.
    ///
    /// # Errors
    /// From the exact methods, when a cap is met.
    fn bandwidth(&self) -> Result<Option<f64>, ExactError>;

    /// The open loop for drawing.
    ///
    /// # Errors
    /// As [`Self::gain_crossings`].
    fn response(&self) -> Result<FrequencyResponse, ExactError>;

    /// The factor by which the gain may rise; infinite without limit.
    ///
    /// # Errors
    /// As [`Self::phase_crossings`].
    fn gain_up(&self) -> Result<f64, ExactError> {
        let factors = self.phase_crossings()?.into_iter().map(|c| c.factor);
        Ok(factors.filter(|f| *f > 1.0).fold(f64::INFINITY, f64::min))
    }

    /// The divisor by which the gain may fall; infinite without limit.
    ///
    /// # Errors
    /// As [`Self::phase_crossings`].
    fn gain_down(&self) -> Result<f64, ExactError> {
        let factors = self.phase_crossings()?.into_iter().map(|c| c.factor);
        Ok(factors.filter(|f| *f < 1.0).map(|f| 1.0 / f).fold(f64::INFINITY, f64::min))
    }

    /// Degrees: the smallest turn of the phase, in either direction, that makes the loop marginal; infinite without one.
    ///
    /// # Errors
    /// As [`Self::gain_crossings`].
    fn phase_margin(&self) -> Result<f64, ExactError> {
        Ok(self.gain_crossings()?.into_iter().map(|c| c.phase_margin.abs()).fold(f64::INFINITY, f64::min))
    }

    /// s: the smallest added dead time that makes the loop marginal; infinite without one.
    ///
    /// # Errors
    /// As [`Self::gain_crossings`].
    fn delay_margin(&self) -> Result<f64, ExactError> {
        Ok(self.gain_crossings()?.into_iter().map(|c| c.delay_margin).fold(f64::INFINITY, f64::min))
    }
}

/// The curves of L(jω) at ascending ω, the phase continuous from point to point; it starts in (−360, 0]. `turned` is what a
/// dead time adds to the phase of `value`, degrees, without ambiguity.
pub fn drawn(
    omegas: impl IntoIterator<Item = f64>,
    value: impl Fn(f64) -> Complex<f64>,
    turned: impl Fn(f64) -> f64,
) -> FrequencyResponse {
    let mut response = FrequencyResponse::default();
    let mut last: Option<f64> = None;
    for omega in omegas {
        let l = value(omega);
        let magnitude = 20.0 * libm::log10(l.modulus());
        if !magnitude.is_finite() {
            continue;
        }
        let raw = l.argument().to_degrees();
        let phase = match last {
            None if raw > 0.0 => raw - 360.0,
            None => raw,
            Some(before) => raw - 360.0 * libm::round((raw - before) / 360.0),
        };
        last = Some(phase);
        response.omega.push(omega);
        response.magnitude.push(magnitude);
        response.phase.push(phase + turned(omega));
    }
    response
}
