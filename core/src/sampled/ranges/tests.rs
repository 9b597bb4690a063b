//! Tests of the ranges of sampled loops. All loops are invented, or name their source.

use super::*;
use crate::model::BlockAt;
use crate::record::EdgeKind;
use crate::sampled::{Given, KnobRatio, Method};

fn p(c: &[i64]) -> IntPoly {
    IntPoly::from_i64(c)
}

fn rational(n: i64, d: u64) -> RBig {
    RBig::from_parts(n.into(), d.into())
}

/// K·above/below as the controller in z.
fn sampled(controller: (&[i64], &[i64]), plant: (&[i64], &[i64]), period: RBig, delay: RBig) -> SampledLoop {
    SampledLoop {
        controller: KnobRatio { above: [p(&[]), p(controller.0)].into(), below: [p(controller.1)].into() },
        given: Given::InZ,
        plant: BlockAt { above: p(plant.0), below: p(plant.1) },
        sensor: BlockAt { above: p(&[1]), below: p(&[1]) },
        computation: delay,
        controller_delay: RBig::ZERO,
        period,
        plant_delay: RBig::ZERO,
        sensor_delay: RBig::ZERO,
        feedback: IBig::ONE,
    }
}

/// Edge values with their kinds, and the counts of poles outside in the ranges.
fn found(input: &SampledLoop) -> (Vec<(f64, EdgeKind)>, Vec<usize>) {
    let stability = ranges(input).expect("found").partition.stability();
    let edges = stability.iter().filter_map(|r| r.to.as_ref());
    let edges = edges.map(|e| {
        assert!(e.proven, "{e:?}");
        (e.value, e.kind)
    });
    (edges.collect(), stability.iter().map(|r| r.unstable_poles).collect())
}

#[test]
fn an_integral_controller_on_a_lag_has_the_published_limits() {
    // K z/(z − 1) and a hold on 1/(s + 1): 0 < K < 2 (1 + e^−T)/(1 − e^−T). I. Kar, Digital Control System, NPTEL
    // course 108103008, IIT Guwahati (read second hand): 8.165, 4.328, 2.626 for T = 0.5, 1, 2; shared/checks J13.
    for (period, limit) in [
        (rational(1, 2), 8.165_976_330_147_193),
        (rational(1, 1), 4.327_906_827_477_306),
        (rational(2, 1), 2.626_070_570_998_663),
    ] {
        let (edges, counts) = found(&sampled((&[0, 1], &[-1, 1]), (&[1], &[1, 1]), period.clone(), RBig::ZERO));
        let t = period.to_f64().value();
        let formula = 2.0 * (1.0 + libm::exp(-t)) / (1.0 - libm::exp(-t));
        assert_eq!(
            (edges[0].0, edges[0].1, edges[1].1),
            (0.0, EdgeKind::OriginCrossing, EdgeKind::AlternationCrossing)
        );
        assert!((edges[1].0 - formula).abs() < 1e-14 * formula && (formula - limit).abs() < 2e-3, "{edges:?}");
        assert_eq!(counts, [1, 0, 1]);
    }
}

#[test]
fn a_motor_with_a_slow_sampler_has_the_published_limit() {
    // 1/(s (s + 1)), T = 2: K = 1.4556788 (R. C. Dorf, R. H. Bishop, Modern Control Systems, table of maximum gain,
    // from memory: 1.45; shared/checks J03-2).
    let (edges, counts) = found(&sampled((&[1], &[1]), (&[1], &[0, 1, 1]), rational(2, 1), RBig::ZERO));
    let crossing = edges.iter().find(|e| e.1 == EdgeKind::AxisCrossing).expect("a crossing");
    assert!((crossing.0 - 1.455_678_841_855_605_4).abs() < 1e-14, "{edges:?}");
    let index = edges.iter().position(|e| e.1 == EdgeKind::AxisCrossing).expect("found");
    assert_eq!((counts[index], counts[index + 1]), (0, 2));
}

#[test]
fn a_double_integrator_with_a_lead_is_resolved_at_zero() {
    // 1/s², h = 1/10, K (z − 0.9)/(z − 0.2): both poles leave z = 1 together.
    let (edges, counts) = found(&sampled((&[-9, 10], &[-2, 10]), (&[1], &[0, 0, 1]), rational(1, 10), RBig::ZERO));
    let zero = edges.iter().position(|e| e.0 == 0.0).expect("an edge at zero");
    assert_eq!((counts[zero], counts[zero + 1]), (1, 0), "{edges:?} {counts:?}");
    // F at z = −1 is 4·(−1.2·…) with the plant's own zero there: no finite knob puts a pole at −1.
    assert!(edges.iter().all(|e| e.1 != EdgeKind::AlternationCrossing), "{edges:?}");
}

