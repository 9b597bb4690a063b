//! The knob as a function of s: q(s) = −(A·e^(T·s) + B0)/B1, real on the locus.

use super::function::{Quasi, horner, scaled};
use super::gain::GainFamily;
use super::poles::in_view;
use super::{DeadTimeError, poles};
use crate::exact::IntPoly;
use crate::exact::complex_roots::roots;
use crate::numerics::magnitude;
use crate::record::{KnobSign, Root, View};
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_ratio::RBig;
use nalgebra::{Complex, ComplexField};

/// Two special points nearer than this part of the view are one: a multiple pole is also a root of the meetings' equation.
const SAME: f64 = 1e-5;

/// The s-plane of a loop, with its special points in a rectangle.
#[derive(Clone, Debug)]
pub(super) struct Plane {
    a: Vec<f64>,
    b0: Vec<f64>,
    b1: Vec<f64>,
    dead_time: f64,
    /// The rectangle.
    pub(super) view: View,
    /// Poles of the closed loop at q = 0 in the rectangle.
    pub(super) poles: Vec<Root>,
    /// Where branches arrive as |q| → ∞, all of them.
    pub(super) zeros: Vec<Root>,
    /// Where real branches meet, ascending.
    pub(super) meetings: Vec<RealMeeting>,
}

/// Poles that meet on the real axis.
#[derive(Clone, Copy, Debug)]
pub(super) struct RealMeeting {
    pub(super) s: f64,
    pub(super) knob: f64,
    /// How many poles meet.
    pub(super) multiplicity: usize,
    /// Whether |q| grows to the right of it.
    pub(super) grows_right: bool,
}

/// q and q′/q at a point.
#[derive(Clone, Copy, Debug)]
pub(super) struct Knob {
    pub(super) value: Complex<f64>,
    pub(super) rate: Complex<f64>,
    /// How fast the two parts of q turn, each by itself, 1/(1/s): where B0 is large q hardly turns, but its imaginary part
    /// changes its sign as often as the small part turns.
    pub(super) turning: f64,
}

/// The roots of A + B·e^(−Ts) in a rectangle; without a delayed part they are those of a polynomial, with exact multiplicities.
fn roots_in_view(a: &IntPoly, b: &IntPoly, dead_time: &RBig, view: &View) -> Result<Vec<Root>, DeadTimeError> {
    if !b.is_zero() {
        return in_view(&Quasi::new(a, b, dead_time), view);
    }
    let inside = |x: f64, range: [f64; 2]| x >= range[0] && x <= range[1];
    Ok(roots(a)?.into_iter().filter(|r| inside(r.re, view.re) && inside(r.im, view.im)).collect())
}

impl Plane {
    pub(super) fn new(family: &GainFamily, view: &View) -> Result<Self, DeadTimeError> {
        let [a, b0, b1] = scaled([&family.a, &family.b0, &family.b1]);
        let dead_time = family.dead_time.to_f64().value();
        let far = poles::LARGEST_EXPONENT / dead_time;
        let view = View { re: [view.re[0].max(-far), view.re[1].min(far)], im: view.im };
        let mut plane = Self {
            poles: roots_in_view(&family.a, &family.b0, &family.dead_time, &view)?,
            zeros: if family.b1.is_zero() { Vec::new() } else { roots(&family.b1)? },
            a,
            b0,
            b1,
            dead_time,
            view,
            meetings: Vec::new(),
        };
        plane.meetings = plane.real_meetings(family)?;
        Ok(plane)
    }

    /// The view's smaller pixel, as a part of 1000 of its extents.
    pub(super) fn pixel(&self) -> f64 {
        ((self.view.re[1] - self.view.re[0]).min(self.view.im[1] - self.view.im[0])) / 1000.0
    }

    pub(super) fn at(&self, s: Complex<f64>) -> Knob {
        let modulus = magnitude(s);
        let at = |p: &[f64]| horner(p, s, modulus);
        let ((a, da, _), (b0, db0, _), (b1, db1, _)) = (at(&self.a), at(&self.b0), at(&self.b1));
        let lead = (s * self.dead_time).exp();
        let sum = a * lead + b0;
        let undelayed = da / a + self.dead_time - db1 / b1;
        let delayed = if self.b0.is_empty() { 0.0 } else { magnitude(db0 / b0 - db1 / b1) };
        Knob {
            value: -sum / b1,
            rate: ((da + a * self.dead_time) * lead + db0) / sum - db1 / b1,
            turning: magnitude(undelayed).max(delayed),
        }
    }

