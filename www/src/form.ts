// The loop form: the blocks as text, the feedback sign, the quantities, the knob and its setting.
import { byId, html, setValue } from "./dom.ts";
import { mathElement } from "./mathml.ts";
import { showProblems } from "./problem.ts";
import { BLOCKS, withBlock, withFeedback, withKnob, withSetting, withTitle } from "./project.ts";
import { quantitiesTable } from "./quantities.ts";
import type { Session, Situation } from "./session.ts";
import type { Field, Problem, Project, Reading } from "./types.ts";

/** Connects the form with the session. */
export function loopForm(session: Session): void {
  const parts = [
    titleField(session),
    ...BLOCKS.map((block) => blockField(block, session)),
    feedbackField(session),
    quantitiesTable(byId("quantities", HTMLTableSectionElement), session),
    knobField(session),
    settingField(session),
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
  select.addEventListener("change", () => session.change(withKnob(session.situation.project, select.value), "knob"));
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

function settingField(session: Session): Show {
  const input = byId("setting", HTMLInputElement);
  const unit = byId("setting-unit", HTMLElement);
  const problems = byId("setting-problem", HTMLElement);
  input.addEventListener("input", () => session.change(withSetting(session.situation.project, input.value), "setting"));
  return ({ project, answer }) => {
    setValue(input, project.setting.value);
    unit.textContent = project.quantities.find((row) => row.symbol === project.knob)?.unit ?? "";
    showProblems(input, problems, project.setting.value, problemsOf(answer?.problems, "setting"));
  };
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
