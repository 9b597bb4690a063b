//! What the closed loop does at one value of the knob: its answers over time, and its open loop over frequency.

mod figures;
mod frequency;
mod loop_at;
mod modes;

pub use figures::{Figure, SettlingBand, overshoot, rise_time, static_error, undershoot};
pub use frequency::Frequency;
pub use loop_at::LoopAt;
pub use modes::{Modes, Peaks};
