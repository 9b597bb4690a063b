//! Bindings of the core for the page's worker. They convert and decide nothing: a project goes in as text, an answer
//! comes out as a plain object, the branches of the locus as typed arrays whose buffers are handed over, not copied.
//!
//! The messages, as the page sees them (`www/src/engine.ts`):
//!
//! * in: `{ id: number, project: string, sheet?: true }`, the project as JSON; with `sheet` the record holds what the
//!   printed sheet needs, and there are no branches;
//! * out: `{ id, analysis, answer, branches, milliseconds }`, where `analysis` is a number that changes with
//!   everything but the setting, `branches` is a list of `{ sign, points }`, and `points` is a `Float64Array` of
//!   real part, imaginary part and knob, vertex by vertex.

mod message;
mod server;

use wasm_bindgen::prelude::{JsValue, wasm_bindgen};

/// Answers every message this worker gets from now on.
///
/// `program_hash` is the SHA-256 of the page, for the record. One answer is worked out before this returns, so that
/// the first real one is not slowed down by pages of memory and code touched for the first time.
///
/// # Errors
///
/// Where this is not a dedicated worker.
#[wasm_bindgen]
pub fn serve(program_hash: Option<String>) -> Result<(), JsValue> {
    server::serve(program_hash)
}
