//! Complex roots of integer polynomials, each in a disc that surely holds it.
//!
//! The f64 approximations are improved by Aberth's iteration with the residual p(z)/p'(z) in exact integer arithmetic,
//! so no cancellation can mislead it. A disc of radius n·|p(z)/p'(z)| around z holds a root (E. Laguerre; see P. Henrici,
//! Applied and Computational Complex Analysis, vol. 1, Wiley 1974, section 6.4); n disjoint discs hold one each.

use super::dyadic::{Dyadic, sign_of};
use super::start::approximate_roots;
use super::{ExactError, IntPoly, gcd};
use crate::numerics::magnitude;
use crate::record::Root;
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_int::ops::BitTest;
use nalgebra::{Complex, ComplexField};

/// Relative radius for roots that become f64 numbers, in bits: below the rounding of the result.
pub const ROOT_BITS: i64 = 62;

/// Relative radius at which the search gives up on telling roots apart.
const LAST_TARGET_BITS: i64 = 4000;

/// Sweeps at one target before the target is raised.
const SWEEP_CAP: usize = 80;

/// Rounds a bound computed in f64 up, past the handful of roundings that made it.
const ROUND_UP: f64 = 1.0 + 1e-14;

/// A complex number (re + j·im)·2^exponent.
#[derive(Clone, Debug)]
pub struct ComplexDyadic {
    re: IBig,
    im: IBig,
    exponent: i64,
}

impl ComplexDyadic {
    /// From finite parts; None for infinities and NaN.
    pub fn from_f64(z: Complex<f64>) -> Option<Self> {
        let (re, im) = (Dyadic::from_f64(z.re)?, Dyadic::from_f64(z.im)?);
        Some(Self::from_parts(&re, &im))
    }

    fn from_parts(re: &Dyadic, im: &Dyadic) -> Self {
        let (re, im) = (re.shortened(), im.shortened());
        let exponent = if im.signum() == 0 {
            re.exponent
        } else if re.signum() == 0 {
            im.exponent
        } else {
            re.exponent.min(im.exponent)
        };
        let align =
            |d: &Dyadic| if d.signum() == 0 { IBig::ZERO } else { &d.mantissa << ((d.exponent - exponent) as usize) };
        Self { re: align(&re), im: align(&im), exponent }
    }

    fn re(&self) -> Dyadic {
        Dyadic::new(self.re.clone(), self.exponent)
    }

    fn im(&self) -> Dyadic {
        Dyadic::new(self.im.clone(), self.exponent)
    }

    /// Rounded to f64.
    pub fn to_f64(&self) -> Complex<f64> {
        Complex::new(self.re().to_f64(), self.im().to_f64())
    }

    /// The number moved by −step and rounded to `bits` significant bits of its larger part.
    fn moved(&self, step: Complex<f64>, bits: i64) -> Self {
        let part = |a: &Dyadic, s: f64| a - &Dyadic::from_f64(s).unwrap_or(Dyadic::ZERO);
        let (re, im) = (part(&self.re(), step.re), part(&self.im(), step.im));
        let Some(size) = re.magnitude().max(im.magnitude()) else { return Self::from_parts(&re, &im) };
        let cut = |d: &Dyadic| {
            let shift = size - bits - d.exponent;
            if shift > 0 { Dyadic::new(&d.mantissa >> (shift as usize), d.exponent + shift) } else { d.clone() }
        };
        Self::from_parts(&cut(&re), &cut(&im))
    }

    /// self − other, rounded once.
    pub fn minus(&self, other: &Self) -> Complex<f64> {
        Complex::new((&self.re() - &other.re()).to_f64(), (&self.im() - &other.im()).to_f64())
    }
}

/// A root, within `radius` of `center`, and alone there but for its multiplicity.
#[derive(Clone, Debug)]
pub struct Disc {
    /// The middle of the disc. On the real axis exactly where the root is real.
    pub center: ComplexDyadic,
    /// The radius.
    pub radius: f64,
    /// How often the root counts.
    pub multiplicity: usize,
}

