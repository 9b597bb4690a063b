//! The project: all that goes in, as it is saved. Numbers are strings as typed, so nothing is rounded.

use alloc::string::{String, ToString};
use alloc::vec::Vec;
use serde::{Deserialize, Serialize};

/// The name and version of the project document.
pub const PROJECT_FORMAT: &str = "stayband-project/1";

/// Everything the user typed.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
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
    /// The chosen setting, in the controller's own scale.
    #[serde(default)]
    pub setting: Setting,
    /// What the loop must do besides being stable.
    #[serde(default)]
    pub requirements: Vec<Requirement>,
    /// What identifies the printed sheet.
    #[serde(default)]
    pub sheet: SheetText,
    /// How the step-up plan goes.
    #[serde(default)]
    pub step_up: StepUpText,
    /// What was seen on the machine.
    #[serde(default)]
    pub site_check: SiteCheckText,
}

/// What stands at the head of the printed sheet beside the title; notes to the reader.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "camelCase", deny_unknown_fields)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct SheetText {
    /// The machine.
    #[serde(default)]
    pub machine: String,
    /// The revision of the sheet.
    #[serde(default)]
    pub revision: String,
    /// The date, as it shall stand there.
    #[serde(default)]
    pub date: String,
    /// Who made the sheet.
    #[serde(default)]
    pub prepared_by: String,
    /// Who checked it.
    #[serde(default)]
    pub checked_by: String,
}

/// How the step-up plan goes from its first to its last setting.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "camelCase", deny_unknown_fields)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct StepUpText {
    /// The first setting, an exact decimal. Empty: chosen by the plan.
    #[serde(default)]
    pub start: String,
    /// The knob of one row over that of the row before, an exact decimal above 1. Empty: 1.5.
    #[serde(default)]
    pub ratio: String,
}

/// What was seen on the machine, as typed; every number an exact decimal.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "camelCase", deny_unknown_fields)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct SiteCheckText {
    /// What kind of observation it is.
    #[serde(default)]
    pub seen: Observation,
    /// The setting at which it was seen. Empty: nothing was seen yet.
    #[serde(default)]
    pub setting: String,
    /// The period of the oscillation, s; of a step the time from its first to its second peak.
    #[serde(default)]
    pub period: String,
    /// Of a step: the first peak beyond the final value, % of it.
    #[serde(default)]
    pub overshoot: String,
}

/// What kind of observation was made on the machine.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum Observation {
    /// The answer to a step of the command at a known setting.
    #[default]
    Step,
    /// An oscillation that neither grew nor died.
    Oscillation,
}

/// The blocks as typed.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
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
    /// The plant's dead time in s, beside those typed into the blocks as e^(−T s): an expression in numbers and quantities.
    /// Empty: none.
    #[serde(default)]
    pub dead_time: String,
    /// The controller's sampling. None: the controller works continuously.
    #[serde(default)]
    pub sampling: Option<SamplingText>,
}

/// How the controller samples, as typed: expressions in numbers and quantities.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "camelCase", deny_unknown_fields)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct SamplingText {
    /// The sample period in s.
    pub period: String,
    /// From a sample to the output computed from it, in sample periods, 0 to 3. Empty: 0.
    #[serde(default)]
    pub delay: String,
    /// How a controller in s becomes one in z.
    #[serde(default)]
    pub method: Discretisation,
    /// rad/s: where [`Discretisation::TustinPrewarped`] is exact.
    #[serde(default)]
    pub prewarp: String,
}

/// The published methods by which a controller in s becomes one in z.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum Discretisation {
    /// Tustin's method: the trapezoidal rule.
    #[default]
    Tustin,
    /// Tustin's method, exact at one frequency.
    TustinPrewarped,
    /// The backward difference.
    BackwardDifference,
    /// Matched poles and zeros.
    Matched,
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
    /// How far the true value may be off in either direction: "5 %" of the value, or a plain decimal in its unit. Empty:
    /// not stated.
    #[serde(default)]
    pub tolerance: String,
}

