//! The model: from the blocks as typed and the table of quantities to the characteristic polynomial.
//!
//! Every number is exact: typed decimals become rationals, and F(s, q) has integer coefficients. F is the denominator of
//! the open loop plus (negative feedback) or minus (positive feedback) its numerator, over the greatest common divisor of
//! its integers and over any factor in the knob q alone; where the highest power of s meets the lowest power of q, its
//! coefficient is positive. The knob itself is not scaled: in the affine case F = D + q N.

mod characteristic;
mod dead_time;
mod display;
mod evaluate;
mod factors;
mod polynomial;
mod quantities;
mod ratio;
mod sampling;
mod scalar;
#[cfg(test)]
mod tests;

pub use dead_time::DeadTime;
pub use display::{Precision, Variables, expression, formula};
pub use factors::Factor;
pub use polynomial::KnobPolynomial;
pub use ratio::{BlockAt, Ratio};
pub use sampling::Sampling;

use crate::answer::{Field, Problem};
use crate::exact::IntPoly;
use crate::notation::{self, Expression, NotationError};
use crate::project::{Direction, Feedback, Project};
use crate::record::{ModelRecord, Notice, NoticeKind, Plane, Reading, SamplingRecord, Timing};
use crate::setting::Scale;
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_ratio::RBig;
use evaluate::{Block, Variable, evaluate};
use quantities::Quantities;

/// The highest order of a loop. Up to here the exact methods are tried and fast.
pub const MAXIMUM_ORDER: usize = 40;

/// The highest power of the knob in the characteristic polynomial. Products of three gains give 3; 12 leaves room, and
/// keeps the expanded polynomials small.
pub const MAXIMUM_KNOB_DEGREE: usize = 12;

/// The most bits of an integer in the model. A loop of order 40 with time constants of 1e-9 needs about 2400; the exact
/// methods slow down with the square of this.
pub const MAXIMUM_BITS: usize = 8192;

/// The loop, ready for analysis.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Loop {
    /// The knob's canonical symbol.
    pub knob: String,
    /// The chosen setting, if one was typed, on the controller's scale.
    pub setting: Option<RBig>,
    /// Controller, plant and sensor, in factors as typed. The field Dead time is part of the plant.
    pub blocks: [Ratio; 3],
    /// Controller times plant times sensor, in factors as typed.
    pub open_loop: Ratio,
    /// The sign of the feedback.
    pub feedback: Feedback,
    /// The controller's scale.
    pub scale: Scale,
    /// How the controller samples; None for one that works continuously.
    pub sampling: Option<Sampling>,
    /// F(s, q), of order 1 or more. Normalised as the module's head says. Of a loop with dead time, that of the loop
    /// without it; of a loop with a controller in z it is not used.
    pub characteristic: KnobPolynomial,
    /// A factor in the knob alone that was divided out of F, as text. Where it is zero, the loop as typed makes no
    /// sense.
    pub knob_factor: Option<String>,
    /// Warnings about the blocks.
    pub notices: Vec<Notice>,
}

/// The three blocks of a project with their fields, names and texts.
fn blocks(project: &Project) -> [(Field, &'static str, &str); 3] {
    [
        (Field::Controller, "controller", &project.blocks.controller),
        (Field::Plant, "plant", &project.blocks.plant),
        (Field::Sensor, "sensor", &project.blocks.sensor),
    ]
}

/// What can be read of the blocks, each by itself; also where others have faults.
#[must_use]
pub fn reading(project: &Project) -> Reading {
    let read = blocks(project).map(|(_, _, text)| notation::read(text).ok());
    let others = numbers(project);
    let names = names(read.iter().flatten().chain(&others));
    let [controller, plant, sensor] = read.map(|block| block.as_ref().map(notation::mathml));
    Reading { controller, plant, sensor, names }
}

/// The inputs that are numbers typed as expressions, as far as they can be read.
fn numbers(project: &Project) -> Vec<Expression> {
    let sampling =
        project.blocks.sampling.iter().flat_map(|sampling| [&sampling.period, &sampling.delay, &sampling.prewarp]);
    let texts = [&project.blocks.dead_time].into_iter().chain(sampling).chain([&project.setting.factor]);
    texts.filter_map(|text| notation::read(text).ok()).collect()
}

/// The names in all blocks, in order of first appearance.
fn names<'a>(expressions: impl Iterator<Item = &'a Expression>) -> Vec<String> {
    let mut found: Vec<String> = Vec::new();
    for name in expressions.flat_map(notation::names) {
        if !found.contains(&name) {
            found.push(name);
        }
    }
    found
}

