//! Where stability and all requirements agree; and where they do not, which exclude each other.

use super::pieces::{Border, Piece, intersection};
use super::requirements::{Lane, Limit, describe};
use crate::project::RequirementKind;
use crate::setting::Scale;
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;

/// Sets of up to this many requirements are searched for the smallest that exclude each other; beyond, all are named.
const CONFLICT_CAP: usize = 4;

/// Requirements that exclude each other.
#[derive(Clone, Debug, PartialEq)]
pub struct Conflict {
    /// The smallest such set; empty where there is no stable setting, or none that the controller can set.
    pub kinds: Vec<RequirementKind>,
    /// By how much, a sentence.
    pub text: String,
}

/// The common part of the stable ranges, what the controller can set, and all lanes.
pub fn permitted(stable: &[Piece], controller: Option<&Piece>, lanes: &[Lane]) -> Vec<Piece> {
    let start = match controller {
        Some(piece) => intersection(stable, core::slice::from_ref(piece)),
        None => stable.to_vec(),
    };
    lanes.iter().fold(start, |common, lane| intersection(&common, &lane.pieces))
}

/// Why nothing is permitted.
pub fn conflict(
    stable: &[Piece],
    controller: Option<&Piece>,
    limits: &[Limit],
    lanes: &[Lane],
    scale: &Scale,
) -> Conflict {
    let of = |kinds: Vec<RequirementKind>, text: String| Conflict { kinds, text };
    if stable.is_empty() {
        return of(Vec::new(), "no setting is stable".to_string());
    }
    let base = permitted(stable, controller, &[]);
    if base.is_empty() {
        return of(Vec::new(), "every setting that the controller takes is unstable".to_string());
    }
    for size in 1..=CONFLICT_CAP.min(lanes.len()) {
        if let Some(set) = first_excluding(&base, lanes, size) {
            let kinds = set.iter().map(|i| limits[*i].kind).collect();
            return of(kinds, sentence(&base, limits, lanes, &set, scale));
        }
    }
    let kinds = limits.iter().map(|limit| limit.kind).collect();
    of(kinds, "no setting meets all requirements, although every few of them can be met together".to_string())
}

/// The first set of `size` lanes without a common part within `base`.
fn first_excluding(base: &[Piece], lanes: &[Lane], size: usize) -> Option<Vec<usize>> {
    fn search(common: &[Piece], lanes: &[Lane], from: usize, left: usize, set: &mut Vec<usize>) -> bool {
        if common.is_empty() {
            return true;
        }
        if left == 0 {
            return false;
        }
        for i in from..lanes.len() {
            set.push(i);
            if search(&intersection(common, &lanes[i].pieces), lanes, i + 1, left - 1, set) {
                return true;
            }
            set.pop();
        }
        false
    }
    let mut set = Vec::new();
    search(base, lanes, 0, size, &mut set).then_some(set)
}

/// "damping ratio allows up to 12.1; static error on a step needs at least 29.6".
fn sentence(base: &[Piece], limits: &[Limit], lanes: &[Lane], set: &[usize], scale: &Scale) -> String {
    let parts: Vec<String> = set
        .iter()
        .map(|i| {
            let name = describe(limits[*i].kind);
            if let Some(remark) = &lanes[*i].remark {
                return format!("{name}: {remark}");
            }
            let within = intersection(base, &lanes[*i].pieces);
            let ranges: Vec<String> = within.iter().map(|piece| spoken(piece, scale)).collect();
            if ranges.is_empty() {
                format!("{name} is met by no setting that the controller takes")
            } else {
                format!("{name} allows {}", ranges.join(" or "))
            }
        })
        .collect();
    parts.join("; ")
}

/// A range in the controller's scale.
fn spoken(piece: &Piece, scale: &Scale) -> String {
    let (low, high) = if scale.rises() { (&piece.from, &piece.to) } else { (&piece.to, &piece.from) };
    let at = |border: &Option<Border>| border.as_ref().and_then(|b| scale.setting_f64(b.value())).map(short);
    let unit = if scale.unit.is_empty() { String::new() } else { format!(" {}", scale.unit) };
    match (at(low), at(high)) {
        (Some(low), Some(high)) => format!("{low} to {high}{unit}"),
        (Some(low), None) => format!("{low}{unit} and more"),
        (None, Some(high)) => format!("up to {high}{unit}"),
        (None, None) => "every setting".to_string(),
    }
}

/// Four significant digits, for a sentence.
pub fn short(value: f64) -> String {
    let magnitude = libm::fabs(value);
    let text = if magnitude == 0.0 {
        "0".to_string()
    } else if (1e-3..1e5).contains(&magnitude) {
        let decimals = (3 - libm::floor(libm::log10(magnitude)) as i32).max(0) as usize;
        let text = format!("{magnitude:.decimals$}");
        if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.').to_string() } else { text }
    } else {
        format!("{magnitude:.3e}")
    };
    if value < 0.0 { format!("−{text}") } else { text }
}
