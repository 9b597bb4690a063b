//! Requirements: each gives the ranges of the knob in which it is met, within the stable ones.
//!
//! Poles and static errors are judged exactly; what depends on a response over time or frequency is computed at many
//! knob values and its edges refined.

pub mod damping_ratio;
mod decay_rate;
mod gain_margin;
mod kinds;
mod natural_frequency;
mod sampled;
mod static_figures;

pub use kinds::{at_least, check_limit, describe, unit};
pub use sampled::{Samples, meets};

use super::pieces::{Border, Piece, intersection};
use super::place::{Place, merge, samples};
use super::{Family, Partition};
use crate::exact::ExactError;
use crate::model::Loop;
use crate::project::RequirementKind;
use crate::record::Cause;
use crate::response::Setup;
use alloc::string::String;
use alloc::vec::Vec;
use dashu_ratio::RBig;

/// A requirement with its limit read.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Limit {
    /// What is required.
    pub kind: RequirementKind,
    /// The limit in the kind's unit.
    pub value: RBig,
}

/// Where a requirement is met.
#[derive(Clone, Debug, PartialEq)]
pub struct Lane {
    /// The ranges, ascending, within the stable ones.
    pub pieces: Vec<Piece>,
    /// Whether they are proven.
    pub proven: bool,
    /// In words: why no setting meets it, or why it is undefined for this loop.
    pub remark: Option<String>,
}

/// What the requirements are judged on.
pub struct Ground<'a> {
    /// The loop as built.
    pub model: &'a Loop,
    /// The same, for a look at single settings.
    pub setup: Setup<'a>,
    /// Its family over the knob; None where it is no ratio of polynomials in s.
    pub family: Option<&'a Family>,
    /// The stable ranges.
    pub stable: &'a [Piece],
    /// The loop at many knob values of the stable ranges.
    pub samples: &'a Samples,
}

/// The stable ranges of a partition.
pub fn stable_pieces(partition: &Partition) -> Vec<Piece> {
    let border = |i: usize| Border {
        bracket: partition.places[i].bracket.clone(),
        proven: partition.is_proven(i),
        cause: Cause::Stability,
    };
    let cuts = partition.stability_places();
    let mut pieces = Vec::new();
    for k in 0..=cuts.len() {
        let from = k.checked_sub(1).map(|j| cuts[j]);
        if partition.ranges[from.map_or(0, |i| i + 1)].half_plane.is_stable() {
            pieces.push(Piece { from: from.map(border), to: cuts.get(k).copied().map(border) });
        }
    }
    pieces
}

/// The lane of a requirement.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub fn lane(ground: &Ground<'_>, limit: &Limit) -> Result<Lane, ExactError> {
    use RequirementKind as Kind;
    let mut lane = match limit.kind {
        Kind::DampingRatio => damping_ratio::lane(ground, limit)?,
        Kind::DecayRate => decay_rate::lane(ground, limit)?,
        Kind::NaturalFrequencyMinimum | Kind::NaturalFrequencyMaximum => natural_frequency::lane(ground, limit)?,
        Kind::GainMarginUp | Kind::GainMarginDown => gain_margin::lane(ground, limit)?,
        Kind::StepError | Kind::RampError | Kind::ParabolaError | Kind::LoadFinal => {
            static_figures::lane(ground, limit)?
        }
        _ => sampled::lane(ground, limit)?,
    };
    if lane.pieces.is_empty() && lane.remark.is_none() {
        lane.remark = Some(if ground.stable.is_empty() {
            "no setting is stable".into()
        } else {
            "no stable setting meets this".into()
        });
    }
    Ok(lane)
}

/// The pieces between places at which `met` holds, decided at one sample each, within the stable ones. At a place with
/// both sides met the limit is just reached, which is allowed.
fn judged(
    ground: &Ground<'_>,
    kind: RequirementKind,
    places: Vec<Place>,
    met: impl Fn(&RBig) -> Result<bool, ExactError>,
) -> Result<Lane, ExactError> {
    let places = merge(places);
    let border =
        |place: &Place| Border { bracket: place.bracket.clone(), proven: true, cause: Cause::Requirement(kind) };
    let mut pieces: Vec<Piece> = Vec::new();
    let mut open: Option<Piece> = None;
    for (k, sample) in samples(&places).iter().enumerate() {
        let from = k.checked_sub(1).map(|j| border(&places[j]));
        match (met(sample)?, &mut open) {
            (true, None) => open = Some(Piece { from, to: None }),
            (false, Some(_)) => pieces.extend(open.take().map(|piece| Piece { to: from, ..piece })),
            _ => {}
        }
    }
    pieces.extend(open);
    Ok(Lane { pieces: intersection(ground.stable, &pieces), proven: true, remark: None })
}
