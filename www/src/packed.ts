// The packed parts of the page: the pack program writes them into elements that the browser does not run.

/** A character stands for its code less this, and less one more for each of &, < and > (38, 60, 62) below it. */
const FIRST = 33;
/** Two characters hold 13 bits, as the number first · 91 + second. */
const CHARACTERS = 91;
const BITS = 13;

/** The element of a part of the page. */
function part(id: string): HTMLElement {
  const element = document.getElementById(id);
  if (!element?.textContent) throw new Error(`The page is damaged: its part "${id}" is missing.`);
  return element;
}

/** The text of a part of the page. */
export function partText(id: string): string {
  return part(id).textContent ?? "";
}

/** The unpacked bytes of a part: a raw deflate stream, written in printable characters. */
export function unpacked(id: string): Response {
  const element = part(id);
  const bytes = bytesOf(element.textContent ?? "", Number(element.dataset["bytes"]));
  return new Response(new Blob([bytes]).stream().pipeThrough(new DecompressionStream("deflate-raw")));
}

/** So many bytes from printable text. */
export function bytesOf(text: string, length: number): Uint8Array<ArrayBuffer> {
  const bytes = new Uint8Array(length);
  const number = (index: number): number => {
    const code = text.charCodeAt(index);
    return code - FIRST - Number(code > 38) - Number(code > 60) - Number(code > 62);
  };
  let [at, waiting, count] = [0, 0, 0];
  for (let index = 0; index + 1 < text.length; index += 2) {
    waiting |= (number(index) * CHARACTERS + number(index + 1)) << count;
    count += BITS;
    for (; count >= 8 && at < length; count -= 8) {
      bytes[at++] = waiting & 255;
      waiting >>>= 8;
    }
  }
  if (at < length && count > 0) bytes[at] = waiting & 255;
  return bytes;
}
