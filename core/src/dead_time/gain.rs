//! A gain as the knob of a loop with dead time: F(s, q) = A(s) + (B0(s) + q·B1(s))·e^(−T·s), every real q.
//!
//! On s = jω, q is real where h(ω) = Im((A·e^(jωT) + B0)·conj B1) vanishes, and then q = −Re(…)/|B1|²; where h falls
//! through zero two poles more are unstable as q grows, where it rises two fewer. Every zero of h is isolated
//! (`isolation.rs`) and proven, and q enclosed, with the signs of h in integer arithmetic.
//!
//! That finitely many suffice: h = |A·B1|·sin θ + c with the phase θ of A·conj B1·e^(jωT). Beyond a frequency W, found from
//! polynomial inequalities, θ grows and outweighs c, so that every further crossing adds two unstable poles as |q| grows.
//! Every crossing up to W is known, and every one with |q| ≤ Q, for a Q beyond which the count exceeds all that the crossings
//! left out could still take away. One count anchors the ranges: it follows dead time from 0 on ([`super::delay`]).

use super::bounds::inner_frequency;
use super::delay::{ComplexInterval, WORKING_BITS, count_at, over, square_root, squared};
use super::isolation::{AxisFunction, Isolated};
use super::origin::{order_at_zero, origin_crossing};
use super::partition::Crossing;
use super::trigonometry::Trigonometry;
use super::{Count, DeadTimeError, DeadTimePartition};
use crate::exact::gcd::{gcd, squarefree_part};
use crate::exact::half_plane;
use crate::exact::real_roots::positive_roots;
use crate::exact::{Dyadic, IntPoly, Interval};
use crate::ranges::{Contact, Place};
use alloc::vec::Vec;
use core::f64::consts::PI;
use dashu_int::IBig;
use dashu_ratio::RBig;

/// Brackets of edges are at least this narrow, in bits: a thousandth of the rounding of f64, and far below the 1e-15 of the record.
const BRACKET_BITS: i64 = 64;

/// Newton steps from an f64 approximation to a proven bracket; three suffice where f64 had ten digits.
const NEWTON_CAP: usize = 12;

/// Times the bound on |q| is raised before no outer range is found.
const OUTER_CAP: usize = 40;

/// The loop: its parts have no common root.
#[derive(Clone, Debug)]
pub struct GainFamily {
    pub(super) a: IntPoly,
    pub(super) b0: IntPoly,
    pub(super) b1: IntPoly,
    pub(super) dead_time: RBig,
    /// The common factor of the parts as given; its roots are the fixed modes.
    pub fixed: IntPoly,
}

impl GainFamily {
    /// From the parts as they are; `dead_time` > 0.
    ///
    /// # Errors
    /// [`DeadTimeError::NotRetarded`] unless both delayed parts have a lower degree than A; [`DeadTimeError::AlwaysZero`]
    /// where A is zero.
    pub fn new(a: &IntPoly, b0: &IntPoly, b1: &IntPoly, dead_time: &RBig) -> Result<Self, DeadTimeError> {
        if a.is_zero() {
            return Err(DeadTimeError::AlwaysZero);
        }
        let delayed = b0.degree().max(b1.degree());
        if delayed >= a.degree() && !(b0.is_zero() && b1.is_zero()) {
            return Err(DeadTimeError::NotRetarded { delayed, undelayed: a.degree() });
        }
        let fixed = gcd(&gcd(a, b0), b1);
        let over = |p: &IntPoly| p.exactly_over(&fixed).unwrap_or_else(|| p.clone());
        Ok(Self { a: over(a), b0: over(b0), b1: over(b1), dead_time: dead_time.clone(), fixed })
    }

    /// A and B0 + q·B1 at a value of the knob, times a positive integer; without the fixed factor.
    pub fn at(&self, q: &RBig) -> (IntPoly, IntPoly) {
        let (numerator, denominator) = (q.numerator().clone(), IBig::from(q.denominator().clone()));
        let a = IntPoly::new(self.a.coefficients().iter().map(|c| c * &denominator).collect());
        (a, self.b0.combined(&denominator, &self.b1, &numerator))
    }

    /// Poles right of the axis and on it at a value of the knob; proven. On the axis only fixed ones are told, unless the
    /// delayed part vanishes there.
    ///
    /// # Errors
    /// As [`count_at`].
    pub fn count(&self, q: &RBig) -> Result<Count, DeadTimeError> {
        let (d, n) = self.at(q);
        let moving = count_at(&d, &n, &self.dead_time)?;
        let fixed = half_plane::count(&self.fixed)?;
        Ok(Count { right: moving.right + fixed.right, axis: moving.axis + fixed.axis })
    }

