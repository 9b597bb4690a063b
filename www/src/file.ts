// Saving to and opening from a file.
import { LARGEST_PROJECT } from "./link.ts";
import type { Project } from "./types.ts";

/** How the name of a project's file ends. */
const ENDING = ".stayband.json";

/** A file name from a title: letters, digits and a few signs that every file system takes. */
export function fileName(title: string, ending: string = ENDING): string {
  const name = title
    .normalize("NFC")
    .replace(/[^\p{L}\p{N}()_.,-]+/gu, " ")
    .trim()
    .replace(/^[.\s]+/, "")
    .slice(0, 80)
    .trim();
  return (name || "loop") + ending;
}

/** The project as it is written into a file. */
export function fileDocument(project: Project): string {
  return `${JSON.stringify(project, null, 2)}\n`;
}

/** Hands a text to the browser as a download. */
export function download(name: string, type: string, text: string): void {
  const blob = new Blob([text], { type });
  const link = document.createElement("a");
  link.href = URL.createObjectURL(blob);
  link.download = name;
  link.click();
  // The browser reads the blob after this turn; a minute is ample, and then the memory is free again.
  setTimeout(() => URL.revokeObjectURL(link.href), 60_000);
}

/**
 * The text of a file the user picks; null where none is picked.
 *
 * Rejects with an `Error` that says what is wrong with the file.
 */
export function pickFile(): Promise<string | null> {
  return new Promise((resolve, reject) => {
    const input = document.createElement("input");
    input.type = "file";
    input.accept = ".json,application/json";
    input.addEventListener("cancel", () => resolve(null));
    input.addEventListener("change", () => {
      const file = input.files?.[0];
      if (file) fileText(file).then(resolve, reject);
      else resolve(null);
    });
    input.click();
  });
}

/** The text of a file, if it is not too large for a project. */
export async function fileText(file: File): Promise<string> {
  if (file.size > LARGEST_PROJECT) {
    throw new Error(`“${file.name}” has ${Math.ceil(file.size / 1e6)} MB; a project has at most ${LARGEST_PROJECT / 1e6} MB`);
  }
  return file.text();
}
