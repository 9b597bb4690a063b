//! Each requirement's governing equation, and its edges with what makes them checkable: the pole on the limit, or the
//! figure.

use super::{Ground, written};
use crate::exact::ExactError;
use crate::model::{KnobPolynomial, StaticRatio, Variables};
use crate::project::RequirementKind as Kind;
use crate::ranges::affine::boundary_polynomial;
use crate::ranges::permitted::short;
use crate::ranges::pieces::Border;
use crate::ranges::requirements::damping_ratio::on_ray;
use crate::ranges::requirements::{Limit, describe, unit};
use crate::record::{Cause, Point};
use crate::response::LoopAt;
use crate::sheet::{Formula, RequirementEdge, RequirementStep};
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_int::IBig;
use nalgebra::Complex;

pub(super) fn step(ground: &Ground<'_>, limit: &Limit) -> Result<RequirementStep, ExactError> {
    let lane = ground.analysis.lane(limit)?;
    let (condition, equation) = governing(ground, limit);
    let borders = lane.pieces.iter().flat_map(|piece| [&piece.from, &piece.to]).flatten();
    let own = borders.filter(|border| border.cause == Cause::Requirement(limit.kind));
    let edges = own.map(|border| edge(ground, limit, border)).collect::<Result<Vec<_>, _>>()?;
    Ok(RequirementStep { kind: limit.kind, condition, equation, proven: lane.proven, edges })
}

fn edge(ground: &Ground<'_>, limit: &Limit, border: &Border) -> Result<RequirementEdge, ExactError> {
    let at = LoopAt::new(ground.analysis.setup(), border.bracket.midpoint().to_rational())?;
    Ok(RequirementEdge { knob: border.value(), pole: pole_on_limit(&at, limit), figure: at.figure(limit.kind).value() })
}

/// The pole nearest to the limit's line, where poles decide.
fn pole_on_limit(at: &LoopAt, limit: &Limit) -> Option<Point> {
    let value = limit.value.to_f64().value();
    let size = |p: &Complex<f64>| libm::hypot(p.re, p.im);
    let off: fn(&Complex<f64>, f64, f64) -> f64 = match limit.kind {
        Kind::DampingRatio => |p, size, value| -p.re / size - value,
        Kind::DecayRate => |p, _, value| (-p.re - value) / value,
        Kind::NaturalFrequencyMinimum | Kind::NaturalFrequencyMaximum => |_, size, value| (size - value) / value,
        _ => return None,
    };
    let distance = |p: &Complex<f64>| off(p, size(p), value).abs();
    let nearest = at.poles().iter().filter(|p| p.im >= 0.0).min_by(|a, b| distance(a).total_cmp(&distance(b)))?;
    Some(Point { re: nearest.re, im: nearest.im })
}

