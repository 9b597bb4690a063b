//! Gain margins: how far the loop gain may rise or fall. Where the knob is the loop gain itself, the edges follow from the
//! stable ranges; otherwise they are computed.

use super::super::pieces::{Border, Piece, intersection};
use super::{Ground, Lane, Limit, sampled};
use crate::exact::{Dyadic, ExactError, Interval};
use crate::project::RequirementKind;
use crate::record::Cause;
use alloc::vec::Vec;

/// A decibel limit turned into a factor is good to this relative error.
const FACTOR_ERROR: f64 = 4.0 * f64::EPSILON;

pub(super) fn lane(ground: &Ground<'_>, limit: &Limit) -> Result<Lane, ExactError> {
    if !ground.model.knob_is_loop_gain() {
        return sampled::lane(ground, limit);
    }
    let factor = libm::pow(10.0, limit.value.to_f64().value() / 20.0);
    let upward = limit.kind == RequirementKind::GainMarginUp;
    let scaled = |border: &Border, by: f64| {
        let value = border.value() * by;
        let error = value.abs() * FACTOR_ERROR;
        let end = |x: f64| Dyadic::from_f64(x).unwrap_or(Dyadic::ZERO);
        let bracket = Interval { low: end(value - error), high: end(value + error) };
        Border { bracket, proven: false, cause: Cause::Requirement(limit.kind) }
    };
    let mut pieces = Vec::new();
    for piece in ground.stable {
        // Upward the end farther from zero comes nearer by the factor; downward the nearer end moves away by it.
        let from = piece.from.as_ref().map(|b| match (b.value() < 0.0, upward) {
            (true, true) => scaled(b, 1.0 / factor),
            (false, false) if b.value() > 0.0 => scaled(b, factor),
            _ => b.clone(),
        });
        let to = piece.to.as_ref().map(|b| match (b.value() > 0.0, upward) {
            (true, true) => scaled(b, 1.0 / factor),
            (false, false) if b.value() < 0.0 => scaled(b, factor),
            _ => b.clone(),
        });
        pieces.extend(intersection(core::slice::from_ref(piece), &[Piece { from, to }]));
    }
    Ok(Lane { pieces, proven: false, remark: None })
}
