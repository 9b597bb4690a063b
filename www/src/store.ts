// The projects kept in this browser, each under a key of its own, so that closing the page loses nothing.
//
// Two tabs may work on the same project: a tab writes only where its own last text still stands, and otherwise begins
// another entry, so that neither tab's work replaces the other's.
import { parsedEntry } from "./document.ts";
import type { Project } from "./types.ts";

/** The name of an entry. */
export type Place = string;

/** An entry of the list. */
export interface Kept {
  readonly place: Place;
  /** As it stands in the store. */
  readonly text: string;
  /** When it was changed last; null where that cannot be read. */
  readonly changed: Date | null;
  /** Null where the entry is damaged. */
  readonly project: Project | null;
}

/** What goes wrong with keeping. `elsewhere`: another tab changed the same project; `moved`: so this one has an entry of its own now. */
export type Trouble = "refused" | "full" | "elsewhere" | "moved";

const PREFIX = "stayband.project.";
/** The entry that was written last: what a new tab opens. */
const NEWEST = "stayband.newest";
/** The entry this tab has open; a reload opens it again. */
const OPEN = "stayband.open";
/** Where the one project stood before there was a list. */
const FORMER = "stayband.project";
/** A pause this long after the last key writes the project, in milliseconds. */
const PAUSE = 200;

/** Keeps projects. */
export class Store {
  readonly #troubles: ((trouble: Trouble) => void)[] = [];
  readonly #changes: (() => void)[] = [];
  /** The text this tab last wrote or read, for each entry. */
  readonly #known = new Map<Place, string>();
  /** Where an entry's changes go since another tab changed it. */
  readonly #moved = new Map<Place, Place>();
  #timer: ReturnType<typeof setTimeout> | undefined;
  /** Changed and not yet written; stays where the browser refuses. */
  #waiting: { readonly place: Place; readonly project: Project } | null = null;
  #failing = false;

