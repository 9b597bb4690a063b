//! Ranges of the knob: where the loop is stable, and what kind of poles it has.
//!
//! The real line of the knob is cut at *places*, proven brackets around the values where something happens; between two
//! places every count is constant and found exactly at one rational sample.

pub mod affine;
mod family;
mod partition;
pub mod permitted;
pub mod pieces;
mod place;
pub mod polynomial;
pub mod requirements;
mod verdict;

pub use family::Family;
pub use partition::Partition;
pub use place::{Contact, EDGE_BITS, Place, merge, samples};
pub use verdict::{Verdict, verdict};
