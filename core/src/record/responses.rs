//! Margins and responses at the setting in the record.

use alloc::vec::Vec;
use serde::Serialize;

/// Margins of the open loop at one setting.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Margins {
    /// The factor by which the loop gain may rise. None: without limit.
    pub gain_up: Option<f64>,
    /// The factor by which the loop gain may be divided. None: without limit.
    pub gain_down: Option<f64>,
    /// Degrees. None: no turn of the phase makes the loop marginal.
    pub phase: Option<f64>,
    /// s. None: no dead time makes the loop marginal.
    pub delay: Option<f64>,
    /// The largest |1/(1 + L(jω))|.
    pub peak_sensitivity: f64,
    /// rad/s, where the peak is.
    pub peak_frequency: f64,
    /// rad/s. None: the closed loop does not fall 3 dB below its static gain.
    pub bandwidth: Option<f64>,
    /// Every ω with |L(jω)| = 1.
    pub gain_crossings: Vec<GainCrossing>,
    /// Every ω ≥ 0 with L(jω) real and negative.
    pub phase_crossings: Vec<PhaseCrossing>,
    /// The open loop over frequency.
    pub response: FrequencyResponse,
}

/// Where the open loop has magnitude 1.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct GainCrossing {
    /// rad/s.
    pub omega: f64,
    /// Degrees above −180 (below where negative), in (−180, 180].
    pub phase_margin: f64,
    /// s.
    pub delay_margin: f64,
}

/// Where the open loop is real and negative.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct PhaseCrossing {
    /// rad/s.
    pub omega: f64,
    /// The factor of the loop gain at which −1 is met here.
    pub factor: f64,
}

/// The open loop L(jω), the same number of entries in each.
#[derive(Clone, Debug, Default, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct FrequencyResponse {
    /// rad/s, ascending.
    pub omega: Vec<f64>,
    /// dB.
    pub magnitude: Vec<f64>,
    /// Degrees, continuous.
    pub phase: Vec<f64>,
}

/// A curve over time.
#[derive(Clone, Debug, Default, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Curve {
    /// s, ascending.
    pub time: Vec<f64>,
    /// The value at each time.
    pub value: Vec<f64>,
}

/// A curve at another setting, for comparison.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct EdgeCurve {
    /// The knob.
    pub knob: f64,
    /// The curve.
    pub curve: Curve,
}

/// The answer of the output to a unit step of the command. The output is in the command's units: what the sensor shows
/// of it at rest.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct StepRecord {
    /// At the setting.
    pub curve: Curve,
    /// At the ends of the permitted range that holds the setting, or of the first one.
    pub at_edges: Vec<EdgeCurve>,
    /// The controller's output at the setting. None where the controller is improper.
    pub controller: Option<Curve>,
    /// The final value.
    pub final_value: f64,
    /// % of the final value. None where that is zero.
    pub overshoot: Option<f64>,
    /// % of the final value. None where that is zero.
    pub undershoot: Option<f64>,
    /// s, from 10 % to 90 %.
    pub rise_time: Option<f64>,
    /// s, to 2 %.
    pub settling_time2: Option<f64>,
    /// s, to 5 %.
    pub settling_time5: Option<f64>,
    /// s. None where the final value is never exceeded.
    pub peak_time: Option<f64>,
    /// The largest controller output. None where the controller is improper.
    pub controller_peak: Option<f64>,
}

/// The answer of the output to a unit step at the plant's input, in the output's own units.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct LoadRecord {
    /// At the setting.
    pub curve: Curve,
    /// The largest deviation.
    pub peak: f64,
    /// The remaining deviation.
    pub final_value: f64,
}
