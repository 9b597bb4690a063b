//! The open loop over frequency: every crossover and the margins, of a stable closed loop.
//!
//! Crossings are positive roots of exact polynomials in x = ω², so that none is missed: |N|² = |D|² for magnitude 1, and
//! Do·Ne = De·No for a real open loop. The smallest margin over all crossings counts; for loops that are unstable at low
//! gain, or stable in several ranges, gain margins are the distances to the nearest crossing in each direction.

use super::axis::AxisRatio;
use super::open_loop::{OpenLoop, drawn};
use crate::exact::gcd::{gcd, squarefree_part, without_common_roots};
use crate::exact::real_roots::positive_roots;
use crate::exact::scaled::Scaled;
use crate::exact::{Dyadic, ExactError, IntPoly};
use crate::model::BlockAt;
use crate::numerics::magnitude;
use crate::record::{FrequencyResponse, GainCrossing, PhaseCrossing};
use alloc::vec::Vec;
use core::cell::OnceCell;
use dashu_int::IBig;
use dashu_ratio::RBig;
use nalgebra::{Complex, ComplexField};

/// The square of the bandwidth is refined to this many bits.
const BANDWIDTH_BITS: i64 = 44;

/// Points of a curve for drawing, without those added at poles and crossings.
const CURVE_POINTS: usize = 240;

/// Points for each decade when looking for the peak of the sensitivity; lightly damped poles add their own.
const SEARCH_POINTS: usize = 12;

/// Decades searched and drawn below the slowest and above the fastest pole, zero or crossing.
const DECADES_BEYOND: f64 = 1.0;

/// Shrinks the place of a peak to 3e-8 of the first interval; its height is then right to rounding.
const GOLDEN_SECTIONS: usize = 36;

/// Poles whose real part is below this part of the imaginary one make peaks that are looked for at exact frequencies.
const NARROW: f64 = 1e-6;

/// The open loop over frequency; each part is computed when first asked for.
#[derive(Debug)]
pub struct Frequency {
    /// N and D of the open loop.
    open: BlockAt,
    /// Command to output.
    transfer: BlockAt,
    poles: Vec<Complex<f64>>,
    above: Scaled,
    below: Scaled,
    closed: Scaled,
    closed_exact: IntPoly,
    gain_crossings: OnceCell<Vec<GainCrossing>>,
    phase_crossings: OnceCell<Vec<PhaseCrossing>>,
    peak: OnceCell<(f64, f64)>,
    bandwidth: OnceCell<Option<f64>>,
}

impl Frequency {
    /// From the open loop, command to output, and the denominator of the closed loop, whose roots are all left of the axis.
    pub fn of(open: BlockAt, transfer: BlockAt, closed: &IntPoly, poles: Vec<Complex<f64>>) -> Self {
        Self {
            above: Scaled::new(&open.above),
            below: Scaled::new(&open.below),
            closed: Scaled::new(closed),
            open,
            transfer,
            poles,
            closed_exact: closed.clone(),
            gain_crossings: OnceCell::new(),
            phase_crossings: OnceCell::new(),
            peak: OnceCell::new(),
            bandwidth: OnceCell::new(),
        }
    }

    /// The frequencies between which something happens, a decade beyond on both sides.
    fn range(&self) -> (f64, f64) {
        let (mut low, mut high) = (f64::INFINITY, 0.0_f64);
        for scaled in [&self.above, &self.below, &self.closed] {
            for radius in scaled.radii() {
                low = low.min(radius);
                high = high.max(radius);
            }
        }
        if high == 0.0 {
            (low, high) = (1.0, 1.0);
        }
        let beyond = libm::pow(10.0, DECADES_BEYOND);
        (low / beyond, high * beyond)
    }

    fn sensitivity(&self, omega: f64) -> f64 {
        let s = Complex::new(0.0, omega);
        magnitude(self.below.value(s).over(self.closed.value(s)).to_complex())
    }

