//! What the printed sheet needs beside the rest of the record: derivation, step-up plan and site check. All of it follows
//! from the project, and is worked out only when asked for.

mod parts;

pub use parts::*;

use crate::analysis::Analysis;
use crate::derivation::derivation;
use crate::exact::ExactError;
use crate::model::Loop;
use crate::project::Project;
use crate::ranges::permitted::permitted;
use crate::ranges::requirements::Limit;
use crate::setting::controller_range;
use crate::setting::step_up::{Ground, step_up};
use crate::site_check::site_check;
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use sha2::{Digest, Sha256};

/// The sheet's part of the record. `model` is the loop as built from this very project, `document` its text.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub fn sheet(
    project: &Project,
    document: &str,
    model: &Loop,
    analysis: &Analysis,
    limits: &[Limit],
) -> Result<SheetRecord, ExactError> {
    let lanes = limits.iter().map(|limit| analysis.lane(limit)).collect::<Result<Vec<_>, _>>()?;
    let pieces = permitted(&analysis.findings.stable, controller_range(&model.scale).as_ref(), &lanes);
    let ground = Ground { analysis, scale: &model.scale, permitted: &pieces, setting: model.setting.as_ref() };
    let derivation = derivation(analysis, limits)?;
    let remark = if derivation.is_none() { Some(not_derived(model).to_string()) } else { None };
    Ok(SheetRecord {
        project_hash: hash(document),
        derivation,
        remark,
        step_up: step_up(&ground, &project.step_up)?,
        site_check: site_check(project, analysis, &model.scale)?,
    })
}

/// Why a loop has no derivation by hand.
fn not_derived(model: &Loop) -> &'static str {
    if model.sampling.is_some() {
        "The derivation by hand is for continuous loops: the Routh array and the rules of the locus do not hold for a sampled \
         one. Its edges are proven by other means:"
    } else {
        "The derivation by hand is for loops without dead time: with it the characteristic equation is no polynomial, and the \
         Routh array does not apply. Its edges are proven by other means:"
    }
}

/// SHA-256 in hexadecimal digits.
fn hash(text: &str) -> String {
    Sha256::digest(text.as_bytes()).iter().map(|byte| format!("{byte:02x}")).collect()
}

#[cfg(test)]
mod tests {
    #[test]
    fn the_hash_is_the_standards() {
        // FIPS 180-4, example "abc" (from memory).
        let expected = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad";
        assert_eq!(super::hash("abc"), expected);
    }
}
