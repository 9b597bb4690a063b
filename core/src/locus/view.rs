//! The default view of the s-plane, and distances in its pixels.

use crate::record::{Point, View};
use nalgebra::Complex;

/// The default view is thought to be this many pixels wide and high when chords are judged.
const PIXELS: f64 = 1000.0;

/// The margin around what matters, as a part of the extent.
const MARGIN: f64 = 0.15;

/// The smaller extent is at least this part of the larger one.
const SLIMMEST: f64 = 0.6;

/// Branches are followed this many view sizes out of the picture, so that there is something to zoom out to.
const FAR: f64 = 6.0;

/// The rectangle around the given points, symmetric to the real axis, with the origin in it.
pub fn frame(points: impl IntoIterator<Item = Point>) -> View {
    let (mut left, mut right, mut top) = (0.0_f64, 0.0_f64, 0.0_f64);
    for point in points {
        left = left.min(point.re);
        right = right.max(point.re);
        top = top.max(point.im.abs());
    }
    let largest = (right - left).max(2.0 * top);
    let largest = if largest > 0.0 && largest.is_finite() { largest } else { 2.0 };
    let width = (right - left).max(SLIMMEST * largest) * (1.0 + 2.0 * MARGIN);
    let height = (2.0 * top).max(SLIMMEST * largest) * (1.0 + 2.0 * MARGIN);
    let middle = 0.5 * (left + right);
    View { re: [middle - 0.5 * width, middle + 0.5 * width], im: [-0.5 * height, 0.5 * height] }
}

/// Distances in pixels of a view.
#[derive(Clone, Copy, Debug)]
pub struct Pixels {
    view: View,
    per_re: f64,
    per_im: f64,
}

impl Pixels {
    /// Of a view.
    pub fn new(view: View) -> Self {
        Self { view, per_re: PIXELS / (view.re[1] - view.re[0]), per_im: PIXELS / (view.im[1] - view.im[0]) }
    }

    fn scaled(&self, z: Complex<f64>) -> Complex<f64> {
        Complex::new(z.re * self.per_re, z.im * self.per_im)
    }

    /// How far outside of the view, in view sizes; 0 inside.
    pub fn remoteness(&self, s: Complex<f64>) -> f64 {
        let outside = |x: f64, range: [f64; 2]| (range[0] - x).max(x - range[1]).max(0.0) / (range[1] - range[0]);
        outside(s.re, self.view.re).max(outside(s.im, self.view.im))
    }

    /// Whether a branch on its way to infinity may end here.
    pub fn is_far(&self, s: Complex<f64>) -> bool {
        self.remoteness(s) >= FAR
    }

    /// The distance of a point from the line through two others, in pixels; leniently outside of the view.
    pub fn off_chord(&self, from: Complex<f64>, to: Complex<f64>, point: Complex<f64>) -> f64 {
        let (chord, way) = (self.scaled(to - from), self.scaled(point - from));
        let length = libm::hypot(chord.re, chord.im);
        let off = if length == 0.0 { 0.0 } else { libm::fabs(chord.re * way.im - chord.im * way.re) / length };
        off / (1.0 + 20.0 * self.remoteness(from).min(self.remoteness(to)))
    }

    /// How far the cubic with these end velocities (over a parameter of length 1) leaves its chord, in pixels: sideways,
    /// or beyond an end where it turns back; leniently outside of the view.
    pub fn sagitta(&self, from: Complex<f64>, to: Complex<f64>, out: Complex<f64>, into: Complex<f64>) -> f64 {
        let (chord, out, into) = (self.scaled(to - from), self.scaled(out), self.scaled(into));
        let length = libm::hypot(chord.re, chord.im);
        let unit = if length == 0.0 { Complex::new(1.0, 0.0) } else { chord / length };
        // The Hermite cubic leaves its chord by out·t(1−t)² − into·t²(1−t), t from 0 to 1: at most 4/27 of each
        // velocity, and an eighth of their difference in the middle.
        let across = |z: Complex<f64>| unit.re * z.im - unit.im * z.re;
        let (a, b) = (across(out), across(into));
        let bend = (0.125 * libm::fabs(a - b)).max(4.0 / 27.0 * libm::fabs(a).max(libm::fabs(b)));
        // A parabola that ends with a backward velocity has turned by the square of it over twice the acceleration.
        let along = |z: Complex<f64>| unit.re * z.re + unit.im * z.im;
        let (a, b) = (along(out), along(into));
        let backward = a.min(b).min(0.0);
        let turned = if backward < 0.0 { 0.5 * backward * backward / (libm::fabs(a) + libm::fabs(b)) } else { 0.0 };
        bend.max(turned) / (1.0 + 20.0 * self.remoteness(from).min(self.remoteness(to)))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_frame_holds_every_point_and_the_origin() {
        let view = frame([Point { re: -5.0, im: 0.0 }, Point { re: -1.0, im: 3.0 }]);
        assert!(view.re[0] < -5.0 && view.re[1] > 0.0 && view.im[1] > 3.0);
        assert!((view.im[0] + view.im[1]).abs() < 1e-12);
        let lone = frame([Point::default()]);
        assert!(lone.re[1] > lone.re[0] && lone.im[1] > lone.im[0]);
    }

    #[test]
    fn a_parabola_bends_by_an_eighth_of_the_change_of_velocity() {
        let pixels = Pixels::new(View { re: [-500.0, 500.0], im: [-500.0, 500.0] });
        // s = t + j·4t(1 − t): from 0 to 1, highest point 1.
        let bend = pixels.sagitta(
            Complex::new(0.0, 0.0),
            Complex::new(1.0, 0.0),
            Complex::new(1.0, 4.0),
            Complex::new(1.0, -4.0),
        );
        assert!((bend - 1.0).abs() < 1e-12, "{bend}");
    }

    #[test]
    fn a_parabola_that_turns_back_on_its_chord_leaves_it_at_the_end() {
        let pixels = Pixels::new(View { re: [-500.0, 500.0], im: [-500.0, 500.0] });
        // s = 6t − 5t²: from 0 to 1, farthest point 1.8.
        let real = |x: f64| Complex::new(x, 0.0);
        let turned = pixels.sagitta(real(0.0), real(1.0), real(6.0), real(-4.0));
        assert!((turned - 0.8).abs() < 1e-12, "{turned}");
        // There and back to the same point, a quarter of the velocity away.
        assert!((pixels.sagitta(real(0.0), real(0.0), real(4.0), real(-4.0)) - 1.0).abs() < 1e-12);
    }
}
