// The part of the page that goes on paper: step-up plan, site check and sheet. Their part of the record is worked out only
// while one of them is open, after a pause in typing, so that the ruler and the pictures never wait for it.
import { byId } from "./dom.ts";
import type { Engine } from "./engine.ts";
import { fileDocument } from "./file.ts";
import type { Session, Situation } from "./session.ts";
import type { Project, Record as Findings, SheetRecord } from "./types.ts";

/** A record with its sheet. */
export interface SheetFindings extends Findings {
  readonly sheet: SheetRecord;
}

/** Shows the newest sheet; null while there is none for the project. */
export type ShowSheet = (record: SheetFindings | null, situation: Situation) => void;

/** A pause this long after the last change asks for the sheet, in milliseconds. */
const PAUSE = 300;

/** Asks for sheets and hands them to those that show them. */
export class Paper {
  readonly #engine: Engine;
  readonly #session: Session;
  readonly #parts = [...byId("paper", HTMLElement).querySelectorAll("details")];
  readonly #listeners: ShowSheet[] = [];
  #timer: ReturnType<typeof setTimeout> | undefined;
  /** The project the newest sheet belongs to, and the one that was asked for last. */
  #answered: Project | null = null;
  #asked: Project | null = null;
  #record: SheetFindings | null = null;

  constructor(engine: Engine, session: Session) {
    this.#engine = engine;
    this.#session = session;
    for (const part of this.#parts) part.addEventListener("toggle", () => this.#wake(0));
    session.onChange(() => this.#wake(PAUSE));
    this.#bindFields();
  }

  /** Calls back with every new sheet. */
  onSheet(listener: ShowSheet): void {
    this.#listeners.push(listener);
  }

  /** Brings the sheet up to date now; null where there is none, or something newer was asked for. */
  async refresh(): Promise<SheetFindings | null> {
    clearTimeout(this.#timer);
    const { project } = this.#session.situation;
    if (this.#answered === project) return this.#record;
    this.#asked = project;
    const reply = await this.#engine.sheet(fileDocument(project)).catch(() => null);
    if (!reply || this.#asked !== project) return null;
    const { record } = reply.answer;
    this.#answered = project;
    this.#record = record?.sheet ? { ...record, sheet: record.sheet } : null;
    this.#tell();
    return this.#record;
  }

  #wake(pause: number): void {
    clearTimeout(this.#timer);
    if (this.#parts.some((part) => part.open)) this.#timer = setTimeout(() => void this.refresh(), pause);
    // What is on the screen belongs to an earlier project.
    if (this.#record && this.#answered !== this.#session.situation.project) byId("paper", HTMLElement).setAttribute("aria-busy", "true");
  }

  #tell(): void {
    byId("paper", HTMLElement).removeAttribute("aria-busy");
    for (const listener of this.#listeners) listener(this.#record, this.#session.situation);
  }

  /** Connects every field that names its place in the project, such as "sheet.machine". */
  #bindFields(): void {
    const fields = [...byId("paper", HTMLElement).querySelectorAll<HTMLInputElement | HTMLSelectElement>("[data-part]")];
    for (const field of fields) {
      const place = partOf(field);
      field.addEventListener(field instanceof HTMLSelectElement ? "change" : "input", () => {
        const { project } = this.#session.situation;
        const part = { ...project[place.section], [place.name]: field.value };
        this.#session.change({ ...project, [place.section]: part }, `${place.section} ${place.name}`);
      });
    }
    this.#session.onChange(({ project }) => {
      for (const field of fields) {
        const place = partOf(field);
        const value = Object.entries(project[place.section]).find(([name]) => name === place.name)?.[1] ?? "";
        if (field.value !== value) field.value = value;
      }
    });
  }
}

/** The place in the project that a field stands for. */
function partOf(field: HTMLElement): { section: "sheet" | "stepUp" | "siteCheck"; name: string } {
  const [section = "", name = ""] = (field.dataset["part"] ?? "").split(".");
  if (section !== "sheet" && section !== "stepUp" && section !== "siteCheck") throw new Error(`no part of the project: ${section}`);
  return { section, name };
}
