// The session: the project, the newest answer and the last good one, and every way in which they change.
import type { Engine, Reply } from "./engine.ts";
import { History } from "./history.ts";
import { completed, emptyProject } from "./project.ts";
import type { Store } from "./store.ts";
import type { Answer, Problem, Project, Record as Findings } from "./types.ts";

/** What the views show. */
export interface Situation {
  readonly project: Project;
  /** The answer to the newest project that was answered; null before the first. */
  readonly answer: Answer | null;
  /** The newest reply with a record; null before the first, and after another project was opened. */
  readonly good: (Reply & { readonly record: Findings }) | null;
  /** True where the record does not belong to the project, because that has problems. */
  readonly stale: boolean;
}

/** A document that cannot be opened; the message says why. */
export class Refusal extends Error {}

/** How often opening a document is tried again when typing overtakes it. */
const MOST_TRIES = 20;

/** One user at work on one project. */
export class Session {
  readonly #engine: Engine;
  readonly #store: Store;
  readonly #history = new History();
  readonly #listeners: ((situation: Situation) => void)[] = [];
  readonly #failures: ((message: string) => void)[] = [];
  #project: Project = emptyProject();
  #answer: Answer | null = null;
  #good: Situation["good"] = null;
  /** Documents are opened one after the other. */
  #opening: Promise<unknown> = Promise.resolve();

  constructor(engine: Engine, store: Store) {
    this.#engine = engine;
    this.#store = store;
  }

  /** What the views show now. */
  get situation(): Situation {
    const stale = this.#good !== null && (this.#answer?.problems.length ?? 0) > 0;
    return { project: this.#project, answer: this.#answer, good: this.#good, stale };
  }

  /** True where there is something to undo, to redo. */
  get steps(): { readonly back: boolean; readonly forth: boolean } {
    return { back: this.#history.canUndo, forth: this.#history.canRedo };
  }

  /** Calls back after every change of the project or the answer. */
  onChange(listener: (situation: Situation) => void): void {
    this.#listeners.push(listener);
  }

  /** Calls back with a sentence when the engine breaks. */
  onFailure(listener: (message: string) => void): void {
    this.#failures.push(listener);
  }

  /** Changes the project; quick changes of the same field are undone together. */
  change(project: Project, field: string): void {
    if (project === this.#project) return;
    this.#history.note(this.#project, field, Date.now());
    this.#take(project);
  }

  /** Completes the project without a step of its own in the history. */
  amend(project: Project): void {
    this.#take(project);
  }

  /** Back to the project before the last change. */
  undo(): void {
    const project = this.#history.undo(this.#project);
    if (project) this.#take(project);
  }

  /** Forth again. */
  redo(): void {
    const project = this.#history.redo(this.#project);
    if (project) this.#take(project);
  }

  /** Puts another project in place of the present one. */
  replace(project: Project): void {
    this.#history.note(this.#project, null, Date.now());
    this.#answer = null;
    this.#good = null;
    this.#take(project);
  }

  /**
   * Opens a project document: JSON text or an object.
   *
   * Resolves to its answer, which may name problems in its fields. Rejects with a `Refusal`, and changes nothing, where
   * it is no project.
   */
  open(document: unknown): Promise<Answer> {
    const opened = this.#opening.then(() => this.#open(document));
    this.#opening = opened.catch(() => undefined);
    return opened.then((answer) => {
      this.#store.keep(this.#project);
      return answer;
    });
  }

  /** Opens a document to begin with; it is not kept before the user changes something. */
  begin(document: unknown): Promise<Answer> {
    return this.#open(document);
  }

  /** Gives up the running computation. */
  stop(): void {
    this.#engine.stop();
  }

  async #open(document: unknown): Promise<Answer> {
    const project = parsed(document);
    for (let tries = 0; tries < MOST_TRIES; tries += 1) {
      const reply = await this.#engine.solve(project);
      if (!reply) continue;
      const refused = reply.answer.problems.filter((problem) => problem.field === "document");
      if (refused.length > 0) throw new Refusal(problemText(refused));
      // Before the first answer there is nothing to come back to.
      if (this.#answer) this.#history.note(this.#project, null, Date.now());
      this.#project = completed(project);
      this.#good = null;
      this.#receive(reply);
      return reply.answer;
    }
    throw new Refusal("opening was stopped");
  }

  #take(project: Project): void {
    this.#project = project;
    this.#store.keep(project);
    this.#tell();
    this.#engine.solve(project).then(
      (reply) => {
        if (reply) this.#receive(reply);
      },
      (error: unknown) => {
        for (const listener of this.#failures) listener(error instanceof Error ? error.message : String(error));
      },
    );
  }

  #receive(reply: Reply): void {
    this.#answer = reply.answer;
    if (reply.answer.record) this.#good = { ...reply, record: reply.answer.record };
    this.#tell();
  }

  #tell(): void {
    const situation = this.situation;
    for (const listener of this.#listeners) listener(situation);
  }
}

/** Problems as one line. */
export function problemText(problems: readonly Problem[]): string {
  return problems.map((problem) => problem.message).join("; ");
}

function parsed(document: unknown): Project {
  let value = document;
  if (typeof value === "string") {
    try {
      value = JSON.parse(value);
    } catch {
      throw new Refusal("it is no JSON text, so no Stayband project");
    }
  }
  if (typeof value !== "object" || value === null || Array.isArray(value)) {
    throw new Refusal("it is no JSON object, so no Stayband project");
  }
  // What the object holds is checked by the core, which refuses a wrong document with a problem of the field `document`.
  return value as Project;
}
