//! The open loop over frequency: every crossover and the margins, of a stable closed loop.
//!
//! Crossings are positive roots of exact polynomials in x = ω², so that none is missed: |N|² = |D|² for magnitude 1, and
//! Do·Ne = De·No for a real open loop. The smallest margin over all crossings counts; for loops that are unstable at low
//! gain, or stable in several ranges, gain margins are the distances to the nearest crossing in each direction.

use super::loop_at::LoopAt;
use crate::exact::gcd::squarefree_part;
use crate::exact::real_roots::positive_roots;
use crate::exact::scaled::Scaled;
use crate::exact::{ExactError, IntPoly};
use crate::record::{FrequencyResponse, GainCrossing, PhaseCrossing};
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_ratio::RBig;
use nalgebra::{Complex, ComplexField};

/// Frequencies are refined to this many bits.
const OMEGA_BITS: i64 = 48;

/// Points of a curve for drawing, without those added at poles and crossings.
const CURVE_POINTS: usize = 240;

/// Points for each decade when looking for the peak of the sensitivity; lightly damped poles add their own.
const SEARCH_POINTS: usize = 24;

/// Decades searched and drawn below the slowest and above the fastest pole, zero or crossing.
const DECADES_BEYOND: f64 = 1.0;

/// The open loop over frequency.
#[derive(Clone, Debug)]
pub struct Frequency {
    above: Scaled,
    below: Scaled,
    closed: Scaled,
    /// Where |L| = 1, ascending.
    pub gain_crossings: Vec<GainCrossing>,
    /// Where L is real and negative, ascending.
    pub phase_crossings: Vec<PhaseCrossing>,
    /// The factor by which the gain may rise; infinite without limit.
    pub gain_up: f64,
    /// The divisor by which the gain may fall; infinite without limit.
    pub gain_down: f64,
    /// Where the sensitivity peaks, rad/s, and its peak.
    pub peak: (f64, f64),
    /// rad/s; infinite where the closed loop never falls 3 dB, None where its static gain is zero.
    pub bandwidth: Option<f64>,
    /// The range of frequencies that matters, rad/s.
    range: (f64, f64),
}

impl Frequency {
    /// Of a loop whose closed loop is stable.
    ///
    /// # Errors
    /// From the exact methods, when a cap is met.
    pub(super) fn new(at: &LoopAt) -> Result<Self, ExactError> {
        let (n, d) = (&at.open.above, &at.open.below);
        let (above, below, closed) = (Scaled::new(n), Scaled::new(d), Scaled::new(&at.closed));
        let gain_crossings = gain_crossings(n, d, &above, &below)?;
        let phase_crossings = phase_crossings(n, d)?;
        let factors = || phase_crossings.iter().map(|c| c.factor);
        let gain_up = factors().filter(|f| *f > 1.0).fold(f64::INFINITY, f64::min);
        let gain_down = factors().filter(|f| *f < 1.0).map(|f| 1.0 / f).fold(f64::INFINITY, f64::min);
        let range = range(at, &gain_crossings, &phase_crossings);
        let bandwidth = bandwidth(at)?;
        let mut found = Self {
            above,
            below,
            closed,
            gain_crossings,
            phase_crossings,
            gain_up,
            gain_down,
            peak: (0.0, 0.0),
            bandwidth,
            range,
        };
        found.peak = found.peak_sensitivity(&at.poles);
        Ok(found)
    }

    /// Degrees: the smallest turn of the phase, in either direction, that makes the loop marginal; infinite without one.
    pub fn phase_margin(&self) -> f64 {
        self.gain_crossings.iter().map(|c| c.phase_margin.abs()).fold(f64::INFINITY, f64::min)
    }

    /// s: the smallest added dead time that makes the loop marginal; infinite without one.
    pub fn delay_margin(&self) -> f64 {
        self.gain_crossings.iter().map(|c| c.delay_margin).fold(f64::INFINITY, f64::min)
    }

    fn sensitivity(&self, omega: f64) -> f64 {
        let s = Complex::new(0.0, omega);
        self.below.value(s).over(self.closed.value(s)).to_complex().modulus()
    }

