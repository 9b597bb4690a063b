// What leaves the page besides the project: the record, curves as tables, pictures, the answer as text.
import { answersTable, csvText, frequencyTable, locusTable } from "./csv.ts";
import { byId } from "./dom.ts";
import { drawingText } from "./drawing.ts";
import { download, fileName } from "./file.ts";
import { menu } from "./menu.ts";
import { say } from "./message.ts";
import type { Paper } from "./paper.ts";
import type { Good, Session } from "./session.ts";
import { answerText } from "./words.ts";

/** A document: its name in the menu, the end of its file's name, its type, and how it is made. */
interface Export {
  readonly name: string;
  readonly ending: string;
  readonly type: string;
  make(good: Good, paper: Paper): string | Promise<string>;
}

const CSV = "text/csv";
const SVG = "image/svg+xml";

/** A picture of the page as a document. */
const picture = (name: string, ending: string, id: string): Export => ({
  name,
  ending,
  type: SVG,
  make: ({ record }) => {
    const element = byId(id, SVGSVGElement);
    return drawingText(element, `${record.project.title}: ${element.getAttribute("aria-label") ?? name}`);
  },
});

const EXPORTS: readonly Export[] = [
  {
    name: "Record, JSON",
    ending: ".record.json",
    type: "application/json",
    // With the sheet's part, which is worked out only when asked for.
    make: async ({ record }, paper) => `${JSON.stringify((await paper.refresh()) ?? record, null, 2)}\n`,
  },
  { name: "Locus, CSV", ending: ".locus.csv", type: CSV, make: ({ record, branches }) => csvText(locusTable(record, branches)) },
  { name: "Answers over time, CSV", ending: ".answers.csv", type: CSV, make: ({ record }) => csvText(answersTable(record)) },
  { name: "Open loop over frequency, CSV", ending: ".frequency.csv", type: CSV, make: ({ record }) => csvText(frequencyTable(record)) },
  picture("Ruler, SVG", ".ruler.svg", "ruler"),
  picture("Locus, SVG", ".locus.svg", "plane"),
  picture("The answer shown, SVG", ".answer.svg", "response"),
];

/** Fills the menu of exports. */
export function exportMenu(session: Session, paper: Paper): void {
  // What is exported belongs together, so there is nothing to export while the project waits for its own answer.
  const withAnswer = (act: (good: Good) => void): void => {
    const { good, stale } = session.situation;
    if (good && !stale) act(good);
    else say("There is no answer to this loop yet, so nothing to export. Put right what is marked first.", "trouble");
  };
  menu("export", [
    { name: "Copy the answer as text", act: () => withAnswer((good) => void copy(answerText(good.record), "The answer is copied.")) },
    ...EXPORTS.map((one) => ({
      name: one.name,
      act: () => withAnswer((good) => void save(one, good, paper)),
    })),
  ]);
}

async function save(one: Export, good: Good, paper: Paper): Promise<void> {
  download(fileName(good.record.project.title, one.ending), one.type, await one.make(good, paper));
}

/** Copies a text, or shows it where the browser does not let the page copy. */
export async function copy(text: string, done: string): Promise<void> {
  try {
    await navigator.clipboard.writeText(text);
    say(done);
  } catch {
    say("This browser does not let the page copy. Copy it from here:", "news", text);
  }
}
