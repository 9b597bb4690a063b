//! From permitted knob ranges to settings: the grid's settings just inside, and one to begin with.

use super::{Rounding, Scale};
use crate::exact::Dyadic;
use crate::project::Direction;
use crate::ranges::pieces::{Border, Piece};
use alloc::string::String;
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_ratio::RBig;

/// Digits to which ends are rounded where the controller has no resolution of its own.
const END_DIGITS: i32 = 4;

/// Digits to which the suggestion is rounded there; more are tried where these do not fit in.
const SUGGESTED_DIGITS: core::ops::RangeInclusive<i32> = 2..=6;

/// Steps of the grid tried from a rounded end inward. The rounding itself is off by less than one; an open end that lies
/// on the grid needs one more.
const STEPS_INWARD: usize = 3;

/// How one of several ranges was chosen.
const SEVERAL: &str = "; of the permitted ranges it is the one that leaves most room on a logarithmic scale, where an open end, or one at zero, leaves 6 dB";

/// What to do with the permitted ranges.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Advice {
    /// For each range the smallest and the largest setting inside, ascending; None where there is none, or the side is
    /// open.
    pub ends: Vec<[Option<RBig>; 2]>,
    /// The suggestion, and why.
    pub suggested: Option<Suggested>,
}

/// A suggested setting.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Suggested {
    /// The setting.
    pub setting: RBig,
    /// The knob there.
    pub knob: RBig,
    /// How it was chosen.
    pub reason: String,
}

/// Rounds permitted ranges inward and suggests a setting in the widest of them.
pub fn suggest(scale: &Scale, pieces: &[Piece]) -> Advice {
    let ends: Vec<[Option<RBig>; 2]> = pieces.iter().map(|piece| ends(scale, piece)).collect();
    let mut order: Vec<usize> = (0..pieces.len()).collect();
    order.sort_by(|a, b| aim(&pieces[*b]).room.total_cmp(&aim(&pieces[*a]).room));
    let mut suggested = order.into_iter().find_map(|i| within(scale, &pieces[i], &ends[i]));
    if let Some(suggested) = suggested.as_mut().filter(|_| pieces.len() > 1) {
        suggested.reason.push_str(SEVERAL);
    }
    Advice { ends, suggested }
}

/// The settings of the grid just inside of a range, ascending.
fn ends(scale: &Scale, piece: &Piece) -> [Option<RBig>; 2] {
    let (low, high) = if scale.rises() { (&piece.from, &piece.to) } else { (&piece.to, &piece.from) };
    let inner = |border: &Option<Border>, rounding: Rounding| {
        let border = border.as_ref()?;
        // Start at the safe side of the bracket.
        let knob = if (rounding == Rounding::Up) == scale.rises() { &border.bracket.high } else { &border.bracket.low };
        let start = scale.setting(&knob.to_rational())?;
        let step = step_near(scale, &start, END_DIGITS);
        let mut setting = with_step(scale, &step).rounded(&start, rounding);
        for _ in 0..STEPS_INWARD {
            if scale.knob(&setting).is_some_and(|knob| piece.surely_holds(&knob)) {
                return Some(setting);
            }
            setting = if rounding == Rounding::Up { setting + &step } else { setting - &step };
        }
        None
    };
    [inner(low, Rounding::Up), inner(high, Rounding::Down)]
}

/// The scale's step, or that of so many digits of a number where it has none.
pub(super) fn step_near(scale: &Scale, setting: &RBig, digits: i32) -> RBig {
    if let Some(step) = &scale.step {
        return step.clone();
    }
    let size = setting.to_f64().value().abs();
    let exponent = if size > 0.0 && size.is_finite() { libm::floor(libm::log10(size)) as i32 } else { 0 };
    let power = exponent - digits + 1;
    let ten = RBig::from(IBig::from(10).pow(power.unsigned_abs() as usize));
    if power >= 0 { ten } else { RBig::ONE / ten }
}

/// The scale on another grid.
pub(super) fn with_step(scale: &Scale, step: &RBig) -> Scale {
    Scale { step: Some(step.clone()), ..scale.clone() }
}

