import { html, type Markup } from "../text/html.ts";
import type { Rgba } from "./png.ts";
import { TILES } from "./tiles.ts";

/**
 * Colours for names rather than amounts, told apart under the common kinds of colour blindness.
 * Source: Okabe and Ito (2008), Color Universal Design; values from memory.
 */
export const CATEGORY_COLOURS: readonly Rgba[] = [
  [86, 180, 233, 255],
  [230, 159, 0, 255],
  [0, 158, 115, 255],
  [204, 121, 167, 255],
  [240, 228, 66, 255],
  [0, 114, 178, 255],
  [213, 94, 0, 255],
];

export function categoryColour(index: number): Rgba {
  return CATEGORY_COLOURS[index % CATEGORY_COLOURS.length];
}

export function cssColour([r, g, b]: Rgba): string {
  return `rgb(${r},${g},${b})`;
}

/** An SVG pattern for a category, to be laid over its colour; `scale` undoes that of a group it stands in. */
export function categoryPattern(id: string, index: number, scale = 1): Markup {
  // With more radars than tiles the pattern grows, so that colour and pattern together stay apart.
  const growth = 1 + 0.75 * Math.floor(index / TILES.length);
  return html`<pattern id="${id}" width="8" height="8" patternUnits="userSpaceOnUse" patternTransform="scale(${growth * scale})"><path d="${
    TILES[index % TILES.length]
  }" class="tile"/></pattern>`;
}