#[test]
fn an_undamped_plant_starts_on_the_circle() {
    // 1/(s² + 4) with a delay of half a period.
    let (edges, counts) = found(&sampled((&[1], &[1]), (&[1], &[4, 0, 1]), rational(1, 5), rational(1, 2)));
    let zero = edges.iter().position(|e| e.0 == 0.0).expect("an edge at zero");
    assert_eq!((edges[zero].1, counts[zero], counts[zero + 1]), (EdgeKind::AxisCrossing, 0, 2), "{edges:?}");
}

#[test]
fn published_polynomials_are_counted() {
    // Roots outside and on the unit circle: shared/checks J14 (I. Kar, NPTEL 108103008, read second hand), J15, J16, J18
    // (K. Ogata, Discrete-Time Control Systems, 2nd ed., Prentice Hall 1995); J17.
    let cases: [(&[i64], usize, usize); 5] = [
        (&[1, 4, 1, 4], 0, 2),
        (&[24, -8, -130, 100], 1, 0),
        (&[-8, 30, 7, -120, 100], 0, 0),
        (&[2, -1, -11, 10], 0, 1),
        (&[8, -10, -17, 10], 1, 0),
    ];
    for (c, outside, on) in cases {
        let mapped = p(c).from_circle(&IBig::ONE, &IBig::ONE, c.len() - 1);
        let counted = count(&mapped).expect("counted");
        let missing = c.len() - 1 - mapped.degree();
        assert_eq!((counted.right, counted.axis + missing), (outside, on), "{c:?}");
    }
}

#[test]
fn a_controller_in_s_is_as_good_as_its_image() {
    // Tustin of K (s + 1)/(s + 10) at h = 1/5: s = 10 (z − 1)/(z + 1): K (11 z − 9)/(20 z).
    let typed = SampledLoop {
        controller: KnobRatio { above: [p(&[]), p(&[1, 1])].into(), below: [p(&[10, 1])].into() },
        given: Given::InS(Method::Tustin),
        ..sampled((&[1], &[1]), (&[3], &[2, 3, 1]), rational(1, 5), rational(3, 2))
    };
    let image = sampled((&[-9, 11], &[0, 20]), (&[3], &[2, 3, 1]), rational(1, 5), rational(3, 2));
    let (a, b) = (found(&typed), found(&image));
    assert_eq!((a.1, a.0.len()), (b.1, b.0.len()));
    assert!(a.0.iter().zip(&b.0).all(|(x, y)| (x.0 - y.0).abs() <= 1e-14 * y.0.abs() && x.1 == y.1));
}

#[test]
fn counting_by_crossings_agrees_with_counting_everywhere() {
    // A lag with 20 periods of delay, a lead with a resonance, a direct path, an undamped plant, a double integrator.
    let inputs = [
        sampled((&[1], &[1]), (&[1], &[1, 1]), rational(1, 10), rational(20, 1)),
        sampled((&[-9, 10], &[-2, 10]), (&[7, 1], &[40, 17, 3, 2]), rational(1, 7), rational(3, 2)),
        sampled((&[1], &[1]), (&[2, 1], &[1, 1]), rational(1, 10), RBig::ZERO),
        sampled((&[1], &[1]), (&[1], &[4, 0, 1]), rational(1, 5), rational(1, 2)),
        sampled((&[-9, 10], &[-2, 10]), (&[1], &[0, 0, 1]), rational(1, 10), RBig::ZERO),
    ];
    for input in inputs {
        let family = input.family(FIRST_BITS).expect("found");
        let parts = family.on_the_axis();
        let found = affine(&family, &parts[0], &parts[1], 1.0).expect("found");
        let places = merge(found.places);
        let counted: Vec<_> =
            samples(&places).iter().map(|q| certain_count(&at(&parts, q)).expect("counted")).collect();
        let last = counted[counted.len() - 1];
        assert_eq!(counts_by_crossings(&places, &found.steps, counted[0], last), Some(counted));
    }
}

#[test]
fn a_quadratic_knob_has_the_edges_of_its_square() {
    let square = SampledLoop {
        controller: KnobRatio { above: [p(&[]), p(&[]), p(&[1])].into(), below: [p(&[1])].into() },
        ..sampled((&[1], &[1]), (&[1], &[0, 1, 1]), rational(2, 1), RBig::ZERO)
    };
    let found = ranges(&square).expect("found").partition.stability();
    let edges: Vec<f64> = found.iter().filter_map(|r| r.to.as_ref()).map(|e| e.value).collect();
    let wanted = libm::sqrt(1.455_678_841_855_605_4);
    assert!(edges.iter().any(|e| (e - wanted).abs() < 1e-13), "{edges:?}");
    assert!(found.iter().filter_map(|r| r.to.as_ref()).all(|e| !e.proven));
    assert!(found.iter().any(|r| r.stable && r.to.as_ref().is_some_and(|e| (e.value - wanted).abs() < 1e-13)));
}