/// p(z)/p'(z) from exact values. None where p'(z) = 0.
fn exact_newton(p: &IntPoly, z: &ComplexDyadic) -> Option<Complex<f64>> {
    // With z = m·2^e, e < 0: q(m) = Σ a_i·2^(−e(n−i))·m^i is an integer Horner scheme, and p/p' = 2^e·q/q'.
    let (m_re, m_im, step) = if z.exponent >= 0 {
        (&z.re << (z.exponent as usize), &z.im << (z.exponent as usize), 0)
    } else {
        (z.re.clone(), z.im.clone(), -z.exponent as usize)
    };
    let real = m_im.is_zero();
    let (mut v_re, mut v_im, mut d_re, mut d_im) = (IBig::ZERO, IBig::ZERO, IBig::ZERO, IBig::ZERO);
    for (k, c) in p.coefficients().iter().rev().enumerate() {
        if real {
            d_re = d_re * &m_re + &v_re;
            v_re = v_re * &m_re + (c << (step * k));
        } else {
            let next = (&d_re * &m_re - &d_im * &m_im + &v_re, &d_re * &m_im + &d_im * &m_re + &v_im);
            (d_re, d_im) = next;
            let next = (&v_re * &m_re - &v_im * &m_im + (c << (step * k)), &v_re * &m_im + &v_im * &m_re);
            (v_re, v_im) = next;
        }
    }
    let scale = if z.exponent < 0 { z.exponent } else { 0 };
    quotient((&v_re, &v_im), (&d_re, &d_im), scale)
}

/// p(z) as an integer pair, times 2^(−exponent·degree) for negative exponents.
fn exact_value(p: &IntPoly, z: &ComplexDyadic) -> (IBig, IBig) {
    let up = z.exponent.max(0) as usize;
    let step = -z.exponent.min(0) as usize;
    let (m_re, m_im) = (&z.re << up, &z.im << up);
    let (mut re, mut im) = (IBig::ZERO, IBig::ZERO);
    for (k, c) in p.coefficients().iter().rev().enumerate() {
        (re, im) = (&re * &m_re - &im * &m_im + (c << (step * k)), &re * &m_im + &im * &m_re);
    }
    (re, im)
}

/// −above(z)/below(z), each part rounded once from its exact value; None where below(z) = 0.
pub fn negative_ratio_at(above: &IntPoly, below: &IntPoly, z: &ComplexDyadic) -> Option<Complex<f64>> {
    let (a_re, a_im) = exact_value(above, z);
    let (b_re, b_im) = exact_value(below, z);
    // −a·conj(b)/|b|²
    let size = &b_re * &b_re + &b_im * &b_im;
    let re = -(&a_re * &b_re + &a_im * &b_im);
    let im = &a_re * &b_im - &a_im * &b_re;
    let scale = z.exponent.min(0) * (above.degree() as i64 - below.degree() as i64);
    let part = |p: IBig| {
        let (m, e) = Dyadic::new(p, scale).to_f64_parts();
        let (d, f) = Dyadic::new(size.clone(), 0).to_f64_parts();
        libm::ldexp(m / d, (e - f).clamp(-1070, 1020) as i32)
    };
    (!size.is_zero()).then(|| Complex::new(part(re), part(im)))
}

/// Approximations of all roots of a polynomial without roots at zero, in f64; nothing is certain about them.
pub fn approximations(p: &IntPoly) -> Vec<Complex<f64>> {
    if p.degree() == 0 { Vec::new() } else { approximate_roots(p) }
}

