//! The exact verdict on one polynomial: where its roots lie, what kind they are, and the trade's word for it.

use crate::exact::half_plane::{HalfPlaneCount, count};
use crate::exact::real_roots::count_real;
use crate::exact::{ExactError, IntPoly, gcd};
use crate::record::CharacterName;

/// What is known about the poles at one value, or in one range, of the knob.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Verdict {
    /// Poles right of the axis and on it.
    pub half_plane: HalfPlaneCount,
    /// Real poles, with multiplicity.
    pub real: usize,
    /// Complex pairs, with multiplicity.
    pub pairs: usize,
    /// The trade's word.
    pub name: CharacterName,
}

/// Looks at the product of a moving and a fixed polynomial, neither of them zero. Poles of the one that happen to coincide
/// with poles of the other do not count as repeated: in a range they do so at single knob values only.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub fn verdict(moving: &IntPoly, fixed: &IntPoly) -> Result<Verdict, ExactError> {
    let half_plane = count(moving)?.plus(count(fixed)?);
    let real = count_real(moving)? + count_real(fixed)?;
    let pairs = (moving.degree() + fixed.degree() - real) / 2;
    // Repetition matters on the axis, and where every pole is real.
    let repeated = if half_plane.right == 0 && (half_plane.axis > 0 || pairs == 0) {
        let is_repeated = |p: &IntPoly| -> Result<bool, ExactError> {
            let common = gcd::gcd(p, &p.derivative());
            if half_plane.axis > 0 { Ok(count(&common)?.axis > 0) } else { Ok(common.degree() > 0) }
        };
        is_repeated(moving)? || is_repeated(fixed)?
    } else {
        false
    };
    Ok(Verdict { half_plane, real, pairs, name: name(half_plane, pairs, repeated) })
}

/// The trade's word; `repeated` says whether a pole on the axis, or else one of all real ones, is repeated.
pub(super) fn name(half_plane: HalfPlaneCount, pairs: usize, repeated: bool) -> CharacterName {
    match (half_plane.right, half_plane.axis) {
        (0, 0) if pairs > 0 => CharacterName::Underdamped,
        (0, 0) if repeated => CharacterName::CriticallyDamped,
        (0, 0) => CharacterName::Overdamped,
        (0, _) if !repeated => CharacterName::MarginallyStable,
        _ => CharacterName::Unstable,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_words_are_the_trades() {
        let word = |c: &[i64]| verdict(&IntPoly::from_i64(c), &IntPoly::from_i64(&[1])).expect("counted").name;
        assert_eq!(word(&[2, 3, 1]), CharacterName::Overdamped);
        assert_eq!(word(&[1, 2, 1]), CharacterName::CriticallyDamped);
        assert_eq!(word(&[1, 1, 1]), CharacterName::Underdamped);
        assert_eq!(word(&[1, 0, 1]), CharacterName::MarginallyStable);
        assert_eq!(word(&[0, 1, 1]), CharacterName::MarginallyStable);
        assert_eq!(word(&[0, 0, 1]), CharacterName::Unstable);
        assert_eq!(word(&[1, 0, 2, 0, 1]), CharacterName::Unstable);
        assert_eq!(word(&[1, -1, 1]), CharacterName::Unstable);
    }
}
