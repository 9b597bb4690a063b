// A picture of the page as a file of its own: SVG whose looks stand in the elements, so that it needs no style sheet.

/** What is drawn by the style sheet. */
const LOOKS = [
  "fill",
  "fill-opacity",
  "stroke",
  "stroke-width",
  "stroke-dasharray",
  "stroke-linecap",
  "stroke-linejoin",
  "opacity",
  "paint-order",
  "font-family",
  "font-size",
  "font-weight",
  "text-anchor",
];
/** What is there for the pointer or moves with it. */
const FOR_THE_POINTER = ".catcher, .target, .halo, .hover, .reading-line";
/** What a drawing by itself has no use for. */
const ATTRIBUTES = ["id", "class", "role", "tabindex", "aria-label", "aria-valuemin", "aria-valuemax", "aria-valuenow", "aria-valuetext"];
const NAMESPACE = "http://www.w3.org/2000/svg";

/** The picture as SVG text, in light colours, on a ground of its own. */
export function drawingText(picture: SVGSVGElement, title: string): string {
  const root = document.documentElement;
  root.classList.add("light");
  const copy = picture.cloneNode(true) as SVGSVGElement;
  const originals = picture.querySelectorAll("*");
  copy.querySelectorAll("*").forEach((element, index) => {
    const original = originals[index];
    if (original) takeLooks(element, original);
  });
  const ground = getComputedStyle(document.body).getPropertyValue("--sheet").trim();
  root.classList.remove("light");
  for (const element of copy.querySelectorAll(FOR_THE_POINTER)) element.remove();
  const { width, height } = picture.viewBox.baseVal;
  const back = document.createElementNS(NAMESPACE, "rect");
  for (const [name, value] of Object.entries({ width: String(width), height: String(height), fill: ground })) back.setAttribute(name, value);
  const name = document.createElementNS(NAMESPACE, "title");
  name.textContent = title;
  copy.prepend(name, back);
  for (const attribute of ATTRIBUTES) copy.removeAttribute(attribute);
  return `<?xml version="1.0" encoding="UTF-8"?>\n${new XMLSerializer().serializeToString(copy)}\n`;
}

/** Writes the looks into the element, and takes off what only the page needs. Patterns and clips keep their names. */
function takeLooks(element: Element, original: Element): void {
  const style = getComputedStyle(original);
  for (const name of LOOKS) {
    const value = style.getPropertyValue(name);
    if (value !== "") element.setAttribute(name, value);
  }
  for (const attribute of ATTRIBUTES) {
    if (attribute !== "id" || !/^(pattern|clipPath)$/.test(element.localName)) element.removeAttribute(attribute);
  }
}