    /// The whole real line of the knob.
    ///
    /// # Errors
    /// Where a method meets a cap, or a pole stays at the origin for all q.
    pub fn partition(&self) -> Result<DeadTimePartition, DeadTimeError> {
        if self.b1.is_zero() {
            return DeadTimePartition::from_first(Vec::new(), self.count(&RBig::ZERO)?);
        }
        let search = Search::new(self)?;
        let inner = search.up_to_inner_frequency()?;
        let mut known: Vec<Found> = Vec::with_capacity(inner.len());
        for isolated in &inner {
            known.push(search.refined(isolated)?);
        }
        let mut bound = search.first_bound(&known)?;
        for _ in 0..OUTER_CAP {
            if let Some(partition) = search.bounded(self, &known, bound)? {
                return Ok(partition);
            }
            bound *= 2.0;
        }
        Err(DeadTimeError::NoOuterBound)
    }
}

/// A crossing with what the search wants to know of it.
#[derive(Clone, Debug)]
struct Found {
    crossing: Crossing,
    knob: f64,
}

impl Found {
    /// Whether unstable poles go as |q| grows.
    fn removes(&self) -> bool {
        (self.crossing.change < 0) == (self.knob > 0.0)
    }
}

/// The function h with its parts, in exact and in f64 form.
struct Search {
    /// A, B0 and B1 without real factors in ω² of A and B0, and of B1.
    a: IntPoly,
    b0: IntPoly,
    b1: IntPoly,
    /// The axis factor of B1 and of A with B0, in x = ω²: their zeros are no crossings at finite q, or at q = 0.
    of_b1: IntPoly,
    of_a: IntPoly,
    /// |A|², |B0|² and |B1|² as given, in x.
    squares: [IntPoly; 3],
    /// u and v of A·conj B1 = u + jω·v, c of Im(B0·conj B1) = ω·c.
    u: IntPoly,
    v: IntPoly,
    c: IntPoly,
    dead_time: RBig,
    time: Interval,
    trigonometry: Trigonometry,
    function: AxisFunction,
    /// rad/s: beyond this every crossing adds unstable poles as |q| grows.
    inner_frequency: f64,
    /// The crossing at the origin, and those of A's own axis poles at q = 0.
    at_origin: Vec<Found>,
}

impl Search {
    fn new(family: &GainFamily) -> Result<Self, DeadTimeError> {
        let (a_parts, b0_parts, b1_parts) = (family.a.axis_parts(), family.b0.axis_parts(), family.b1.axis_parts());
        let of_a = gcd(&gcd(&a_parts.0, &a_parts.1), &gcd(&b0_parts.0, &b0_parts.1)).without_zero_roots().0;
        let of_b1 = gcd(&b1_parts.0, &b1_parts.1).without_zero_roots().0;
        let without =
            |p: &IntPoly, factor: &IntPoly| p.exactly_over(&of_x_as_of_s(factor)).unwrap_or_else(|| p.clone());
        let (a, b0, b1) = (without(&family.a, &of_a), without(&family.b0, &of_a), without(&family.b1, &of_b1));
        let ((ae, ao), (b0e, b0o), (be, bo)) = (a.axis_parts(), b0.axis_parts(), b1.axis_parts());
        let x = IntPoly::from_i64(&[0, 1]);
        let u = ae.times(&be).plus(&ao.times(&bo).times(&x));
        let v = ao.times(&be).minus(&ae.times(&bo));
        let c = b0o.times(&be).minus(&b0e.times(&bo));
        let dead_time = family.dead_time.clone();
        let (order, sign) = order_at_zero(&u, &v, &c, &dead_time)?;
        let function = AxisFunction::new(&u, &v, &c, dead_time.to_f64().value(), order);
        let inner_frequency = inner_frequency(&a, &b0, &u, &v, &c, &dead_time);
        let mut search = Self {
            squares: [squared(&family.a), squared(&family.b0), squared(&family.b1)],
            time: Interval::around(&dead_time, WORKING_BITS),
            trigonometry: Trigonometry::new(),
            at_origin: Vec::new(),
            a,
            b0,
            b1,
            of_b1,
            of_a,
            u,
            v,
            c,
            dead_time,
            function,
            inner_frequency,
        };
        let origin = origin_crossing(family, sign * search.factor_sign(&Dyadic::ZERO))?;
        let own = search.crossings_of_own_poles()?;
        let found = |crossing: Crossing| Found { knob: crossing.place.value(), crossing };
        search.at_origin = origin.into_iter().chain(own).map(found).collect();
        Ok(search)
    }

