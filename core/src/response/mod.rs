//! What the closed loop does at one value of the knob: its answers over time, and its open loop over frequency.

mod altered;
mod axis;
mod delayed;
mod figures;
mod frequency;
mod loop_at;
mod modes;
mod motion;
mod open_loop;
mod searches;
mod trace;

pub use altered::FirstSwing;
pub use figures::{Figure, SettlingBand};
pub use frequency::Frequency;
pub use loop_at::{Answer, LoopAt, Setup};
pub use modes::{Modes, Peaks};
pub use motion::Motion;
pub use open_loop::{OpenLoop, drawn};
pub use trace::{Trace, TracePoint};
