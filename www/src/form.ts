// The loop form: the blocks as text, the feedback sign, the quantities, the knob; its setting and the requirements.
import { fromNumber, roundDigits, typedText } from "./decimal.ts";
import { byId, html, setValue } from "./dom.ts";
import { mathElement } from "./mathml.ts";
import { showProblems } from "./problem.ts";
import { BLOCKS, withBlock, withFeedback, withKnob, withTitle } from "./project.ts";
import { quantitiesTable } from "./quantities.ts";
import { requirementPanel } from "./requirementsform.ts";
import { isPlain } from "./scale.ts";
import { scaleForm } from "./scaleform.ts";
import type { Session, Situation } from "./session.ts";
import { timingForm } from "./timing.ts";
import type { Field, Problem, Project, Reading } from "./types.ts";

/** Connects the form with the session. */
export function loopForm(session: Session): void {
  const parts = [
    titleField(session),
    ...BLOCKS.map((block) => blockField(block, session)),
    feedbackField(session),
    timingForm(session),
    quantitiesTable(byId("quantities", HTMLTableSectionElement), session),
    knobField(session),
    scaleForm(session),
    requirementPanel(session),
    loopProblems(),
  ];
  session.onChange((situation) => {
    for (const show of parts) show(situation);
  });
}

type Show = (situation: Situation) => void;

function titleField(session: Session): Show {
  const input = byId("title", HTMLInputElement);
  input.addEventListener("input", () => session.change(withTitle(session.situation.project, input.value), "title"));
  return ({ project }) => {
    setValue(input, project.title);
    document.title = project.title ? `${project.title} · Stayband` : "Stayband";
  };
}

function blockField(block: (typeof BLOCKS)[number], session: Session): Show {
  const input = byId(block, HTMLInputElement);
  const reading = byId(`${block}-reading`, HTMLElement);
  const problems = byId(`${block}-problem`, HTMLElement);
  input.addEventListener("input", () => session.change(withBlock(session.situation.project, block, input.value), block));
  let shown: string | null = null;
  return ({ project, answer }) => {
    setValue(input, project.loop[block]);
    const typeset = answer?.reading[block] ?? null;
    if (typeset !== shown) {
      const mathematics = typeset === null ? null : mathElement(typeset);
      reading.replaceChildren(...(mathematics ? ["read as ", mathematics] : []));
      shown = typeset;
    }
    showProblems(input, problems, project.loop[block], problemsOf(answer?.problems, block));
  };
}

function feedbackField(session: Session): Show {
  const select = byId("feedback", HTMLSelectElement);
  select.addEventListener("change", () => {
    session.change(withFeedback(session.situation.project, select.value === "positive" ? "positive" : "negative"), "feedback");
  });
  return ({ project }) => setValue(select, project.loop.feedback);
}

function knobField(session: Session): Show {
  const select = byId("knob", HTMLSelectElement);
  const problems = byId("knob-problem", HTMLElement);
  select.addEventListener("change", () => {
    const { project } = session.situation;
    session.change(withKnob(project, select.value, knobText(session.situation)), "knob");
  });
  let listed = "";
  return ({ project, answer }) => {
    const names = answer?.reading.names ?? [];
    const options = names.includes(project.knob) ? names : [project.knob, ...names];
    if (options.join(" ") !== listed) {
      select.replaceChildren(...options.map((name) => html("option", { value: name }, name || "choose …")));
      listed = options.join(" ");
    }
    setValue(select, project.knob);
    showProblems(select, problems, project.knob, problemsOf(answer?.problems, "knob"));
    if (answer && wantsKnob(project, answer.reading)) queueMicrotask(() => amendKnob(session, names));
  };
}

/** True where a readable loop has names, but its knob was never chosen, or chosen for a name that is gone and not set. */
function wantsKnob(project: Project, reading: Reading): boolean {
  const readable = reading.controller !== null && reading.plant !== null && reading.sensor !== null;
  const chosen = project.knob !== "" && (reading.names.includes(project.knob) || project.setting.value !== "");
  return readable && !chosen;
}

/** Takes the first name without a value as the knob. */
function amendKnob(session: Session, names: readonly string[]): void {
  const { project } = session.situation;
  const valued = project.quantities.filter((row) => row.value !== "").map((row) => row.symbol);
  const first = names.find((name) => !valued.includes(name));
  if (first !== undefined) session.amend({ ...project, knob: first });
}

/** Digits of a knob value that is taken over from a setting on another scale. */
const KNOB_DIGITS = 12;

/** The knob's present value as it is typed into the table. */
function knobText({ project, good }: Situation): string {
  const knob = good?.record.closedLoop?.knob;
  if (knob === undefined || good === null || isPlain(good.record.scale)) return project.setting.value;
  return typedText(roundDigits(fromNumber(knob), KNOB_DIGITS, "nearest"));
}

/** Problems of the loop as a whole, and of the document, which have no field of their own; and rows that have none. */
function loopProblems(): Show {
  const place = byId("loop-problem", HTMLElement);
  const form = byId("loop", HTMLElement);
  return ({ answer }) => {
    const found = answer?.problems.filter((problem) => problem.field === "loop" || problem.field === "document");
    showProblems(form, place, "", found ?? []);
    form.removeAttribute("aria-invalid");
  };
}

function problemsOf(problems: readonly Problem[] | undefined, field: Field): Problem[] {
  return problems?.filter((problem) => problem.field === field) ?? [];
}