    /// The peak of |D/F| over ω ≥ 0, and where.
    fn peak_sensitivity(&self, poles: &[Complex<f64>]) -> (f64, f64) {
        let mut omegas = self.grid(SEARCH_POINTS);
        for p in poles.iter().filter(|p| p.im > 0.0) {
            // A lightly damped pair makes a peak as narrow as its decay rate.
            for k in -6..=6 {
                omegas.push((p.im + f64::from(k) * 0.5 * p.re).max(0.0));
            }
        }
        omegas.push(0.0);
        omegas.sort_by(f64::total_cmp);
        let values: Vec<f64> = omegas.iter().map(|w| self.sensitivity(*w)).collect();
        // At infinite frequency |S| is the ratio of the leading coefficients.
        let far = self.sensitivity(1e6 * self.range.1);
        let mut best = (self.range.1, far);
        for k in 0..omegas.len() {
            let is_top = (k == 0 || values[k - 1] <= values[k]) && (k + 1 == omegas.len() || values[k + 1] <= values[k]);
            if is_top {
                let (low, high) = (omegas[k.saturating_sub(1)], omegas[(k + 1).min(omegas.len() - 1)]);
                let peak = self.refined_peak(low, high);
                if peak.1 > best.1 {
                    best = peak;
                }
            }
        }
        best
    }

    /// The largest sensitivity between two frequencies around one top, by golden sections.
    fn refined_peak(&self, mut low: f64, mut high: f64) -> (f64, f64) {
        const GOLDEN: f64 = 0.618_033_988_749_894_9;
        for _ in 0..36 {
            let (a, b) = (high - GOLDEN * (high - low), low + GOLDEN * (high - low));
            if self.sensitivity(a) > self.sensitivity(b) { high = b } else { low = a }
        }
        let omega = 0.5 * (low + high);
        (omega, self.sensitivity(omega))
    }

    /// Frequencies evenly spaced on a logarithmic scale over the range that matters.
    fn grid(&self, per_decade: usize) -> Vec<f64> {
        let decades = libm::log10(self.range.1 / self.range.0);
        let count = (decades * per_decade as f64) as usize + 1;
        (0..=count).map(|k| self.range.0 * libm::pow(10.0, decades * k as f64 / count as f64)).collect()
    }

    /// The open loop for drawing.
    pub fn response(&self, poles: &[Complex<f64>]) -> FrequencyResponse {
        let decades = libm::log10(self.range.1 / self.range.0);
        let mut omegas = self.grid((CURVE_POINTS as f64 / decades) as usize + 1);
        omegas.extend(self.gain_crossings.iter().map(|c| c.omega));
        omegas.extend(self.phase_crossings.iter().map(|c| c.omega).filter(|w| *w > 0.0));
        omegas.extend(poles.iter().map(|p| p.im).filter(|w| *w > self.range.0));
        omegas.sort_by(f64::total_cmp);
        omegas.dedup();
        let mut response = FrequencyResponse::default();
        let mut last: Option<f64> = None;
        for omega in omegas {
            let s = Complex::new(0.0, omega);
            let l = self.above.value(s).over(self.below.value(s)).to_complex();
            let magnitude = 20.0 * libm::log10(l.modulus());
            if !magnitude.is_finite() {
                continue;
            }
            let raw = l.argument().to_degrees();
            // Continuous from point to point; the start lies in (−360, 0].
            let phase = match last {
                None if raw > 0.0 => raw - 360.0,
                None => raw,
                Some(before) => raw - 360.0 * libm::round((raw - before) / 360.0),
            };
            last = Some(phase);
            response.omega.push(omega);
            response.magnitude.push(magnitude);
            response.phase.push(phase);
        }
        response
    }
}

