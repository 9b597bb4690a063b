// The answer in words above the ruler, with the suggestion, the mark of a stale one, and the notices.
import {
  answerSentence,
  plain,
  settingSentence,
  stabilitySentence,
  suggestionReason,
  typedSetting,
  type AnyEdge,
  type Piece,
} from "./answer.ts";
import { fromRational, typedText } from "./decimal.ts";
import { button, byId, html } from "./dom.ts";
import { capital } from "./format.ts";
import { withSetting } from "./project.ts";
import type { Session } from "./session.ts";
import type { Record as Findings } from "./types.ts";

/** A screen reader hears the answer after a pause this long, in milliseconds: not at every step of the pointer. */
const PAUSE = 900;

/** Keeps the headline in step with the session; `onReason` is asked to explain an edge. */
export function headline(session: Session, onReason: (edge: AnyEdge, from: Element) => void): void {
  const answer = sentence("answer", onReason);
  const behind = sentence("answer-stable", onReason);
  const suggestion = suggestionButton(session);
  const why = byId("answer-why", HTMLElement);
  const atSetting = byId("answer-setting", HTMLElement);
  const stale = byId("stale", HTMLElement);
  const spoken = byId("spoken", HTMLElement);
  const notices = byId("notices", HTMLElement);
  let timer: ReturnType<typeof setTimeout> | undefined;
  session.onChange((situation) => {
    const { good } = situation;
    document.body.classList.toggle("stale", situation.stale);
    document.body.classList.toggle("blank", good === null);
    document.body.classList.remove("starting");
    stale.hidden = !situation.stale;
    const record = good?.record ?? null;
    const pieces = record ? answerSentence(record) : [{ text: "Type a loop below: its stable ranges appear here." }];
    const words = record ? settingSentence(record) : "";
    const key = good?.picture ?? "";
    answer(key, pieces);
    behind(key, record && record.requirements.length > 0 ? stabilitySentence(record) : []);
    const suggested = suggestion(record);
    why.textContent = record ? suggestionReason(record) : "";
    atSetting.textContent = words;
    notices.replaceChildren(...(record?.notices ?? []).map(({ kind, text }) => html("li", { class: kind }, `${capital(text).replace(/\.$/, "")}.`)));
    clearTimeout(timer);
    timer = setTimeout(() => {
      spoken.textContent = situation.stale ? (stale.textContent ?? "") : `${plain(pieces)} ${suggested} ${words}`;
    }, PAUSE);
  });
}

/** Shows pieces in an element. The buttons of the sentence keep the focus while only the setting moves. */
function sentence(id: string, onReason: (edge: AnyEdge, from: Element) => void): (picture: string, pieces: readonly Piece[]) => void {
  const place = byId(id, HTMLElement);
  let drawn = "";
  return (picture, pieces) => {
    const key = JSON.stringify([picture, pieces]);
    if (key !== drawn) place.replaceChildren(...pieces.map((piece) => pieceElement(piece, onReason)));
    drawn = key;
  };
}

function pieceElement({ text, edge, aside }: Piece, onReason: (edge: AnyEdge, from: Element) => void): Node {
  if (!edge) return html("span", { class: aside ? "aside" : null }, text);
  const element = button(text, () => onReason(edge, element), { class: "edge-link", title: "Why here?" });
  return element;
}

/** "Suggested 36." with a button that sets it; returns those words. */
function suggestionButton(session: Session): (record: Findings | null) => string {
  const words = byId("answer-suggested", HTMLElement);
  const take = byId("take", HTMLButtonElement);
  take.addEventListener("click", () => {
    const suggested = session.situation.good?.record.permitted.suggested;
    const decimal = suggested ? fromRational(suggested.setting) : null;
    if (decimal) session.change(withSetting(session.situation.project, typedText(decimal)), "setting");
  });
  return (record) => {
    const suggested = record?.permitted.suggested;
    const setting = suggested ? typedSetting(suggested.setting) : "";
    words.textContent = setting === "" ? "" : `Suggested ${setting}.`;
    take.hidden = setting === "";
    take.textContent = `Set ${setting}`;
    return words.textContent;
  };
}
