/** What an element may hold: other nodes, and text that is only ever text. */
export type Child = Node | string | undefined | false;

type Attributes = Readonly<Record<string, string | number | boolean | undefined>>;

function fill(element: Element, attributes: Attributes, children: readonly Child[]): void {
  for (const [name, value] of Object.entries(attributes)) {
    if (value === undefined || value === false) continue;
    element.setAttribute(name, value === true ? "" : String(value));
  }
  element.append(...children.filter((child) => child !== undefined && child !== false));
}

/** An HTML element with its attributes and children. */
export function el<Tag extends keyof HTMLElementTagNameMap>(
  tag: Tag,
  attributes: Attributes = {},
  ...children: readonly Child[]
): HTMLElementTagNameMap[Tag] {
  const element = document.createElement(tag);
  fill(element, attributes, children);
  return element;
}

/** An SVG element with its attributes and children. */
export function svg<Tag extends keyof SVGElementTagNameMap>(
  tag: Tag,
  attributes: Attributes = {},
  ...children: readonly Child[]
): SVGElementTagNameMap[Tag] {
  const element = document.createElementNS("http://www.w3.org/2000/svg", tag);
  fill(element, attributes, children);
  return element;
}

/** The one element that a selector must find. */
export function need<Found extends Element>(selector: string, within: ParentNode = document): Found {
  const found = within.querySelector<Found>(selector);
  if (found === null) throw new Error(`the page has no ${selector}`);
  return found;
}

/** A button that does something, and says so. */
export function button(label: string, act: () => void, attributes: Attributes = {}): HTMLButtonElement {
  const element = el("button", { type: "button", ...attributes }, label);
  element.addEventListener("click", act);
  return element;
}
