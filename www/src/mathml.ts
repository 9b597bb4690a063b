// Typeset mathematics from the core. Only MathML is let through, whatever the text may hold.

const MATHML = "http://www.w3.org/1998/Math/MathML";

/** The `math` element in a text; null where the text holds anything else. */
export function mathElement(text: string): Element | null {
  const parsed = new DOMParser().parseFromString(text, "text/html");
  const [root, ...more] = parsed.body.children;
  if (!root || more.length > 0 || root.localName !== "math" || !isMathematics(root)) return null;
  return document.importNode(root, true);
}

/** True where an element and all in it are MathML and carry no script. */
function isMathematics(root: Element): boolean {
  return [root, ...root.querySelectorAll("*")].every(
    (element) =>
      element.namespaceURI === MATHML &&
      [...element.attributes].every(({ name }) => !name.startsWith("on") && !name.includes("href") && name !== "style"),
  );
}
