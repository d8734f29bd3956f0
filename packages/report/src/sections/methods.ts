import type { ReportInput } from "../input.ts";
import { missing } from "../text/figures.ts";
import { html, type Markup } from "../text/html.ts";
import { countText, mmText } from "../text/numbers.ts";

/** The candidates for an adjustment, and why one of them was picked. Empty where there was no choice. */
export function methodSection({ methodChoice }: ReportInput): Markup {
  if (methodChoice === undefined) return html``;
  const { rule, clusterRule, chosen, outerErrorMm, outerClusterErrorMm, candidates } = methodChoice;
  const error = (mm: number) =>
    Number.isFinite(mm) ? mmText(mm) : missing("it left a gauge without a figure");
  return html`<section id="methods" aria-labelledby="methods-heading"><h2 id="methods-heading">Ways to adjust, compared</h2><p class="lead">Picked: ${chosen}. The rule: ${rule}. At gauges that had no part in the choice either, the error is ${
    Number.isFinite(outerErrorMm) ? html`<b>${mmText(outerErrorMm)} mm</b>` : "not known"
  }${
    Number.isFinite(outerClusterErrorMm)
      ? html`, and <b>${mmText(outerClusterErrorMm)} mm</b> where all gauges near by are held out too`
      : ""
  }; the errors below are smaller than what to expect of the one that was picked, because it was picked by them.</p><div class="scroll" role="region" tabindex="0" aria-label="Ways to adjust"><table><caption>Errors of window depths at held-out gauges, mm; the mean is adjusted minus gauge. Clusters: ${clusterRule}</caption><thead><tr><th scope="col">Method</th><th scope="col" class="number">Root mean square, one by one</th><th scope="col" class="number">Mean</th><th scope="col" class="number">Root mean square, by clusters</th><th scope="col" class="number">Picked in folds</th><th scope="col">Note</th></tr></thead><tbody>${candidates.map(
    ({ title, errorMm, meanErrorMm, clusterErrorMm, chosenInFolds, notes }) =>
      html`<tr><th scope="row">${title === chosen ? html`<b>${title}</b>` : title}</th><td class="number">${error(errorMm)}</td><td class="number">${error(meanErrorMm)}</td><td class="number">${error(clusterErrorMm)}</td><td class="number">${countText(chosenInFolds)}</td><td>${notes.join("; ")}</td></tr>`,
  )}</tbody></table></div></section>`;
}