    /// The peak of |D/F| over ω ≥ 0, and where.
    fn peak_sensitivity(&self) -> (f64, f64) {
        let range = self.range();
        let mut omegas = grid(range, SEARCH_POINTS);
        let upper = || self.poles.iter().filter(|p| p.im > 0.0);
        let narrow: Vec<f64> = upper().filter(|p| -p.re < NARROW * p.im).map(|p| p.im).collect();
        for p in upper().filter(|p| -p.re >= NARROW * p.im) {
            // A lightly damped pair makes a peak as narrow as its decay rate.
            for k in -6..=6 {
                omegas.push((p.im + f64::from(k) * 0.5 * p.re).max(0.0));
            }
        }
        omegas.push(0.0);
        omegas.sort_by(f64::total_cmp);
        let values: Vec<f64> = omegas.iter().map(|w| self.sensitivity(*w)).collect();
        // At infinite frequency |S| is the ratio of the leading coefficients.
        let far = self.sensitivity(1e6 * range.1);
        let mut best = (range.1, far);
        for k in 0..omegas.len() {
            let is_top =
                (k == 0 || values[k - 1] <= values[k]) && (k + 1 == omegas.len() || values[k + 1] <= values[k]);
            if is_top {
                let (low, high) = (omegas[k.saturating_sub(1)], omegas[(k + 1).min(omegas.len() - 1)]);
                // Beside a narrow peak the search would end in rounding noise.
                let noisy = narrow.iter().any(|omega| (low..=high).contains(omega));
                let peak =
                    if noisy { (omegas[k], values[k]) } else { highest(low, high, |omega| self.sensitivity(omega)) };
                if peak.1 > best.1 {
                    best = peak;
                }
            }
        }
        for omega in narrow {
            if let Some(peak) = self.narrow_peak(omega)
                && peak.1 > best.1
            {
                best = peak;
            }
        }
        best
    }

    /// The peak at a pole so near to the axis that the rounding of frequencies in f64 shows: looked for at exact ones.
    fn narrow_peak(&self, omega: f64) -> Option<(f64, f64)> {
        let exact = Dyadic::from_f64(omega)?;
        let x = &exact * &exact;
        // One step of Newton's method from jω: the pole's distance from there, relative to the pole's own accuracy.
        let step = AxisRatio::new(&self.closed_exact, &self.closed_exact.derivative()).at(&x);
        let (middle, width) = (-step.im, step.re.abs());
        let ratio = AxisRatio::new(&self.open.below, &self.closed_exact);
        let sensitivity = |offset: f64| {
            let at = Dyadic::from_f64(offset).map_or(exact.clone(), |offset| &exact + &offset);
            magnitude(ratio.at(&(&at * &at)))
        };
        let offsets: Vec<f64> = (-6..=6).map(|k| middle + 0.5 * f64::from(k) * width).collect();
        let values: Vec<f64> = offsets.iter().map(|offset| sensitivity(*offset)).collect();
        let top = (1..offsets.len() - 1).max_by(|a, b| values[*a].total_cmp(&values[*b]))?;
        let (offset, peak) = highest(offsets[top - 1], offsets[top + 1], sensitivity);
        peak.is_finite().then_some((omega + offset, peak))
    }
}

impl OpenLoop for Frequency {
    fn gain_crossings(&self) -> Result<Vec<GainCrossing>, ExactError> {
        cached(&self.gain_crossings, || gain_crossings(&self.open))
    }

    fn phase_crossings(&self) -> Result<Vec<PhaseCrossing>, ExactError> {
        cached(&self.phase_crossings, || phase_crossings(&self.open))
    }

    fn peak(&self) -> Result<(f64, f64), ExactError> {
        Ok(*self.peak.get_or_init(|| self.peak_sensitivity()))
    }

    fn bandwidth(&self) -> Result<Option<f64>, ExactError> {
        cached(&self.bandwidth, || bandwidth(&self.transfer))
    }

    fn response(&self) -> Result<FrequencyResponse, ExactError> {
        let range = self.range();
        let mut omegas = grid(range, (CURVE_POINTS as f64 / libm::log10(range.1 / range.0)) as usize + 1);
        let crossings = self
            .gain_crossings()?
            .into_iter()
            .map(|c| c.omega)
            .chain(self.phase_crossings()?.into_iter().map(|c| c.omega));
        let resonances = self.poles.iter().map(|p| p.im);
        omegas.extend(crossings.chain(resonances).filter(|w| *w > range.0 && w.is_finite()));
        omegas.sort_by(f64::total_cmp);
        omegas.dedup();
        let open = |omega: f64| {
            let s = Complex::new(0.0, omega);
            self.above.value(s).over(self.below.value(s)).to_complex()
        };
        Ok(drawn(omegas, open, |_| 0.0))
    }
}

/// The value in the cell, computed where it is empty.
fn cached<T: Clone>(cell: &OnceCell<T>, compute: impl FnOnce() -> Result<T, ExactError>) -> Result<T, ExactError> {
    match cell.get() {
        Some(known) => Ok(known.clone()),
        None => {
            let found = compute()?;
            Ok(cell.get_or_init(|| found).clone())
        }
    }
}

/// The place and height of the top between two places around it, by golden sections.
fn highest(mut low: f64, mut high: f64, value: impl Fn(f64) -> f64) -> (f64, f64) {
    const GOLDEN: f64 = 0.618_033_988_749_894_9;
    let (mut a, mut b) = (high - GOLDEN * (high - low), low + GOLDEN * (high - low));
    let (mut at_a, mut at_b) = (value(a), value(b));
    for _ in 0..GOLDEN_SECTIONS {
        if at_a > at_b {
            high = b;
            (b, at_b) = (a, at_a);
            a = high - GOLDEN * (high - low);
            at_a = value(a);
        } else {
            low = a;
            (a, at_a) = (b, at_b);
            b = low + GOLDEN * (high - low);
            at_b = value(b);
        }
    }
    if at_a > at_b { (a, at_a) } else { (b, at_b) }
}

