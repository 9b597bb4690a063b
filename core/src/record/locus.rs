//! The s-plane in the record: landmarks, asymptotes, poles and zeros, and the closed loop at the setting.

use super::CharacterName;
use super::timing::equivalent;
use alloc::vec::Vec;
use serde::Serialize;

/// A special point of the locus.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Landmark {
    /// What it is.
    pub kind: LandmarkKind,
    /// Where it is, 1/s; in the z-plane without unit. Of a conjugate pair only the upper one is listed.
    pub s: Point,
    /// Of a landmark in the z-plane the point of the s-plane it comes from, 1/s.
    pub equivalent: Option<Point>,
    /// The knob there; None is infinity (arrivals).
    pub knob: Option<f64>,
    /// How many poles meet there.
    pub multiplicity: usize,
    /// Degrees in (−180, 180], for departures and arrivals: the direction in which the branch leaves a pole, or from
    /// which, seen from the zero, it arrives.
    pub angle: Option<f64>,
    /// The sign of the knob on this part of the locus.
    pub sign: KnobSign,
}

/// What a landmark is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum LandmarkKind {
    /// Branches meet; away from the real axis, or leaving it as |knob| grows.
    Breakaway,
    /// Branches meet on the real axis and stay on it as |knob| grows.
    BreakIn,
    /// A branch leaves a pole of the open loop.
    Departure,
    /// A branch arrives at a zero of the open loop.
    Arrival,
    /// A pole pair is on the imaginary axis.
    #[serde(rename = "axis crossing")]
    AxisCrossing,
    /// A pole is at the origin.
    #[serde(rename = "origin crossing")]
    OriginCrossing,
    /// A pole is at z = −1.
    #[serde(rename = "alternation crossing")]
    AlternationCrossing,
}

/// Which half of the locus.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum KnobSign {
    /// Knob from 0 to +∞.
    Positive,
    /// Knob from 0 to −∞.
    Negative,
}

/// A value for each sign of the knob.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct BothSigns<T> {
    /// Knob from 0 to +∞.
    pub positive: T,
    /// Knob from 0 to −∞.
    pub negative: T,
}

/// The straight lines the branches approach.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Asymptotes {
    /// The number of branches that go to infinity.
    pub count: usize,
    /// Where the asymptotes meet, on the real axis, 1/s. None where there are none.
    pub centroid: Option<f64>,
    /// Degrees in (−180, 180], ascending.
    pub angles: Vec<f64>,
}

/// A part of the real axis; None is an infinite end.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Segment(
    /// The left end, 1/s; None is −∞.
    pub Option<f64>,
    /// The right end, 1/s; None is +∞.
    pub Option<f64>,
);

/// A point of the s-plane, 1/s.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Point {
    /// The real part.
    pub re: f64,
    /// The imaginary part.
    pub im: f64,
}

/// A root with the radius of a disc that surely holds it.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Root {
    /// The real part, 1/s.
    pub re: f64,
    /// The imaginary part, 1/s; exactly 0 for a real root.
    pub im: f64,
    /// The true root is no farther than this, 1/s.
    pub radius: f64,
    /// How many roots coincide here.
    pub multiplicity: usize,
}

/// The closed loop at the chosen setting.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct ClosedLoop {
    /// The knob's value.
    pub knob: f64,
    /// Poles of the closed loop.
    pub poles: Vec<ClosedPole>,
    /// Poles in the open right half plane; exact.
    pub unstable_poles: usize,
    /// Poles on the imaginary axis; exact.
    pub axis_poles: usize,
    /// The trade's word for the kinds of poles; exact.
    pub name: CharacterName,
}

/// A pole of the closed loop: a [`Root`] with the trade's figures of it.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct ClosedPole {
    /// The real part, 1/s.
    pub re: f64,
    /// The imaginary part, 1/s; exactly 0 for a real pole.
    pub im: f64,
    /// The true pole is no farther than this, 1/s.
    pub radius: f64,
    /// How many poles coincide here.
    pub multiplicity: usize,
    /// Of a pole in the z-plane the point of the s-plane it comes from, 1/s; the figures below are those of it.
    pub equivalent: Option<EquivalentPole>,
    /// −re/|s|: 1 for a stable real pole, 0 on the imaginary axis, negative right of it. None where the pole cannot be
    /// told from the origin.
    pub damping_ratio: Option<f64>,
    /// |s|, rad/s; 0 where the pole cannot be told from the origin.
    pub natural_frequency: f64,
}

/// The pole of the s-plane that a pole of the z-plane comes from.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct EquivalentPole {
    /// The real part, 1/s.
    pub re: f64,
    /// The imaginary part, 1/s.
    pub im: f64,
    /// The true pole is no farther than this, 1/s.
    pub radius: f64,
}

impl ClosedPole {
    /// A pole of the z-plane; its figures are those of the equivalent pole. Poles next to z = 0 have none: they are gone
    /// within a sample.
    #[must_use]
    pub fn sampled(root: Root, period: f64) -> Self {
        let Root { re, im, radius, multiplicity } = root;
        let size = libm::hypot(re, im);
        let found = equivalent(Point { re, im }, period).filter(|_| size > 2.0 * radius);
        let Some(Point { re: s_re, im: s_im }) = found else {
            return Self { damping_ratio: None, natural_frequency: 0.0, ..root.into() };
        };
        // d(ln z) = dz/z; the factor covers the curvature for discs up to half of |z|.
        let own = EquivalentPole { re: s_re, im: s_im, radius: 2.0 * radius / (size * period) };
        let Self { damping_ratio, natural_frequency, .. } =
            Root { re: s_re, im: s_im, radius: own.radius, multiplicity }.into();
        Self { re, im, radius, multiplicity, equivalent: Some(own), damping_ratio, natural_frequency }
    }
}

impl From<Root> for ClosedPole {
    fn from(Root { re, im, radius, multiplicity }: Root) -> Self {
        let distance = libm::hypot(re, im);
        let known = distance > radius;
        Self {
            re,
            im,
            radius,
            multiplicity,
            equivalent: None,
            damping_ratio: known.then(|| if libm::fabs(re) <= radius { 0.0 } else { -re / distance }),
            natural_frequency: if known { distance } else { 0.0 },
        }
    }
}

/// A rectangle of the s-plane, 1/s.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct View {
    /// Left and right.
    pub re: [f64; 2],
    /// Bottom and top.
    pub im: [f64; 2],
}

#[cfg(test)]
mod tests {
    use super::*;

    fn pole(re: f64, im: f64, radius: f64) -> ClosedPole {
        Root { re, im, radius, multiplicity: 1 }.into()
    }

    #[test]
    fn a_pole_carries_its_damping_ratio_and_natural_frequency() {
        let found = pole(-3.0, 4.0, 1e-12);
        assert_eq!((found.damping_ratio, found.natural_frequency), (Some(0.6), 5.0));
        assert_eq!(pole(2.0, 0.0, 0.0).damping_ratio, Some(-1.0));
    }

    #[test]
    fn what_the_radius_does_not_tell_from_zero_is_zero() {
        assert_eq!(pole(1e-10, 4.0, 1e-9).damping_ratio, Some(0.0));
        let origin = pole(1e-10, 0.0, 1e-9);
        assert_eq!((origin.damping_ratio, origin.natural_frequency), (None, 0.0));
    }
}
