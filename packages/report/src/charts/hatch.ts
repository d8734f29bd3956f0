import { html, type Markup } from "../text/html.ts";

/** An SVG pattern of slanting lines, the sign for "not observed"; `scale` undoes that of a group it stands in. */
export function hatchPattern(id: string, slant: "rising" | "falling" = "rising", scale = 1): Markup {
  return html`<pattern id="${id}" width="5" height="5" patternUnits="userSpaceOnUse" patternTransform="scale(${scale}) rotate(${
    slant === "rising" ? 45 : -45
  })"><path d="M0 0v5" class="hatch-line"/></pattern>`;
}

/** A small picture for a legend. */
export function swatch(content: Markup, width = 22): Markup {
  return html`<svg class="swatch" width="${width}" height="14" viewBox="0 0 ${width} 14" aria-hidden="true">${content}</svg>`;
}
