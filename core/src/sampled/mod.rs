//! Sampled control without approximation: controllers in z, plants behind a zero-order hold.

pub mod at;
pub mod controller;
pub mod enclosed;
pub mod factored;
pub mod family;
pub mod fixed;
pub mod frequency;
mod knob_powers;
pub mod locus;
pub mod period;
pub mod plant;
pub mod ranges;
pub mod response;
#[cfg(test)]
mod tests;
pub mod warnings;

pub use at::SampledAt;
pub use controller::{Given, KnobRatio, Method};
pub use family::{SampledFamily, SampledLoop, Trouble};
pub use frequency::SampledFrequency;
pub use locus::{SampledLocus, locus};
pub use ranges::{SampledRanges, ranges};
pub use response::Answers;