/// The factor from a single limit to the setting aimed at: 6 dB.
const FROM_LIMIT: f64 = 2.0;

/// A setting inside of one range.
fn within(scale: &Scale, piece: &Piece, ends: &[Option<RBig>; 2]) -> Option<Suggested> {
    let Aim { knob: target, reason, .. } = aim(piece);
    let wanted = scale.setting_f64(target).and_then(Dyadic::from_f64)?.to_rational();
    let holds =
        |setting: &RBig| scale.takes(setting) && scale.knob(setting).is_some_and(|knob| piece.surely_holds(&knob));
    let digits = if scale.step.is_some() { END_DIGITS..=END_DIGITS } else { SUGGESTED_DIGITS };
    for count in digits {
        let grid = with_step(scale, &step_near(scale, &wanted, count));
        let below = grid.rounded(&wanted, Rounding::Down);
        let above = grid.rounded(&wanted, Rounding::Up);
        // Nearer on a logarithmic scale: the smallest distance to the range's ends is then the largest.
        let ratio = |setting: &RBig| libm::fabs(libm::log(setting.to_f64().value() / wanted.to_f64().value()));
        let nearer_below = ratio(&below) <= ratio(&above);
        let order = if nearer_below { [below, above] } else { [above, below] };
        if let Some(setting) = order.into_iter().find(holds) {
            let knob = scale.knob(&setting)?;
            return Some(Suggested { setting, knob, reason: reason.into() });
        }
    }
    let setting = ends.iter().flatten().find(|setting| holds(setting))?.clone();
    let knob = scale.knob(&setting)?;
    Some(Suggested {
        setting,
        knob,
        reason: "the only setting of the controller's grid in the widest permitted range".into(),
    })
}

/// Where to aim in a range.
struct Aim {
    knob: f64,
    /// The smaller of the logarithmic distances to the range's limits.
    room: f64,
    reason: &'static str,
}

/// Midway between two limits on a logarithmic scale, and at [`FROM_LIMIT`] of a single one: an end that is 0, infinite or
/// of the other sign is none to keep away from, and what lies beyond is no gain. So a range with one limit leaves as much
/// room as one with the ratio 4.
fn aim(piece: &Piece) -> Aim {
    const HALF: &str = "half of the limit: 6 dB away from it (common practice, no source)";
    const DOUBLE: &str = "twice the limit: 6 dB away from it (common practice, no source)";
    let from_limit = |knob: f64, reason| Aim { knob, room: libm::log(FROM_LIMIT), reason };
    let free = |knob: f64, reason| Aim { knob, room: f64::INFINITY, reason };
    match (piece.from.as_ref().map(Border::value), piece.to.as_ref().map(Border::value)) {
        (Some(a), Some(b)) if a * b > 0.0 => Aim {
            knob: libm::copysign(libm::sqrt(a.abs()) * libm::sqrt(b.abs()), b),
            room: 0.5 * libm::fabs(libm::log(b / a)),
            reason: "midway, on a logarithmic scale, between the ends of the widest permitted range",
        },
        (Some(a), Some(b)) if b >= -a => from_limit(b / FROM_LIMIT, HALF),
        (Some(a), Some(_)) => from_limit(a / FROM_LIMIT, HALF),
        (Some(a), None) if a > 0.0 => from_limit(FROM_LIMIT * a, DOUBLE),
        (None, Some(b)) if b < 0.0 => from_limit(FROM_LIMIT * b, DOUBLE),
        (None, Some(b)) if b > 0.0 => from_limit(b / FROM_LIMIT, HALF),
        (None, Some(_)) => free(-1.0, "any setting below zero is permitted"),
        (_, None) => free(1.0, "any setting above zero is permitted"),
    }
}