/// Builds the loop from everything typed.
///
/// # Errors
/// All that must be put right, in the order of the form.
pub fn build(project: &Project) -> Result<Loop, Vec<Problem>> {
    let texts = blocks(project);
    let read = texts.map(|(_, _, text)| notation::read(text));
    let used = names(read.iter().flatten().chain(&numbers(project)));
    let (quantities, table_problems) = quantities::read(project, &used);

    let mut problems = Vec::new();
    let mut ratios = Vec::new();
    for ((field, _, text), expression) in texts.iter().zip(&read) {
        let evaluated = match expression {
            Ok(expression) => {
                let variable = variable(project, *field, expression);
                evaluate(&Block { field: *field, text, expression, variable }, &quantities)
            }
            Err(error) => Err([fault(*field, error)].into()),
        };
        match evaluated {
            Ok(ratio) => ratios.push(ratio),
            Err(found) => problems.extend(found),
        }
    }
    let dead_time = scalar::dead_time(&project.blocks.dead_time, &quantities).unwrap_or_else(|found| {
        problems.extend(found);
        DeadTime::default()
    });
    let sampling = sampling::read(project, read[0].as_ref().ok(), &quantities).unwrap_or_else(|found| {
        problems.extend(found);
        None
    });
    problems.extend(table_problems);
    let scaled = setting(project, &quantities).map_err(|found| problems.extend(found));
    let ([controller, plant, sensor], Some(knob), Ok((setting, scale))) = (ratios.as_slice(), quantities.knob, scaled)
    else {
        return Err(problems);
    };
    let plant = &Ratio { dead_time: plant.dead_time.plus(&dead_time), ..plant.clone() };
    if !problems.is_empty() {
        return Err(problems);
    }

    let in_z = sampling.as_ref().is_some_and(|sampling| sampling.controller_in_z);
    if in_z && controller.zero_count() > controller.pole_count() {
        let message = "this needs samples that are not yet taken: give the controller as many poles as zeros, such as \
                       K (z - 0.9)/z"
            .to_string();
        return Err([Problem { field: Field::Controller, symbol: None, span: None, message }].into());
    }
    let about_loop = |message| [Problem { field: Field::Loop, symbol: None, span: None, message }].to_vec();
    let open_loop = controller.times(plant).and_then(|path| path.times(sensor));
    let open_loop = open_loop.map_err(|excess| about_loop(characteristic::too_large(excess)))?;
    let found = characteristic::characteristic(&open_loop, project.blocks.feedback).map_err(about_loop)?;
    let mut notices: Vec<Notice> =
        texts.iter().zip(&ratios).filter_map(|((_, name, _), ratio)| improper(name, ratio)).collect();
    if found.loses_order && sampling.is_none() && open_loop.dead_time.is_none() {
        let text = "algebraic loop: at high frequencies the loop returns exactly its own signal at every setting; add a \
                    filter pole, such as 1/(0.01 s + 1)";
        notices.push(Notice { kind: NoticeKind::AlgebraicLoop, text: text.to_string() });
    }
    let knob_factor = found.knob_factor.map(|factor| display::formula(&factor, &knob));
    let blocks = [controller.clone(), plant.clone(), sensor.clone()];
    let feedback = project.blocks.feedback;
    Ok(Loop {
        knob,
        setting,
        blocks,
        open_loop,
        feedback,
        scale,
        sampling,
        characteristic: found.polynomial,
        knob_factor,
        notices,
    })
}

