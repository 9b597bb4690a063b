// The buttons of the header: new, open, save, link, demos, undo, redo.
import { byId, html } from "./dom.ts";
import { DEMOS } from "./demos.ts";
import { fileText, pickFile, saveFile } from "./file.ts";
import { linkPart } from "./link.ts";
import { say } from "./message.ts";
import { emptyProject } from "./project.ts";
import type { Session } from "./session.ts";

/** Connects the buttons with the session. */
export function tools(session: Session): void {
  const press = (id: string, act: () => void): void => byId(id, HTMLButtonElement).addEventListener("click", act);
  press("new", () => session.replace(emptyProject()));
  press("open", () => void openDocument("The file", () => openFile(session)));
  press("save", () => saveFile(session.situation.project));
  press("link", () => void copyLink(session));
  press("undo", () => session.undo());
  press("redo", () => session.redo());
  press("help-open", () => byId("help", HTMLDialogElement).showModal());
  press("help-close", () => byId("help", HTMLDialogElement).close());
  session.onChange(() => {
    byId("undo", HTMLButtonElement).disabled = !session.steps.back;
    byId("redo", HTMLButtonElement).disabled = !session.steps.forth;
  });
  demoMenu(session);
  undoKeys(session);
  dropFiles(session);
}

/** Opens a document and says what is wrong where that fails. `source` names it: "The file", "The link". */
export async function openDocument(source: string, open: () => Promise<unknown>): Promise<boolean> {
  try {
    await open();
    return true;
  } catch (error) {
    const reason = error instanceof Error ? error.message : String(error);
    say(`${source} was not opened, and nothing was changed: ${reason.replace(/\.$/, "")}.`, "trouble");
    return false;
  }
}

async function openFile(session: Session): Promise<void> {
  const text = await pickFile();
  if (text !== null) await session.open(text);
}

async function copyLink(session: Session): Promise<void> {
  const link = location.href.replace(/#.*$/s, "") + (await linkPart(session.situation.project));
  try {
    await navigator.clipboard.writeText(link);
    say("The link to this project is copied. It holds the whole project; nothing is stored elsewhere.");
  } catch {
    say("Copy this link; it holds the whole project:", "news", link);
  }
}

function demoMenu(session: Session): void {
  const menu = byId("demos", HTMLDetailsElement);
  const list = byId("demo-list", HTMLElement);
  for (const demo of DEMOS) {
    const item = html("button", { type: "button" }, html("strong", {}, demo.name), html("span", {}, demo.shows));
    item.addEventListener("click", () => {
      menu.open = false;
      void openDocument("The demo", () => session.open(demo.document));
    });
    list.append(html("li", {}, item));
  }
  menu.addEventListener("keydown", (event) => {
    if (event.key !== "Escape" || !menu.open) return;
    menu.open = false;
    menu.querySelector("summary")?.focus();
  });
  document.addEventListener("pointerdown", (event) => {
    if (event.target instanceof Node && !menu.contains(event.target)) menu.open = false;
  });
}

/** Undo and redo by keys; in a field the browser's own undo comes first. */
function undoKeys(session: Session): void {
  document.addEventListener("keydown", (event) => {
    if (!(event.ctrlKey || event.metaKey) || event.altKey || event.target instanceof HTMLInputElement) return;
    const key = event.key.toLowerCase();
    if (key === "z" && !event.shiftKey) session.undo();
    else if (key === "y" || (key === "z" && event.shiftKey)) session.redo();
    else return;
    event.preventDefault();
  });
}

/** A file dropped on the page is opened like a picked one, instead of leaving the page. */
function dropFiles(session: Session): void {
  document.addEventListener("dragover", (event) => event.preventDefault());
  document.addEventListener("drop", (event) => {
    const file = event.dataTransfer?.files[0];
    if (!file) return;
    event.preventDefault();
    void openDocument("The file", async () => session.open(await fileText(file)));
  });
}