    /// The sign at x of what was taken out of h.
    fn factor_sign(&self, x: &Dyadic) -> i32 {
        self.of_a.sign_at(x) * self.of_b1.sign_at(x)
    }

    /// The enclosures of h·(…) and of −q·|B1|²·(…), at ω in an interval.
    fn values(&self, omega: &Interval) -> (Interval, Interval) {
        let x = omega.times(omega).rounded(WORKING_BITS);
        let (cos, sin) = self.trigonometry.cos_sin(&omega.times(&self.time));
        let turn = ComplexInterval { re: cos, im: sin };
        let delayed = ComplexInterval::at(&self.a, &x, omega).times(&turn);
        let sum = delayed.plus(&ComplexInterval::at(&self.b0, &x, omega));
        let value = sum.times(&ComplexInterval::at(&self.b1, &x, omega).conjugate());
        (value.im, value.re)
    }

    /// The sign of h without its real factors.
    fn sign(&self, omega: f64) -> Option<i32> {
        let (h, _) = self.values(&Interval::point(Dyadic::from_f64(omega)?));
        h.sign().filter(|sign| *sign != 0)
    }

    fn zeros(&self, from: f64, to: f64, looked: &mut usize) -> Result<Vec<Isolated>, DeadTimeError> {
        if from >= to {
            return Ok(Vec::new());
        }
        self.function.zeros(from, to, |omega| self.sign(omega), looked)
    }

    fn up_to_inner_frequency(&self) -> Result<Vec<Isolated>, DeadTimeError> {
        self.zeros(0.0, self.inner_frequency, &mut 0)
    }

    /// A first bound on |q|: the places within the first turns of the phase.
    fn first_bound(&self, known: &[Found]) -> Result<f64, DeadTimeError> {
        let turns = 2.0 * PI / self.dead_time.to_f64().value();
        let mut near = Vec::new();
        for isolated in self.zeros(self.inner_frequency, self.inner_frequency + 2.0 * turns, &mut 0)? {
            near.push(self.refined(&isolated)?);
        }
        let of_sign = |positive: bool| {
            let all = known.iter().chain(&near).filter(move |f| (f.knob > 0.0) == positive && !f.removes());
            all.map(|f| f.knob.abs()).fold(f64::INFINITY, f64::min)
        };
        let smallest = known.iter().chain(&near).map(|f| f.knob.abs()).fold(f64::INFINITY, f64::min);
        let wanted = [of_sign(true), of_sign(false)].into_iter().filter(|q| q.is_finite()).fold(smallest, f64::max);
        if wanted.is_finite() { Ok(1.01 * wanted) } else { Err(DeadTimeError::NoOuterBound) }
    }

    /// The partition with every crossing of |q| ≤ bound, the origin's included; None where its outermost ranges are not surely unstable for ever.
    fn bounded(
        &self,
        family: &GainFamily,
        known: &[Found],
        bound: f64,
    ) -> Result<Option<DeadTimePartition>, DeadTimeError> {
        let mut looked = 0;
        let (inside, outside): (Vec<&Found>, Vec<&Found>) =
            known.iter().chain(&self.at_origin).partition(|f| f.knob.abs() <= bound);
        let mut crossings: Vec<Crossing> = inside.into_iter().map(|f| f.crossing.clone()).collect();
        for (from, to) in self.bands(bound)? {
            for isolated in self.zeros(from.max(self.inner_frequency), to, &mut looked)? {
                let found = self.refined(&isolated)?;
                if found.knob.abs() <= bound {
                    crossings.push(found.crossing);
                }
            }
        }
        let mut partition = DeadTimePartition::new(crossings, |q| family.count(q))?;
        let removed = |positive: bool| {
            let all = outside.iter().filter(|f| (f.knob > 0.0) == positive && f.removes());
            all.map(|f| f.crossing.change.unsigned_abs() as usize).sum::<usize>()
        };
        let ends = (partition.ranges[0].right, partition.ranges[partition.places.len()].right);
        let settled = ends.0 > removed(false) && ends.1 > removed(true);
        (partition.open_below, partition.open_above) = (true, true);
        Ok(settled.then_some(partition))
    }

