// What people who script the page can use.
import type { Paper } from "./paper.ts";
import { problemText, type Session } from "./session.ts";
import type { Project, Record as Findings } from "./types.ts";

/**
 * `window.stayband`, for scripts that drive the page:
 *
 * - `open(project)` opens a project, given as an object or as JSON text. It is kept in the browser when the user
 *   changes it. The promise holds the record. It is rejected, with what is wrong as its message, where there is no record: a document that is
 *   no project changes nothing; a project with problems in its fields is opened and shows them.
 * - `record()` is the newest record, the one on the screen, or null while there is none.
 * - `project()` is the project as it stands in the form.
 * - `sheet()` works out what the printed sheet needs; the promise holds the record with it, or null while there is none.
 *
 * Both documents are described in DEVELOPERS.md of the project.
 */
export interface Scripting {
  open(project: Project | string): Promise<Findings>;
  record(): Findings | null;
  project(): Project;
  sheet(): Promise<Findings | null>;
}

declare global {
  interface Window {
    stayband: Scripting;
  }
}

/** Offers the session to scripts. */
export function offerScripting(session: Session, paper: Paper): void {
  window.stayband = {
    async open(project) {
      const { record, problems } = await session.openUnkept(project);
      if (!record) throw new Error(problemText(problems));
      return record;
    },
    record: () => session.situation.good?.record ?? null,
    project: () => session.situation.project,
    sheet: () => paper.refresh(),
  };
}