/// A static figure as a function of the knob: |above(q)/below(q)|.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct StaticRatio {
    /// The numerator, a polynomial in the knob.
    pub above: IntPoly,
    /// The denominator, a polynomial in the knob.
    pub below: IntPoly,
}

impl Loop {
    /// Whether the knob is a factor of the open loop and appears nowhere else, so that scaling it scales the loop gain.
    #[must_use]
    pub fn knob_is_loop_gain(&self) -> bool {
        let is_knob = |factor: &Factor| factor.polynomial == KnobPolynomial::knob() && factor.exponent == 1;
        let has_knob = |factor: &&Factor| factor.polynomial.knob_degree() > 0;
        let mut with_knob = self.open_loop.numerator.iter().filter(has_knob);
        with_knob.next().is_some_and(is_knob)
            && with_knob.next().is_none()
            && !self.open_loop.denominator.iter().any(|factor| has_knob(&factor))
    }

    /// The static error on the command 1/s^(order + 1). None where it is infinite for all but isolated knob values.
    #[must_use]
    pub fn static_error(&self, order: usize) -> Option<StaticRatio> {
        let (above, below) = self.open_loop.polynomials().ok()?;
        let finite = (0..order).all(|i| below.coefficient_of(i).is_zero());
        let closed = below.coefficient_of(0).combined(&IBig::ONE, &above.coefficient_of(0), &self.feedback_sign());
        finite.then(|| StaticRatio { above: below.coefficient_of(order), below: closed })
    }

    /// What remains at the output of a unit step at the plant's input.
    #[must_use]
    pub fn static_load(&self) -> StaticRatio {
        let parts = self.blocks.each_ref().map(|block| {
            let (above, below) = block.polynomials().unwrap_or_default();
            (above.coefficient_of(0), below.coefficient_of(0))
        });
        let [controller, plant, sensor] = parts;
        let product = |a: &IntPoly, b: &IntPoly, c: &IntPoly| a.times(b).times(c);
        let open = product(&controller.0, &plant.0, &sensor.0);
        let closed = product(&controller.1, &plant.1, &sensor.1).combined(&IBig::ONE, &open, &self.feedback_sign());
        StaticRatio { above: product(&controller.1, &plant.0, &sensor.1), below: closed }
    }

    /// 1 for negative feedback, −1 for positive.
    #[must_use]
    pub fn feedback_sign(&self) -> IBig {
        match self.feedback {
            Feedback::Negative => IBig::ONE,
            Feedback::Positive => IBig::NEG_ONE,
        }
    }
}

/// The variable a block is written in: z stands for the controller of a sampled loop only.
fn variable(project: &Project, field: Field, expression: &Expression) -> Variable {
    let in_z =
        field == Field::Controller && project.blocks.sampling.is_some() && sampling::contains_advance(expression);
    if in_z { Variable::Advance } else { Variable::Laplace }
}

fn fault(field: Field, error: &NotationError) -> Problem {
    Problem { field, symbol: None, span: Some(error.span().into()), message: error.to_string() }
}

/// A problem of one input of the setting; `part` is its name in the project document.
fn setting_problem(part: &str, span: Option<[usize; 2]>, message: String) -> Problem {
    Problem { field: Field::Setting, symbol: Some(part.to_string()), span, message }
}

/// A typed decimal of the setting; None where nothing is typed.
fn typed(part: &str, text: &str) -> Result<Option<RBig>, Problem> {
    if text.trim().is_empty() {
        return Ok(None);
    }
    notation::decimal(text)
        .map(Some)
        .map_err(|error| setting_problem(part, Some(error.span().into()), error.to_string()))
}

