//! The characteristic polynomial F(s, q) of the loop.

use super::factors::Excess;
use super::polynomial::KnobPolynomial;
use super::ratio::Ratio;
use super::{MAXIMUM_KNOB_DEGREE, MAXIMUM_ORDER};
use crate::notation::Sign;
use crate::project::Feedback;
use alloc::format;
use alloc::string::{String, ToString};

/// F and what was divided out of it.
pub(super) struct Characteristic {
    /// Primitive, without a factor in the knob alone, of the sign that [`KnobPolynomial::primitive`] gives.
    pub(super) polynomial: KnobPolynomial,
    /// The factor in the knob alone that was divided out, if there was one.
    pub(super) knob_factor: Option<KnobPolynomial>,
    /// True where the highest power of s cancels for every knob value.
    pub(super) loses_order: bool,
}

/// D + N for negative feedback, D − N for positive, where N/D is the open loop.
///
/// # Errors
/// What the user must know about a loop that is too large or has no poles.
pub(super) fn characteristic(open_loop: &Ratio, feedback: Feedback) -> Result<Characteristic, String> {
    let sign = match feedback {
        Feedback::Negative => Sign::Plus,
        Feedback::Positive => Sign::Minus,
    };
    let expected = open_loop.pole_count().max(open_loop.zero_count());
    if expected > MAXIMUM_ORDER as u64 {
        return Err(too_large(Excess::Order(expected)));
    }
    let (polynomial, _) = open_loop.characteristic(sign).map_err(too_large)?.primitive();
    if polynomial.is_zero() {
        return Err("the open loop is the constant that makes every s a closed-loop pole: change a block or the sign \
                    of the feedback"
            .to_string());
    }
    let content = polynomial.knob_content();
    let (polynomial, knob_factor) = match polynomial.over_knob_polynomial(&content) {
        Some(rest) if content.degree() > 0 => (rest.primitive().0, Some(KnobPolynomial::in_knob(&content))),
        _ => (polynomial, None),
    };
    if expected == 0 {
        return Err("the loop has no poles: type a block with s in it".to_string());
    }
    if polynomial.order() == 0 {
        return Err("the closed loop has no poles, because all powers of s cancel: change a block or the sign of the \
                    feedback"
            .to_string());
    }
    let loses_order = (polynomial.order() as u64) < expected;
    Ok(Characteristic { polynomial, knob_factor, loses_order })
}

pub(super) fn too_large(excess: Excess) -> String {
    match excess {
        Excess::Order(order) => {
            format!("the loop has order {order}; Stayband treats up to {MAXIMUM_ORDER}")
        }
        Excess::KnobDegree(degree) => {
            format!("the knob appears to the power {degree} in the loop; Stayband treats up to {MAXIMUM_KNOB_DEGREE}")
        }
        Excess::Digits => "the numbers of the loop are out of range: type fewer digits or smaller powers".to_string(),
    }
}
