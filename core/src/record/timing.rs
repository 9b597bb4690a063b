//! Dead time and sampling in the record.

use super::Point;
use crate::project::Discretisation;
use alloc::vec::Vec;
use serde::Serialize;

/// How the loop's signals travel in time.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Timing {
    /// The plane in which poles, zeros, branches and landmarks of this record lie.
    pub plane: Plane,
    /// The dead time of the whole loop in s, without the sampling's own; the part that does not change with the knob.
    pub dead_time: f64,
    /// What one unit of the knob adds to it, s.
    pub dead_time_per_knob: f64,
    /// The controller's sampling; None for one that works continuously.
    pub sampling: Option<SamplingRecord>,
}

/// The plane of the poles.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum Plane {
    /// The s-plane; stable left of the imaginary axis.
    S,
    /// The z-plane; stable inside the unit circle.
    Z,
}

/// How the controller samples.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct SamplingRecord {
    /// s.
    pub period: f64,
    /// The computation delay in sample periods.
    pub delay: f64,
    /// How the controller was converted. None where it was typed in z.
    pub method: Option<Discretisation>,
    /// The stable ranges at other periods, with the period, ascending.
    pub by_period: Vec<StableAtPeriod>,
    /// The longest period up to which the chosen setting is stable without a break, s. None without a setting, where it is
    /// not stable, or where no limit was found.
    pub longest_period: Option<f64>,
}

/// The stable ranges at another sample period.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct StableAtPeriod {
    /// s.
    pub period: f64,
    /// The ends of the stable ranges of the knob; None is an infinite end.
    pub ranges: Vec<[Option<f64>; 2]>,
}

/// The point of the s-plane that a point of the z-plane comes from: ln(z)/period, in the strip |Im s| ≤ π/period.
#[must_use]
pub fn equivalent(z: Point, period: f64) -> Option<Point> {
    let radius = libm::hypot(z.re, z.im);
    let s = Point { re: libm::log(radius) / period, im: libm::atan2(z.im, z.re) / period };
    (s.re.is_finite() && s.im.is_finite()).then_some(s)
}
