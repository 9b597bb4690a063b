//! What the sample period does: the stable ranges at other periods, and the longest period that keeps a setting stable.
//!
//! A controller typed in s is converted anew for every period; one typed in z keeps its numbers. The computation delay stays
//! the same number of periods.

use super::family::{FIRST_BITS, SampledLoop, Trouble, at};
use super::ranges::{certain_count, ranges};
use crate::ranges::requirements::stable_pieces;
use crate::record::StableAtPeriod;
use alloc::vec::Vec;
use dashu_ratio::RBig;

/// The period is lengthened by this factor, as a fraction, until the loop is unstable: an unstable stretch of periods that
/// is shorter than this is not seen.
const GROWTH: (u32, u32) = (5, 4);

/// Lengthenings before no limit is found: to about 900 times the period.
const GROWTH_CAP: usize = 30;

/// Halvings of the last lengthening; the longest period is then known to 1e-5.
const HALVINGS: usize = 14;

/// Bits to which a period that is tried is rounded.
const PERIOD_BITS: usize = 40;

/// The periods at which ranges are shown beside the loop's own, as fractions of it.
const PARTS: [(u32, u32); 8] = [(1, 4), (1, 2), (3, 4), (1, 1), (3, 2), (2, 1), (3, 1), (4, 1)];

/// The stable ranges at some periods around the loop's own, ascending. Periods at which the loop cannot be treated are left
/// out.
pub fn by_period(input: &SampledLoop) -> Vec<StableAtPeriod> {
    let mut found = Vec::new();
    for (above, below) in PARTS {
        let period = &input.period * RBig::from_parts(above.into(), below.into());
        let seconds = period.to_f64().value();
        let Ok(at) = ranges(&input.at_period(period)) else { continue };
        let end = |border: &Option<crate::ranges::pieces::Border>| border.as_ref().map(|b| b.value());
        let pieces = stable_pieces(&at.partition).iter().map(|piece| [end(&piece.from), end(&piece.to)]).collect();
        found.push(StableAtPeriod { period: seconds, ranges: pieces });
    }
    found
}

/// Whether the loop is stable at a knob value and a period; proven where it is said to be.
fn is_stable(input: &SampledLoop, period: &RBig, knob: &RBig) -> Result<bool, Trouble> {
    let family = input.at_period(period.clone()).family(FIRST_BITS)?;
    let fixed = family.fixed_count();
    Ok(certain_count(&at(&family.on_the_axis(), knob))?.plus(fixed).is_stable())
}

/// The longest period up to which the loop at this knob value stays stable without a break, s: at the period told, the
/// count is proven, and within 1e-5 beyond it the loop is unstable or too near to being so. Periods between are looked at
/// in steps of a quarter. None where the loop is not stable at its own period, or no limit was found.
pub fn longest_period(input: &SampledLoop, knob: &RBig) -> Option<f64> {
    let stable = |period: &RBig| matches!(is_stable(input, period, knob), Ok(true));
    let mut low = input.period.clone();
    if !stable(&low) {
        return None;
    }
    let factor = RBig::from_parts(GROWTH.0.into(), GROWTH.1.into());
    let mut high = None;
    for _ in 0..GROWTH_CAP {
        let next = short(&(&low * &factor));
        // A period that cannot be treated is no limit of stability.
        match is_stable(input, &next, knob) {
            Ok(true) => low = next,
            Ok(false) | Err(Trouble::Undecided) => {
                high = Some(next);
                break;
            }
            Err(_) => return None,
        }
    }
    let mut high = high?;
    for _ in 0..HALVINGS {
        let middle = (&low + &high) / RBig::from(2);
        if stable(&middle) { low = middle } else { high = middle }
    }
    Some(low.to_f64().value())
}

/// The rational rounded to a short one.
fn short(value: &RBig) -> RBig {
    use crate::exact::Interval;
    Interval::around(value, PERIOD_BITS).low.to_rational()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::sampled::tests::in_z;

    #[test]
    fn an_integrator_is_stable_up_to_two_over_its_gain() {
        // K/s sampled: z − 1 + K h, stable for K h < 2.
        let input = in_z((&[1], &[1]), (&[1], &[0, 1]), (1, 10), (0, 1));
        let longest = longest_period(&input, &RBig::from(4)).expect("a limit");
        assert!((longest - 0.5).abs() < 1e-5 && longest < 0.5, "{longest}");
        assert_eq!(longest_period(&input, &RBig::from(30)), None);
        for at in by_period(&input) {
            let [from, to] = at.ranges[0];
            assert!(from == Some(0.0) && (to.expect("an end") * at.period - 2.0).abs() < 1e-12, "{at:?}");
        }
    }
}