    /// The stretches of ω > 0 where a crossing with |q| ≤ bound can be, rounded outward.
    fn bands(&self, bound: f64) -> Result<Vec<(f64, f64)>, DeadTimeError> {
        // |A| ≤ |B0| + |q|·|B1|, and (a + b)² ≤ 2a² + 2b².
        let weight = if self.b0.is_zero() { 1 } else { 2 };
        let q = Dyadic::from_f64(bound).ok_or(DeadTimeError::NoOuterBound)?.to_rational();
        let square = (&q * &q) * RBig::from(weight);
        let denominator = IBig::from(square.denominator().clone());
        let [a, b0, b1] = &self.squares;
        let excess = a.combined(&denominator, b0, &(&denominator * -weight)).combined(
            &IBig::ONE,
            b1,
            &-square.numerator().clone(),
        );
        let mut bands = Vec::new();
        let mut from = (excess.lowest_sign() < 0).then_some(0.0);
        let part = squarefree_part(&excess);
        let outward = (1.0 - 1e-15, 1.0 + 1e-15);
        for mut root in positive_roots(&part)? {
            root.refine_to(&part, BRACKET_BITS)?;
            let (low, high) = (libm::sqrt(root.bracket.low.to_f64()), libm::sqrt(root.bracket.high.to_f64()));
            // Just right of the root: a touch of zero is a band of its own.
            match from.take() {
                Some(start) => {
                    bands.push((start, high * outward.1));
                    let right = &root.bracket.high + &Dyadic::new(IBig::ONE, root.bracket.high.exponent - 64);
                    if excess.sign_at(&right) < 0 {
                        from = Some(low * outward.0);
                    }
                }
                None => from = Some(low * outward.0),
            }
        }
        // Beyond the last root A outweighs all: what is still open was a touch.
        if let Some(start) = from {
            bands.push((start, start * (1.0 + 1e-12)));
        }
        Ok(bands)
    }

    /// A proven bracket of the knob at an isolated zero.
    fn refined(&self, isolated: &Isolated) -> Result<Found, DeadTimeError> {
        let start = Dyadic::from_f64(isolated.estimate).ok_or(DeadTimeError::CrossingsNotSeparated)?;
        let ends = [isolated.low, isolated.high].map(|w| Dyadic::from_f64(w).unwrap_or(Dyadic::ZERO));
        let mut omega = start;
        for _ in 0..NEWTON_CAP {
            let step = self.newton_step(&omega);
            let Some(step) = step else { break };
            let next = (&omega - &step).round_down(WORKING_BITS);
            omega = next.max(ends[0].clone()).min(ends[1].clone());
            // Beside a step of 2^-k of ω the next one is about its square, relatively.
            let size = omega.magnitude().unwrap_or(0);
            let reached = size - step.magnitude().unwrap_or(i64::MIN / 2);
            if reached < 24 {
                continue;
            }
            let margin = Dyadic::new(IBig::ONE, size - (2 * reached - 16).min(WORKING_BITS as i64 / 2));
            let bracket = Interval { low: &omega - &margin, high: &omega + &margin };
            if let Some(found) = self.proven(&bracket, &ends, isolated.direction) {
                return Ok(found);
            }
        }
        Err(DeadTimeError::CrossingsNotSeparated)
    }

    /// The crossing in a bracket of ω at whose ends h has the signs it must have. None where that is open, or the knob's bracket
    /// too wide.
    fn proven(&self, bracket: &Interval, ends: &[Dyadic; 2], direction: i32) -> Option<Found> {
        let sign = |omega: &Dyadic| self.values(&Interval::point(omega.clone())).0.sign();
        let inside = bracket.low >= ends[0] && bracket.high <= ends[1];
        if !inside || sign(&bracket.low) != Some(-direction) || sign(&bracket.high) != Some(direction) {
            return None;
        }
        let x = bracket.times(bracket).rounded(WORKING_BITS);
        let (_, re) = self.values(bracket);
        let b1 = ComplexInterval::at(&self.b1, &x, bracket);
        let size = b1.re.times(&b1.re).plus(&b1.im.times(&b1.im));
        let (of_a, of_b1) = (over(&self.of_a, &x), over(&self.of_b1, &x));
        let knob = re.negated().times(&of_a).over(&size.times(&of_b1), WORKING_BITS)?;
        if !knob.narrow(BRACKET_BITS) {
            return None;
        }
        let factor = of_a.times(&of_b1).sign().filter(|sign| *sign != 0)?;
        let omega = bracket.midpoint().to_f64();
        let value = knob.midpoint().to_f64();
        let place = Place::within(knob, Contact::Axis { omega });
        Some(Found { crossing: Crossing::simple(place, i64::from(-2 * factor * direction)), knob: value })
    }