  constructor() {
    // A page that is closed or put aside writes what still waits.
    document.addEventListener("visibilitychange", () => this.#write());
    window.addEventListener("pagehide", () => this.#write());
    window.addEventListener("beforeunload", (event) => {
      this.#write();
      if (this.#waiting) event.preventDefault();
    });
    window.addEventListener("storage", ({ key, newValue }) => {
      this.#changed();
      const place = key?.startsWith(PREFIX) ? key.slice(PREFIX.length) : null;
      if (place === this.open && newValue !== null && newValue !== this.#known.get(place ?? "")) this.#trouble("elsewhere");
    });
  }

  /** Calls back when something goes wrong. */
  onTrouble(listener: (trouble: Trouble) => void): void {
    this.#troubles.push(listener);
  }

  /** Calls back when the list may have changed, or whether all is kept. */
  onChange(listener: () => void): void {
    this.#changes.push(listener);
  }

  /** False while the browser refuses to keep the newest change. */
  get keeping(): boolean {
    return !this.#failing;
  }

  /** The entry this tab has open; null before the first. */
  get open(): Place | null {
    return read(sessionOf, OPEN);
  }

  /** Where the changes of an entry really go. */
  placeOf(place: Place): Place {
    return this.#moved.get(place) ?? place;
  }

  /** A name for an entry that does not exist yet. */
  static newPlace(): Place {
    return `${Date.now().toString(36)}-${Math.random().toString(36).slice(2, 8)}`;
  }

  /** Keeps a project, after a short pause. */
  keep(place: Place, project: Project): void {
    if (this.#waiting && this.#waiting.place !== place) this.#write();
    this.#waiting = { place, project };
    clearTimeout(this.#timer);
    this.#timer = setTimeout(() => this.#write(), PAUSE);
  }

  /** The project was saved to a file: nothing is lost where the browser refuses to keep it. */
  saved(project: Project): void {
    if (this.#waiting?.project !== project) return;
    this.#waiting = null;
    this.#failing = false;
    this.#changed();
  }

  /** The entry to begin with; null where there is none. */
  restore(): Kept | null {
    this.#takeFormer();
    const places = [this.open, read(localOf, NEWEST)];
    const found = places.map((place) => (place === null ? null : this.read(place))).find((kept) => kept !== null);
    return found ?? this.list()[0] ?? null;
  }

  /** An entry; null where there is none. */
  read(place: Place): Kept | null {
    const text = read(localOf, PREFIX + place);
    return text === null ? null : keptFrom(place, text);
  }

  /** The entry that holds this very project; null where there is none. */
  find(project: Project): Kept | null {
    const text = JSON.stringify(project);
    return this.list().find((kept) => JSON.stringify(kept.project) === text) ?? null;
  }

  /** Remembers that this tab has an entry open, as it stands there now. */
  opened({ place, text }: Pick<Kept, "place" | "text">): void {
    this.#known.set(place, text);
    write(sessionOf, OPEN, place);
  }

  /** All entries, the newest first; damaged ones before them. */
  list(): Kept[] {
    const time = ({ changed }: Kept): number => changed?.getTime() ?? Infinity;
    const places = keysOf().flatMap((key) => (key.startsWith(PREFIX) ? key.slice(PREFIX.length) : []));
    const kept = places.flatMap((place) => this.read(place) ?? []);
    return kept.sort((left, right) => Number(time(left) < time(right)) - Number(time(left) > time(right)));
  }

  /** Writes an entry at once, as for another name or a copy. False where the browser refuses. */
  put(place: Place, project: Project): boolean {
    return this.restoreText(place, textOf(project));
  }

  /** Writes an entry back as it was. False where the browser refuses. */
  restoreText(place: Place, text: string): boolean {
    const trouble = write(localOf, PREFIX + place, text);
    if (trouble) this.#trouble(trouble);
    this.#changed();
    return trouble === null;
  }

  /** Takes an entry out of the list. */
  remove(place: Place): void {
    localOf()?.removeItem(PREFIX + place);
    this.#known.delete(place);
    // Where the store was full, there may be room now.
    this.#write();
    this.#changed();
  }

  #write(): void {
    clearTimeout(this.#timer);
    if (!this.#waiting) return;
    const { place: wanted, project } = this.#waiting;
    let place = this.placeOf(wanted);
    const stands = this.read(place);
    if (stands?.project && JSON.stringify(stands.project) === JSON.stringify(project)) {
      this.#wrote(place, stands.text);
      return;
    }
    if (stands && stands.text !== this.#known.get(place)) {
      place = Store.newPlace();
      this.#moved.set(wanted, place);
      this.#trouble("moved");
    }
    const text = textOf(project);
    const trouble = write(localOf, PREFIX + place, text);
    if (trouble) this.#fail(trouble);
    else this.#wrote(place, text);
  }

  #wrote(place: Place, text: string): void {
    this.#known.set(place, text);
    this.#waiting = null;
    this.#failing = false;
    write(localOf, NEWEST, place);
    write(sessionOf, OPEN, place);
    this.#changed();
  }

  /** Says once that something is not kept, until it is kept again. */
  #fail(trouble: Trouble): void {
    if (!this.#failing) this.#trouble(trouble);
    this.#failing = true;
    this.#changed();
  }

  #trouble(trouble: Trouble): void {
    for (const listener of this.#troubles) listener(trouble);
  }

  #changed(): void {
    for (const listener of this.#changes) listener();
  }

  /** Puts the one project of an earlier version into the list. */
  #takeFormer(): void {
    const former = read(localOf, FORMER);
    if (former === null) return;
    const project = parsedEntry(former);
    const place = Store.newPlace();
    const trouble = write(localOf, PREFIX + place, project ? textOf(project) : former);
    if (trouble === null) localOf()?.removeItem(FORMER);
  }
}

/** An entry's text: the project with the time of the change. */
function textOf(project: Project): string {
  return JSON.stringify({ changed: new Date().toISOString(), project });
}

function keptFrom(place: Place, text: string): Kept {
  const damaged = { place, text, changed: null, project: null };
  try {
    const { changed, project } = JSON.parse(text) as { changed?: unknown; project?: unknown };
    const time = new Date(String(changed));
    const found = parsedEntry(project);
    return found && !Number.isNaN(time.getTime()) ? { place, text, changed: time, project: found } : damaged;
  } catch {
    return damaged;
  }
}

/** The browser's store; null where it is refused, as in some private windows. */
function localOf(): Storage | null {
  try {
    return window.localStorage;
  } catch {
    return null;
  }
}

/** The tab's own store; null where it is refused. */
function sessionOf(): Storage | null {
  try {
    return window.sessionStorage;
  } catch {
    return null;
  }
}

function read(storeOf: () => Storage | null, key: string): string | null {
  try {
    return storeOf()?.getItem(key) ?? null;
  } catch {
    return null;
  }
}

/** What goes wrong with writing; null where nothing does. */
function write(storeOf: () => Storage | null, key: string, text: string): Trouble | null {
  const store = storeOf();
  if (!store) return "refused";
  try {
    store.setItem(key, text);
    return null;
  } catch (error) {
    return error instanceof DOMException && error.name === "QuotaExceededError" && store.length > 0 ? "full" : "refused";
  }
}

function keysOf(): string[] {
  try {
    return Object.keys(localOf() ?? {});
  } catch {
    return [];
  }
}
