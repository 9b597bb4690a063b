//! Every range of stability, counted anew by the Routh array at one number.

use super::Ground;
use super::routh::{Row, Special, told};
use crate::exact::dyadic::{decimal_below, exact_text};
use crate::exact::half_plane::count;
use crate::exact::{ExactError, IntPoly};
use crate::ranges::samples;
use crate::sheet::RangeCheck;
use alloc::string::String;
use alloc::vec::Vec;
use dashu_ratio::RBig;

/// Digits of an element.
const DIGITS: u32 = 6;

pub(super) fn checks(ground: &Ground<'_>) -> Result<Vec<RangeCheck>, ExactError> {
    let (family, partition) = (ground.family, ground.partition);
    let cuts = partition.stability_places();
    let places: Vec<_> = cuts.iter().map(|i| partition.places[*i].clone()).collect();
    let fixed_unstable = count(&family.fixed)?.right;
    let check = |(k, sample): (usize, &RBig)| {
        let claimed = partition.ranges[k.checked_sub(1).map_or(0, |j| cuts[j] + 1)].half_plane;
        let p = positive(&family.at(sample));
        let (arrays, told) = told(&p);
        let last = arrays.last();
        let rows = last.map_or(&[][..], |array| &array.rows);
        RangeCheck {
            sample: exact_text(sample),
            first_column: rows.iter().map(first_element).collect(),
            added_pole: last.and_then(|array| array.added_pole).map(|a| a as i32),
            changes: told.map(|told| told.changes),
            on_axis: told.map(|told| told.on_axis),
            zero_rows: rows.iter().filter(|row| row.special == Some(Special::ZeroRow)).map(|row| row.power).collect(),
            unstable_poles: claimed.right,
            fixed_unstable,
        }
    };
    Ok(samples(&places).iter().enumerate().map(check).collect())
}

/// With a positive leading coefficient, over its content: easier on the eye.
fn positive(p: &IntPoly) -> IntPoly {
    let p = p.primitive();
    if p.leading_sign() < 0 { p.negated() } else { p }
}

fn first_element(row: &Row) -> String {
    let (above, below) = row.element(0);
    decimal_below(&RBig::from_parts_signed(above.coefficient(0), below.coefficient(0)), DIGITS)
}

#[cfg(test)]
mod tests {
    use crate::answer::Session;
    use alloc::format;

    #[test]
    fn the_array_at_a_number_counts_what_the_ranges_claim() {
        let loops = [
            (r#""K""#, r#""1/(s (s + 7)(s + 11))""#),
            (r#""K""#, r#""(s^2 + 2 s + 4)/(s (s + 4)(s + 6)(s^2 + 1.4 s + 1))""#),
            (r#""K (s + 10)^2""#, r#""1/s^3""#),
            (r#""K""#, r#""1/((s^2 + 1)(s^2 + 4))""#),
            (r#""K""#, r#""(s + 1)(s - 2)/((s + 1)(s^2 + 3 s + 5))""#),
            (r#""K (1 + K/(s + 3))""#, r#""1/((s + 1)(s + 2))""#),
        ];
        for (controller, plant) in loops {
            let json = format!(
                r#"{{"format": "stayband-project/1", "loop": {{"controller": {controller}, "plant": {plant}}}, "knob": "K"}}"#
            );
            let answer = Session::new().sheet(&json, None);
            let sheet = answer.record.and_then(|record| record.sheet).expect("a sheet");
            let derivation = sheet.derivation.expect("a derivation");
            for range in derivation.ranges {
                let told = range.changes.expect("an array") + range.fixed_unstable;
                assert_eq!(told, range.unstable_poles, "{plant} at {}", range.sample);
            }
        }
    }
}