/// |p(jω)|² as a polynomial in x = ω².
fn squared(p: &IntPoly) -> IntPoly {
    let (even, odd) = p.axis_parts();
    even.times(&even).plus(&odd.times(&odd).times(&IntPoly::from_i64(&[0, 1])))
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

fn gain_crossings(n: &IntPoly, d: &IntPoly, above: &Scaled, below: &Scaled) -> Result<Vec<GainCrossing>, ExactError> {
    let crossing = |omega: f64| {
        let s = Complex::new(0.0, omega);
        let l = above.value(s).over(below.value(s)).to_complex();
        // The turn from −1 to L, in (−180, 180].
        let margin = (-l).argument().to_degrees();
        let lag = if margin > 0.0 { margin } else { margin + 360.0 };
        GainCrossing { omega, phase_margin: margin, delay_margin: lag.to_radians() / omega }
    };
    Ok(frequencies(&squared(n).minus(&squared(d)))?.into_iter().map(crossing).collect())
}

fn phase_crossings(n: &IntPoly, d: &IntPoly) -> Result<Vec<PhaseCrossing>, ExactError> {
    let ((n_even, n_odd), (d_even, d_odd)) = (n.axis_parts(), d.axis_parts());
    let mut found = Vec::new();
    let ratio = |above: &IBig, below: &IBig| (!below.is_zero()).then(|| -RBig::from_parts_signed(above.clone(), below.clone()).to_f64().value());
    if let Some(factor) = ratio(&d.coefficient(0), &n.coefficient(0)) {
        found.push(PhaseCrossing { omega: 0.0, factor });
    }
    let (n_even, n_odd, d_even, d_odd) = (n_even, n_odd, d_even, d_odd);
    let crossing = d_odd.times(&n_even).minus(&d_even.times(&n_odd));
    let parts = [&n_even, &n_odd, &d_even, &d_odd].map(Scaled::new);
    for omega in frequencies(&crossing)? {
        let x = Complex::new(omega * omega, 0.0);
        let value = |k: usize| parts[k].value(x);
        // The quotient with the larger denominator loses fewer digits.
        let even = value(2).over(value(0)).to_complex().re;
        let odd = value(3).over(value(1)).to_complex().re;
        let even_size = value(0).to_complex().modulus();
        let odd_size = value(1).to_complex().modulus() * omega;
        let factor = if even_size >= odd_size { -even } else { -odd };
        if factor.is_finite() {
            found.push(PhaseCrossing { omega, factor });
        }
    }
    // A bi-proper open loop reaches its last value at infinite frequency.
    if n.degree() == d.degree()
        && let Some(factor) = ratio(&d.leading(), &n.leading())
    {
        found.push(PhaseCrossing { omega: f64::INFINITY, factor });
    }
    found.retain(|c| c.factor > 0.0);
    Ok(found)
}

/// The first ω at which |T|² falls below half of |T(0)|².
fn bandwidth(at: &LoopAt) -> Result<Option<f64>, ExactError> {
    let transfer = at.output_transfer();
    let (n0, d0) = (transfer.above.coefficient(0), transfer.below.coefficient(0));
    if n0.is_zero() || d0.is_zero() {
        return Ok(None);
    }
    // 2·|N|²·d0² − |F|²·n0²
    let above = squared(&transfer.above);
    let below = squared(&transfer.below);
    let difference = above.combined(&(IBig::from(2) * &d0 * &d0), &below, &-(&n0 * &n0));
    Ok(Some(frequencies(&difference)?.first().copied().unwrap_or(f64::INFINITY)))
}

/// The frequencies between which something happens, a decade beyond on both sides.
fn range(at: &LoopAt, gain: &[GainCrossing], phase: &[PhaseCrossing]) -> (f64, f64) {
    let roots = [&at.open.above, &at.open.below].map(crate::exact::complex_roots::polished);
    let open = roots.into_iter().flatten().flatten();
    let sizes = open.chain(at.poles.iter().copied()).map(|z| z.modulus());
    let omegas = gain.iter().map(|c| c.omega).chain(phase.iter().map(|c| c.omega)).chain(sizes);
    let (mut low, mut high) = (f64::INFINITY, 0.0_f64);
    for omega in omegas.filter(|w| *w > 0.0 && w.is_finite()) {
        low = low.min(omega);
        high = high.max(omega);
    }
    if high == 0.0 {
        (low, high) = (1.0, 1.0);
    }
    let beyond = libm::pow(10.0, DECADES_BEYOND);
    (low / beyond, high * beyond)
}
