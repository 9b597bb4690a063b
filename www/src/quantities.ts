// The quantities table: one row for every name in the blocks.
import { button, html, setValue } from "./dom.ts";
import { showProblems } from "./problem.ts";
import { rowsOf, withoutQuantity, withQuantity } from "./project.ts";
import type { Session, Situation } from "./session.ts";
import type { Quantity } from "./types.ts";

/** The elements of a row. */
interface Row {
  readonly elements: readonly HTMLTableRowElement[];
  readonly value: HTMLInputElement;
  readonly unit: HTMLInputElement;
  readonly tolerance: HTMLInputElement;
  readonly meaning: HTMLInputElement;
  readonly knobNote: HTMLElement;
  readonly unusedNote: HTMLElement;
  readonly problems: HTMLElement;
}

/** Keeps the table in step with the session. */
export function quantitiesTable(body: HTMLTableSectionElement, session: Session): (situation: Situation) => void {
  const rows = new Map<string, Row>();
  let names: readonly string[] = [];
  return ({ project, answer }) => {
    if (answer) names = knownNames(answer.reading, names);
    const shown = rowsOf(project, names);
    for (const [symbol, row] of rows) {
      if (shown.some((other) => other.row.symbol === symbol)) continue;
      for (const element of row.elements) element.remove();
      rows.delete(symbol);
    }
    const order = shown.flatMap(({ row: quantity, used }) => {
      const row = rows.get(quantity.symbol) ?? makeRow(quantity.symbol, session);
      rows.set(quantity.symbol, row);
      const knob = quantity.symbol === project.knob;
      fillRow(row, quantity, { knob, used: used || knob });
      const wrong = answer?.problems.filter((problem) => problem.field === "quantity" && problem.symbol === quantity.symbol);
      showProblems(row.value, row.problems, quantity.value, wrong ?? []);
      return row.elements;
    });
    place(body, order);
  };
}

/** The names of a reading; those known before stay while a block cannot be read. */
function knownNames(
  reading: { controller: string | null; plant: string | null; sensor: string | null; names: string[] },
  before: readonly string[],
): readonly string[] {
  if (reading.controller !== null && reading.plant !== null && reading.sensor !== null) return reading.names;
  return [...before, ...reading.names.filter((name) => !before.includes(name))];
}

/** Puts the rows into the table in order, moving only those that stand elsewhere: a moved field would lose its caret. */
function place(body: HTMLTableSectionElement, order: readonly HTMLTableRowElement[]): void {
  order.forEach((element, index) => {
    if (body.children[index] !== element) body.insertBefore(element, body.children[index] ?? null);
  });
}

function makeRow(symbol: string, session: Session): Row {
  const field = (name: "value" | "unit" | "tolerance" | "meaning"): HTMLInputElement => {
    const input = html("input", { type: "text", "aria-label": `${name} of ${symbol}`, autocomplete: "off", spellcheck: "false" });
    input.dataset["symbol"] = symbol;
    input.addEventListener("input", () => {
      session.change(withQuantity(session.situation.project, symbol, { [name]: input.value }), `${name} of ${symbol}`);
    });
    return input;
  };
  const value = field("value");
  value.inputMode = "decimal";
  const unit = field("unit");
  const tolerance = field("tolerance");
  const meaning = field("meaning");
  const knobNote = html("span", { class: "note" }, "the knob");
  const remove = button("Remove", () => session.change(withoutQuantity(session.situation.project, symbol), `row ${symbol}`), {
    class: "small",
    "aria-label": `Remove ${symbol}`,
  });
  const unusedNote = html("span", { class: "note" }, "not in the loop", remove);
  const problems = html("div", { class: "problem", id: `problem-quantity-${symbol}`, hidden: true });
  const main = html(
    "tr",
    {},
    html("th", { scope: "row" }, symbol),
    html("td", {}, value, knobNote),
    html("td", {}, unit),
    html("td", {}, tolerance),
    html("td", {}, meaning, unusedNote),
  );
  const below = html("tr", { class: "below" }, html("td", { colspan: 5 }, problems));
  return { elements: [main, below], value, unit, tolerance, meaning, knobNote, unusedNote, problems };
}

function fillRow(row: Row, quantity: Quantity, { knob, used }: { knob: boolean; used: boolean }): void {
  setValue(row.value, quantity.value);
  setValue(row.unit, quantity.unit);
  setValue(row.tolerance, quantity.tolerance);
  setValue(row.meaning, quantity.meaning);
  row.value.hidden = knob;
  row.tolerance.hidden = knob;
  row.knobNote.hidden = !knob;
  row.unusedNote.hidden = used;
}
