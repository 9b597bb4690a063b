// The worker: starts the WebAssembly, then leaves every message to it (`wasm/src/server.rs`).

import { initSync, serve } from "../glue/stayband_wasm.js";
import type { Start } from "./engine.ts";

// The library of types that knows workers excludes the one that knows pages, so what is used of it is named here.
declare const self: {
  onmessage: ((event: MessageEvent<Start>) => void) | null;
  postMessage(message: { ready: true }): void;
};

self.onmessage = ({ data }) => {
  initSync({ module: new WebAssembly.Module(data.wasm) });
  serve(data.programHash);
  self.postMessage({ ready: true });
};