/// The knob values that the controller can set, as a range of its own; None where it excludes none.
pub fn controller_range(scale: &Scale) -> Option<Piece> {
    use crate::exact::Interval;
    use crate::record::Cause;
    let border = |knob: RBig| Border { bracket: Interval::around(&knob, 64), proven: true, cause: Cause::Controller };
    let (minimum, maximum) = match scale.direction {
        Direction::Proportional => (scale.minimum.clone(), scale.maximum.clone()),
        // A band of 0 or less has no meaning.
        Direction::Reciprocal => {
            (Some(scale.minimum.clone().unwrap_or(RBig::ZERO).max(RBig::ZERO)), scale.maximum.clone())
        }
    };
    if minimum.is_none() && maximum.is_none() {
        return None;
    }
    let at = |setting: Option<RBig>| setting.and_then(|s| scale.knob(&s));
    // On a reciprocal scale an open upper end is knob 0, and setting 0 the infinite knob.
    let high_end = match (scale.direction, &maximum) {
        (Direction::Reciprocal, None) => Some(RBig::ZERO),
        _ => at(maximum),
    };
    let low_end = at(minimum);
    let (from, to) = if scale.rises() { (low_end, high_end) } else { (high_end, low_end) };
    Some(Piece { from: from.map(border), to: to.map(border) })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::exact::Interval;
    use crate::record::Cause;

    fn rational(n: i64, d: u64) -> RBig {
        RBig::from_parts(n.into(), d.into())
    }

    fn scale(direction: Direction, factor: RBig, step: Option<RBig>) -> Scale {
        Scale { name: String::new(), unit: String::new(), direction, factor, minimum: None, maximum: None, step }
    }

    fn piece(low: RBig, high: RBig) -> Piece {
        let border =
            |q: RBig| Some(Border { bracket: Interval::around(&q, 64), proven: true, cause: Cause::Stability });
        Piece { from: border(low), to: border(high) }
    }

    #[test]
    fn ends_are_rounded_inward_and_an_open_end_on_the_grid_is_left() {
        let gain = scale(Direction::Proportional, RBig::ONE, Some(RBig::ONE));
        let advice = suggest(&gain, &[piece(rational(296, 10), rational(45, 1))]);
        assert_eq!(advice.ends, [[Some(rational(30, 1)), Some(rational(44, 1))]]);
        // √(29.6·45) = 36.5; on a logarithmic scale 36 is 0.0137 away and 37 0.0137 the other way.
        let suggested = advice.suggested.expect("a setting");
        assert!([rational(36, 1), rational(37, 1)].contains(&suggested.setting), "{suggested:?}");
    }

    #[test]
    fn a_proportional_band_is_rounded_to_the_safe_side_too() {
        // knob = 100/band, permitted 3 to 8: band 12.5 to 33.3, both open.
        let band = scale(Direction::Reciprocal, rational(100, 1), Some(rational(1, 2)));
        let advice = suggest(&band, &[piece(rational(3, 1), rational(8, 1))]);
        assert_eq!(advice.ends, [[Some(rational(13, 1)), Some(rational(33, 1))]]);
    }

    #[test]
    fn a_grid_too_coarse_leaves_no_setting() {
        let gain = scale(Direction::Proportional, RBig::ONE, Some(rational(10, 1)));
        let advice = suggest(&gain, &[piece(rational(31, 1), rational(39, 1))]);
        assert_eq!((advice.ends, advice.suggested), ([[None, None]].into(), None));
    }

    #[test]
    fn a_range_open_to_zero_counts_as_much_as_one_of_ratio_four() {
        let gain = scale(Direction::Proportional, RBig::ONE, None);
        let low = piece(RBig::ZERO, RBig::ONE);
        let suggested = |low_end: i64, high_end: i64| {
            suggest(&gain, &[low.clone(), piece(rational(low_end, 1), rational(high_end, 1))])
                .suggested
                .expect("a setting")
        };
        assert_eq!(suggested(10, 39).setting, rational(1, 2));
        let wider = suggested(10, 50);
        assert_eq!(wider.setting, rational(22, 1));
        assert!(wider.reason.contains("most room"), "{}", wider.reason);
    }

    #[test]
    fn without_a_grid_few_digits_are_suggested() {
        let gain = scale(Direction::Proportional, RBig::ONE, None);
        let suggested = suggest(&gain, &[piece(rational(1, 10), rational(1, 5))]).suggested.expect("a setting");
        assert_eq!(suggested.setting, rational(14, 100));
    }
}