/// All roots in f64, improved by one step with the exact residual, real ones exactly on the axis and complex ones in
/// exact pairs. Good to about 1e-14 for well separated roots; nothing is certain about them.
///
/// # Errors
/// As [`enclose`], which helps out where the approximations do not come in pairs.
pub fn polished(p: &IntPoly) -> Result<Vec<Complex<f64>>, ExactError> {
    let (stripped, zeros) = p.without_zero_roots();
    let mut all = alloc::vec![Complex::new(0.0, 0.0); zeros];
    for z in approximations(&stripped) {
        let exact = ComplexDyadic::from_f64(snapped(z)).filter(|z| z.im >= IBig::ZERO);
        let Some(exact) = exact else { continue };
        let mut z = exact.to_f64();
        if let Some(step) = exact_newton(&stripped, &exact)
            && step.modulus() < 1e-3 * z.modulus()
        {
            z -= step;
        }
        all.push(z);
        if z.im > 0.0 {
            all.push(z.conj());
        }
    }
    if all.len() == p.degree() {
        return Ok(all);
    }
    let discs = enclose_all(p, ROOT_BITS)?;
    let centers = discs.iter().flat_map(|disc| core::iter::repeat_n(disc.center.to_f64(), disc.multiplicity));
    Ok(centers.collect())
}

/// (a/b)·2^scale for complex integers, in f64.
fn quotient(a: (&IBig, &IBig), b: (&IBig, &IBig), scale: i64) -> Option<Complex<f64>> {
    let to_complex = |(re, im): (&IBig, &IBig)| {
        let size = re.bit_len().max(im.bit_len()) as i64;
        let part = |v: &IBig| Dyadic::new(v.clone(), -size).to_f64();
        (Complex::new(part(re), part(im)), size)
    };
    let ((a, a_size), (b, b_size)) = (to_complex(a), to_complex(b));
    if magnitude(b) == 0.0 {
        return None;
    }
    let exponent = (a_size - b_size + scale).clamp(-1060, 1020) as i32;
    Some(a / b * libm::ldexp(1.0, exponent))
}

/// Encloses every root of a square-free polynomial in a disc of its own, of radius 2^−bits of the root or less.
///
/// # Errors
/// [`ExactError::RootsNotEnclosed`] when roots are closer than the cap on precision can tell.
pub fn enclose(p: &IntPoly, bits: i64) -> Result<Vec<Disc>, ExactError> {
    let (p, zeros) = p.without_zero_roots();
    let mut discs = Vec::new();
    if zeros > 0 {
        let center = ComplexDyadic { re: IBig::ZERO, im: IBig::ZERO, exponent: 0 };
        discs.push(Disc { center, radius: 0.0, multiplicity: 1 });
    }
    if p.degree() == 0 {
        return Ok(discs);
    }
    let mut search = Search::new(&p)?;
    let mut target = bits;
    while target <= LAST_TARGET_BITS {
        if search.improve(target) && search.settle_real_roots() {
            discs.append(&mut search.discs);
            return Ok(discs);
        }
        target *= 2;
    }
    Err(ExactError::RootsNotEnclosed { degree: p.degree() })
}

/// Encloses every root of any polynomial but zero; a disc may meet one of a root of other multiplicity.
///
/// # Errors
/// As [`enclose`].
pub fn enclose_all(p: &IntPoly, bits: i64) -> Result<Vec<Disc>, ExactError> {
    let mut all = Vec::new();
    for (factor, multiplicity) in gcd::squarefree_factors(p) {
        all.extend(enclose(&factor, bits)?.into_iter().map(|disc| Disc { multiplicity, ..disc }));
    }
    Ok(all)
}

/// All roots of any polynomial but zero, with multiplicity: f64 values with radii, by real part, then imaginary part.
///
/// # Errors
/// As [`enclose`].
pub fn roots(p: &IntPoly) -> Result<Vec<Root>, ExactError> {
    let mut all: Vec<Root> = enclose_all(p, ROOT_BITS)?.iter().map(Disc::to_root).collect();
    all.sort_by(|a, b| a.re.total_cmp(&b.re).then(a.im.total_cmp(&b.im)));
    Ok(all)
}

impl Disc {
    /// The disc around the nearest f64 number.
    pub fn to_root(&self) -> Root {
        let z = self.center.to_f64();
        let mut radius = self.radius;
        // A part smaller than the radius carries no digit; zero is the better thing to print, and still inside.
        let mut flatten = |part: f64| {
            if part != 0.0 && libm::fabs(part) <= self.radius {
                radius += libm::fabs(part);
                return 0.0;
            }
            part
        };
        let (re, im) = (flatten(z.re), flatten(z.im));
        radius = (radius + f64::EPSILON * (libm::fabs(re) + libm::fabs(im))) * ROUND_UP;
        Root { re, im, radius, multiplicity: self.multiplicity }
    }
}

