import type { GaugeRole } from "../input.ts";
import { html, type Markup } from "../text/html.ts";
import { svgNumber } from "../text/numbers.ts";

/** What a reader is told of a gauge's part in the figures. */
export const ROLE_WORDS: Readonly<Record<GaugeRole, string>> = {
  used: "used",
  doubted: "doubted",
  "left-out": "left out",
};

/** Shapes about the origin, ten units across: they stay apart without colour. */
const SHAPES: Readonly<Record<GaugeRole, Markup>> = {
  used: html`<circle r="5"/>`,
  doubted: html`<path d="M0 -6.2L6 4.8H-6z"/>`,
  "left-out": html`<path d="M-4.5 -4.5L4.5 4.5M4.5 -4.5L-4.5 4.5"/>`,
};

function placeKey(key: string | undefined): Markup | false {
  return key !== undefined && key !== "" && html` data-place="${key}"`;
}

/** What a pointer or a finger meets of a mark that can be picked: more than the thin lines of it. */
function hit(key: string | undefined): Markup | false {
  return key !== undefined && key !== "" && html`<circle r="8" class="hit"/>`;
}

/**
 * The mark of a gauge at a place of a chart or map, with its words on hover, if any.
 *
 * @param key - of the place it stands for, by which the page's script links marks
 */
export function gaugeMark(role: GaugeRole, x: number, y: number, words: string, key?: string): Markup {
  return html`<g class="gauge ${role}"${placeKey(key)} transform="translate(${svgNumber(x)} ${svgNumber(y)})">${words !== "" && html`<title>${words}</title>`}${
    role === "left-out" && html`<path class="casing" d="M-4.5 -4.5L4.5 4.5M4.5 -4.5L-4.5 4.5"/>`
  }${SHAPES[role]}${hit(key)}</g>`;
}

/** The mark of a radar: two rings and a dot. */
export function radarMark(x: number, y: number, words: string, key?: string): Markup {
  return html`<g class="radar"${placeKey(key)} transform="translate(${svgNumber(x)} ${svgNumber(y)})">${words !== "" && html`<title>${words}</title>`}<circle r="8" class="casing"/><circle r="8"/><circle r="4"/><circle r="1.2" class="dot"/>${hit(key)}</g>`;
}

/** The mark of an asset: a square with a dot. */
export function assetMark(x: number, y: number, words: string, key: string): Markup {
  return html`<g class="asset"${placeKey(key)} transform="translate(${svgNumber(x)} ${svgNumber(y)})"><title>${words}</title><rect x="-4.5" y="-4.5" width="9" height="9"/><circle r="1.4" class="dot"/>${hit(key)}</g>`;
}
