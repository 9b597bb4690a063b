//! The open loop N/D·e^(−jωT) over frequency, of a stable closed loop: true crossings and margins.
//!
//! Dead time does not change |L|: the gain crossings are roots of |N|² = |D|², all of them. Phase crossings are the places of
//! the gain family D + q·N·e^(−sT) with q > 0, proven ([`super::gain`]); those left out there bring the loop from unstable to
//! more unstable, and matter to no margin. Peak and bandwidth are searched on a grid that resolves e^(−jωT) and every known
//! resonance, up to the frequency beyond which L is too small to matter.

use super::delay::squared;
use super::gain::GainFamily;
use super::{DeadTimeError, DeadTimePartition};
use crate::exact::gcd::squarefree_part;
use crate::exact::real_roots::positive_roots;
use crate::exact::scaled::Scaled;
use crate::exact::{ExactError, IntPoly};
use crate::ranges::Contact;
use crate::record::{FrequencyResponse, GainCrossing, PhaseCrossing};
use crate::response::{OpenLoop, drawn};
use alloc::vec::Vec;
use core::cell::OnceCell;
use core::f64::consts::PI;
use dashu_int::IBig;
use dashu_ratio::RBig;
use nalgebra::{Complex, ComplexField};

/// Frequencies are refined to this many bits.
const OMEGA_BITS: i64 = 40;

/// Points of a curve for drawing.
const CURVE_POINTS: usize = 320;

/// Points for each decade when looking for the peak of the sensitivity; resonances add their own.
const SEARCH_POINTS: usize = 24;

/// Steps of ωT in that search, rad.
const SEARCH_STEP: f64 = 0.1;

/// Steps of ωT at most: some thousand turns of the phase.
const SEARCH_CAP: usize = 60_000;

/// 1/|L| beyond which no larger sensitivity is looked for: there it stays below 1.06. Where nothing larger was found before,
/// the search goes on to the second one, and 1.005 is as good as 1.
const NEGLIGIBLE: [i64; 2] = [20, 200];

/// A peak above this is surely beyond anything behind the first.
const CLEAR_PEAK: f64 = 1.06;

/// Halvings of a bracket in which the sensitivity peaks, or the closed loop falls below 3 dB.
const HALVINGS: usize = 60;

/// The phase is drawn up to this many turns by the dead time.
const TURNS_DRAWN: f64 = 3.0;

/// The open loop over frequency; each part is computed when first asked for.
#[derive(Debug)]
pub struct DelayFrequency {
    above: IntPoly,
    below: IntPoly,
    transfer: IntPoly,
    dead_time: RBig,
    scaled_above: Scaled,
    scaled_below: Scaled,
    scaled_transfer: Scaled,
    seconds: f64,
    resonances: Vec<f64>,
    gain_crossings: OnceCell<Vec<GainCrossing>>,
    phase_crossings: OnceCell<Vec<PhaseCrossing>>,
    peak: OnceCell<(f64, f64)>,
    bandwidth: OnceCell<Option<f64>>,
}

impl OpenLoop for DelayFrequency {
    fn gain_crossings(&self) -> Result<Vec<GainCrossing>, ExactError> {
        Ok(self.all_gain_crossings().map_err(exact)?.to_vec())
    }

    fn phase_crossings(&self) -> Result<Vec<PhaseCrossing>, ExactError> {
        Ok(self.known_phase_crossings().map_err(exact)?.to_vec())
    }

    fn peak(&self) -> Result<(f64, f64), ExactError> {
        self.highest_sensitivity().map_err(exact)
    }

    fn bandwidth(&self) -> Result<Option<f64>, ExactError> {
        self.first_bandwidth().map_err(exact)
    }

    fn response(&self) -> Result<FrequencyResponse, ExactError> {
        self.drawn().map_err(exact)
    }
}

/// A cap of these methods, as one of the exact ones.
fn exact(error: DeadTimeError) -> ExactError {
    match error {
        DeadTimeError::Exact(error) => error,
        _ => ExactError::EdgeNotNarrow,
    }
}

