//! Tests of a sampled loop at a setting, by ways of their own. All loops are invented.

use super::factored::Factored;
use super::*;
use crate::exact::IntPoly;
use crate::model::BlockAt;
use crate::response::{OpenLoop, Trace};
use alloc::rc::Rc;
use alloc::vec;
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_ratio::RBig;

fn p(c: &[i64]) -> IntPoly {
    IntPoly::from_i64(c)
}

fn rational((n, d): (i64, u64)) -> RBig {
    RBig::from_parts(n.into(), d.into())
}

/// K·controller in z, a plant in s, period in s and delay in periods.
pub(super) fn in_z(
    controller: (&[i64], &[i64]),
    plant: (&[i64], &[i64]),
    period: (i64, u64),
    delay: (i64, u64),
) -> SampledLoop {
    SampledLoop {
        controller: KnobRatio { above: [p(&[]), p(controller.0)].into(), below: [p(controller.1)].into() },
        given: Given::InZ,
        plant: BlockAt { above: p(plant.0), below: p(plant.1) },
        sensor: BlockAt { above: p(&[1]), below: p(&[1]) },
        computation: rational(delay),
        controller_delay: RBig::ZERO,
        period: rational(period),
        plant_delay: RBig::ZERO,
        sensor_delay: RBig::ZERO,
        feedback: IBig::ONE,
    }
}

/// Coefficients in f64, lowest power first, over the leading one of `unit`.
fn list(p: &Factored, unit: &Factored) -> Vec<f64> {
    let value = |p: &Factored, i: usize| p.expanded().coefficient(i).midpoint().to_rational();
    let lead = value(unit, unit.degree());
    (0..=p.degree()).map(|i| (value(p, i) / &lead).to_f64().value()).collect()
}

fn product(a: &[f64], b: &[f64]) -> Vec<f64> {
    let mut c = vec![0.0; a.len() + b.len() - 1];
    for (i, x) in a.iter().enumerate() {
        for (j, y) in b.iter().enumerate() {
            c[i + j] += x * y;
        }
    }
    c
}

/// The answer of above/below (lowest power of z first) to a unit step, sample by sample.
fn sequence(above: &[f64], below: &[f64], count: usize) -> Vec<f64> {
    let order = below.len() - 1;
    let mut y: Vec<f64> = Vec::new();
    for k in 0..count {
        let forced: f64 = (0..=order.min(k)).map(|i| above.get(order - i).copied().unwrap_or(0.0)).sum();
        let past: f64 = (1..=order.min(k)).map(|i| below[order - i] * y[k - i]).sum();
        y.push((forced - past) / below[order]);
    }
    y
}

/// Compares a trace at the samples with the sequence of command to sensor.
fn samples_agree(input: &SampledLoop, knob: (i64, u64)) {
    let whole = ranges(input).expect("found");
    let at = SampledAt::new(&Rc::new(whole.clone()), rational(knob)).expect("poles");
    let answers = at.answers().expect("stable");
    let plant = &whole.family.plant;
    let q = knob.0 as f64 / knob.1 as f64;
    let control_below = list(&whole.family.controller.below[0], &whole.family.controller.below[0]);
    let control_above: Vec<f64> =
        list(&whole.family.controller.above[1], &whole.family.controller.below[0]).iter().map(|c| c * q).collect();
    let above = product(&control_above, &list(&plant.above, &plant.below));
    let mut below = product(&control_below, &list(&plant.below, &plant.below));
    for (i, c) in above.iter().enumerate() {
        below[i] += c;
    }
    let wanted = sequence(&above, &below, 40);
    let h = at.period();
    // At a jump the trace shows the later value; the sample is what the sensor sees.
    for (k, y) in wanted.iter().enumerate() {
        let found = answers.output.value(k as f64 * h);
        assert!((found - y).abs() < 1e-9 * (1.0 + y.abs()), "sample {k}: {found} {y}");
    }
    let control = sequence(&product(&control_above, &list(&plant.below, &plant.below)), &below, 20);
    let delay = (input.hold_delay()).to_f64().value();
    for (k, u) in control.iter().enumerate() {
        let found = answers.control.value(k as f64 * h + delay + 0.01 * h);
        assert!((found - u).abs() < 1e-9 * (1.0 + u.abs()), "output {k}: {found} {u}");
    }
}

