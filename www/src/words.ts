// The answer as plain text, for a mail or a log book.
import { answerSentence, plain, settingSentence, stabilitySentence, suggestionReason, typedSetting } from "./answer.ts";
import { withUnit } from "./format.ts";
import { limitWords } from "./reason.ts";
import { nameInSentence } from "./requirements.ts";
import { settingUnit } from "./scale.ts";
import type { Record as Findings } from "./types.ts";

/** Loop, answer, figures and where they come from, a line each. */
export function answerText(record: Findings): string {
  const { project, permitted, requirements, program, notices } = record;
  const { controller, plant, sensor, feedback } = project.loop;
  const suggested = permitted.suggested ? withUnit(typedSetting(permitted.suggested.setting), settingUnit(record)) : null;
  const lines = [
    project.title,
    `Controller ${controller}, plant ${plant}, sensor ${sensor}, ${feedback} feedback; knob ${project.knob}`,
    project.quantities.filter(({ value }) => value !== "").map(({ symbol, value, unit }) => `${symbol} = ${withUnit(value, unit)}`).join(", "),
    "",
    plain(answerSentence(record)),
    suggested === null ? "" : `Suggested: ${suggested}. ${suggestionReason(record)}`,
    requirements.length > 0 ? plain(stabilitySentence(record)) : "",
    settingSentence(record),
    ...requirements.map((requirement) => `Required: ${nameInSentence(requirement.kind)} ${limitWords(requirement)}.`),
    ...notices.map(({ text }) => `Note: ${text}`),
    "",
    `Stayband ${program.version}, build ${program.hash ?? "unknown"}. A model is not the machine.`,
  ];
  // An empty line stands only between the parts.
  return `${lines.filter((line, index) => line !== "" || index === 3 || index === lines.length - 2).join("\n").trim()}\n`;
}
