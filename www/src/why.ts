// The panel that explains an edge.
import { byId, html } from "./dom.ts";
import type { AnyEdge } from "./answer.ts";
import { reasonHeading, reasonLines } from "./reason.ts";
import type { Session } from "./session.ts";

/** Opens the explanation of an edge; closing it gives the focus back. */
export function reasonPanel(session: Session): (edge: AnyEdge, from: Element) => void {
  const panel = byId("why", HTMLDialogElement);
  const heading = byId("why-heading", HTMLElement);
  const lines = byId("why-lines", HTMLElement);
  let opener: Element | null = null;
  const close = (): void => {
    if (!panel.open) return;
    panel.close();
    if (opener instanceof HTMLElement || opener instanceof SVGElement) opener.focus({ preventScroll: true });
  };
  byId("why-close", HTMLButtonElement).addEventListener("click", close);
  document.addEventListener("keydown", (event) => {
    if (event.key === "Escape") close();
  });
  document.addEventListener("pointerdown", (event) => {
    if (event.target instanceof Node && !panel.contains(event.target)) panel.close();
  });
  return (edge, from) => {
    const record = session.situation.good?.record;
    if (!record) return;
    opener = from;
    heading.textContent = reasonHeading(record, edge);
    lines.replaceChildren(...reasonLines(record, edge).flatMap(({ term, text }) => [html("dt", {}, term), html("dd", {}, text)]));
    if (!panel.open) panel.show();
    const place = from.getBoundingClientRect();
    const room = document.documentElement.clientWidth - panel.offsetWidth - 8;
    panel.style.left = `${Math.max(8, Math.min(room, place.left - panel.offsetWidth / 2))}px`;
    panel.style.top = `${place.bottom + 10}px`;
    heading.focus({ preventScroll: true });
  };
}