    /// q at a point of the real axis.
    pub(super) fn on_axis(&self, x: f64) -> f64 {
        self.at(Complex::new(x, 0.0)).value.re
    }

    pub(super) fn holds(&self, s: Complex<f64>) -> bool {
        let inside = |x: f64, range: [f64; 2]| x >= range[0] && x <= range[1];
        inside(s.re, self.view.re) && inside(s.im, self.view.im)
    }

    /// Whether |q| grows from a point of the real axis to the right, seen at a small distance.
    pub(super) fn grows_right(&self, x: f64) -> bool {
        let step = 1e-3 * self.pixel();
        self.on_axis(x + step).abs() > self.on_axis(x).abs()
    }

    /// The roots of q′ = 0 on the real axis: (A′·B1 − A·B1′ + T·A·B1) + (B0′·B1 − B0·B1′)·e^(−Ts), again a
    /// quasi-polynomial, so that none is missed.
    fn real_meetings(&self, family: &GainFamily) -> Result<Vec<RealMeeting>, DeadTimeError> {
        let GainFamily { a, b0, b1, dead_time, .. } = family;
        let wronskian = |p: &IntPoly| p.derivative().times(b1).minus(&p.times(&b1.derivative()));
        let (tn, td) = (dead_time.numerator(), IBig::from(dead_time.denominator().clone()));
        let undelayed = wronskian(a).combined(&td, &a.times(b1), tn);
        let delayed = wronskian(b0).combined(&td, &IntPoly::default(), &IBig::ZERO);
        let all = roots_in_view(&undelayed, &delayed, dead_time, &self.view)?;
        let near = |x: f64, root: &Root| root.im == 0.0 && (x - root.re).abs() <= SAME * 1000.0 * self.pixel();
        // A multiple pole or zero is there at q = 0 or at infinite q.
        let special = |x: f64| self.poles.iter().chain(&self.zeros).any(|r| r.multiplicity > 1 && near(x, r));
        let real = all.iter().filter(|r| r.im == 0.0 && !special(r.re));
        let mut meetings: Vec<RealMeeting> = real
            .map(|root| RealMeeting {
                s: root.re,
                knob: self.on_axis(root.re),
                multiplicity: root.multiplicity + 1,
                grows_right: self.grows_right(root.re),
            })
            .collect();
        meetings.sort_by(|a, b| a.s.total_cmp(&b.s));
        Ok(meetings)
    }

    /// Directions, radians, in which branches of a sign leave a pole.
    pub(super) fn departures(&self, pole: &Root, sign: KnobSign) -> Vec<f64> {
        // q ≈ c·(s − p)^m.
        self.directions(pole, pole.multiplicity as f64, sign)
    }

    /// Directions, radians, from which branches of a sign arrive at a zero, seen from it.
    pub(super) fn arrivals(&self, zero: &Root, sign: KnobSign) -> Vec<f64> {
        self.directions(zero, -(zero.multiplicity as f64), sign)
    }

    fn directions(&self, root: &Root, order: f64, sign: KnobSign) -> Vec<f64> {
        let s = Complex::new(root.re, root.im);
        let step = 1e-5 * self.pixel();
        let knob = self.at(s + step).value;
        if !(knob.re.is_finite() && knob.im.is_finite()) {
            return Vec::new();
        }
        let full = core::f64::consts::TAU;
        let mut first = -(knob * sign.factor()).argument() / order;
        if root.im == 0.0 {
            // Real coefficients: only multiples of a half turn over m.
            let unit = core::f64::consts::PI / order.abs();
            first = unit * libm::round(first / unit);
        }
        (0..root.multiplicity)
            .map(|k| {
                let angle = first + full * k as f64 / order.abs();
                let turned = angle - full * libm::ceil(angle / full - 0.5);
                // A half turn that rounding puts on the other side.
                if turned <= -core::f64::consts::PI + 1e-9 { turned + full } else { turned }
            })
            .collect()
    }
}
