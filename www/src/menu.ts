// A menu that opens below its button: closed by Escape, by a click elsewhere and by a choice.
import { byId, html } from "./dom.ts";

/** A line of a menu. */
export interface Item {
  readonly name: string;
  /** More about it, in a second line. */
  readonly about?: string;
  act(): void;
}

/** Fills the list of the menu with the id. */
export function menu(id: string, items: readonly Item[]): void {
  const place = byId(id, HTMLDetailsElement);
  const lines = items.map(({ name, about, act }) => {
    const line = html("button", { type: "button" }, ...(about === undefined ? [name] : [html("strong", {}, name), html("span", {}, about)]));
    line.addEventListener("click", () => {
      place.open = false;
      act();
    });
    return html("li", {}, line);
  });
  place.querySelector("ul")?.append(...lines);
  place.addEventListener("keydown", (event) => {
    if (event.key !== "Escape" || !place.open) return;
    place.open = false;
    place.querySelector("summary")?.focus();
  });
  document.addEventListener("pointerdown", (event) => {
    if (event.target instanceof Node && !place.contains(event.target)) place.open = false;
  });
}