/// The state of the iteration.
struct Search<'p> {
    p: &'p IntPoly,
    discs: Vec<Disc>,
}

impl<'p> Search<'p> {
    fn new(p: &'p IntPoly) -> Result<Self, ExactError> {
        let discs: Option<Vec<Disc>> = approximate_roots(p)
            .into_iter()
            .map(|z| {
                Some(Disc { center: ComplexDyadic::from_f64(snapped(z))?, radius: f64::INFINITY, multiplicity: 1 })
            })
            .collect();
        discs.map(|discs| Self { p, discs }).ok_or(ExactError::RootsNotEnclosed { degree: p.degree() })
    }

    /// Iterates until every radius is 2^−target of its root and the discs are disjoint; false when the cap is met.
    fn improve(&mut self, target: i64) -> bool {
        for _ in 0..SWEEP_CAP {
            let mut done = true;
            for i in 0..self.discs.len() {
                done &= self.improve_one(i, target);
            }
            if done {
                return self.disjoint();
            }
        }
        self.leave_the_real_axis();
        false
    }

    /// From real points the iteration never turns complex: points that do not settle on the axis are pushed off it.
    fn leave_the_real_axis(&mut self) {
        for (i, disc) in self.discs.iter_mut().enumerate() {
            let size = magnitude(disc.center.to_f64());
            if disc.center.im.is_zero() && disc.radius > size * f64::EPSILON {
                let push = disc.radius.min(size) * if i % 2 == 0 { 0.5 } else { -0.5 };
                disc.center = disc.center.moved(Complex::new(0.0, push), LAST_TARGET_BITS);
            }
        }
    }

    /// One step for one root; true where its disc was already small enough.
    fn improve_one(&mut self, i: usize, target: i64) -> bool {
        let size = magnitude(self.discs[i].center.to_f64());
        let small = size * libm::ldexp(1.0, -target.min(1000) as i32);
        if self.discs[i].radius <= small {
            return true;
        }
        let Some(newton) = exact_newton(self.p, &self.discs[i].center) else {
            // On a root of the derivative: step aside.
            self.discs[i].center = self.discs[i].center.moved(Complex::new(size / 64.0, size / 81.0), target + 32);
            return false;
        };
        self.discs[i].radius = magnitude(newton) * self.p.degree() as f64 * ROUND_UP;
        if self.discs[i].radius <= small {
            return true;
        }
        let mut sum = Complex::new(0.0, 0.0);
        for (j, other) in self.discs.iter().enumerate() {
            let difference = self.discs[i].center.minus(&other.center);
            if j != i && magnitude(difference) > 0.0 {
                sum += difference.recip();
            }
        }
        let step = newton / (Complex::new(1.0, 0.0) - newton * sum);
        let step = if step.re.is_finite() && step.im.is_finite() { step } else { newton };
        self.discs[i].center = self.discs[i].center.moved(step, target + 32);
        false
    }

    fn disjoint(&self) -> bool {
        self.discs.iter().enumerate().all(|(i, a)| {
            self.discs[..i].iter().all(|b| magnitude(a.center.minus(&b.center)) > (a.radius + b.radius) * ROUND_UP)
        })
    }

    /// Puts real roots on the axis and makes the others exact conjugates. A disc that meets the axis and no other disc
    /// holds a real root, for the conjugate of its root would be in a second disc. False where that is still open.
    fn settle_real_roots(&mut self) -> bool {
        let mut settled: Vec<Disc> = Vec::with_capacity(self.discs.len());
        let mut real = 0;
        for disc in &self.discs {
            let im = disc.center.im().to_f64();
            if libm::fabs(im) <= disc.radius {
                let center = ComplexDyadic::from_parts(&disc.center.re(), &Dyadic::ZERO);
                settled.push(Disc { center, radius: disc.radius, multiplicity: 1 });
                real += 1;
            } else if sign_of(&disc.center.im) > 0 {
                let mut mirrored = disc.clone();
                mirrored.center.im = -mirrored.center.im;
                settled.push(disc.clone());
                settled.push(mirrored);
            }
        }
        let consistent = settled.len() == self.discs.len() && (self.discs.len() - real).is_multiple_of(2);
        if consistent {
            self.discs = settled;
        }
        consistent && self.disjoint()
    }
}