/// Frequencies evenly spaced on a logarithmic scale.
fn grid(range: (f64, f64), per_decade: usize) -> Vec<f64> {
    let decades = libm::log10(range.1 / range.0);
    let count = (decades * per_decade as f64) as usize + 1;
    (0..=count).map(|k| range.0 * libm::pow(10.0, decades * k as f64 / count as f64)).collect()
}

/// |p(jω)|² as a polynomial in x = ω².
fn squared(p: &IntPoly) -> IntPoly {
    let (even, odd) = p.axis_parts();
    even.times(&even).plus(&odd.times(&odd).times(&IntPoly::from_i64(&[0, 1])))
}

fn gain_crossings(open: &BlockAt) -> Result<Vec<GainCrossing>, ExactError> {
    let crossing = |(omega, l): (f64, Complex<f64>)| {
        // The turn from −1 to L, in (−180, 180].
        let margin = (-l).argument().to_degrees();
        let lag = if margin > 0.0 { margin } else { margin + 360.0 };
        GainCrossing { omega, phase_margin: margin, delay_margin: lag.to_radians() / omega }
    };
    let found = at_roots(open, &squared(&open.above).minus(&squared(&open.below)))?;
    Ok(found.into_iter().map(crossing).collect())
}

/// ω and L(jω) where ω² is a root, ascending.
fn at_roots(open: &BlockAt, p: &IntPoly) -> Result<Vec<(f64, Complex<f64>)>, ExactError> {
    if p.is_zero() {
        return Ok(Vec::new());
    }
    let p = squarefree_part(p);
    let ratio = AxisRatio::new(&open.above, &open.below);
    positive_roots(&p)?.into_iter().map(|root| ratio.at_root(&p, root)).collect()
}

fn phase_crossings(open: &BlockAt) -> Result<Vec<PhaseCrossing>, ExactError> {
    let (n, d) = (&open.above, &open.below);
    let ((n_even, n_odd), (d_even, d_odd)) = (n.axis_parts(), d.axis_parts());
    let mut found = Vec::new();
    let ratio = |above: &IBig, below: &IBig| {
        (!below.is_zero()).then(|| -RBig::from_parts_signed(above.clone(), below.clone()).to_f64().value())
    };
    if let Some(factor) = ratio(&d.coefficient(0), &n.coefficient(0)) {
        found.push(PhaseCrossing { omega: 0.0, factor });
    }
    let crossing = d_odd.times(&n_even).minus(&d_even.times(&n_odd));
    // Where N or D vanishes on the axis the open loop is zero or infinite, and no factor brings it to −1.
    let finite = without_common_roots(&crossing, &gcd(&n_even, &n_odd));
    let crossing = without_common_roots(&finite, &gcd(&d_even, &d_odd));
    for (omega, l) in at_roots(open, &crossing)? {
        let factor = -(Complex::new(1.0, 0.0) / l).re;
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
fn bandwidth(transfer: &BlockAt) -> Result<Option<f64>, ExactError> {
    let (n0, d0) = (transfer.above.coefficient(0), transfer.below.coefficient(0));
    if n0.is_zero() || d0.is_zero() {
        return Ok(None);
    }
    // 2·|N|²·d0² − |F|²·n0²
    let above = squared(&transfer.above);
    let below = squared(&transfer.below);
    let difference = above.combined(&(IBig::from(2) * &d0 * &d0), &below, &-(&n0 * &n0));
    let difference = squarefree_part(&difference);
    let Some(mut root) = positive_roots(&difference)?.into_iter().next() else { return Ok(Some(f64::INFINITY)) };
    root.refine_to(&difference, BANDWIDTH_BITS)?;
    Ok(Some(libm::sqrt(root.to_f64())))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_resonance_narrower_than_f64_keeps_its_margins() {
        // L = K·s/(s² + 1), K = 1e-20: |L| = 1 on both sides of ω = 1, 5e-21 away, where L = ±j.
        let (above, below) = (IntPoly::from_i64(&[0, 1]), IntPoly::from_i64(&[1, 0, 1]));
        let ten_to_20 = IBig::from(10).pow(20);
        let open =
            BlockAt { above, below: IntPoly::new(below.coefficients().iter().map(|c| c * &ten_to_20).collect()) };
        let found = gain_crossings(&open).expect("found");
        let margins: Vec<f64> = found.iter().map(|c| c.phase_margin).collect();
        assert!(margins.len() == 2 && margins.iter().all(|m| (m.abs() - 90.0).abs() < 1e-9), "{margins:?}");
    }
}
