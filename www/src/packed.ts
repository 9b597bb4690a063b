// The packed parts of the page: the pack program writes them into elements that the browser does not run.

/** The text of a part of the page. */
export function partText(id: string): string {
  const text = document.getElementById(id)?.textContent;
  if (!text) throw new Error(`The page is damaged: its part "${id}" is missing.`);
  return text;
}

/** The unpacked bytes of a part: a raw deflate stream written in base64. */
export async function unpacked(id: string): Promise<Response> {
  const bytes = Uint8Array.from(atob(partText(id)), (character) => character.charCodeAt(0));
  const stream = new Blob([bytes]).stream().pipeThrough(new DecompressionStream("deflate-raw"));
  return new Response(stream);
}
