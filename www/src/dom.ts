// Making and finding elements. User text only ever becomes text nodes and attribute values.

/** Attributes by name; false, null and undefined leave one out, true writes it empty. */
export type Attributes = { readonly [name: string]: string | number | boolean | null | undefined };

/** What an element can hold. */
export type Content = Node | string | null;

const SVG = "http://www.w3.org/2000/svg";

/** An HTML element. */
export function html<Tag extends keyof HTMLElementTagNameMap>(
  tag: Tag,
  attributes: Attributes = {},
  ...content: readonly Content[]
): HTMLElementTagNameMap[Tag] {
  const element = document.createElement(tag);
  setAttributes(element, attributes);
  element.append(...content.filter((part) => part !== null));
  return element;
}

/** An SVG element. */
export function svg<Tag extends keyof SVGElementTagNameMap>(
  tag: Tag,
  attributes: Attributes = {},
  ...content: readonly Content[]
): SVGElementTagNameMap[Tag] {
  const element = document.createElementNS(SVG, tag);
  setAttributes(element, attributes);
  element.append(...content.filter((part) => part !== null));
  return element;
}

/** Writes attributes. */
export function setAttributes(element: Element, attributes: Attributes): void {
  for (const [name, value] of Object.entries(attributes)) {
    if (value === false || value === null || value === undefined) element.removeAttribute(name);
    else element.setAttribute(name, value === true ? "" : String(value));
  }
}

/** The element of the page with an id; the page is built with the script, so a missing one is a programmer's mistake. */
export function byId<Kind extends Element>(id: string, kind: new () => Kind): Kind {
  const element = document.getElementById(id);
  if (!(element instanceof kind)) throw new Error(`the page has no ${kind.name} with the id ${id}`);
  return element;
}

/** A button. */
export function button(label: string, onPress: () => void, attributes: Attributes = {}): HTMLButtonElement {
  const element = html("button", { type: "button", ...attributes }, label);
  element.addEventListener("click", onPress);
  return element;
}

/** Writes a value into a control, leaving the caret alone where it is the same. */
export function setValue(control: HTMLInputElement | HTMLSelectElement, value: string): void {
  if (control.value !== value) control.value = value;
}

/** Calls back with the width and height of an element, now and whenever they change. */
export function watchSize(element: Element, onSize: (width: number, height: number) => void): void {
  let last = "";
  new ResizeObserver(() => {
    const { width, height } = element.getBoundingClientRect();
    const size = `${Math.round(width)}×${Math.round(height)}`;
    if (size === last || width === 0) return;
    last = size;
    onSize(Math.round(width), Math.round(height));
  }).observe(element);
}

/** The size of the page's letters against the usual 16 px. Pictures grow with it. */
export function letterScale(): number {
  return parseFloat(getComputedStyle(document.documentElement).fontSize) / 16 || 1;
}

/** Runs the newest of many calls once before the next frame is painted. */
export function oncePerFrame<Arguments extends readonly unknown[]>(
  run: (...values: Arguments) => void,
): (...values: Arguments) => void {
  let waiting: Arguments | null = null;
  return (...values) => {
    if (waiting === null) {
      requestAnimationFrame(() => {
        const newest = waiting;
        waiting = null;
        if (newest) run(...newest);
      });
    }
    waiting = values;
  };
}
