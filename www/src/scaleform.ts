// The setting and the controller's scale in the form: what the controller calls it, its unit, and how the knob follows.
import { CONVERSIONS, conversionText, withConversion } from "./conversions.ts";
import { byId, html, setValue } from "./dom.ts";
import { withUnit } from "./format.ts";
import { showProblems } from "./problem.ts";
import { withScale, withSetting } from "./project.ts";
import { settingUnit } from "./scale.ts";
import type { Session, Situation } from "./session.ts";
import type { Problem, Project } from "./types.ts";

/** The typed parts of the scale; each has an input `setting-PART` and, where it can be wrong, a place `setting-PART-problem`. */
const PARTS = ["name", "unit", "factor", "minimum", "maximum", "step"] as const;

/** Connects the setting and its scale with the session. */
export function scaleForm(session: Session): (situation: Situation) => void {
  const parts = [valueField(session), ...PARTS.map((part) => partField(part, session)), directionField(session), summary()];
  conversionChoice(session);
  return (situation) => {
    for (const show of parts) show(situation);
  };
}

type Show = (situation: Situation) => void;

/** Problems of one input of the setting; those that name no input belong to its value. */
function problemsOf(problems: readonly Problem[] | undefined, part: string): Problem[] {
  return problems?.filter(({ field, symbol }) => field === "setting" && (symbol ?? "value") === part) ?? [];
}

function valueField(session: Session): Show {
  const input = byId("setting", HTMLInputElement);
  const unit = byId("setting-unit-shown", HTMLElement);
  const problems = byId("setting-problem", HTMLElement);
  input.addEventListener("input", () => session.change(withSetting(session.situation.project, input.value), "setting"));
  return ({ project, answer, good }) => {
    setValue(input, project.setting.value);
    unit.textContent = good ? settingUnit({ ...good.record, project }) : project.setting.unit;
    showProblems(input, problems, project.setting.value, problemsOf(answer?.problems, "value"));
  };
}

function partField(part: (typeof PARTS)[number], session: Session): Show {
  const input = byId(`setting-${part}`, HTMLInputElement);
  const place = part === "name" || part === "unit" ? null : byId(`setting-${part}-problem`, HTMLElement);
  input.addEventListener("input", () => {
    session.change(withScale(session.situation.project, { [part]: input.value }), `setting ${part}`);
  });
  return ({ project, answer }) => {
    setValue(input, project.setting[part]);
    if (part === "name") input.placeholder = project.knob;
    if (place) showProblems(input, place, project.setting[part], problemsOf(answer?.problems, part));
    // A message must be seen, so the part of the form that holds it opens.
    if (place && !place.hidden) byId("scale", HTMLDetailsElement).open = true;
  };
}

function directionField(session: Session): Show {
  const select = byId("setting-direction", HTMLSelectElement);
  select.addEventListener("change", () => {
    const direction = select.value === "reciprocal" ? "reciprocal" : "proportional";
    session.change(withScale(session.situation.project, { direction }), "setting direction");
  });
  return ({ project }) => setValue(select, project.setting.direction);
}

/** The scale in one line, for when its part of the form is closed. */
function summary(): Show {
  const place = byId("scale-summary", HTMLElement);
  return ({ project }) => {
    place.textContent = scaleText(project);
  };
}

/** "register, 1 … 999, step 1; K = 0.5 × setting". */
export function scaleText({ setting, knob }: Project): string {
  const { name, unit, direction, factor, minimum, maximum, step } = setting;
  const called = withUnit(name.trim() || "setting", unit.trim() ? `in ${unit.trim()}` : "");
  const limits =
    minimum && maximum ? `${minimum} … ${maximum}` : minimum ? `from ${minimum}` : maximum ? `up to ${maximum}` : "";
  const factorText = factor.trim() || "1";
  const relation = `${knob || "knob"} = ${factorText} ${direction === "reciprocal" ? "÷" : "×"} setting`;
  return [[called, limits, step ? `step ${step}` : ""].filter(Boolean).join(", "), relation].join("; ");
}

function conversionChoice(session: Session): void {
  const select = byId("conversion", HTMLSelectElement);
  select.append(html("option", { value: "" }, "choose …"));
  for (const knob of new Set(CONVERSIONS.map((conversion) => conversion.knob))) {
    const options = CONVERSIONS.flatMap((conversion, index) =>
      conversion.knob === knob ? [html("option", { value: index }, conversionText(conversion))] : [],
    );
    select.append(html("optgroup", { label: knob }, ...options));
  }
  select.addEventListener("change", () => {
    const conversion = CONVERSIONS[Number(select.value)];
    const { project, good } = session.situation;
    if (select.value !== "" && conversion) session.change(withConversion(project, conversion, good?.record ?? null), "conversion");
    select.value = "";
  });
}
