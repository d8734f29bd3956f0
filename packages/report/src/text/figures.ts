import type { DepthFigure, DepthRangeFigure } from "../input.ts";
import { html, type Markup } from "./html.ts";
import { atLeastText, mmText, percentText } from "./numbers.ts";

/** A dash for what is missing, with the reason for eyes (on hover), for ears, and for a note beside it. */
export function missing(reason: string): Markup {
  return html`<span class="missing" title="${reason}">–<span class="heard"> not available: ${reason}</span></span>`;
}

/** A number's text where it is known, else the dash with its reason. */
export function orMissing(value: number, text: (known: number) => string, reason: string): Markup {
  return Number.isFinite(value) ? html`${text(value)}` : missing(reason);
}

/** Why a depth is missing, in words that are never empty. */
export function reasonOf(figure: DepthFigure): string {
  if (figure.reason !== undefined && figure.reason !== "") return figure.reason;
  return figure.observedFraction > 0 ? "no depth was worked out" : "nothing was observed";
}

/** True where the depth is of a part only, so that the whole was at least that. */
export function isPartial(figure: DepthFigure, minObserved: number): boolean {
  return Number.isFinite(figure.mm) && figure.observedFraction < minObserved;
}

/**
 * A depth with its marks and without its unit, for a column headed "mm": "31.4", "≥ 31.4",
 * "31.4 at cap", or the dash with its reason.
 */
export function depthCell(figure: DepthFigure, minObserved: number): Markup {
  if (!Number.isFinite(figure.mm)) return missing(reasonOf(figure));
  const partial = isPartial(figure, minObserved);
  const why = `observed ${percentText(figure.observedFraction)} of it, so at least this much`;
  return html`${partial ? html`<span title="${why}">${atLeastText(figure.mm)}</span>` : mmText(figure.mm)}${
    figure.atCap === true && html` <span class="mark" title="a capped rain rate went into it">at cap</span>`
  }`;
}

/** Bounds of a depth as plain words, without the unit. */
export function rangeWords({ p10Mm, p90Mm }: DepthRangeFigure, between = " to "): string {
  return `${mmText(p10Mm)}${between}${mmText(p90Mm)}`;
}

/** The same as plain words with the unit, and with the reason where it is missing. */
export function depthWords(figure: DepthFigure, minObserved: number): string {
  if (!Number.isFinite(figure.mm)) return `– (${reasonOf(figure)})`;
  const depth = isPartial(figure, minObserved) ? atLeastText(figure.mm) : mmText(figure.mm);
  return `${depth}\u00a0mm${figure.atCap === true ? " (at cap)" : ""}`;
}

/** The same with its unit, for running text. */
export function depthInText(figure: DepthFigure, minObserved: number): Markup {
  if (!Number.isFinite(figure.mm)) return missing(reasonOf(figure));
  return html`${depthWords(figure, minObserved)}`;
}