/// The chosen setting and the controller's scale.
fn setting(project: &Project, quantities: &Quantities) -> Result<(Option<RBig>, Scale), Vec<Problem>> {
    let input = &project.setting;
    let mut problems = Vec::new();
    let mut decimal = |part: &str, text: &str| {
        typed(part, text).unwrap_or_else(|problem| {
            problems.push(problem);
            None
        })
    };
    let value = decimal("value", &input.value);
    let minimum = decimal("minimum", &input.minimum);
    let maximum = decimal("maximum", &input.maximum);
    let step = decimal("step", &input.step);
    let factor = factor(&input.factor, quantities).unwrap_or_else(|found| {
        problems.extend(found);
        RBig::ONE
    });
    let mut complain = |part: &str, message: &str| problems.push(setting_problem(part, None, message.to_string()));
    if step.as_ref().is_some_and(|step| *step <= RBig::ZERO) {
        complain("step", "the resolution must be above zero, such as 0.1; leave it empty where any number can be set");
    }
    if let (Some(low), Some(high)) = (&minimum, &maximum)
        && low > high
    {
        complain("maximum", "the largest setting is below the smallest: exchange the two");
    }
    if value.as_ref().is_some_and(RBig::is_zero) && input.direction == Direction::Reciprocal {
        complain("value", "a setting of 0 on a reciprocal scale means an infinite knob: type a number above zero");
    }
    if !problems.is_empty() {
        return Err(problems);
    }
    let name = if input.name.trim().is_empty() { project.knob.trim() } else { input.name.trim() };
    let (name, unit) = (name.to_string(), input.unit.trim().to_string());
    Ok((value, Scale { name, unit, direction: input.direction, factor, minimum, maximum, step }))
}

/// The factor of the scale: a number other than zero.
fn factor(text: &str, quantities: &Quantities) -> Result<RBig, Vec<Problem>> {
    let factor = scalar::number(Field::Setting, "factor", text, quantities)?.unwrap_or(RBig::ONE);
    if factor.is_zero() {
        let message = "the factor must not be zero: type what one unit of the setting means for the knob";
        return Err([setting_problem("factor", None, message.to_string())].into());
    }
    Ok(factor)
}

/// A warning about a block with more zeros than poles.
fn improper(name: &str, ratio: &Ratio) -> Option<Notice> {
    let (zeros, poles) = (ratio.zero_count(), ratio.pole_count());
    let missing = zeros.checked_sub(poles).filter(|missing| *missing > 0)?;
    let counted = |count: u64, one: &str| format!("{count} {one}{}", if count == 1 { "" } else { "s" });
    let text = format!(
        "the {name} is improper, with {} and {}: no device can be built like that; add {}, such as 1/(0.01 s + 1)",
        counted(zeros, "zero"),
        counted(poles, "pole"),
        counted(missing, "filter pole"),
    );
    Some(Notice { kind: NoticeKind::ImproperBlock, text })
}

/// Dead time and sampling for the record; what depends on the analysis is still empty.
#[must_use]
pub fn timing(model: &Loop) -> Timing {
    let sampling = model.sampling.as_ref().map(|sampling| SamplingRecord {
        period: sampling.period.to_f64().value(),
        delay: sampling.delay.to_f64().value(),
        method: (!sampling.controller_in_z).then_some(sampling.method),
        by_period: Vec::new(),
        longest_period: None,
    });
    let DeadTime { fixed, per_knob } = &model.open_loop.dead_time;
    Timing {
        plane: if sampling.is_some() { Plane::Z } else { Plane::S },
        dead_time: fixed.to_f64().value(),
        dead_time_per_knob: per_knob.to_f64().value(),
        sampling,
    }
}

/// The characteristic polynomial for the record.
#[must_use]
pub fn record(model: &Loop) -> ModelRecord {
    let polynomial = &model.characteristic;
    let row = |row: &Vec<dashu_int::IBig>| row.iter().map(ToString::to_string).collect();
    ModelRecord {
        order: polynomial.order(),
        knob_degree: polynomial.knob_degree(),
        coefficients: polynomial.coefficients().iter().map(row).collect(),
        mathml: display::equation(polynomial, &model.knob),
    }
}