impl DelayFrequency {
    /// Of L = above/below·e^(−sT), where 1 + L is the characteristic function of a stable loop (for positive feedback `above`
    /// carries the sign). Command to output is transfer/(below + above·e^(−sT)), but for a dead time. `poles` are known poles
    /// of the closed loop; their resonances are looked at.
    pub fn new(
        above: &IntPoly,
        below: &IntPoly,
        dead_time: &RBig,
        transfer: &IntPoly,
        poles: impl IntoIterator<Item = Complex<f64>>,
    ) -> Self {
        // A peak is as wide as the pole is far from the axis.
        let around = |p: Complex<f64>| [-2.0, -1.0, -0.5, 0.0, 0.5, 1.0, 2.0].map(|k| p.im + k * p.re);
        Self {
            scaled_above: Scaled::new(above),
            scaled_below: Scaled::new(below),
            scaled_transfer: Scaled::new(transfer),
            seconds: dead_time.to_f64().value(),
            resonances: poles.into_iter().filter(|p| p.im > 0.0).flat_map(around).filter(|w| *w > 0.0).collect(),
            above: above.clone(),
            below: below.clone(),
            transfer: transfer.clone(),
            dead_time: dead_time.clone(),
            gain_crossings: OnceCell::new(),
            phase_crossings: OnceCell::new(),
            peak: OnceCell::new(),
            bandwidth: OnceCell::new(),
        }
    }

    /// Takes the phase crossings from the partition of D + q·N·e^(−sT), q the factor of the loop gain, where it is known.
    pub fn with_partition(self, of_factor: &DeadTimePartition) -> Self {
        self.phase_crossings.get_or_init(|| phase_crossings(of_factor));
        self
    }

    /// Where |L| = 1, ascending.
    ///
    /// # Errors
    /// From the exact methods, when a cap is met.
    fn all_gain_crossings(&self) -> Result<&[GainCrossing], DeadTimeError> {
        if self.gain_crossings.get().is_none() {
            let omegas = frequencies(&squared(&self.above).minus(&squared(&self.below)))?;
            let found = omegas.into_iter().map(|omega| self.gain_crossing(omega)).collect();
            self.gain_crossings.get_or_init(|| found);
        }
        Ok(self.gain_crossings.get().map_or(&[], Vec::as_slice))
    }

    fn gain_crossing(&self, omega: f64) -> GainCrossing {
        // The turn from −1 to L, in (−180, 180].
        let margin = (-self.open(omega)).argument().to_degrees();
        let lag = if margin > 0.0 { margin } else { margin + 360.0 };
        GainCrossing { omega, phase_margin: margin, delay_margin: lag.to_radians() / omega }
    }

    /// Where L is real and negative, ascending in ω, up to a factor beyond which the loop stays unstable.
    ///
    /// # Errors
    /// From [`GainFamily::partition`].
    fn known_phase_crossings(&self) -> Result<&[PhaseCrossing], DeadTimeError> {
        if self.phase_crossings.get().is_none() {
            let family = GainFamily::new(&self.below, &IntPoly::default(), &self.above, &self.dead_time)?;
            let found = phase_crossings(&family.partition()?);
            self.phase_crossings.get_or_init(|| found);
        }
        Ok(self.phase_crossings.get().map_or(&[], Vec::as_slice))
    }

    /// Where the sensitivity peaks, rad/s, and its peak.
    ///
    /// # Errors
    /// From the exact methods, when a cap is met.
    fn highest_sensitivity(&self) -> Result<(f64, f64), DeadTimeError> {
        if self.peak.get().is_none() {
            let found = self.peak_sensitivity()?;
            self.peak.get_or_init(|| found);
        }
        Ok(self.peak.get().copied().unwrap_or_default())
    }

    /// rad/s; infinite where the closed loop never falls 3 dB, None where its static gain is zero.
    ///
    /// # Errors
    /// From the exact methods, when a cap is met.
    fn first_bandwidth(&self) -> Result<Option<f64>, DeadTimeError> {
        if self.bandwidth.get().is_none() {
            let found = self.first_fall()?;
            self.bandwidth.get_or_init(|| found);
        }
        Ok(self.bandwidth.get().copied().flatten())
    }

    /// N/D without its dead time.
    fn undelayed(&self, omega: f64) -> Complex<f64> {
        let s = Complex::new(0.0, omega);
        self.scaled_above.value(s).over(self.scaled_below.value(s)).to_complex()
    }

    /// L(jω).
    fn open(&self, omega: f64) -> Complex<f64> {
        let angle = omega * self.seconds;
        self.undelayed(omega) * Complex::new(libm::cos(angle), -libm::sin(angle))
    }

    fn sensitivity(&self, omega: f64) -> f64 {
        let l = self.open(omega);
        // Where L is infinite nothing is left of a disturbance.
        if l.re.is_finite() && l.im.is_finite() { 1.0 / (l + 1.0).modulus() } else { 0.0 }
    }

    /// |M/(D + N·e^(−sT))|.
    fn closed(&self, omega: f64) -> f64 {
        let s = Complex::new(0.0, omega);
        let forward = self.scaled_transfer.value(s).over(self.scaled_below.value(s)).to_complex();
        let l = self.open(omega);
        if l.re.is_finite() && l.im.is_finite() {
            return (forward / (l + 1.0)).modulus();
        }
        // An integrator at ω = 0, or a pole on the axis: M/N remains.
        self.scaled_transfer.value(s).over(self.scaled_above.value(s)).to_complex().modulus()
    }

