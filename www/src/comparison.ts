// Another project's ranges below those of the present one, on the same ruler.
import { button, byId } from "./dom.ts";
import { Engine } from "./engine.ts";
import { say } from "./message.ts";
import { settingName, settingUnit } from "./scale.ts";
import { problemText, type Session } from "./session.ts";
import type { Project, Record as Findings } from "./types.ts";

/** The comparison under the ruler. */
export class Comparison {
  readonly #session: Session;
  readonly #show: (record: Findings | null) => void;
  readonly #bar = byId("comparison", HTMLElement);
  readonly #words = byId("comparison-words", HTMLElement);
  #other: Findings | null = null;

  /** `show` draws the lanes of the other record, or takes them away. */
  constructor(session: Session, show: (record: Findings | null) => void) {
    this.#session = session;
    this.#show = show;
    this.#bar.append(button("End comparison", () => this.#set(null), { class: "small" }));
    session.onChange(() => this.#say());
  }

  /** Answers another project in an engine of its own, so that the present one is not held up, and shows its ranges. */
  async begin(project: Project): Promise<void> {
    const engine = new Engine();
    try {
      const reply = await engine.solve(project);
      const { record = null, problems = [] } = reply?.answer ?? {};
      if (record) this.#set(record);
      else say(`“${project.title}” cannot be compared: ${problemText(problems)}.`, "trouble");
    } catch (error) {
      say(`“${project.title}” cannot be compared: ${String(error)}`, "trouble");
    } finally {
      engine.end();
    }
  }

  #set(other: Findings | null): void {
    this.#other = other;
    this.#show(other);
    this.#say();
  }

  #say(): void {
    const [other, here] = [this.#other, this.#session.situation.good?.record];
    this.#bar.hidden = other === null;
    if (!other) return;
    const differs = here && scaleWords(here) !== scaleWords(other);
    const warning = differs ? ` Its setting is ${scaleWords(other)}, this one’s ${scaleWords(here)}: the same place on the ruler is not the same knob.` : "";
    this.#words.textContent = `“Other” is ${other.project.title.trim() || "the untitled project"}.${warning}`;
  }
}

/** A scale in words, by which two can be told apart: "proportional band in %, factor ÷ setting". */
function scaleWords(record: Findings): string {
  const { direction, factor } = record.scale;
  const unit = settingUnit(record).trim();
  const knob = direction === "proportional" ? `${factor} × setting` : `${factor} ÷ setting`;
  return `${settingName(record)}${unit && ` in ${unit}`} (knob = ${knob})`;
}
