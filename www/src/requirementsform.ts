// The panel of requirements: those switched on as rows with their limits, and the lists to switch others on.
import { button, byId, html, setAttributes, setValue } from "./dom.ts";
import { showProblems } from "./problem.ts";
import { withoutRequirement, withRequirement, withRequirements } from "./project.ts";
import { quantity } from "./reason.ts";
import { figureOf, GROUPS, KINDS, kindOf, offerFor, PRESETS, type Kind, type Offer } from "./requirements.ts";
import type { Session, Situation } from "./session.ts";
import type { RequirementKind, RequirementRecord } from "./types.ts";

/** The elements of a row. */
interface Row {
  readonly element: HTMLLIElement;
  readonly limit: HTMLInputElement;
  readonly verdict: HTMLElement;
  readonly remark: HTMLElement;
  readonly problems: HTMLElement;
}

/** Keeps the panel in step with the session. */
export function requirementPanel(session: Session): (situation: Situation) => void {
  const list = byId("requirements", HTMLElement);
  const none = byId("requirements-none", HTMLElement);
  const rows = new Map<RequirementKind, Row>();
  const offers = new Map<RequirementKind, Offer>();
  const switches = kindSwitches(session, offers);
  presetMenu(session);
  return (situation) => {
    const { project, answer, good } = situation;
    const shown = project.requirements.map(({ kind }) => kind);
    for (const [kind, row] of rows) {
      if (shown.includes(kind)) continue;
      row.element.remove();
      rows.delete(kind);
    }
    project.requirements.forEach(({ kind, limit }, index) => {
      const row = rows.get(kind) ?? makeRow(kindOf(kind), session);
      rows.set(kind, row);
      if (list.children[index] !== row.element) list.insertBefore(row.element, list.children[index] ?? null);
      setValue(row.limit, limit);
      const judged = good?.record.requirements.find((requirement) => requirement.kind === kind && !situation.stale);
      const figure = good && !situation.stale ? figureOf(kind, good.record) : null;
      fillRow(row, kindOf(kind), judged ?? null, figure);
      const offer = offers.get(kind);
      row.remark.textContent = [judged?.remark ?? "", offer?.limit === limit ? offerWords(offer) : ""].filter(Boolean).join(" · ");
      row.remark.hidden = row.remark.textContent === "";
      const wrong = answer?.problems.filter((problem) => problem.field === "requirement" && problem.symbol === kind);
      showProblems(row.limit, row.problems, limit, wrong ?? []);
    });
    none.hidden = shown.length > 0;
    for (const [kind, input] of switches) input.checked = shown.includes(kind);
  };
}

/** Where a limit that was offered comes from. */
function offerWords({ source }: Offer): string {
  if (source === "usual") return "a usual limit (common practice, no source)";
  return source === "this loop" ? "taken from this loop at the setting: put in what the machine needs" : "no usual limit: put in what the machine needs";
}

function makeRow(kind: Kind, session: Session): Row {
  const side = kind.atLeast ? "at least" : "at most";
  const limit = html("input", { type: "text", inputmode: "decimal", autocomplete: "off", "aria-label": `${kind.name}, ${side}` });
  limit.addEventListener("input", () => {
    session.change(withRequirement(session.situation.project, kind.kind, limit.value), `limit of ${kind.kind}`);
  });
  const verdict = html("span", { class: "verdict" });
  const remark = html("p", { class: "remark", hidden: true });
  const problems = html("div", { class: "problem", id: `problem-requirement-${kind.kind}`, hidden: true });
  const off = button(
    "×",
    () => session.change(withoutRequirement(session.situation.project, kind.kind), `requirement ${kind.kind}`),
    { class: "small off", "aria-label": `Switch off ${kind.name}`, title: "Switch off" },
  );
  const head = html(
    "div",
    { class: "requirement" },
    html("span", {}, kind.name),
    html("span", { title: side, "aria-hidden": "true" }, kind.atLeast ? "≥" : "≤"),
    limit,
    html("span", { class: "unit" }, kind.unit),
    off,
    verdict,
  );
  return { element: html("li", {}, head, remark, problems), limit, verdict, remark, problems };
}

function fillRow({ verdict }: Row, kind: Kind, judged: RequirementRecord | null, figure: number | null): void {
  const mark = judged?.met === true ? "✓" : judged?.met === false ? "✗" : "";
  const word = judged?.met === true ? "met" : judged?.met === false ? "not met" : "";
  const here = figure === null ? "" : quantity(figure, kind.unit, 3);
  setAttributes(verdict, { class: `verdict ${judged?.met === false ? "failed" : ""}` });
  verdict.replaceChildren(
    ...(mark ? [html("span", { "aria-hidden": "true" }, mark), ` ${word}`] : []),
    ...(here ? [html("span", { class: "here" }, mark ? `: ${here}` : here)] : []),
  );
}

/** The list of all kinds, each with its switch. */
function kindSwitches(session: Session, offers: Map<RequirementKind, Offer>): Map<RequirementKind, HTMLInputElement> {
  const place = byId("requirement-kinds", HTMLElement);
  const switches = new Map<RequirementKind, HTMLInputElement>();
  for (const group of GROUPS) {
    const kinds = KINDS.filter((kind) => kind.group === group).map((kind) => {
      const input = html("input", { type: "checkbox" });
      switches.set(kind.kind, input);
      input.addEventListener("change", () => {
        const { project, good } = session.situation;
        const offer = offerFor(kind, good?.record ?? null);
        offers.set(kind.kind, offer);
        const changed = input.checked ? withRequirement(project, kind.kind, offer.limit) : withoutRequirement(project, kind.kind);
        session.change(changed, `requirement ${kind.kind}`);
      });
      return html("label", {}, input, ` ${kind.name}`);
    });
    place.append(html("fieldset", {}, html("legend", {}, group), ...kinds));
  }
  return switches;
}

function presetMenu(session: Session): void {
  const menu = byId("presets", HTMLDetailsElement);
  const list = byId("preset-list", HTMLElement);
  for (const { name, source, requirements } of PRESETS) {
    const item = html("button", { type: "button" }, html("strong", {}, name), html("span", {}, source));
    item.addEventListener("click", () => {
      menu.open = false;
      session.change(withRequirements(session.situation.project, requirements), "preset");
      menu.querySelector("summary")?.focus();
    });
    list.append(html("li", {}, item));
  }
}
