// The answer in words above the ruler, the mark of a stale one, and the notices.
import { plain, settingSentence, stabilitySentence, type Piece } from "./answer.ts";
import { button, byId, html } from "./dom.ts";
import type { Session } from "./session.ts";
import type { Edge } from "./types.ts";

/** A screen reader hears the answer after a pause this long, in milliseconds: not at every step of the pointer. */
const PAUSE = 900;

/** Keeps the headline in step with the session; `onReason` is asked to explain an edge. */
export function headline(session: Session, onReason: (edge: Edge, from: Element) => void): void {
  const answer = byId("answer", HTMLElement);
  const atSetting = byId("answer-setting", HTMLElement);
  const stale = byId("stale", HTMLElement);
  const spoken = byId("spoken", HTMLElement);
  const notices = byId("notices", HTMLElement);
  let timer: ReturnType<typeof setTimeout> | undefined;
  let drawn = "";
  session.onChange((situation) => {
    const { good } = situation;
    document.body.classList.toggle("stale", situation.stale);
    document.body.classList.toggle("blank", good === null);
    document.body.classList.remove("starting");
    stale.hidden = !situation.stale;
    const pieces = good ? stabilitySentence(good.record) : [{ text: "Type a loop below: its stable ranges appear here." }];
    const words = good ? settingSentence(good.record) : "";
    const key = `${good?.picture ?? ""} ${plain(pieces)}`;
    // The buttons of the sentence keep the focus while only the setting moves.
    if (key !== drawn) answer.replaceChildren(...pieces.map((piece) => pieceElement(piece, onReason)));
    drawn = key;
    atSetting.textContent = words;
    notices.replaceChildren(...(good?.record.notices ?? []).map(({ kind, text }) => html("li", { class: kind }, text)));
    clearTimeout(timer);
    timer = setTimeout(() => {
      spoken.textContent = situation.stale ? (stale.textContent ?? "") : `${plain(pieces)} ${words}`;
    }, PAUSE);
  });
}

function pieceElement({ text, edge, aside }: Piece, onReason: (edge: Edge, from: Element) => void): Node {
  if (!edge) return html("span", { class: aside ? "aside" : null }, text);
  const element = button(text, () => onReason(edge, element), { class: "edge-link", title: "Why here?" });
  return element;
}