    /// h/h′ at ω. None where h′ may be zero.
    fn newton_step(&self, omega: &Dyadic) -> Option<Dyadic> {
        let at = Interval::point(omega.clone());
        let x = at.times(&at);
        let (cos, sin) = self.trigonometry.cos_sin(&at.times(&self.time));
        let (u, v, c) = (over(&self.u, &x), over(&self.v, &x), over(&self.c, &x));
        let slope = |p: &IntPoly| over(&p.derivative(), &x);
        let (du, dv, dc) = (slope(&self.u), slope(&self.v), slope(&self.c));
        let twice = |i: &Interval| i.plus(i);
        let value = u.times(&sin).plus(&at.times(&v.times(&cos).plus(&c)));
        // u·sin + ωv·cos + ωc, by ω.
        let of_sin = at.times(&twice(&du).plus(&self.time.times(&v).negated()));
        let of_cos = self.time.times(&u).plus(&v).plus(&twice(&x.times(&dv)));
        let alone = c.plus(&twice(&x.times(&dc)));
        let rise = of_sin.times(&sin).plus(&of_cos.times(&cos)).plus(&alone);
        Some(value.rounded(WORKING_BITS).over(&rise.rounded(WORKING_BITS), WORKING_BITS)?.midpoint())
    }

    /// A's own poles on the axis, which B0 shares: they are there at q = 0.
    fn crossings_of_own_poles(&self) -> Result<Vec<Crossing>, DeadTimeError> {
        let mut crossings = Vec::new();
        for (factor, multiplicity) in crate::exact::gcd::squarefree_factors(&self.of_a) {
            for mut root in positive_roots(&factor)? {
                let omega = |x: f64| libm::sqrt(x);
                let change = if multiplicity % 2 == 0 {
                    0
                } else {
                    root.refine_to(&factor, crate::ranges::EDGE_BITS)?;
                    let at = square_root(&root.bracket);
                    let h = self.values(&at).0.sign().ok_or(DeadTimeError::CrossingsNotSeparated)?;
                    let rest = crate::exact::gcd::without_common_roots(&self.of_a, &factor);
                    let leading = self.of_a.exactly_over(&rest).map_or(0, |p| p.leading_sign());
                    // The factor rises through its root, or falls, by its sign right of it.
                    let step = &root.bracket.high + &Dyadic::new(IBig::ONE, root.bracket.high.exponent - 8);
                    let rising = factor.sign_at(&step) * leading * rest.sign_at(&root.bracket.high);
                    i64::from(-2 * rising * h * self.of_b1.sign_at(&root.bracket.high))
                };
                let place = Place::exactly(RBig::ZERO, Contact::Axis { omega: omega(root.to_f64()) });
                crossings.push(Crossing { place, change, axis: 2 * multiplicity, from_right: None });
            }
        }
        Ok(crossings)
    }
}

