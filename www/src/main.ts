// The page: connects the session with its views and opens the first project.
import { byId, watchSize } from "./dom.ts";
import { DEMOS } from "./demos.ts";
import { Engine } from "./engine.ts";
import { figuresTable } from "./figures.ts";
import { loopForm } from "./form.ts";
import { headline } from "./headline.ts";
import { landmarksTable } from "./landmarks.ts";
import { carriesProject, projectText } from "./link.ts";
import { messageBar, say } from "./message.ts";
import { Paper } from "./paper.ts";
import { Plane } from "./plane.ts";
import { Responses } from "./responses.ts";
import { Ruler } from "./ruler.ts";
import { offerScripting } from "./script.ts";
import { Session } from "./session.ts";
import { Store } from "./store.ts";
import { openDocument, tools } from "./tools.ts";
import { sheetPanel } from "./sheet.ts";
import { siteCheckPanel } from "./sitecheck.ts";
import { stepUpPanel } from "./stepup.ts";
import { reasonPanel } from "./why.ts";

function start(): void {
  messageBar();
  const engine = new Engine();
  const store = new Store(() => say("This browser does not let the page keep your work. Save it to a file before closing."));
  const session = new Session(engine, store);
  const why = reasonPanel(session);
  headline(session, why);
  loopForm(session);
  new Ruler(session, why);
  landmarksTable(session, new Plane(session));
  new Responses(session);
  figuresTable(session);
  const paper = new Paper(engine, session);
  stepUpPanel(paper);
  siteCheckPanel(session, paper);
  sheetPanel(paper);
  roomForPictures();
  tools(session);
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
  if (kept !== null && (await openKept(session, kept))) return;
  await openDocument("The demo", () => session.begin(DEMOS[0]?.document));
}

/** Opens the project kept in this browser. One that cannot be opened, say of a newer version, is handed to the user. */
async function openKept(session: Session, kept: string): Promise<boolean> {
  let reason = "something else came first";
  try {
    if (await session.begin(kept)) return true;
  } catch (error) {
    reason = error instanceof Error ? error.message : String(error);
  }
  say(`The project kept in this browser was not opened: ${reason}. Copy it from here before it is replaced:`, "trouble", kept);
  return false;
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
