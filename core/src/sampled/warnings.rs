//! Warnings about the sample period.

use super::at::SampledAt;
use super::family::SampledLoop;
use crate::exact::complex_roots::approximations;
use crate::numerics::magnitude;
use crate::ranges::permitted::short;
use crate::record::{Notice, NoticeKind};
use crate::response::OpenLoop;
use alloc::format;
use alloc::string::String;
use alloc::vec::Vec;
use nalgebra::Complex;

/// The sampling frequency should be this many times the bandwidth of the closed loop: common practice, no source.
const SAMPLES_PER_BANDWIDTH: f64 = 10.0;

/// A decaying real pole that falls by more than e^−this within a period is hidden from the samples.
const FADED: f64 = 4.0;

/// An unstable pole may grow by this factor within a period before it is worth a warning.
const GROWN: f64 = 2.0;

/// Half turns of two poles against each other within a period that are this near to whole ones are pathological: near
/// them the sampled plant is hardly reachable.
const NEAR_PATHOLOGICAL: f64 = 0.03;

/// What there is to say of the period and the plant.
pub fn of_the_plant(input: &SampledLoop) -> Vec<Notice> {
    let period = input.period.to_f64().value();
    let below = input.plant.below.times(&input.sensor.below);
    let poles = approximations(&below.without_zero_roots().0);
    [too_fast(&poles, period), growing(&poles, period), pathological(&poles, period)].into_iter().flatten().collect()
}

/// What there is to say of the period and the stable closed loop.
pub fn of_the_closed_loop(at: &SampledAt) -> Option<Notice> {
    let bandwidth = at.frequency()?.bandwidth().ok()??;
    let sampling = core::f64::consts::TAU / at.period();
    let slow = !bandwidth.is_finite() || sampling < SAMPLES_PER_BANDWIDTH * bandwidth;
    let reaches = if bandwidth.is_finite() {
        format!("{} times the closed loop's bandwidth of {} rad/s", short(sampling / bandwidth), short(bandwidth))
    } else {
        String::from("less than twice the closed loop's bandwidth")
    };
    slow.then(|| {
        notice(format!(
            "the sampling frequency is {} rad/s, {reaches}: at least ten times is common practice (no source)",
            short(sampling)
        ))
    })
}

fn notice(text: String) -> Notice {
    Notice { kind: NoticeKind::Sampling, text }
}

fn written(pole: Complex<f64>) -> String {
    if pole.im == 0.0 { short(pole.re) } else { format!("{} ± {} j", short(pole.re), short(pole.im)) }
}

fn is_real(pole: &Complex<f64>) -> bool {
    pole.im.abs() <= 1e-9 * magnitude(*pole)
}

/// A pole that oscillates beyond half the sampling frequency, or dies out between two samples.
fn too_fast(poles: &[Complex<f64>], period: f64) -> Option<Notice> {
    let aliased = |p: &&Complex<f64>| p.im * period > core::f64::consts::PI && !is_real(p);
    if let Some(pole) = poles.iter().filter(aliased).max_by(|a, b| a.im.total_cmp(&b.im)) {
        let text = format!(
            "the plant's poles at s = {} oscillate beyond half the sampling frequency of {} rad/s: the samples show them as \
             a slower oscillation",
            written(*pole),
            short(core::f64::consts::PI / period)
        );
        return Some(notice(text));
    }
    let faded = |p: &&Complex<f64>| -p.re * period > FADED;
    let pole = poles.iter().filter(faded).min_by(|a, b| a.re.total_cmp(&b.re))?;
    let pole = if is_real(pole) { Complex::new(pole.re, 0.0) } else { Complex::new(pole.re, pole.im.abs()) };
    Some(notice(format!(
        "the plant's pole at s = {} dies out within a sample period of {} s: the samples hardly show it",
        written(pole),
        short(period)
    )))
}

/// An unstable pole that grows much between two samples.
fn growing(poles: &[Complex<f64>], period: f64) -> Option<Notice> {
    let fastest = poles.iter().map(|p| p.re).fold(0.0, f64::max);
    let factor = libm::exp(fastest * period);
    (factor > GROWN).then(|| {
        notice(format!(
            "the plant's unstable pole grows by a factor {} within a sample period: sample faster",
            short(factor)
        ))
    })
}

/// Two poles that the samples cannot tell apart (R. E. Kalman, Y. C. Ho, K. S. Narendra, "Controllability of linear
/// dynamical systems", Contributions to Differential Equations 1, 1963): equal real parts, imaginary parts that differ by
/// a multiple of 2π/h.
fn pathological(poles: &[Complex<f64>], period: f64) -> Option<Notice> {
    for (i, a) in poles.iter().enumerate() {
        for b in &poles[..i] {
            let turns = (a.im - b.im).abs() * period / core::f64::consts::TAU;
            let whole = libm::round(turns);
            let near = (turns - whole).abs() < NEAR_PATHOLOGICAL && (a.re - b.re).abs() * period < NEAR_PATHOLOGICAL;
            if whole >= 1.0 && near {
                let upper = if a.im > b.im { a } else { b };
                return Some(notice(format!(
                    "at this sample period of {} s the plant's poles at s = {} fall on each other in the samples: one of \
                     them can hardly be reached by the controller; choose another period",
                    short(period),
                    written(*upper)
                )));
            }
        }
    }
    None
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::sampled::tests::in_z;
    use crate::sampled::{SampledAt, ranges};
    use alloc::rc::Rc;
    use dashu_ratio::RBig;

    fn texts(plant: (&[i64], &[i64]), period: (i64, u64)) -> Vec<String> {
        of_the_plant(&in_z((&[1], &[1]), plant, period, (0, 1))).into_iter().map(|n| n.text).collect()
    }

    #[test]
    fn a_period_that_suits_the_plant_is_not_complained_about() {
        assert!(texts((&[1], &[1, 2, 1]), (1, 20)).is_empty());
    }

    #[test]
    fn each_trouble_has_its_words() {
        // 1/(s² + 1) every π seconds (22/7), and every 4; 1/(s + 100) every 0.1; 1/(s − 3) every 1.
        assert!(texts((&[1], &[1, 0, 1]), (22, 7)).iter().any(|t| t.contains("fall on each other")));
        assert!(texts((&[1], &[1, 0, 1]), (4, 1))[0].contains("beyond half the sampling frequency"));
        assert!(texts((&[1], &[100, 1]), (1, 10))[0].contains("dies out"));
        assert!(texts((&[1], &[-3, 1]), (1, 1))[0].contains("grows by a factor 20.09"));
    }

    #[test]
    fn a_slow_sampler_is_told_with_its_ratio() {
        // K/s: bandwidth about K.
        let input = in_z((&[1], &[1]), (&[1], &[0, 1]), (1, 10), (0, 1));
        let whole = ranges(&input).expect("found");
        let told =
            |knob: i64| of_the_closed_loop(&SampledAt::new(&Rc::new(whole.clone()), RBig::from(knob)).expect("poles"));
        assert!(told(1).is_none());
        assert!(told(12).is_some_and(|n| n.text.contains("common practice")));
    }
}
