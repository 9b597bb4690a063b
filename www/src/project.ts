// Changes of the project. Each returns a new project and leaves the old one as it was, so that it can be undone.
import type {
  Feedback,
  LoopText,
  Project,
  Quantity,
  Requirement,
  RequirementKind,
  SamplingText,
  Setting,
  SheetText,
  SiteCheckText,
  StepUpText,
} from "./types.ts";

/** The blocks that are typed. */
export type BlockName = "controller" | "plant" | "sensor";

/** All of them, in the order of the form. */
export const BLOCKS: readonly BlockName[] = ["controller", "plant", "sensor"];

/** The name and version of the project document. */
export const PROJECT_FORMAT = "stayband-project/1";

/** A setting nobody has chosen, on a scale where it is the knob itself. */
const PLAIN_SETTING: Setting = {
  value: "",
  name: "",
  unit: "",
  direction: "proportional",
  factor: "",
  minimum: "",
  maximum: "",
  step: "",
};

/** A sampling nobody has typed anything into. */
const EMPTY_SAMPLING: SamplingText = { period: "", delay: "", method: "tustin", prewarp: "" };

/** Nothing that the sheet, the step-up plan and the site check ask for. */
const PLAIN_SHEET: SheetText = { machine: "", revision: "", date: "", preparedBy: "", checkedBy: "" };
const PLAIN_STEP_UP: StepUpText = { start: "", ratio: "" };
const PLAIN_SITE_CHECK: SiteCheckText = { seen: "step", setting: "", period: "", overshoot: "" };

/** A quantity of which only the symbol is known. */
const PLAIN_QUANTITY: Omit<Quantity, "symbol"> = { value: "", unit: "", meaning: "", tolerance: "" };

/** A project nobody has typed anything into. */
export function emptyProject(): Project {
  return {
    format: PROJECT_FORMAT,
    title: "",
    loop: { controller: "", plant: "", sensor: "1", feedback: "negative", deadTime: "", sampling: null },
    quantities: [],
    knob: "",
    setting: PLAIN_SETTING,
    requirements: [],
    sheet: PLAIN_SHEET,
    stepUp: PLAIN_STEP_UP,
    siteCheck: PLAIN_SITE_CHECK,
  };
}

/** With another title. */
export function withTitle(project: Project, title: string): Project {
  return { ...project, title };
}

/** With another text for a block. */
export function withBlock(project: Project, block: BlockName, text: string): Project {
  return withLoop(project, { [block]: text });
}

/** With another feedback sign. */
export function withFeedback(project: Project, feedback: Feedback): Project {
  return withLoop(project, { feedback });
}

/** With another dead time. */
export function withDeadTime(project: Project, deadTime: string): Project {
  return withLoop(project, { deadTime });
}

/** With another part of the sampling, or switched on or off. */
export function withSampling(project: Project, part: Partial<SamplingText> | null): Project {
  return withLoop(project, { sampling: part && { ...EMPTY_SAMPLING, ...part } });
}

/** With another setting. */
export function withSetting(project: Project, value: string): Project {
  return { ...project, setting: { ...project.setting, value } };
}

/** With another scale of the controller. */
export function withScale(project: Project, part: Partial<Setting>): Project {
  return { ...project, setting: { ...project.setting, ...part } };
}

/** With a requirement, new or with another limit. */
export function withRequirement(project: Project, kind: RequirementKind, limit: string): Project {
  const known = project.requirements.some((requirement) => requirement.kind === kind);
  const requirements = known
    ? project.requirements.map((requirement) => (requirement.kind === kind ? { kind, limit } : requirement))
    : [...project.requirements, { kind, limit }];
  return { ...project, requirements };
}

/** With several requirements at once. */
export function withRequirements(project: Project, requirements: readonly Requirement[]): Project {
  return requirements.reduce((changed, { kind, limit }) => withRequirement(changed, kind, limit), project);
}

/** Without a requirement. */
export function withoutRequirement(project: Project, kind: RequirementKind): Project {
  return { ...project, requirements: project.requirements.filter((requirement) => requirement.kind !== kind) };
}

/** With another value, unit or meaning for a quantity; a row is made where there is none. */
export function withQuantity(project: Project, symbol: string, part: Partial<Omit<Quantity, "symbol">>): Project {
  const known = project.quantities.some((row) => row.symbol === symbol);
  const rows = known ? project.quantities : [...project.quantities, { ...PLAIN_QUANTITY, symbol }];
  return { ...project, quantities: rows.map((row) => (row.symbol === symbol ? { ...row, ...part } : row)) };
}

/** Without the row of a quantity. */
export function withoutQuantity(project: Project, symbol: string): Project {
  return { ...project, quantities: project.quantities.filter((row) => row.symbol !== symbol) };
}

/**
 * With another knob. `present`, the value the old knob was set to, becomes its value in the table, and the value of the
 * new one becomes the setting, on a plain scale: the loop stays the same loop, seen from another knob.
 */
export function withKnob(project: Project, knob: string, present: string = project.setting.value): Project {
  if (knob === project.knob) return project;
  const value = project.quantities.find((row) => row.symbol === knob)?.value ?? "";
  const kept = project.knob === "" ? project : withQuantity(project, project.knob, { value: present });
  const moved = value === "" ? kept : withQuantity(kept, knob, { value: "" });
  return { ...moved, knob, setting: { ...PLAIN_SETTING, value } };
}

/** The names of the loop that have no row yet get one in the table; rows of names that are gone stay while they hold something. */
export function rowsOf(project: Project, names: readonly string[]): { row: Quantity; used: boolean }[] {
  const rowOf = (symbol: string): Quantity =>
    project.quantities.find((row) => row.symbol === symbol) ?? { ...PLAIN_QUANTITY, symbol };
  const unused = project.quantities.filter((row) => !names.includes(row.symbol) && (row.value || row.unit || row.tolerance || row.meaning));
  return [...names.map((name) => ({ row: rowOf(name), used: true })), ...unused.map((row) => ({ row, used: false }))];
}

/** A project as an older or scripted document may give it, with everything that may be left out filled in. */
export function completed(given: Project): Project {
  const empty = emptyProject();
  return {
    format: given.format,
    title: given.title ?? empty.title,
    loop: { ...empty.loop, ...given.loop, sampling: given.loop.sampling ? { ...EMPTY_SAMPLING, ...given.loop.sampling } : null },
    quantities: (given.quantities ?? []).map((row) => ({ ...PLAIN_QUANTITY, ...row })),
    knob: given.knob,
    setting: { ...empty.setting, ...given.setting },
    requirements: given.requirements ?? empty.requirements,
    sheet: { ...empty.sheet, ...given.sheet },
    stepUp: { ...empty.stepUp, ...given.stepUp },
    siteCheck: { ...empty.siteCheck, ...given.siteCheck },
  };
}

/** The setting as a number; null where none can be read. */
export function settingNumber(project: Project): number | null {
  const text = project.setting.value.trim().replace("−", "-");
  const value = Number(text);
  return text === "" || !Number.isFinite(value) ? null : value;
}

function withLoop(project: Project, part: Partial<LoopText>): Project {
  return { ...project, loop: { ...project.loop, ...part } };
}
