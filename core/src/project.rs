//! The project: all that goes in, as it is saved. Numbers are strings as typed, so nothing is rounded.

use alloc::string::{String, ToString};
use alloc::vec::Vec;
use serde::{Deserialize, Serialize};

/// The name and version of the project document.
pub const PROJECT_FORMAT: &str = "stayband-project/1";

/// Everything the user typed.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "camelCase", deny_unknown_fields)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Project {
    /// Always [`PROJECT_FORMAT`].
    pub format: String,
    /// Free text: the machine and the axis.
    #[serde(default)]
    pub title: String,
    /// The blocks of the loop.
    #[serde(rename = "loop")]
    pub blocks: LoopText,
    /// One row for every name used in the blocks, but for `s`. The knob's row may be missing: its value is the setting.
    #[serde(default)]
    pub quantities: Vec<Quantity>,
    /// The symbol of the quantity left to choose.
    pub knob: String,
    /// The chosen setting.
    #[serde(default)]
    pub setting: Setting,
}

/// The blocks as typed.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "camelCase", deny_unknown_fields)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct LoopText {
    /// The controller, a ratio of polynomials in s.
    pub controller: String,
    /// The plant, a ratio of polynomials in s.
    pub plant: String,
    /// The sensor in the feedback path, a ratio of polynomials in s.
    #[serde(default = "one")]
    pub sensor: String,
    /// The sign with which the sensor's signal enters the comparison.
    #[serde(default)]
    pub feedback: Feedback,
}

fn one() -> String {
    "1".to_string()
}

/// The sign of the feedback.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum Feedback {
    /// The characteristic equation is 1 + L(s) = 0.
    #[default]
    Negative,
    /// The characteristic equation is 1 − L(s) = 0.
    Positive,
}

/// A named quantity of the loop.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "camelCase", deny_unknown_fields)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Quantity {
    /// The name as it stands in the blocks.
    pub symbol: String,
    /// An exact decimal, as typed. Empty while not yet given.
    #[serde(default)]
    pub value: String,
    /// The unit, as a note to the reader; no conversion is made.
    #[serde(default)]
    pub unit: String,
    /// What the quantity is, as a note to the reader.
    #[serde(default)]
    pub meaning: String,
}

/// The chosen setting of the knob.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "camelCase", deny_unknown_fields)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Setting {
    /// An exact decimal, as typed. Empty while not yet chosen.
    #[serde(default)]
    pub value: String,
}
