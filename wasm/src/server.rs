//! The worker's side of the conversation: one session of the core, one answer a message.

use crate::message::{Reply, Request};
use stayband_core::answer::Session;
use wasm_bindgen::prelude::{Closure, JsCast, JsValue};
use web_sys::{DedicatedWorkerGlobalScope, MessageEvent, Performance, console};

/// A loop of our own invention, solved once before the first message.
const WARM_UP: &str = r#"{
    "format": "stayband-project/1",
    "loop": { "controller": "K", "plant": "1/(s (s + 1)(s + 2))" },
    "knob": "K",
    "setting": { "value": "1" }
}"#;

/// What answering needs.
struct Server {
    scope: DedicatedWorkerGlobalScope,
    clock: Performance,
    session: Session,
    /// SHA-256 of the page.
    program_hash: Option<String>,
}

pub(crate) fn serve(program_hash: Option<String>) -> Result<(), JsValue> {
    let scope: DedicatedWorkerGlobalScope =
        js_sys::global().dyn_into().map_err(|_| JsValue::from_str("the engine runs in a dedicated worker only"))?;
    let clock = scope.performance().ok_or_else(|| JsValue::from_str("the worker has no clock"))?;
    // The page is told that the worker stopped; what went wrong stands on the browser's console.
    std::panic::set_hook(Box::new(|panic| console::error_1(&panic.to_string().into())));
    let mut server = Server { scope: scope.clone(), clock, session: Session::new(), program_hash };
    server.reply_to(&Request { id: 0.0, project: WARM_UP.to_owned(), with_sheet: false })?;

    let handler = Closure::<dyn FnMut(MessageEvent) -> Result<(), JsValue>>::new(move |event: MessageEvent| {
        let reply = server.reply_to(&Request::read(&event.data())?)?;
        server.scope.post_message_with_transfer(&reply.message, &reply.transfer)
    });
    scope.set_onmessage(Some(handler.as_ref().unchecked_ref()));
    // The handler lives as long as the worker.
    handler.forget();
    Ok(())
}

impl Server {
    /// Solves and converts; the time of both is in the reply.
    fn reply_to(&mut self, request: &Request) -> Result<Reply, JsValue> {
        let start = self.clock.now();
        if request.with_sheet {
            let answer = self.session.sheet(&request.project, self.program_hash.as_deref());
            let reply = Reply::new(request.id, 0)?;
            reply.put_answer(&answer)?;
            reply.put_branches(&[])?;
            reply.put_milliseconds(self.clock.now() - start)?;
            return Ok(reply);
        }
        let solved = self.session.solve(&request.project, self.program_hash.as_deref());
        let reply = Reply::new(request.id, solved.analysis)?;
        reply.put_answer(&solved.answer)?;
        reply.put_branches(solved.branches)?;
        reply.put_milliseconds(self.clock.now() - start)?;
        Ok(reply)
    }
}
