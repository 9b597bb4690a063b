// The first script of the page: unpacks the page's own script and runs it. The policy of the page names the hashes of both.
import { unpacked } from "./packed.ts";

/** What this page needs; the same as DESIGN.md's baseline. */
const NEEDS = "Stayband needs Chrome or Edge 109, Firefox 115, Safari 16.4, or a newer one of these.";

async function start(): Promise<void> {
  const script = document.createElement("script");
  script.textContent = await unpacked("page-script").text();
  document.body.append(script);
}

start().catch((error: unknown) => {
  const text = document.createElement("p");
  text.setAttribute("role", "alert");
  text.textContent = `The page could not start: ${error instanceof Error ? error.message : String(error)}. ${NEEDS}`;
  document.body.prepend(text);
});
