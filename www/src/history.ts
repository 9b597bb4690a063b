// Undo and redo: what was before and after the present project.

/** Changes of the same field that follow each other faster than this are undone together, in milliseconds. */
const TOGETHER = 1200;
/** More steps back than anyone will go; beyond, the oldest are forgotten. */
const MOST_STEPS = 500;

/** The line of projects, or of what stands for one. */
export class History<Step> {
  #past: Step[] = [];
  #future: Step[] = [];
  #lastField: string | null = null;
  #lastTime = 0;

  /** Notes that `before` is about to give way to another project, because `field` was changed at `time`. */
  note(before: Step, field: string | null, time: number): void {
    const together = field !== null && field === this.#lastField && time - this.#lastTime < TOGETHER;
    if (!together) {
      this.#past.push(before);
      if (this.#past.length > MOST_STEPS) this.#past.shift();
    }
    this.#future = [];
    this.#lastField = field;
    this.#lastTime = time;
  }

  /** The project before `present`; null at the beginning. */
  undo(present: Step): Step | null {
    return this.#move(this.#past, this.#future, present);
  }

  /** The project that was undone last; null where there is none. */
  redo(present: Step): Step | null {
    return this.#move(this.#future, this.#past, present);
  }

  /** True where there is something to undo. */
  get canUndo(): boolean {
    return this.#past.length > 0;
  }

  /** True where there is something to redo. */
  get canRedo(): boolean {
    return this.#future.length > 0;
  }

  #move(from: Step[], to: Step[], present: Step): Step | null {
    const found = from.pop();
    if (!found) return null;
    to.push(present);
    this.#lastField = null;
    return found;
  }
}
