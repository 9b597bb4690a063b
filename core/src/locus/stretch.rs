//! Stretches of the knob in which no poles meet, and what is found in them.

use super::position::Position;
use alloc::vec::Vec;
use nalgebra::Complex;

/// Where poles meet.
#[derive(Clone, Copy, Debug)]
pub(super) struct Cluster {
    /// In the closed upper half plane; on the real axis with imaginary part exactly 0.
    pub(super) s: Position,
    /// How many poles meet.
    pub(super) multiplicity: usize,
    /// Where two poles only just miss each other, by how many quarters the way from one to the other turns; None where
    /// they meet, and every continuation is as good as another.
    pub(super) turn: Option<i32>,
}

/// One end of a stretch.
#[derive(Clone, Debug)]
pub(super) struct End {
    /// The knob: 0, a value where poles meet or vanish, or infinity.
    pub(super) knob: f64,
    /// Nearer to it than this no row can be trusted.
    pub(super) blur: f64,
    /// Where poles meet; at 0 and infinity every pole's or zero's place, simple ones included.
    pub(super) clusters: Vec<Cluster>,
    /// True where poles without a cluster keep a finite place (not at 0 and infinity).
    pub(super) others_stay: bool,
    /// How many poles are at infinity there.
    pub(super) at_infinity: usize,
}

/// A stretch of the knob between two ends, with the number of real poles in it.
#[derive(Clone, Debug)]
pub(super) struct Stretch {
    /// The end nearer to zero.
    pub(super) inner: End,
    /// The end farther from zero.
    pub(super) outer: End,
    /// Moving poles on the real axis.
    pub(super) real: usize,
    /// Knob values inside at which a row is wanted.
    pub(super) stops: Vec<f64>,
}

/// One carried pole.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Carried {
    /// Where it is; on the real axis or in the upper half plane.
    pub(super) s: Position,
    /// ds/dv of the stretch's parameter v.
    pub(super) velocity: Complex<f64>,
}

/// All carried poles at one knob value.
#[derive(Clone, Debug)]
pub(super) struct Row {
    /// The knob.
    pub(super) knob: f64,
    /// The stretch's parameter there.
    pub(super) v: f64,
    /// The poles, in an order kept along the stretch.
    pub(super) poles: Vec<Carried>,
}

/// Where a carried pole is at an end.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Arrival {
    /// In the cluster of that number.
    Cluster(usize),
    /// At a simple place.
    Place(Complex<f64>),
    /// At infinity.
    Infinity,
}

/// A tracked stretch.
#[derive(Clone, Debug)]
pub(super) struct Track {
    /// Rows with growing knob.
    pub(super) rows: Vec<Row>,
    /// What each carried pole does at the inner end.
    pub(super) inner: Vec<Arrival>,
    /// What each carried pole does at the outer end.
    pub(super) outer: Vec<Arrival>,
}

/// Which way along a stretch.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Way {
    /// Towards the end nearer to zero.
    Inward,
    /// Towards the other.
    Outward,
}

/// The tracking could not be finished within its caps.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Lost;

/// The parameter v = ln τ of a stretch (a, b): τ = (q − a)/(b − q); for b = ∞, τ = (q − a)/a, or q/typical for a = 0.
/// Near a meeting of m poles their distance from it goes like e^(v/m): the tracking slows down by itself.
#[derive(Clone, Copy, Debug)]
pub(super) struct Parameter {
    /// The knob at the inner end.
    pub(super) inner: f64,
    /// The knob at the outer end.
    pub(super) outer: f64,
    /// A knob value in the middle of the action.
    pub(super) typical: f64,
}

impl Parameter {
    fn unit(&self) -> f64 {
        if self.inner > 0.0 { self.inner } else { self.typical }
    }

    /// q at a value of v.
    pub(super) fn knob(&self, v: f64) -> f64 {
        let tau = libm::exp(v);
        if self.outer.is_finite() {
            // Written so that neither end is lost to cancellation.
            if tau < 1.0 {
                self.inner + (self.outer - self.inner) * (tau / (1.0 + tau))
            } else {
                self.outer - (self.outer - self.inner) / (1.0 + tau)
            }
        } else {
            self.inner + self.unit() * tau
        }
    }

    /// v at a value of q.
    pub(super) fn at(&self, knob: f64) -> f64 {
        if self.outer.is_finite() {
            libm::log((knob - self.inner) / (self.outer - knob))
        } else {
            libm::log((knob - self.inner) / self.unit())
        }
    }

    /// dq/dv.
    pub(super) fn speed(&self, v: f64) -> f64 {
        let tau = libm::exp(v);
        if self.outer.is_finite() {
            (self.outer - self.inner) * tau / ((1.0 + tau) * (1.0 + tau))
        } else {
            self.unit() * tau
        }
    }
}
