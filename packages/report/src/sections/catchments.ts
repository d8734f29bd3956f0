import type { DepthFigure, ReportCatchment, ReportInput } from "../input.ts";
import { depthCell, missing, orMissing } from "../text/figures.ts";
import { html, type Markup } from "../text/html.ts";
import { areaText, mmText, percentText } from "../text/numbers.ts";

/** Depth of each catchment, with all that stands beside it. */
export function catchmentSection(input: ReportInput): Markup {
  const { catchments, minObserved, howSure = [] } = input;
  if (catchments.length === 0) {
    return html`<section id="catchments" aria-labelledby="catchments-heading"><h2 id="catchments-heading">Catchments</h2><p>The run had no catchments, so there are no depths by area.</p></section>`;
  }
  const noAdjustment = input.adjustment.applied
    ? "not worked out for this catchment"
    : input.adjustment.reason;
  const hasRange = catchments.some(({ range }) => range !== undefined);
  const cell = (figure: DepthFigure) => html`<td class="number">${depthCell(figure, minObserved)}</td>`;
  return html`<section id="catchments" aria-labelledby="catchments-heading"><h2 id="catchments-heading">Catchments</h2><div class="scroll" role="region" tabindex="0" aria-label="Depth by catchment"><table><caption>Mean depth over the window, mm. “≥” where less than ${percentText(minObserved)} of area and time was observed.</caption><thead><tr><th scope="col">Catchment</th><th scope="col" class="number">Depth mm</th><th scope="col" class="number">Observed</th><th scope="col" class="number">Radar mm</th><th scope="col" class="number">Adjusted mm</th><th scope="col" class="number">Wettest cell mm</th>${hasRange && html`<th scope="col" class="number">p10 mm</th><th scope="col" class="number">p90 mm</th>`}<th scope="col" class="number">Area km²</th><th scope="col">Note</th></tr></thead><tbody>${catchments.map(
    (catchment) =>
      html`<tr><th scope="row"><span class="id">${catchment.name}</span><span class="sub">${catchment.id}</span></th><td class="number main">${depthCell(catchment.depth, minObserved)}</td><td class="number">${percentText(catchment.depth.observedFraction)}</td>${cell(catchment.radar)}${
        catchment.adjusted === undefined
          ? html`<td class="number">${missing(noAdjustment)}</td>`
          : cell(catchment.adjusted)
      }${cell(catchment.maxCell)}${hasRange && rangeCells(catchment)}<td class="number">${areaText(catchment.areaKm2)}</td><td class="words">${notes(catchment)}</td></tr>`,
  )}</tbody></table></div>${!input.adjustment.applied && html`<p class="small">No adjusted depths: ${input.adjustment.reason}.</p>`}${
    howSure.length > 0 &&
    html`<h3>How sure</h3><p class="lead">One true depth in ten lies below p10, one above p90. They say nothing of time or area that was not observed.</p><ul>${howSure.map((line) => html`<li>${line}</li>`)}</ul>`
  }</section>`;
}

function rangeCells({ range }: ReportCatchment): Markup {
  const none = "nothing tells how sure this depth is";
  return html`<td class="number">${orMissing(range?.p10Mm ?? Number.NaN, mmText, none)}</td><td class="number">${orMissing(range?.p90Mm ?? Number.NaN, mmText, none)}</td>`;
}

function notes({ depth }: ReportCatchment): Markup {
  return html`${depth.reason}`;
}

/** The headline had another relation been chosen. */
export function relationSection(input: ReportInput): Markup {
  const { relations, minObserved, headline } = input;
  if (relations.length === 0) return html``;
  // The place is written as a sentence begins with it; here it stands inside one.
  const place = headline.place.replace(/^The /, "the ");
  const most = Math.max(0.1, ...relations.map(({ depth }) => depth.mm).filter(Number.isFinite));
  return html`<section id="relations" aria-labelledby="relations-heading"><h2 id="relations-heading">The headline under other relations</h2><p class="lead">The same echoes over ${place}, turned into rain by Z = A R<sup>b</sup> with other published numbers, before any adjustment. The spread is what the choice of relation alone is worth.</p><div class="scroll" role="region" tabindex="0" aria-label="Headline under other relations"><table><caption>Mean depth over ${place}, mm, radar alone</caption><thead><tr><th scope="col">Relation</th><th scope="col" class="number">A</th><th scope="col" class="number">b</th><th scope="col">Meant for</th><th scope="col" class="number">Depth mm</th><th scope="col" class="chart-column"><span class="heard">Bar</span></th></tr></thead><tbody>${relations.map(
    (relation) =>
      html`<tr><th scope="row">${relation.name}${relation.inUse && html` <span class="mark">in use</span>`}</th><td class="number">${relation.a}</td><td class="number">${relation.b}</td><td class="words">${relation.regime}</td><td class="number main">${depthCell(relation.depth, minObserved)}</td><td class="chart-column">${bar(relation.depth.mm, most, relation.inUse)}</td></tr>`,
  )}</tbody></table></div></section>`;
}

function bar(mm: number, most: number, inUse: boolean): Markup {
  if (!Number.isFinite(mm)) return html``;
  return html`<svg class="bar-cell" viewBox="0 0 200 14" preserveAspectRatio="none" aria-hidden="true"><rect class="${
    inUse ? "bar in-use" : "bar"
  }" width="${Math.round((200 * mm) / most)}" height="14"/></svg>`;
}