/// p(ω²) as a polynomial in s: x = −s².
fn of_x_as_of_s(p: &IntPoly) -> IntPoly {
    let mut coefficients = alloc::vec![IBig::ZERO; 2 * p.degree() + 1];
    for (i, c) in p.coefficients().iter().enumerate() {
        coefficients[2 * i] = if i % 2 == 1 { -c } else { c.clone() };
    }
    IntPoly::new(coefficients)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn p(c: &[i64]) -> IntPoly {
        IntPoly::from_i64(c)
    }

    fn family(a: &[i64], b0: &[i64], b1: &[i64], dead_time: (i64, u64)) -> GainFamily {
        let time = RBig::from_parts(dead_time.0.into(), dead_time.1.into());
        GainFamily::new(&p(a), &p(b0), &p(b1), &time).expect("retarded")
    }

    fn cut(a: &[i64], b0: &[i64], b1: &[i64], dead_time: (i64, u64)) -> (Vec<f64>, Vec<usize>) {
        let partition = family(a, b0, b1, dead_time).partition().expect("cut");
        assert!(partition.open_below && partition.open_above);
        for place in &partition.places {
            assert!(place.exact.is_some() || place.bracket.narrow(53), "{place:?}");
        }
        (partition.places.iter().map(Place::value).collect(), partition.ranges.iter().map(|c| c.right).collect())
    }

    /// The range around `inside` and its count.
    fn around(cut: &(Vec<f64>, Vec<usize>), inside: f64) -> (f64, f64, usize) {
        let i = cut.0.iter().filter(|q| **q < inside).count();
        let low = if i > 0 { cut.0[i - 1] } else { f64::NEG_INFINITY };
        (low, cut.0.get(i).copied().unwrap_or(f64::INFINITY), cut.1[i])
    }

    #[test]
    fn a_delayed_integrator_is_stable_up_to_half_pi() {
        // shared/checks L02a: delayed integrator, KT = π/2.
        let found = cut(&[0, 1], &[], &[1], (1, 1));
        assert_eq!(around(&found, 1.0), (0.0, core::f64::consts::FRAC_PI_2, 0));
        assert_eq!(around(&found, 3.0).2, 2);
        assert_eq!(around(&found, -1.0).2, 1);
    }

    #[test]
    fn a_delayed_lag_has_the_published_limit() {
        // K·e^(−0.8s)/(s + 1): K. Ogata, Modern Control Engineering, 5th ed., as in shared/checks L03b.
        let (low, high, right) = around(&cut(&[1, 1], &[], &[1], (4, 5)), 1.0);
        assert_eq!((low, right), (-1.0, 0));
        assert!((high - 2.644_574_314_795_622_6).abs() < 1e-15 * high, "{high}");
    }

    #[test]
    fn a_double_integrator_is_never_stable_and_changes_by_one_at_zero() {
        let (places, right) = cut(&[0, 0, 1], &[], &[1], (1, 1));
        let zero = places.iter().position(|q| *q == 0.0).expect("a place at 0");
        assert_eq!((right[zero], right[zero + 1]), (1, 2));
        let partition = family(&[0, 0, 1], &[], &[1], (1, 1)).partition().expect("cut");
        assert_eq!(partition.at_places[zero], Count { right: 0, axis: 2 });
    }

    #[test]
    fn a_pole_pair_on_the_axis_is_a_place_at_zero() {
        // e^(−s/2)/(s² + 1): the delay of ω = 1 is half a radian, so that positive feedback of small gain damps.
        let partition = family(&[1, 0, 1], &[], &[1], (1, 2)).partition().expect("cut");
        let zero = partition.places.iter().position(|place| place.exact == Some(RBig::ZERO)).expect("a place at 0");
        assert_eq!((partition.ranges[zero].right, partition.ranges[zero + 1].right), (0, 2));
        assert_eq!(partition.at_places[zero], Count { right: 0, axis: 2 });
        // A double pair gains one pair on each side.
        let partition = family(&[1, 0, 2, 0, 1], &[], &[1], (1, 2)).partition().expect("cut");
        let zero = partition.places.iter().position(|place| place.exact == Some(RBig::ZERO)).expect("a place at 0");
        assert_eq!((partition.ranges[zero].right, partition.ranges[zero + 1].right), (2, 2));
        assert_eq!(partition.at_places[zero], Count { right: 0, axis: 4 });
    }

    #[test]
    fn a_common_factor_is_a_fixed_mode() {
        let family = family(&[-2, -1, 1], &[], &[-2, 1], (1, 1));
        assert_eq!(family.fixed, p(&[-2, 1]));
        assert!(family.partition().expect("cut").ranges.iter().all(|count| count.right >= 1));
    }

    #[test]
    fn a_fixed_part_beside_the_knob_moves_the_ranges_by_itself() {
        // s(s + 1)(s + 2) + (b + q)·e^(−s): the ranges of b + q are those without b.
        let plain = cut(&[0, 2, 3, 1], &[], &[1], (1, 1));
        let moved = cut(&[0, 2, 3, 1], &[3], &[1], (1, 1));
        let (low, high, right) = around(&moved, -2.9);
        let (plain_low, plain_high, plain_right) = around(&plain, 0.1);
        assert_eq!(right, plain_right);
        assert!((low + 3.0 - plain_low).abs() < 1e-14 && (high + 3.0 - plain_high).abs() < 1e-14);
    }

    #[test]
    fn what_is_not_retarded_is_refused() {
        let refused = GainFamily::new(&p(&[1, 1]), &p(&[]), &p(&[1, 2]), &RBig::ONE);
        assert_eq!(refused.err(), Some(DeadTimeError::NotRetarded { delayed: 1, undelayed: 1 }));
    }
}
