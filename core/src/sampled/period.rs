//! What the sample period does: the stable ranges at other periods, and the longest period that keeps a setting stable.
//!
//! A controller typed in s is converted anew for every period; one typed in z keeps its numbers. The computation delay stays
//! the same number of periods.

use super::family::{FIRST_BITS, SampledLoop, Trouble, at};
use super::ranges::{SampledRanges, certain_count, drawn, ranges_from};
use crate::exact::Interval;
use crate::exact::complex_roots::polished;
use crate::numerics::magnitude;
use crate::ranges::Partition;
use crate::ranges::pieces::Border;
use crate::ranges::requirements::stable_pieces;
use crate::record::StableAtPeriod;
use alloc::vec::Vec;
use dashu_ratio::RBig;

/// The periods at which ranges are shown beside the loop's own, as fractions of it.
const PARTS: [(u32, u32); 7] = [(1, 4), (1, 2), (3, 4), (1, 1), (3, 2), (2, 1), (4, 1)];

/// Other periods are looked at while the whole delay is no longer than this many of them: each adds a pole.
const LANE_DELAY_PERIODS: u32 = 12;

/// Bits of the fixed point at the first try for other periods. The counts are as proven as with more; where these do not
/// decide, more are taken.
const LANE_BITS: usize = 128;

/// The period is lengthened by this factor, as a fraction, until the loop is unstable: an unstable stretch of periods that
/// is shorter than this is not seen.
const GROWTH: (u32, u32) = (3, 2);

/// Lengthenings before no limit is found: to about 130 times the period.
const GROWTH_CAP: usize = 12;

/// Steps of the false position; it ends long before.
const STEP_CAP: usize = 24;

/// The longest period is looked for to this part of its value, and proven to ten times it.
const PERIOD_TOLERANCE: f64 = 1e-7;

/// Bits of the fixed point while it is looked for.
const SEARCH_BITS: usize = 96;

/// Bits to which a period that is tried is rounded.
const PERIOD_BITS: usize = 53;

/// The stable ranges at some periods around the loop's own, ascending. Periods that are short against
/// the dead time, or at which the loop cannot be treated, are left out.
pub fn by_period(whole: &SampledRanges) -> Vec<StableAtPeriod> {
    let input = &whole.input;
    let mut found = Vec::new();
    for (above, below) in PARTS {
        let period = &input.period * RBig::from_parts(above.into(), below.into());
        let seconds = period.to_f64().value();
        let ranges = if above == below {
            Some(stable_ranges(&whole.partition))
        } else if input.delay() > &period * RBig::from(LANE_DELAY_PERIODS) {
            None
        } else {
            ranges_from(&input.at_period(period), LANE_BITS).ok().map(|at| stable_ranges(&at.partition))
        };
        found.extend(ranges.map(|ranges| StableAtPeriod { period: seconds, ranges }));
    }
    found
}

fn stable_ranges(partition: &Partition) -> Vec<[Option<f64>; 2]> {
    let end = |border: &Option<Border>| border.as_ref().map(Border::value);
    stable_pieces(partition).iter().map(|piece| [end(&piece.from), end(&piece.to)]).collect()
}

/// Whether the loop is stable at a knob value and a period; proven.
fn is_stable(input: &SampledLoop, period: &RBig, knob: &RBig) -> Result<bool, Trouble> {
    let family = input.at_period(period.clone()).family(FIRST_BITS)?;
    let fixed = family.fixed_count();
    Ok(certain_count(&at(&family.on_the_axis(), knob))?.plus(fixed).is_stable())
}

/// ln of the largest |z| of a pole, in f64.
fn growth(input: &SampledLoop, period: f64, knob: &RBig) -> Option<f64> {
    let family = input.at_period(short(period)?).family(SEARCH_BITS).ok()?;
    let parts: Vec<_> = drawn(&family.parts).into_iter().map(super::enclosed::Enclosed::exact).collect();
    let closed = at(&parts, knob).center.times(&family.fixed_in_z());
    let largest = polished(&closed).ok()?.into_iter().map(magnitude).fold(0.0, f64::max);
    Some(libm::log(largest.max(f64::MIN_POSITIVE)))
}

/// The longest period up to which the loop at this knob value stays stable without a break, s: a millionth below it the loop
/// is proven to be stable, a millionth above it not to be. Periods between are looked at in steps of a half, in f64. None
/// where the loop is not stable at its own period, or no limit was found.
pub fn longest_period(input: &SampledLoop, knob: &RBig) -> Option<f64> {
    let own = input.period.to_f64().value();
    let mut low = (own, growth(input, own, knob)?);
    if low.1 >= 0.0 {
        return None;
    }
    let mut high = None;
    for _ in 0..GROWTH_CAP {
        let next = low.0 * f64::from(GROWTH.0) / f64::from(GROWTH.1);
        // A period that cannot be treated is no limit of stability.
        let here = (next, growth(input, next, knob)?);
        if here.1 >= 0.0 {
            high = Some(here);
            break;
        }
        low = here;
    }
    let limit = crossing(low, high?, |period| growth(input, period, knob))?;
    let proven = |factor: f64| is_stable(input, &short(limit * factor)?, knob).ok();
    let margin = 10.0 * PERIOD_TOLERANCE;
    (proven(1.0 - margin) == Some(true) && proven(1.0 + margin) == Some(false)).then_some(limit)
}

/// Where a function passes zero, by false position with the retained end's value halved (the Illinois method; M. Dowell, P.
/// Jarratt, "A modified regula falsi method for computing the root of an equation", BIT 11, 1971).
fn crossing(mut low: (f64, f64), mut high: (f64, f64), value: impl Fn(f64) -> Option<f64>) -> Option<f64> {
    let mut kept_low = None;
    for _ in 0..STEP_CAP {
        let x = (low.0 * high.1 - high.0 * low.1) / (high.1 - low.1);
        let y = value(x)?;
        let narrow = |other: f64| (x - other).abs() <= PERIOD_TOLERANCE * x;
        if y == 0.0 || (y < 0.0 && narrow(low.0)) || (y > 0.0 && narrow(high.0)) {
            return Some(x);
        }
        if y < 0.0 {
            low = (x, y);
            if kept_low == Some(false) {
                high.1 *= 0.5;
            }
            kept_low = Some(false);
        } else {
            high = (x, y);
            if kept_low == Some(true) {
                low.1 *= 0.5;
            }
            kept_low = Some(true);
        }
    }
    None
}

/// A period as a short rational.
fn short(period: f64) -> Option<RBig> {
    let value = crate::exact::Dyadic::from_f64(period)?.to_rational();
    Some(Interval::around(&value, PERIOD_BITS).low.to_rational())
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
        assert!((longest - 0.5).abs() < 1e-7, "{longest}");
        assert_eq!(longest_period(&input, &RBig::from(30)), None);
        for at in by_period(&crate::sampled::ranges(&input).expect("found")) {
            let [from, to] = at.ranges[0];
            assert!(from == Some(0.0) && (to.expect("an end") * at.period - 2.0).abs() < 1e-12, "{at:?}");
        }
    }
}
