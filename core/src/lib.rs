//! The mathematics of Stayband: from a loop typed as text to every stable range of its knob, proven, with the root locus.
//!
//! The core knows no page, no WebAssembly and no layout; it needs `alloc` and nothing else. One way through:
//! a [`project::Project`] goes in, an [`answer::Answer`] with a [`record::Record`] comes out.
#![cfg_attr(not(any(test, feature = "types")), no_std)]

extern crate alloc;

pub mod analysis;
pub mod answer;
pub mod dead_time;
pub mod derivation;
pub mod exact;
pub mod judgement;
pub mod locus;
pub mod model;
pub mod notation;
mod numerics;
pub mod project;
pub mod ranges;
pub mod record;
pub mod response;
pub mod sampled;
pub mod setting;
pub mod sheet;
pub mod site_check;
