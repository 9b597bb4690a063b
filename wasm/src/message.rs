//! The two messages between page and worker, and their conversion.

use js_sys::{Array, Float64Array, Object, Reflect};
use serde::Serialize;
use serde_wasm_bindgen::Serializer;
use stayband_core::answer::Answer;
use stayband_core::locus::Branch;
use wasm_bindgen::prelude::JsValue;

/// Numbers a vertex takes in a typed array: real part, imaginary part, knob.
const NUMBERS_PER_VERTEX: usize = 3;

/// What the page asks.
pub(crate) struct Request {
    /// Given back with the reply.
    pub(crate) id: f64,
    /// The project as JSON.
    pub(crate) project: String,
    /// Whether the record shall hold what the printed sheet needs; the branches are then left out.
    pub(crate) with_sheet: bool,
}

impl Request {
    /// Reads `{ id, project, sheet }`.
    pub(crate) fn read(message: &JsValue) -> Result<Self, JsValue> {
        let id = Reflect::get(message, &"id".into())?.as_f64();
        let project = Reflect::get(message, &"project".into())?.as_string();
        let with_sheet = Reflect::get(message, &"sheet".into())?.is_truthy();
        match (id, project) {
            (Some(id), Some(project)) => Ok(Self { id, project, with_sheet }),
            _ => Err(JsValue::from_str("a request is { id: number, project: string }")),
        }
    }
}

/// What the page gets: a plain object, and the buffers that are handed over with it.
pub(crate) struct Reply {
    pub(crate) message: Object,
    pub(crate) transfer: Array,
}

impl Reply {
    /// A reply without its contents yet.
    pub(crate) fn new(id: f64, analysis: u32) -> Result<Self, JsValue> {
        let reply = Self { message: Object::new(), transfer: Array::new() };
        reply.put("id", &id.into())?;
        reply.put("analysis", &analysis.into())?;
        Ok(reply)
    }

    /// Puts the answer in as plain objects and numbers; what is missing is null.
    pub(crate) fn put_answer(&self, answer: &Answer) -> Result<(), JsValue> {
        self.put("answer", &plain(answer)?)
    }

    /// Puts the branches in as typed arrays.
    pub(crate) fn put_branches(&self, branches: &[Branch]) -> Result<(), JsValue> {
        let list = Array::new();
        let mut numbers = Vec::new();
        for branch in branches {
            numbers.clear();
            numbers.reserve(branch.points.len() * NUMBERS_PER_VERTEX);
            numbers.extend(branch.points.iter().flat_map(|point| [point.re, point.im, point.knob]));
            let points = Float64Array::from(numbers.as_slice());
            self.transfer.push(&points.buffer());
            let item = Object::new();
            Reflect::set(&item, &"sign".into(), &plain(&branch.sign)?)?;
            Reflect::set(&item, &"points".into(), &points)?;
            list.push(&item);
        }
        self.put("branches", &list)
    }

    /// Puts in how long the answer took.
    pub(crate) fn put_milliseconds(&self, milliseconds: f64) -> Result<(), JsValue> {
        self.put("milliseconds", &milliseconds.into())
    }

    fn put(&self, key: &str, value: &JsValue) -> Result<(), JsValue> {
        Reflect::set(&self.message, &key.into(), value).map(|_| ())
    }
}

/// The value as JSON would have it, but as objects: numbers stay numbers, None is null.
fn plain(value: &impl Serialize) -> Result<JsValue, JsValue> {
    value.serialize(&Serializer::json_compatible()).map_err(JsValue::from)
}
