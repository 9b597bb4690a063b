// A message at its field, with the wrong place marked in the text it is about.
import { html, setAttributes, type Content } from "./dom.ts";
import type { Problem } from "./types.ts";

/** Characters of the text shown on each side of the wrong place. */
const CONTEXT = 24;

/** A text cut into what stands before, at and behind a place, shortened on both sides. */
export function cutOut(text: string, [from, to]: readonly [number, number]): { before: string; at: string; behind: string } {
  const characters = Array.from(text);
  const before = characters.slice(0, from).join("");
  const behind = characters.slice(to).join("");
  return {
    before: from > CONTEXT ? `…${characters.slice(from - CONTEXT, from).join("")}` : before,
    at: characters.slice(from, to).join(""),
    behind: characters.length - to > CONTEXT ? `${characters.slice(to, to + CONTEXT).join("")}…` : behind,
  };
}

/**
 * Shows the problems of a field in the element below it, and marks the field as wrong for those who cannot see it.
 *
 * A field nobody has typed into yet is no mistake: its message stands there calmly.
 */
export function showProblems(field: Element, place: HTMLElement, text: string, problems: readonly Problem[]): void {
  const wrong = problems.length > 0;
  const calm = text === "" && document.body.classList.contains("blank");
  setAttributes(field, { "aria-invalid": wrong && !calm ? "true" : null, "aria-describedby": wrong ? place.id : null });
  place.hidden = !wrong;
  place.classList.toggle("calm", calm);
  place.replaceChildren(...problems.flatMap((problem) => [...excerpt(text, problem), html("p", {}, problem.message)]));
}

function excerpt(text: string, { span }: Problem): Content[] & Node[] {
  if (!span || text === "") return [];
  const { before, at, behind } = cutOut(text, span);
  // A place between two characters, or behind the last, is marked by an empty box.
  const mark = html("mark", {}, at.trim() === "" ? "\u00a0" : at);
  return [html("code", { "aria-hidden": "true" }, before, mark, behind)];
}