/// The chosen setting, and the controller's scale on which it stands.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "camelCase", deny_unknown_fields)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Setting {
    /// An exact decimal, as typed. Empty while not yet chosen.
    #[serde(default)]
    pub value: String,
    /// What the controller calls it. Empty: the knob's own symbol.
    #[serde(default)]
    pub name: String,
    /// The controller's unit, as a note to the reader.
    #[serde(default)]
    pub unit: String,
    /// How the knob follows from the setting.
    #[serde(default)]
    pub direction: Direction,
    /// Knob per setting, or knob times setting: an expression in numbers and quantities. Empty: 1.
    #[serde(default)]
    pub factor: String,
    /// The smallest setting the controller takes, an exact decimal. Empty: none.
    #[serde(default)]
    pub minimum: String,
    /// The largest setting the controller takes, an exact decimal. Empty: none.
    #[serde(default)]
    pub maximum: String,
    /// The resolution: settings are whole multiples of it, an exact decimal. Empty: any number can be set.
    #[serde(default)]
    pub step: String,
}

/// How the knob follows from the setting.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum Direction {
    /// knob = factor × setting, as for a gain.
    #[default]
    Proportional,
    /// knob = factor / setting, as for a proportional band.
    Reciprocal,
}

/// One requirement with its limit.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "camelCase", deny_unknown_fields)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Requirement {
    /// What is required.
    pub kind: RequirementKind,
    /// The limit, an exact decimal in the kind's unit, as typed.
    pub limit: String,
}

/// What can be required. Speeds and times are those of the output for a unit step of the command.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum RequirementKind {
    /// The damping ratio of every pole is at least the limit; dimensionless, 0 to 1.
    DampingRatio,
    /// Every pole lies at least this far left of the imaginary axis; 1/s.
    DecayRate,
    /// No pole is slower: every |s| is at least the limit; rad/s.
    NaturalFrequencyMinimum,
    /// Some pole is as slow: the smallest |s| is at most the limit; rad/s.
    NaturalFrequencyMaximum,
    /// The loop gain may rise by at least this factor; dB.
    GainMarginUp,
    /// The loop gain may fall by at least this factor; dB.
    GainMarginDown,
    /// The smallest phase turn that makes the loop marginal; degrees, at least.
    PhaseMargin,
    /// The smallest added dead time that makes the loop marginal; s, at least.
    DelayMargin,
    /// The largest |1/(1 + L(jω))|; dimensionless, at most.
    PeakSensitivity,
    /// The frequency at which the closed loop first falls 3 dB below its static gain; rad/s, at least.
    Bandwidth,
    /// Beyond the final value, in % of it, at most.
    Overshoot,
    /// Opposite to the final value, in % of it, at most.
    Undershoot,
    /// From 10 % to 90 % of the final value; s, at most.
    RiseTime,
    /// Until the output stays within 2 % of its final value; s, at most.
    #[serde(rename = "settling-time-2")]
    SettlingTime2,
    /// Until the output stays within 5 % of its final value; s, at most.
    #[serde(rename = "settling-time-5")]
    SettlingTime5,
    /// Until the highest point; s, at most.
    PeakTime,
    /// The static error after a step of the command, at the comparison of command and sensor; % of the step, at most.
    StepError,
    /// The static error on a unit ramp of the command, at the comparison; at most.
    RampError,
    /// The static error on a unit parabola t²/2 of the command, at the comparison; at most.
    ParabolaError,
    /// The largest deviation of the output after a unit step at the plant's input; at most.
    LoadPeak,
    /// The remaining deviation of the output after a unit step at the plant's input; at most.
    LoadFinal,
    /// The largest controller output after a unit step of the command; at most.
    ControllerPeak,
}

impl RequirementKind {
    /// Every kind. The page's table is made from this list, and its compiler refuses one from which a kind is missing.
    pub const ALL: [Self; 22] = [
        Self::DampingRatio,
        Self::DecayRate,
        Self::NaturalFrequencyMinimum,
        Self::NaturalFrequencyMaximum,
        Self::GainMarginUp,
        Self::GainMarginDown,
        Self::PhaseMargin,
        Self::DelayMargin,
        Self::PeakSensitivity,
        Self::Bandwidth,
        Self::Overshoot,
        Self::Undershoot,
        Self::RiseTime,
        Self::SettlingTime2,
        Self::SettlingTime5,
        Self::PeakTime,
        Self::StepError,
        Self::RampError,
        Self::ParabolaError,
        Self::LoadPeak,
        Self::LoadFinal,
        Self::ControllerPeak,
    ];
}
