// A project document on its way in: what can be said against it before the core reads it.
import { LARGEST_PROJECT } from "./link.ts";
import type { Project } from "./types.ts";

/** A document that cannot be opened; the message says why. */
export class Refusal extends Error {}

/**
 * A project from JSON text or an object. What it holds is checked by the core, which refuses a wrong document with a
 * problem of the field `document`.
 *
 * Throws a `Refusal` where it is too large, too deeply nested or no JSON object.
 */
export function parsed(document: unknown): Project {
  const text = textFrom(document);
  if (text.length > LARGEST_PROJECT) {
    throw new Refusal(`it has ${Math.ceil(text.length / 1e6)} MB; a project has at most ${LARGEST_PROJECT / 1e6} MB`);
  }
  try {
    const value: unknown = JSON.parse(text);
    // The way to the worker is text again, which some engines make by recursion: too deep a nesting is found here.
    JSON.stringify(value);
    if (typeof value === "object" && value !== null && !Array.isArray(value)) return value as Project;
  } catch (error) {
    throw new Refusal(error instanceof SyntaxError ? "it is no JSON text, so no Stayband project, or it is cut off" : "it is nested too deeply for a project");
  }
  throw new Refusal("it is no JSON object, so no Stayband project");
}

/** The project of an entry of the store; null where it is damaged. */
export function parsedEntry(value: unknown): Project | null {
  try {
    const project = parsed(value);
    return typeof project.format === "string" && typeof (project.title ?? "") === "string" ? project : null;
  } catch {
    return null;
  }
}

/** An object goes through text as well: what the caller does to it later is then of no effect. */
function textFrom(document: unknown): string {
  if (typeof document === "string") return document;
  try {
    return JSON.stringify(document) ?? "";
  } catch {
    throw new Refusal("it is nested too deeply for a project, or in itself");
  }
}
