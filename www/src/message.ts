// One line of news at the top of the page, for what has no field: a file that cannot be read, a link that was copied.
import { byId, html } from "./dom.ts";

/** Whether the user has to do something about it. */
export type Tone = "news" | "trouble";

/** Good news disappear after this time, in milliseconds; trouble stays until it is closed. */
const SHOWN = 6000;

/** Shows a message; `detail` is a text to copy. */
export function say(text: string, tone: Tone = "news", detail?: string): void {
  const bar = byId("message", HTMLElement);
  const words = byId("message-text", HTMLElement);
  const copy = detail === undefined ? null : html("input", { type: "text", readonly: true, value: detail, "aria-label": "Text to copy" });
  words.replaceChildren(text, ...(copy ? [copy] : []));
  bar.className = tone;
  bar.hidden = false;
  copy?.select();
  clearTimeout(timer);
  if (tone === "news" && !copy) timer = setTimeout(() => (bar.hidden = true), SHOWN);
}

/** Makes the bar closable. */
export function messageBar(): void {
  const bar = byId("message", HTMLElement);
  byId("message-close", HTMLButtonElement).addEventListener("click", () => (bar.hidden = true));
}

let timer: ReturnType<typeof setTimeout> | undefined;
