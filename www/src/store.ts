// The project is kept in the browser while it is typed, so that closing the page loses nothing.
import type { Project } from "./types.ts";

const KEY = "stayband.project";
/** A pause this long after the last key writes the project, in milliseconds. */
const PAUSE = 200;

/** Keeps the newest project. */
export class Store {
  #timer: ReturnType<typeof setTimeout> | undefined;
  #waiting: Project | null = null;
  #refused = false;
  readonly #onRefused: () => void;

  /** `onRefused` is called once if the browser does not let the page keep anything. */
  constructor(onRefused: () => void) {
    this.#onRefused = onRefused;
    // A page that is closed or put aside writes what still waits.
    document.addEventListener("visibilitychange", () => this.#write());
    window.addEventListener("pagehide", () => this.#write());
  }

  /** Keeps a project, after a short pause. */
  keep(project: Project): void {
    this.#waiting = project;
    clearTimeout(this.#timer);
    this.#timer = setTimeout(() => this.#write(), PAUSE);
  }

  /** The text kept last time; null where there is none or the browser refuses. */
  restore(): string | null {
    try {
      return localStorage.getItem(KEY);
    } catch {
      this.#refuse();
      return null;
    }
  }

  #write(): void {
    clearTimeout(this.#timer);
    if (!this.#waiting) return;
    try {
      localStorage.setItem(KEY, JSON.stringify(this.#waiting));
    } catch {
      this.#refuse();
    }
    this.#waiting = null;
  }

  #refuse(): void {
    if (this.#refused) return;
    this.#refused = true;
    this.#onRefused();
  }
}