/// The condition in words and the expression it speaks of.
fn governing(ground: &Ground<'_>, limit: &Limit) -> (String, Option<Formula>) {
    let (family, model) = (ground.family, &ground.analysis.model);
    let knob = model.knob.as_str();
    let value = short(limit.value.to_f64().value());
    let (a, c) = (limit.value.numerator().clone(), IBig::from(limit.value.denominator().clone()));
    let ratio = |found: &StaticRatio| written::ratio(&found.above, &found.below, knob);
    let polynomial = |shown: &KnobPolynomial, main: &str| written::polynomial(shown, Variables { main, knob });
    let error = |order: usize| model.static_error(order).as_ref().map(ratio);
    match limit.kind {
        Kind::DampingRatio => {
            let t = written::fresh(["t", "u"], knob);
            let equation = family.affine().and_then(|(d, n)| {
                let p = boundary_polynomial(&on_ray(d, &a, &c), &on_ray(n, &a, &c));
                (!p.is_zero()).then(|| written::equation(&p, t))
            });
            let root = short(libm::sqrt((&c * &c - &a * &a).to_f64().value()));
            let words = format!(
                "every pole has −Re s/|s| of at least {value}; on the limit s = (−{a} + {root} j) {t}, |s| = {c} {t}. With F split \
                 by powers of s into its two real parts there and {knob} eliminated, {t} is a positive root of this polynomial, \
                 and {knob} = −D(s)/N(s)"
            );
            (words, equation)
        }
        Kind::DecayRate => {
            let shifted = family.mapped(|p, degree| p.shifted_right(&a, &c, degree));
            let words = format!(
                "every pole lies left of −{value}: all roots of F(s − {value}), up to a factor, lie left of the imaginary axis; its \
                 edges are found like those of stability"
            );
            (words, Some(polynomial(&written::family(&shifted.parts), "s")))
        }
        Kind::NaturalFrequencyMinimum | Kind::NaturalFrequencyMaximum => {
            let v = written::fresh(["v", "w"], knob);
            let mapped = family.mapped(|p, degree| p.from_circle(&a, &c, degree));
            let which = if limit.kind == Kind::NaturalFrequencyMinimum {
                "every pole lies outside of"
            } else {
                "some pole lies inside"
            };
            let words = format!(
                "{which} the circle |s| = {value}; with s = {value} (1 + {v})/(1 − {v}) the circle becomes the imaginary axis of {v}, \
                 and its inside the left half plane, of this polynomial"
            );
            (words, Some(polynomial(&written::family(&mapped.parts), v)))
        }
        Kind::StepError => (format!("100 times the size of this ratio is at most {value}"), error(0)),
        Kind::RampError => (format!("the size of this ratio is at most {value}"), error(1)),
        Kind::ParabolaError => (format!("the size of this ratio is at most {value}"), error(2)),
        Kind::LoadFinal => (format!("the size of this ratio is at most {value}"), Some(ratio(&model.static_load()))),
        Kind::GainMarginUp | Kind::GainMarginDown if model.knob_is_loop_gain() => {
            let factor = short(libm::pow(10.0, limit.value.to_f64().value() / 20.0));
            let towards = if limit.kind == Kind::GainMarginUp {
                "below the edge of stability above it"
            } else {
                "above the edge of stability below it"
            };
            (format!("{knob} stays by the factor 10^({value}/20) = {factor} {towards}"), None)
        }
        kind => (format!("{}{}", definition(kind), bound(limit, &value)), None),
    }
}

/// ", at most 5 %".
fn bound(limit: &Limit, value: &str) -> String {
    let direction = if crate::ranges::requirements::at_least(limit.kind) { "at least" } else { "at most" };
    let unit = unit(limit.kind);
    let space = if unit.is_empty() { "" } else { "\u{202f}" };
    format!(", {direction} {value}{space}{unit}")
}

/// How a computed figure is defined.
fn definition(kind: Kind) -> String {
    match kind {
        Kind::GainMarginUp => "the smallest factor above 1 with 1 + factor·L(jω) = 0",
        Kind::GainMarginDown => "the smallest divisor above 1 with 1 + L(jω)/divisor = 0",
        Kind::PhaseMargin => "the smallest angle between L(jω) and −1 where |L(jω)| = 1",
        Kind::DelayMargin => "the angle from −1 to L(jω), in radians, over ω, where |L(jω)| = 1; the smallest",
        Kind::PeakSensitivity => "the largest |1/(1 + L(jω))| over all ω",
        Kind::Bandwidth => "the first ω at which |T(jω)|² is half of |T(0)|², T = command to output",
        Kind::Overshoot => "the largest excess of the answer to a step of the command over its final value",
        Kind::Undershoot => "the largest excess of the answer to a step of the command to the other side of zero",
        Kind::RiseTime => "from 10 % to 90 % of the final value of the answer to a step of the command",
        Kind::SettlingTime2 => "until the answer to a step of the command stays within 2 % of its final value",
        Kind::SettlingTime5 => "until the answer to a step of the command stays within 5 % of its final value",
        Kind::PeakTime => "until the highest point of the answer to a step of the command",
        Kind::LoadPeak => "the largest deviation of the output after a unit step at the plant's input",
        Kind::ControllerPeak => "the largest controller output after a unit step of the command",
        _ => return describe(kind).to_string(),
    }
    .to_string()
}