/// Nearly real points are put on the axis, where exact evaluation is twice as fast. A pair that does not belong there
/// leaves it again by [`Search::leave_the_real_axis`].
fn snapped(z: Complex<f64>) -> Complex<f64> {
    if libm::fabs(z.im) <= 1e-13 * libm::fabs(z.re) { Complex::new(z.re, 0.0) } else { z }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn from_roots(roots: impl IntoIterator<Item = i64>) -> IntPoly {
        roots.into_iter().fold(IntPoly::from_i64(&[1]), |p, r| p.times(&IntPoly::from_i64(&[-r, 1])))
    }

    #[test]
    fn wilkinson_roots_are_found_to_the_last_bit() {
        let found = roots(&from_roots(1..=20)).expect("enclosed");
        for (root, k) in found.iter().zip(1..) {
            assert!(libm::fabs(root.re - f64::from(k)) <= root.radius && root.im.to_bits() == 0, "{root:?}");
            assert!(root.radius < 1e-14 * f64::from(k), "{root:?}");
        }
        assert_eq!(found.len(), 20);
    }

    #[test]
    fn multiple_and_wide_spread_roots_keep_their_precision() {
        // (s + 10^9)³ (10^9 s + 1) (s² + 1)²
        let cube = from_roots([-1_000_000_000; 3]);
        let pair = IntPoly::from_i64(&[1, 0, 1]);
        let p = cube.times(&IntPoly::from_i64(&[1, 1_000_000_000])).times(&pair).times(&pair);
        let found = roots(&p).expect("enclosed");
        let summary: Vec<(f64, f64, usize)> = found.iter().map(|r| (r.re, r.im, r.multiplicity)).collect();
        assert_eq!(summary, [(-1e9, 0.0, 3), (-1e-9, 0.0, 1), (0.0, -1.0, 2), (0.0, 1.0, 2)]);
        assert!(found.iter().all(|r| r.radius <= 1e-15 * libm::hypot(r.re, r.im)));
    }

    #[test]
    fn roots_that_differ_in_the_twelfth_digit_are_told_apart() {
        // (s + 1)² + 10^-24, times 10^24, and (s + 1).
        let e24 = IBig::from(10).pow(24);
        let near = IntPoly::new([&e24 + 1, &e24 * 2, e24].to_vec());
        let p = near.times(&IntPoly::from_i64(&[1, 1]));
        let found = roots(&p).expect("enclosed");
        assert_eq!(found.len(), 3);
        assert!(found.iter().any(|r| libm::fabs(r.im - 1e-12) < 1e-24), "{found:?}");
    }

    #[test]
    fn a_pair_too_near_the_axis_for_f64_is_found() {
        // (s + 1)² + 10^-40, times 10^40.
        let e40 = IBig::from(10).pow(40);
        let p = IntPoly::new([&e40 + 1, &e40 * 2, e40].to_vec());
        let found = roots(&p).expect("enclosed");
        assert!(found.iter().all(|r| libm::fabs(libm::fabs(r.im) - 1e-20) < 1e-30), "{found:?}");
    }

    #[test]
    fn even_polynomials_that_stall_unshifted_methods_are_solved() {
        for c in [&[1, 0, 0, 0, 0, 0, 1][..], &[4, 0, 5, 0, 1], &[7, 0, 5, 0, 1], &[1, 0, 0, 0, 1]] {
            let p = IntPoly::from_i64(c);
            let found = roots(&p).expect("enclosed");
            assert_eq!(found.iter().map(|r| r.multiplicity).sum::<usize>(), p.degree(), "{c:?}");
            assert!(found.iter().all(|r| r.radius < 1e-14));
        }
    }
}
