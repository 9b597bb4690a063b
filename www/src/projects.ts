// The list of the projects kept in this browser: open, rename, duplicate, delete with undo, compare.
import type { Comparison } from "./comparison.ts";
import { button, byId, html } from "./dom.ts";
import { say } from "./message.ts";
import { withTitle } from "./project.ts";
import type { Session } from "./session.ts";
import { Store, type Kept } from "./store.ts";
import { openDocument } from "./tools.ts";

/** Connects the list with the store and the session. */
export function projectList(session: Session, store: Store, comparison: Comparison): void {
  const dialog = byId("projects", HTMLDialogElement);
  const body = byId("project-rows", HTMLTableSectionElement);
  const none = byId("projects-none", HTMLElement);
  /** Deleted since the page was opened: each can be taken back. */
  const deleted = new Map<string, Kept>();

  const show = (): void => {
    if (!dialog.open) return;
    const kept = store.list();
    none.hidden = kept.length > 0 || deleted.size > 0;
    body.replaceChildren(...kept.map(row), ...[...deleted.values()].map(deletedRow));
  };
  const act = (words: string, name: string, run: () => void, disabled = false): HTMLButtonElement =>
    button(words, () => {
      run();
      show();
    }, { class: "small", "aria-label": `${words} ${name}`, disabled });

  const row = (kept: Kept): HTMLTableRowElement => {
    const { place, project } = kept;
    const here = place === session.place;
    const name = nameOf(kept);
    const title = html("input", { type: "text", value: project?.title ?? "", placeholder: "untitled", "aria-label": `Title of ${name}`, readonly: project === null });
    title.addEventListener("change", () => {
      if (!project) return;
      if (here) session.change(withTitle(session.situation.project, title.value), "title");
      else store.put(place, withTitle(project, title.value));
    });
    const copy = (): void => {
      if (project) store.put(Store.newPlace(), withTitle(project, `${project.title} (copy)`.trim()));
    };
    const remove = (): void => {
      deleted.set(place, kept);
      store.remove(place);
    };
    const open = (): void => {
      dialog.close();
      void openDocument(`“${name}”`, () => session.openKept(kept));
    };
    return html(
      "tr",
      {},
      html("td", {}, project ? title : html("span", { class: "failed" }, "Damaged entry")),
      html("td", { class: "when" }, here ? "open here" : whenOf(kept)),
      html(
        "td",
        { class: "acts" },
        project ? act("Open", name, open, here) : act("Show text", name, () => (dialog.close(), say("This entry cannot be read. Its text:", "trouble", kept.text))),
        project ? act("Compare", name, () => (dialog.close(), void comparison.begin(project)), here) : null,
        project ? act("Duplicate", name, copy) : null,
        act("Delete", name, remove, here),
      ),
    );
  };
  const deletedRow = (kept: Kept): HTMLTableRowElement => {
    const name = nameOf(kept);
    const back = (): void => {
      if (store.restoreText(kept.place, kept.text)) deleted.delete(kept.place);
    };
    return html("tr", { class: "deleted" }, html("td", { colspan: 2 }, `“${name}” is deleted.`), html("td", { class: "acts" }, act("Undo", `deleting ${name}`, back)));
  };

  byId("projects-open", HTMLButtonElement).addEventListener("click", () => {
    dialog.showModal();
    show();
  });
  byId("projects-close", HTMLButtonElement).addEventListener("click", () => dialog.close());
  store.onChange(show);
}

function nameOf({ project }: Kept): string {
  if (!project) return "damaged entry";
  return project.title.trim() || "untitled project";
}

/** "2026-03-05 14:07", as the clock on the wall says. */
function whenOf({ changed }: Kept): string {
  if (!changed) return "";
  const two = (part: number): string => String(part).padStart(2, "0");
  const day = [changed.getFullYear(), two(changed.getMonth() + 1), two(changed.getDate())].join("-");
  return `${day} ${two(changed.getHours())}:${two(changed.getMinutes())}`;
}
