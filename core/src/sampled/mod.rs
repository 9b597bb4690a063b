//! Sampled control without approximation: controllers in z, plants behind a zero-order hold.

pub mod controller;
pub mod enclosed;
pub mod factored;
pub mod family;
pub mod fixed;
mod knob_powers;
pub mod plant;
pub mod ranges;

pub use controller::{Given, KnobRatio, Method};
pub use family::{SampledFamily, SampledLoop, Trouble};
pub use ranges::{SampledRanges, ranges};
