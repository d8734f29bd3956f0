/** Markup that is safe to print as it stands: made by {@link html} only. */
export class Markup {
  readonly text: string;
  constructor(text: string) {
    this.text = text;
  }
  toString(): string {
    return this.text;
  }
}

/** What may stand in a hole of an {@link html} template. */
export type Insert = Markup | string | number | undefined | false | readonly Insert[];

/**
 * The five characters that HTML and SVG give a meaning to; control characters; the characters that turn
 * the direction of the text that follows them; halves of a surrogate pair.
 */
const UNSAFE =
  /[&<>"']|[\u0000-\u0008\u000b-\u001f\u007f-\u009f\u202a-\u202e\u2066-\u2069\ufffe\uffff]|\p{Surrogate}/gu;

const ENTITIES: Readonly<Record<string, string>> = {
  "&": "&amp;",
  "<": "&lt;",
  ">": "&gt;",
  '"': "&quot;",
  "'": "&#39;",
};

/**
 * Text made harmless for HTML, SVG and quoted attributes.
 *
 * A character that has no place in a printed name is shown as U+FFFD, so that a reader sees that
 * something odd stood there.
 */
export function escapeText(text: string): string {
  return text.replace(UNSAFE, (character) => ENTITIES[character] ?? "\ufffd");
}

/** The same without the entities: for text that a script sets as text. */
export function plainText(text: string): string {
  return text.replace(UNSAFE, (character) => (ENTITIES[character] === undefined ? "\ufffd" : character));
}

function render(insert: Insert): string {
  if (insert === undefined || insert === false) return "";
  if (insert instanceof Markup) return insert.text;
  if (typeof insert === "string") return escapeText(insert);
  if (typeof insert === "number") {
    // A missing value must have become a dash with its reason before it comes here.
    if (!Number.isFinite(insert)) throw new RangeError(`a template was handed the number ${insert}`);
    return String(insert);
  }
  return insert.map(render).join("");
}

/**
 * A template whose holes are escaped: every string from outside is text, never markup.
 *
 * Holes may stand in element content and inside quoted attributes, nowhere else.
 *
 * @throws RangeError for a number that is not finite
 * @example
 * html`<td>${"<b>"}</td>`.text; // "<td>&lt;b&gt;</td>"
 */
export function html(strings: TemplateStringsArray, ...inserts: readonly Insert[]): Markup {
  let text = strings[0] ?? "";
  for (let i = 0; i < inserts.length; i += 1) text += render(inserts[i]) + (strings[i + 1] ?? "");
  return new Markup(text);
}

/** Several pieces with something between them. */
export function joined(pieces: readonly Insert[], between: string): Markup {
  return new Markup(pieces.map(render).join(escapeText(between)));
}
