// The engine: turns projects into answers in a worker, so that typing never waits for mathematics.
//
// The page is one file, so the worker is made from the file itself: its script and its WebAssembly stand in two
// elements that the browser does not run (`worker-source` and `engine-wasm`, put there by the pack program).

import { partText, unpacked } from "./packed.ts";
import type { Answer, KnobSign, Project } from "./types.ts";

/** The first message to a worker. */
export interface Start {
  readonly wasm: ArrayBuffer;
  readonly programHash: string | null;
}

/** A branch of the locus. */
export interface Branch {
  readonly sign: KnobSign;
  /** Real part (1/s), imaginary part (1/s) and knob of each vertex, one after the other, in order of growing |knob|. */
  readonly points: Float64Array;
}

/** What the engine says to a project. */
export interface Reply {
  readonly answer: Answer;
  readonly branches: readonly Branch[];
  /** Changes with everything but the setting: the branches of two replies with the same number are the same. */
  readonly analysis: number;
  /** How long the worker took. */
  readonly milliseconds: number;
}

/** A project on its way to an answer. */
interface Request {
  readonly id: number;
  /** The project as JSON text. */
  readonly text: string;
  /** True where the record shall hold what the printed sheet needs. */
  readonly sheet: boolean;
  resolve(reply: Reply | null): void;
  reject(error: Error): void;
}

type Message = { readonly ready: true } | (Reply & { readonly id: number; readonly ready?: undefined });

/** An answer that takes longer than this is announced to `onBusy`, in milliseconds: below it, a sign would only flicker. */
const BUSY_AFTER = 300;

/**
 * Answers projects one at a time, the newest first.
 *
 * While one project is being worked on, only the newest other one waits. A project that was pushed out by a newer one,
 * or stopped, resolves to null: its answer is of no use any more.
 */
export class Engine {
  #worker: Worker | null = null;
  /** False from the start of a worker until it is ready for requests. */
  #ready = false;
  /** With the worker now. */
  #current: Request | null = null;
  /** Next. */
  #waiting: Request | null = null;
  /** Next where nothing else waits: the newest project whose sheet is wanted. */
  #sheet: Request | null = null;
  #nextId = 1;
  #busyTimer: ReturnType<typeof setTimeout> | undefined;
  #busy = false;
  readonly #busyListeners: ((busy: boolean) => void)[] = [];
  readonly #wasm: Promise<ArrayBuffer>;
  readonly #source: string;

  constructor() {
    this.#wasm = unpacked("engine-wasm").arrayBuffer();
    this.#source = URL.createObjectURL(new Blob([partText("worker-source")], { type: "text/javascript" }));
    void this.#start();
  }

  /**
   * The answer to a project, or null where a newer project or `stop` made it useless. Rejects where the engine broke;
   * a new one is then already starting, and other projects can be asked.
   */
  solve(project: Project): Promise<Reply | null> {
    return new Promise((resolve, reject) => {
      this.#waiting?.resolve(null);
      this.#waiting = { id: this.#nextId++, text: JSON.stringify(project), sheet: false, resolve, reject };
      this.#send();
    });
  }

  /**
   * The answer to a project document with the sheet's part of the record and no branches. It waits until no other project
   * does, and is null where a newer sheet or `stop` made it useless.
   */
  sheet(text: string): Promise<Reply | null> {
    return new Promise((resolve, reject) => {
      this.#sheet?.resolve(null);
      this.#sheet = { id: this.#nextId++, text, sheet: true, resolve, reject };
      this.#send();
    });
  }

  /** Gives up what is being worked on and what waits. */
  stop(): void {
    const dropped = this.#take();
    if (dropped.length === 0) return;
    void this.#start();
    for (const request of dropped) request.resolve(null);
  }

  /** Ends the worker: this engine is not asked again. */
  end(): void {
    this.#take();
    this.#end();
  }

  /** Calls back with true when an answer takes long enough to say so, and with false when that is over. */
  onBusy(listener: (busy: boolean) => void): void {
    this.#busyListeners.push(listener);
  }

  /** Starts a new worker in place of the old one, if any. */
  async #start(): Promise<void> {
    this.#end();
    const worker = new Worker(this.#source);
    this.#worker = worker;
    worker.onmessage = (event: MessageEvent<Message>) => this.#receive(worker, event.data);
    worker.onerror = (event) => {
      event.preventDefault();
      this.#fail(worker, event.message);
    };
    try {
      const start: Start = { wasm: await this.#wasm, programHash: programHash() };
      worker.postMessage(start);
    } catch (error) {
      this.#fail(worker, String(error));
    }
  }

  #end(): void {
    this.#worker?.terminate();
    this.#worker = null;
    this.#ready = false;
  }

  #send(): void {
    const request = this.#waiting ?? this.#sheet;
    if (!request) return;
    if (!this.#worker) void this.#start();
    if (!this.#ready || this.#current) return;
    if (request.sheet) this.#sheet = null;
    else this.#waiting = null;
    this.#current = request;
    this.#busyTimer = setTimeout(() => this.#setBusy(true), BUSY_AFTER);
    this.#worker?.postMessage({ id: request.id, project: request.text, sheet: request.sheet });
  }

  #receive(worker: Worker, message: Message): void {
    if (worker !== this.#worker) return;
    if (message.ready) {
      this.#ready = true;
    } else if (message.id === this.#current?.id) {
      const request = this.#current;
      this.#current = null;
      this.#rest();
      const { answer, branches, analysis, milliseconds } = message;
      request.resolve({ answer, branches, analysis, milliseconds });
    }
    this.#send();
  }

  /** The worker broke: all that was asked of it fails. */
  #fail(worker: Worker, reason: string): void {
    if (worker !== this.#worker) return;
    const dropped = this.#take();
    // A worker that broke before it was ready would break again: then the next request starts one, not this failure.
    if (this.#ready) void this.#start();
    else this.#end();
    const error = new Error(`The engine stopped unexpectedly (${reason}). Nothing you typed is lost; change it and try again`);
    for (const request of dropped) request.reject(error);
  }

  /** Takes all open requests away from the worker. */
  #take(): Request[] {
    const open = [this.#current, this.#waiting, this.#sheet].filter((request) => request !== null);
    this.#current = null;
    this.#waiting = null;
    this.#sheet = null;
    this.#rest();
    return open;
  }

  /** Nothing is being worked on. */
  #rest(): void {
    clearTimeout(this.#busyTimer);
    this.#setBusy(false);
  }

  #setBusy(busy: boolean): void {
    if (busy === this.#busy) return;
    this.#busy = busy;
    for (const listener of this.#busyListeners) listener(busy);
  }
}

/** The SHA-256 of this page as the pack program wrote it. */
function programHash(): string | null {
  return document.querySelector<HTMLMetaElement>('meta[name="program-hash"]')?.content ?? null;
}
