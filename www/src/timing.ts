// Dead time and sampling in the form.
import { byId, setValue } from "./dom.ts";
import { showProblems } from "./problem.ts";
import { withDeadTime, withSampling } from "./project.ts";
import type { Session, Situation } from "./session.ts";
import type { Discretisation, Problem } from "./types.ts";

/** The typed parts of the sampling; each has an input `sampling-PART` and a place `sampling-PART-problem`. */
const PARTS = ["period", "delay", "prewarp"] as const;

type Show = (situation: Situation) => void;

/** Connects dead time and sampling with the session. */
export function timingForm(session: Session): Show {
  const parts = [deadTimeField(session), switchField(session), methodField(session), ...PARTS.map((part) => partField(part, session))];
  return (situation) => {
    for (const show of parts) show(situation);
  };
}

function deadTimeField(session: Session): Show {
  const input = byId("dead-time", HTMLInputElement);
  const place = byId("dead-time-problem", HTMLElement);
  input.addEventListener("input", () => session.change(withDeadTime(session.situation.project, input.value), "dead time"));
  return ({ project, answer }) => {
    setValue(input, project.loop.deadTime);
    showProblems(input, place, project.loop.deadTime, (answer?.problems ?? []).filter(({ field }) => field === "deadTime"));
  };
}

/** Sampling on or off. What was typed is kept while it is off, so that both can be compared. */
function switchField(session: Session): Show {
  const box = byId("sampled", HTMLInputElement);
  const inputs = byId("sampling", HTMLElement);
  let kept = { period: "", delay: "", method: "tustin" as Discretisation, prewarp: "" };
  box.addEventListener("change", () => {
    session.change(withSampling(session.situation.project, box.checked ? kept : null), "sampling");
  });
  return ({ project }) => {
    const { sampling } = project.loop;
    kept = sampling ?? kept;
    box.checked = sampling !== null;
    inputs.hidden = sampling === null;
  };
}

function methodField(session: Session): Show {
  const select = byId("sampling-method", HTMLSelectElement);
  const prewarp = byId("sampling-prewarp-field", HTMLElement);
  select.addEventListener("change", () => change(session, { method: select.value as Discretisation }, "conversion"));
  return ({ project }) => {
    const { sampling } = project.loop;
    if (!sampling) return;
    setValue(select, sampling.method);
    prewarp.hidden = sampling.method !== "tustin-prewarped";
  };
}

function partField(part: (typeof PARTS)[number], session: Session): Show {
  const input = byId(`sampling-${part}`, HTMLInputElement);
  const place = byId(`sampling-${part}-problem`, HTMLElement);
  input.addEventListener("input", () => change(session, { [part]: input.value }, `sampling ${part}`));
  return ({ project, answer }) => {
    const text = project.loop.sampling?.[part] ?? "";
    setValue(input, text);
    showProblems(input, place, text, problemsOf(answer?.problems, part));
  };
}

function change(session: Session, part: Parameters<typeof withSampling>[1], what: string): void {
  const { project } = session.situation;
  const { sampling } = project.loop;
  if (sampling) session.change(withSampling(project, { ...sampling, ...part }), what);
}

/** Problems of one input of the sampling; those that name no input belong to the period. */
function problemsOf(problems: readonly Problem[] | undefined, part: string): Problem[] {
  return problems?.filter(({ field, symbol }) => field === "sampling" && (symbol ?? "period") === part) ?? [];
}
