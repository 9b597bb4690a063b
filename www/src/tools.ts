// The buttons of the header: new, open, save, link, demos, undo, redo.
import { byId } from "./dom.ts";
import { DEMOS } from "./demos.ts";
import { copy } from "./exports.ts";
import { download, fileDocument, fileName, fileText, pickFile } from "./file.ts";
import { linkPart } from "./link.ts";
import { menu } from "./menu.ts";
import { say } from "./message.ts";
import type { Session } from "./session.ts";
import type { Place, Store } from "./store.ts";

/** Connects the buttons with the session. */
export function tools(session: Session, store: Store): void {
  const press = (id: string, act: () => void): void => byId(id, HTMLButtonElement).addEventListener("click", act);
  press("new", () => session.beginEmpty());
  press("open", () => void openDocument("The file", () => openFile(session)));
  saving(session, store, press);
  press("link", () => void copyLink(session));
  press("undo", () => session.undo());
  press("redo", () => session.redo());
  press("help-open", () => byId("help", HTMLDialogElement).showModal());
  press("help-close", () => byId("help", HTMLDialogElement).close());
  session.onChange(() => {
    byId("undo", HTMLButtonElement).disabled = !session.steps.back;
    byId("redo", HTMLButtonElement).disabled = !session.steps.forth;
  });
  const demo = (document: unknown) => (): void => void openDocument("The demo", () => session.openUnkept(document));
  menu("demos", DEMOS.map(({ name, shows, document }) => ({ name, about: shows, act: demo(document) })));
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

/** Save, and Save as, which asks for the file's name; the name then stays with the project. */
function saving(session: Session, store: Store, press: (id: string, act: () => void) => void): void {
  const dialog = byId("save-as", HTMLDialogElement);
  const field = byId("file-name", HTMLInputElement);
  const names = new Map<Place, string>();
  const nameOf = (): string => names.get(session.place) ?? fileName(session.situation.project.title);
  const save = (): void => {
    const { project } = session.situation;
    download(nameOf(), "application/json", fileDocument(project));
    store.saved(project);
  };
  press("save", save);
  press("save-as-open", () => {
    field.value = nameOf();
    dialog.showModal();
    field.select();
  });
  press("save-as-close", () => dialog.close());
  byId("save-as-form", HTMLFormElement).addEventListener("submit", (event) => {
    event.preventDefault();
    names.set(session.place, fileName(field.value.replace(/(\.stayband)?\.json$/i, "")));
    dialog.close();
    save();
  });
}

async function copyLink(session: Session): Promise<void> {
  const link = location.href.replace(/#.*$/s, "") + (await linkPart(session.situation.project));
  await copy(link, "The link to this project is copied. It holds the whole project; nothing is stored elsewhere.");
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
  const sign = (shown: boolean): boolean => document.body.classList.toggle("dropping", shown);
  document.addEventListener("dragover", (event) => {
    event.preventDefault();
    sign(event.dataTransfer?.types.includes("Files") ?? false);
  });
  document.addEventListener("dragleave", ({ relatedTarget }) => relatedTarget === null && sign(false));
  document.addEventListener("drop", (event) => {
    event.preventDefault();
    sign(false);
    const files = event.dataTransfer?.files ?? [];
    const [file] = files;
    if (!file) return;
    if (files.length > 1) say("Only one file is opened at a time: drop them one by one.", "trouble");
    else void openDocument(`“${file.name}”`, async () => session.open(await fileText(file)));
  });
}
