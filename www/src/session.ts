// The session: the project, the newest answer and the last good one, and every way in which they change.
import { parsed, Refusal } from "./document.ts";
import type { Engine, Reply } from "./engine.ts";
import { History } from "./history.ts";
import { completed, emptyProject } from "./project.ts";
import { Store, type Kept, type Place } from "./store.ts";
import type { Answer, Problem, Project, Record as Findings } from "./types.ts";

/** A reply with a record. */
export interface Good extends Reply {
  readonly record: Findings;
  /** Changes with everything but the setting; the same for no two pictures of this session. */
  readonly picture: string;
}

/** What the views show. */
export interface Situation {
  readonly project: Project;
  /** The answer to the newest project that was answered; null before the first. */
  readonly answer: Answer | null;
  /** The newest reply with a record; null before the first, and after another project was opened. */
  readonly good: Good | null;
  /** True where the record does not belong to the project, because that has problems or was not answered. */
  readonly stale: boolean;
}

/** A project with the entry of the store in which it is kept. */
interface Step {
  readonly project: Project;
  readonly place: Place;
}

/** How a document is opened. */
interface Opening {
  readonly place: Place;
  /** False where opening is given up because something else came first. */
  wanted(): boolean;
}

/** How often opening a document is tried again when typing overtakes it. */
const MOST_TRIES = 20;

/** The project before the first one. */
const NOTHING = emptyProject();

/** One user at work on one project. */
export class Session {
  readonly #engine: Engine;
  readonly #store: Store;
  readonly #history = new History<Step>();
  readonly #listeners: ((situation: Situation) => void)[] = [];
  readonly #failures: ((message: string) => void)[] = [];
  #project: Project = NOTHING;
  #place: Place = Store.newPlace();
  #answer: Answer | null = null;
  #good: Good | null = null;
  /** True where the newest project got no answer, because it was stopped or the engine broke. */
  #unanswered = false;
  /** How often the engine was stopped or broke: a new one counts its analyses anew. */
  #engines = 0;
  /** Documents are opened one after the other. */
  #opening: Promise<unknown> = Promise.resolve();

  constructor(engine: Engine, store: Store) {
    this.#engine = engine;
    this.#store = store;
  }

  /** What the views show now. */
  get situation(): Situation {
    const wrong = this.#unanswered || (this.#answer?.problems.length ?? 0) > 0;
    const stale = this.#good !== null && wrong;
    return { project: this.#project, answer: this.#answer, good: this.#good, stale };
  }

  /** The entry of the store in which the project is kept, or will be. */
  get place(): Place {
    return this.#store.placeOf(this.#place);
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
    this.#history.note(this.#step, field, Date.now());
    this.#take(project);
  }

  /** Completes the project without a step of its own in the history. */
  amend(project: Project): void {
    this.#take(project);
  }

  /** Back to the project before the last change. */
  undo(): void {
    this.#go(this.#history.undo(this.#step));
  }

  /** Forth again. */
  redo(): void {
    this.#go(this.#history.redo(this.#step));
  }

  /** Begins an empty project. It is kept when something is typed into it. */
  beginEmpty(): void {
    this.#begin();
    this.#ask(emptyProject());
  }

  /** Puts another project in place of the present one, and keeps it as an entry of its own. */
  replace(project: Project): void {
    this.#begin();
    this.#take(project);
  }

  /**
   * Opens a project document, JSON text or an object, and keeps it: as the entry that holds the same project, if there is
   * one, else as an entry of its own.
   *
   * Resolves to its answer, which may name problems in its fields. Rejects with a `Refusal`, and changes nothing, where
   * it is no project.
   */
  async open(document: unknown): Promise<Answer> {
    const answer = await this.openUnkept(document);
    const kept = this.#store.find(this.#project);
    if (kept) {
      this.#place = kept.place;
      this.#store.opened(kept);
    } else {
      this.#store.keep(this.#place, this.#project);
    }
    return answer;
  }

  /** The same for a document that need not be kept before the user changes something: a demo, or one from a script. */
  async openUnkept(document: unknown): Promise<Answer> {
    return this.#queue(() => this.#open(document, { place: Store.newPlace(), wanted: () => true }));
  }

  /** Opens an entry of the store. Rejects like `open`. */
  async openKept({ place, text, project }: Kept): Promise<Answer> {
    const answer = await this.#queue(() => this.#open(project, { place, wanted: () => true }));
    this.#store.opened({ place, text });
    return answer;
  }

  /**
   * Opens a document to begin with: an entry of the store, or a demo.
   *
   * Resolves to false where something else came first. Rejects like `open`.
   */
  async begin(document: unknown, kept?: Kept): Promise<boolean> {
    const untouched = (): boolean => this.#project === NOTHING;
    return this.#queue(async () => {
      try {
        await this.#open(document, { place: kept?.place ?? this.#place, wanted: untouched });
        if (kept) this.#store.opened(kept);
        return true;
      } catch (error) {
        // The form is there to be used all the same.
        this.#tell();
        if (untouched()) throw error;
        return false;
      }
    });
  }

  /** Gives up the running computation; what is on the screen then belongs to an earlier project. */
  stop(): void {
    this.#engines += 1;
    this.#unanswered = true;
    this.#engine.stop();
    this.#tell();
  }

  /** Runs after everything that was queued before, whether that failed or not. */
  #queue<Result>(run: () => Promise<Result>): Promise<Result> {
    const result = this.#opening.then(run);
    this.#opening = result.catch(() => undefined);
    return result;
  }

  async #open(document: unknown, { place, wanted }: Opening): Promise<Answer> {
    const project = parsed(document);
    const engines = this.#engines;
    for (let tries = 0; tries < MOST_TRIES && engines === this.#engines && wanted(); tries += 1) {
      const reply = await this.#engine.solve(project);
      if (!reply || !wanted()) continue;
      const refused = reply.answer.problems.filter((problem) => problem.field === "document");
      if (refused.length > 0) throw new Refusal(problemText(refused));
      // Before the first answer there is nothing to come back to.
      if (this.#answer) this.#history.note(this.#step, null, Date.now());
      this.#project = completed(project);
      this.#place = place;
      this.#good = null;
      this.#receive(reply);
      return reply.answer;
    }
    throw new Refusal("it was stopped or overtaken by something newer");
  }

  get #step(): Step {
    return { project: this.#project, place: this.#place };
  }

  /** A project that has nothing to do with the present one comes next. */
  #begin(): void {
    this.#history.note(this.#step, null, Date.now());
    this.#answer = null;
    this.#good = null;
    this.#place = Store.newPlace();
  }

  #go(step: Step | null): void {
    if (!step) return;
    this.#place = step.place;
    this.#take(step.project);
  }

  /** Makes a project the present one, and keeps it. */
  #take(project: Project): void {
    this.#store.keep(this.#place, project);
    this.#ask(project);
  }

  /** Makes a project the present one, and asks for its answer. */
  #ask(project: Project): void {
    this.#project = project;
    this.#tell();
    this.#engine.solve(project).then(
      (reply) => {
        if (reply) this.#receive(reply);
      },
      (error: unknown) => {
        this.#engines += 1;
        this.#unanswered = true;
        this.#tell();
        for (const listener of this.#failures) listener(error instanceof Error ? error.message : String(error));
      },
    );
  }

  #receive(reply: Reply): void {
    this.#answer = reply.answer;
    this.#unanswered = false;
    const { record } = reply.answer;
    if (record) this.#good = { ...reply, record, picture: `${this.#engines}.${reply.analysis}` };
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
