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

/// Looks at any polynomial but zero.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub fn verdict(p: &IntPoly) -> Result<Verdict, ExactError> {
    let half_plane = count(p)?;
    let real = count_real(p)?;
    let pairs = (p.degree() - real) / 2;
    // Repetition matters on the axis, and where every pole is real.
    let repeated = if half_plane.right == 0 && (half_plane.axis > 0 || pairs == 0) {
        let common = gcd::gcd(p, &p.derivative());
        if half_plane.axis > 0 { count(&common)?.axis > 0 } else { common.degree() > 0 }
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
        let word = |c: &[i64]| verdict(&IntPoly::from_i64(c)).expect("counted").name;
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