#[test]
fn stepping_agrees_with_the_difference_equation() {
    let motor: (&[i64], &[i64]) = (&[1], &[0, 1, 1]);
    for delay in [(0, 1), (1, 2), (1, 1), (7, 3)] {
        samples_agree(&in_z((&[1], &[1]), motor, (1, 5), delay), (1, 5));
    }
    samples_agree(&in_z((&[-9, 10], &[-2, 10]), (&[1], &[0, 0, 1]), (1, 10), (0, 1)), (3, 1));
    // A stiff plant: poles at −1 and −400 every 1/4.
    samples_agree(&in_z((&[0, 1], &[-1, 1]), (&[400], &[400, 401, 1]), (1, 4), (1, 2)), (1, 3));
    // A plant with a direct path, and a delay.
    samples_agree(&in_z((&[0, 1], &[-1, 1]), (&[3, 1], &[1, 1]), (1, 2), (1, 1)), (1, 20));
}

/// The largest distance of a trace from a function of time, at many times off the grid.
fn farthest(trace: &Trace, end: f64, expected: impl Fn(f64) -> f64) -> f64 {
    (1..2000).map(|k| end * f64::from(k) / 2000.0).map(|t| (trace.value(t) - expected(t)).abs()).fold(0.0, f64::max)
}

#[test]
fn between_the_samples_an_integrator_runs_straight() {
    // K/s, K h = 1/2: y falls short by half at every sample.
    let whole = ranges(&in_z((&[1], &[1]), (&[1], &[0, 1]), (1, 2), (0, 1))).expect("found");
    let at = SampledAt::new(&Rc::new(whole.clone()), RBig::ONE).expect("poles");
    let answers = at.answers().expect("stable");
    let expected = |t: f64| {
        let k = libm::floor(t / 0.5);
        let left = libm::pow(0.5, k);
        1.0 - left * (1.0 - (t - 0.5 * k))
    };
    assert!(farthest(&answers.output, 5.0, expected) < 1e-12);
    let control = |t: f64| libm::pow(0.5, libm::floor(t / 0.5));
    assert!(farthest(&answers.control, 5.0, control) < 1e-12);
    assert!((answers.load.final_value - 1.0).abs() < 1e-12);
    assert_eq!((at.static_error(0), at.static_error(1), at.static_error(2)), (0.0, 1.0, f64::INFINITY));
}

#[test]
fn fast_modes_are_followed_between_the_samples() {
    // 1/((s + 1)(s/200 + 1)) every 1/2 s, after the first sample: a step K through the plant.
    let whole = ranges(&in_z((&[1], &[1]), (&[200], &[200, 201, 1]), (1, 2), (0, 1))).expect("found");
    let at = SampledAt::new(&Rc::new(whole.clone()), RBig::ONE).expect("poles");
    let trace = &at.answers().expect("stable").output;
    let expected = |t: f64| 1.0 - 200.0 / 199.0 * libm::exp(-t) + libm::exp(-200.0 * t) / 199.0;
    assert!(farthest(trace, 0.499, expected) < 2e-5, "{}", farthest(trace, 0.499, expected));
}

#[test]
fn gain_margins_end_where_the_ranges_do() {
    let whole = ranges(&in_z((&[-9, 10], &[-2, 10]), (&[1], &[0, 1, 3, 1]), (1, 10), (3, 2))).expect("found");
    let stability = whole.partition.stability();
    let stable = stability.iter().find(|r| r.stable).expect("a stable range");
    let to = stable.to.as_ref().expect("an end");
    let at = SampledAt::new(&Rc::new(whole.clone()), RBig::from_parts(1.into(), 10u8.into())).expect("poles");
    let frequency = at.frequency().expect("stable");
    assert!((frequency.gain_up().expect("found") * 0.1 / to.value - 1.0).abs() < 1e-10);
    let crossing = frequency.phase_crossings().expect("found");
    let there = crossing.iter().find(|c| c.factor > 1.0).expect("a crossing");
    assert!((there.omega / to.omega.expect("a frequency") - 1.0).abs() < 1e-10);
}

