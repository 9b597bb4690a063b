// The page: connects the session with its views and opens the first project.
import { byId, watchSize } from "./dom.ts";
import { DEMOS } from "./demos.ts";
import { Comparison } from "./comparison.ts";
import { Engine } from "./engine.ts";
import { exportMenu } from "./exports.ts";
import { figuresTable } from "./figures.ts";
import { loopForm } from "./form.ts";
import { headline } from "./headline.ts";
import { landmarksTable } from "./landmarks.ts";
import { carriesProject, projectText } from "./link.ts";
import { messageBar, say } from "./message.ts";
import { Paper } from "./paper.ts";
import { projectList } from "./projects.ts";
import { periodsTable } from "./periods.ts";
import { Plane } from "./plane.ts";
import { Responses } from "./responses.ts";
import { Ruler } from "./ruler.ts";
import { offerScripting } from "./script.ts";
import { Session } from "./session.ts";
import { Store, type Kept, type Trouble } from "./store.ts";
import { openDocument, tools } from "./tools.ts";
import { sheetPanel } from "./sheet.ts";
import { siteCheckPanel } from "./sitecheck.ts";
import { stepUpPanel } from "./stepup.ts";
import { reasonPanel } from "./why.ts";

function start(): void {
  messageBar();
  const engine = new Engine();
  const store = new Store();
  const session = new Session(engine, store);
  const why = reasonPanel(session);
  headline(session, why);
  loopForm(session);
  const ruler = new Ruler(session, why);
  landmarksTable(session, new Plane(session));
  new Responses(session);
  figuresTable(session);
  periodsTable(session);
  const paper = new Paper(engine, session);
  stepUpPanel(paper);
  siteCheckPanel(session, paper);
  sheetPanel(paper);
  roomForPictures();
  tools(session, store);
  exportMenu(session, paper);
  projectList(session, store, new Comparison(session, (other) => ruler.compare(other)));
  keepingSigns(store);
  busySign(engine, session);
  session.onFailure((message) => say(message, "trouble"));
  offerScripting(session, paper);
  window.addEventListener("hashchange", () => void openLink(session));
  void openFirst(session, store);
  showHash();
}

/** The project of the link, else the one kept in this browser, else the first demo. */
async function openFirst(session: Session, store: Store): Promise<void> {
  if (await openLink(session)) return;
  const kept = store.restore();
  if (kept && (await openKept(session, kept))) return;
  await openDocument("The demo", () => session.begin(DEMOS[0]?.document));
}

/** Opens an entry of the store. One that cannot be opened, say of a newer version, stays there and is shown to the user. */
async function openKept(session: Session, kept: Kept): Promise<boolean> {
  let reason = "something else came first";
  try {
    if (!kept.project) reason = "the entry is damaged";
    else if (await session.begin(kept.project, kept)) return true;
  } catch (error) {
    reason = error instanceof Error ? error.message : String(error);
  }
  say(`The project kept in this browser was not opened: ${reason}. It stays in the list of projects; this is its text:`, "trouble", kept.text);
  return false;
}

/** What to say where work is not kept as usual. */
const TROUBLES: { readonly [trouble in Trouble]: string } = {
  refused: "This browser does not let the page keep your work. Save it to a file before closing.",
  full: "The browser’s store is full: what you change now is not kept. Save it to a file, or delete projects you no longer need, under Projects.",
  elsewhere: "This project was changed in another tab. What you change here from now on is kept as a project of its own.",
  moved: "Another tab changed the same project, so this one is now kept as a project of its own. Both stand under Projects.",
};

/** Says what goes wrong with keeping, and keeps a sign up while something is not kept. */
function keepingSigns(store: Store): void {
  store.onTrouble((trouble) => say(TROUBLES[trouble], "trouble"));
  store.onChange(() => {
    byId("unkept", HTMLElement).hidden = store.keeping;
  });
}

/** Opens the project in the address, if there is one, and takes it out: what is typed from now on is newer. */
async function openLink(session: Session): Promise<boolean> {
  const part = location.hash;
  if (!carriesProject(part)) return false;
  history.replaceState(null, "", location.href.replace(/#.*$/s, ""));
  return openDocument("The link", async () => session.open(await projectText(part)));
}

function busySign(engine: Engine, session: Session): void {
  const sign = byId("busy", HTMLElement);
  engine.onBusy((busy) => {
    sign.hidden = !busy;
  });
  byId("stop", HTMLButtonElement).addEventListener("click", () => session.stop());
}

/** Tells the style sheet how much of the window the answer and the ruler take, so that the pictures fill the rest. */
function roomForPictures(): void {
  const ruler = byId("ruler-place", HTMLElement);
  const tell = (): void => {
    const above = ruler.getBoundingClientRect().bottom + window.scrollY;
    document.documentElement.style.setProperty("--above", `${Math.round(above)}px`);
  };
  for (const element of [ruler, byId("headline", HTMLElement), byId("head", HTMLElement)]) watchSize(element, tell);
}

/** Shows which build this page is. */
function showHash(): void {
  const hash = document.querySelector<HTMLMetaElement>('meta[name="program-hash"]')?.content ?? "";
  if (/^[0-9a-f]{64}$/.test(hash)) byId("build", HTMLElement).textContent = `build ${hash.slice(0, 12)}`;
}

start();