    /// The frequencies at which something changes, without those of the dead time.
    fn radii(&self) -> (f64, f64) {
        let (mut low, mut high) = (f64::INFINITY, 0.0_f64);
        for scaled in [&self.scaled_above, &self.scaled_below] {
            for radius in scaled.radii() {
                low = low.min(radius);
                high = high.max(radius);
            }
        }
        let turn = 1.0 / self.seconds;
        (low.min(turn), high.max(turn))
    }

    /// Frequencies up to `end` at which nothing is missed between two.
    fn grid(&self, end: f64) -> Vec<f64> {
        let (low, _) = self.radii();
        let start = 0.01 * low.min(end);
        let decades = libm::log10(end / start).max(0.0);
        let count = (decades * SEARCH_POINTS as f64) as usize + 1;
        let mut omegas: Vec<f64> =
            (0..=count).map(|k| start * libm::pow(10.0, decades * k as f64 / count as f64)).collect();
        let steps = libm::ceil(end * self.seconds / SEARCH_STEP).min(SEARCH_CAP as f64) as usize;
        // From 0 on: without an integrator the sensitivity may be largest at rest.
        omegas.extend((0..=steps).map(|k| end * k as f64 / steps.max(1) as f64));
        omegas.extend(self.resonances.iter().copied().filter(|w| *w < end));
        omegas.sort_by(f64::total_cmp);
        omegas
    }

    fn peak_sensitivity(&self) -> Result<(f64, f64), DeadTimeError> {
        let mut best = (0.0, 0.0);
        for negligible in NEGLIGIBLE {
            best = self.peak_up_to(negligible)?;
            if best.1 > CLEAR_PEAK {
                break;
            }
        }
        Ok(best)
    }

    /// The peak up to where |L| stays below 1/negligible.
    fn peak_up_to(&self, negligible: i64) -> Result<(f64, f64), DeadTimeError> {
        let factor = IBig::from(negligible * negligible);
        let small = squared(&self.above).combined(&factor, &squared(&self.below), &IBig::NEG_ONE);
        let (_, high) = self.radii();
        let end = frequencies(&small)?.last().copied().unwrap_or(0.0).max(high);
        let omegas = self.grid(end);
        let values: Vec<f64> = omegas.iter().map(|w| self.sensitivity(*w)).collect();
        let best = (0..omegas.len()).max_by(|a, b| values[*a].total_cmp(&values[*b])).unwrap_or(0);
        let (mut low, mut high) = (omegas[best.saturating_sub(1)], omegas[(best + 1).min(omegas.len() - 1)]);
        for _ in 0..HALVINGS {
            let (a, b) = (low + 0.382 * (high - low), low + 0.618 * (high - low));
            if self.sensitivity(a) > self.sensitivity(b) { high = b } else { low = a }
        }
        let omega = 0.5 * (low + high);
        let refined = (omega, self.sensitivity(omega));
        // Two maxima between the neighbours may have led the search to the lower one.
        Ok(if refined.1 >= values[best] { refined } else { (omegas[best], values[best]) })
    }

    fn first_fall(&self) -> Result<Option<f64>, DeadTimeError> {
        let static_gain = RBig::from(self.transfer.coefficient(0));
        let at_rest = self.below.coefficient(0) + self.above.coefficient(0);
        if static_gain.is_zero() || at_rest.is_zero() {
            return Ok(None);
        }
        let gain = (static_gain / RBig::from(at_rest.clone())).to_f64().value().abs();
        // Beyond both of these |L| < 1/2 and |M/D| < gain/√8, and the closed loop is below gain/√2.
        let m0 = self.transfer.coefficient(0);
        let small = squared(&self.above).combined(&IBig::from(4), &squared(&self.below), &IBig::NEG_ONE);
        let forward = squared(&self.transfer).combined(
            &(IBig::from(8) * &at_rest * &at_rest),
            &squared(&self.below),
            &-(&m0 * &m0),
        );
        let last = |p: &IntPoly| frequencies(p).map(|all| all.last().copied().unwrap_or(0.0));
        let end = last(&small)?.max(last(&forward)?);
        if end == 0.0 {
            return Ok(Some(f64::INFINITY));
        }
        let limit = gain * core::f64::consts::FRAC_1_SQRT_2;
        let mut before = 0.0;
        for omega in self.grid(end) {
            if self.closed(omega) < limit {
                let (mut low, mut high) = (before, omega);
                for _ in 0..HALVINGS {
                    let middle = 0.5 * (low + high);
                    if self.closed(middle) < limit { high = middle } else { low = middle }
                }
                return Ok(Some(high));
            }
            before = omega;
        }
        Ok(Some(f64::INFINITY))
    }

