// A link that carries a whole project in its `#` part, which browsers send to no server.
//
// After `#project=` stands base64url (RFC 4648, section 5, without padding) of the project's JSON in UTF-8; a leading
// `z` says that the JSON was deflated (RFC 1951) first. JSON itself never encodes to a leading `z`.
import type { Project } from "./types.ts";

const MARK = "#project=";
const DEFLATED = "z";
/** A project as text is never larger; more is an accident or an attack, and is not unpacked. */
export const LARGEST_PROJECT = 2_000_000;

/** The `#` part for a project. */
export async function linkPart(project: Project): Promise<string> {
  const bytes = new TextEncoder().encode(JSON.stringify(project));
  const deflated = await collect(piped(bytes, new CompressionStream("deflate-raw")), Infinity);
  return MARK + DEFLATED + toBase64Url(deflated);
}

/** True where a `#` part claims to carry a project. */
export function carriesProject(part: string): boolean {
  return part.startsWith(MARK);
}

/**
 * The JSON text in a `#` part.
 *
 * Throws an `Error` that says what is wrong with the link.
 */
export async function projectText(part: string): Promise<string> {
  const code = part.slice(MARK.length);
  const deflated = code.startsWith(DEFLATED);
  try {
    const bytes = fromBase64Url(decodeURIComponent(deflated ? code.slice(1) : code));
    const plain = deflated ? await collect(piped(bytes, new DecompressionStream("deflate-raw")), LARGEST_PROJECT) : bytes;
    return new TextDecoder("utf-8", { fatal: true }).decode(plain);
  } catch (error) {
    const reason = error instanceof RangeError ? error.message : "it is cut off or was changed on its way";
    throw new Error(reason);
  }
}

function piped(bytes: Uint8Array<ArrayBuffer>, through: CompressionStream | DecompressionStream): ReadableStream<Uint8Array> {
  return new Blob([bytes]).stream().pipeThrough(through);
}

/** All bytes of a stream, at most so many. */
async function collect(stream: ReadableStream<Uint8Array>, limit: number): Promise<Uint8Array> {
  const reader = stream.getReader();
  const parts: Uint8Array[] = [];
  let length = 0;
  for (let part = await reader.read(); !part.done; part = await reader.read()) {
    parts.push(part.value);
    length += part.value.length;
    if (length > limit) {
      void reader.cancel();
      throw new RangeError(`it unpacks to more than ${limit} bytes`);
    }
  }
  const all = new Uint8Array(length);
  let place = 0;
  for (const part of parts) {
    all.set(part, place);
    place += part.length;
  }
  return all;
}

function toBase64Url(bytes: Uint8Array): string {
  const binary = Array.from(bytes, (byte) => String.fromCharCode(byte)).join("");
  return btoa(binary).replace(/\+/g, "-").replace(/\//g, "_").replace(/=+$/, "");
}

function fromBase64Url(code: string): Uint8Array<ArrayBuffer> {
  if (code === "") throw new RangeError("there is nothing behind “#project=”");
  const binary = atob(code.replace(/-/g, "+").replace(/_/g, "/"));
  return Uint8Array.from(binary, (character) => character.charCodeAt(0));
}