#[test]
fn crossovers_and_sensitivity_agree_with_the_curve() {
    // K/s every 1/10, K = 2: L = 0.2/(z − 1); |L| = 1 at 2 sin(ωh/2) = 0.2.
    let whole = ranges(&in_z((&[1], &[1]), (&[1], &[0, 1]), (1, 10), (0, 1))).expect("found");
    let at = SampledAt::new(&Rc::new(whole.clone()), RBig::from(2)).expect("poles");
    let frequency = at.frequency().expect("stable");
    let crossing = frequency.gain_crossings().expect("found");
    let omega = 20.0 * libm::asin(0.1);
    assert!(crossing.len() == 1 && (crossing[0].omega - omega).abs() < 1e-9, "{crossing:?}");
    // L = 0.2/(2j sin(ωh/2)) e^(−jωh/2): the phase is −90° − ωh/2.
    let margin = 90.0 - (omega * 0.05).to_degrees();
    assert!((crossing[0].phase_margin - margin).abs() < 1e-7);
    assert!((frequency.delay_margin().expect("found") - margin.to_radians() / omega).abs() < 1e-9);
    // |1/(1 + L)| = |z − 1|/|z − 0.8| is largest at z = −1: 2/1.8, at half the sampling frequency.
    let (where_, peak) = frequency.peak().expect("found");
    assert!((peak - 2.0 / 1.8).abs() < 1e-9 && where_ >= frequency.nyquist(), "{where_} {peak}");
    // T = 0.2/(z − 0.8), |T|² = 1/2: |z − 0.8|² = 0.08.
    let bandwidth = frequency.bandwidth().expect("found").expect("defined");
    let expected = 10.0 * libm::acos((1.64 - 0.08) / 1.6);
    assert!((bandwidth - expected).abs() < 1e-8, "{bandwidth} {expected}");
    let response = frequency.response().expect("drawn");
    assert!(response.omega.iter().all(|w| *w <= frequency.nyquist() * 1.000_001));
}

#[test]
fn figures_of_poles_are_those_of_the_equivalent_ones() {
    // A continuous pair −1 ± 2j as a fixed open loop: tiny knob.
    let whole = ranges(&in_z((&[1], &[1]), (&[1], &[5, 2, 1]), (1, 10), (0, 1))).expect("found");
    let at = SampledAt::new(&Rc::new(whole.clone()), RBig::from_parts(1.into(), 1_000_000_000_000u64.into()))
        .expect("poles");
    assert!((at.damping_ratio() - 1.0 / libm::sqrt(5.0)).abs() < 1e-9);
    assert!((at.decay_rate() - 1.0).abs() < 1e-9 && (at.natural_frequency() - libm::sqrt(5.0)).abs() < 1e-9);
}

#[test]
fn a_late_sensor_sees_the_past() {
    // The same total delay in front of the plant and in the sensor: the same poles, the output itself earlier.
    let front = in_z((&[1], &[1]), (&[1], &[1, 2, 1]), (1, 4), (3, 2));
    let behind = SampledLoop {
        computation: RBig::ZERO,
        sensor_delay: RBig::from_parts(3.into(), 8u8.into()),
        ..in_z((&[1], &[1]), (&[1], &[1, 2, 1]), (1, 4), (0, 1))
    };
    let (a, b) = (ranges(&front).expect("found"), ranges(&behind).expect("found"));
    let (a, b) = (
        SampledAt::new(&Rc::new(a.clone()), RBig::ONE).expect("poles"),
        SampledAt::new(&Rc::new(b.clone()), RBig::ONE).expect("poles"),
    );
    let (a, b) = (a.answers().expect("stable"), b.answers().expect("stable"));
    for k in 0..60 {
        let t = 0.07 * f64::from(k);
        assert!((a.output.value(t + 0.375) - b.output.value(t)).abs() < 1e-6, "{t}");
    }
    assert!((a.output.value(0.37)).abs() < 1e-15 && b.output.value(0.37) > 0.01);
}