    /// The open loop for drawing.
    ///
    /// # Errors
    /// As [`Self::gain_crossings`] and [`Self::phase_crossings`].
    fn drawn(&self) -> Result<FrequencyResponse, DeadTimeError> {
        let (low, mut high) = self.radii();
        let crossings = self.all_gain_crossings()?.iter().map(|c| c.omega);
        let crossings: Vec<f64> = crossings.chain(self.known_phase_crossings()?.iter().map(|c| c.omega)).collect();
        // What the dead time turns more often is only a blur.
        high = crossings.iter().copied().fold((10.0 * high).min(TURNS_DRAWN * 2.0 * PI / self.seconds), f64::max);
        let start = 0.1 * low;
        let decades = libm::log10(high / start).max(1.0);
        let mut omegas: Vec<f64> = (0..=CURVE_POINTS)
            .map(|k| start * libm::pow(10.0, decades * k as f64 / CURVE_POINTS as f64))
            .chain(crossings)
            .chain(self.resonances.iter().copied())
            .filter(|w| *w >= start && *w <= high)
            .collect();
        omegas.sort_by(f64::total_cmp);
        omegas.dedup();
        Ok(drawn(omegas, |omega| self.undelayed(omega), |omega| -(omega * self.seconds).to_degrees()))
    }
}

/// √x for every positive root x.
fn frequencies(p: &IntPoly) -> Result<Vec<f64>, ExactError> {
    if p.is_zero() {
        return Ok(Vec::new());
    }
    let p = squarefree_part(p);
    let mut found = Vec::new();
    for mut root in positive_roots(&p)? {
        root.refine_to(&p, OMEGA_BITS)?;
        found.push(libm::sqrt(root.to_f64()));
    }
    Ok(found)
}

/// The positive places of a gain family as factors.
fn phase_crossings(of_factor: &DeadTimePartition) -> Vec<PhaseCrossing> {
    let mut found = Vec::new();
    for place in of_factor.places.iter().filter(|place| place.value() > 0.0) {
        for contact in &place.contacts {
            let omega = match contact {
                Contact::Axis { omega } => *omega,
                _ => 0.0,
            };
            found.push(PhaseCrossing { omega, factor: place.value() });
        }
    }
    found.sort_by(|a, b| a.omega.total_cmp(&b.omega));
    found
}

#[cfg(test)]
mod tests {
    use super::*;

    fn integrator(gain: i64) -> DelayFrequency {
        // gain/10·e^(−s)/s
        let n = IntPoly::from_i64(&[gain]);
        DelayFrequency::new(&n, &IntPoly::from_i64(&[0, 10]), &RBig::ONE, &n, [])
    }

    #[test]
    fn the_margins_of_a_delayed_integrator_follow_the_formulas() {
        // L = K·e^(−s)/s: ωc = K, margin 90° − K, gain margin π/(2K).
        let f = integrator(5);
        assert!((f.phase_margin().expect("found") - (90.0 - 0.5_f64.to_degrees())).abs() < 1e-9);
        assert!((f.gain_up().expect("found") - PI).abs() < 1e-14);
        assert!(f.gain_down().expect("found").is_infinite());
        assert!((f.delay_margin().expect("found") - (PI - 1.0)).abs() < 1e-11);
        // |1 + L|² = 1 − 2K·sin ω/ω + K²/ω²; its minimum by a fine search.
        let least = (1..2_000_000).map(|k| f64::from(k) * 1e-5).map(|w| 1.0 - libm::sin(w) / w + 0.25 / (w * w));
        let expected = 1.0 / libm::sqrt(least.fold(f64::INFINITY, f64::min));
        let (_, peak) = f.peak().expect("found");
        assert!((peak - expected).abs() < 1e-8, "{peak} {expected}");
    }

    #[test]
    fn the_bandwidth_is_where_the_closed_loop_first_falls() {
        let f = integrator(5);
        let bandwidth = f.bandwidth().expect("found").expect("defined");
        let l = f.open(bandwidth);
        assert!(((l / (l + 1.0)).modulus() - core::f64::consts::FRAC_1_SQRT_2).abs() < 1e-12);
        assert!((1..1000).map(|k| f64::from(k) * bandwidth / 1000.0).all(|w| f.closed(w) > 0.707));
    }

    #[test]
    fn the_phase_falls_with_the_dead_time() {
        let response = integrator(5).response().expect("drawn");
        for (omega, phase) in response.omega.iter().zip(&response.phase) {
            assert!((phase + 90.0 + omega.to_degrees()).abs() < 1e-9, "{omega} {phase}");
        }
    }
}
