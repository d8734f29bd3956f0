import type { AccountLine, ProvenanceInput, ReportInput } from "../input.ts";
import { html, type Markup } from "../text/html.ts";
import { counted, countText } from "../text/numbers.ts";

/** More lines than this say nothing more to a reader; the manifest beside the report has them all. */
export const MOST_LINES = 200;

const DEEDS: readonly AccountLine["deed"][] = [
  "left out",
  "capped",
  "filled",
  "flagged",
  "corrected",
  "assumed",
];

function more(total: number, what: string): Markup {
  const rest = total - MOST_LINES;
  return rest > 0
    ? html`<p class="small">And ${countText(rest)} more ${what}; manifest.json beside this report lists them all.</p>`
    : html``;
}

/** What was done to the input, counted. */
export function accountSection(input: ReportInput): Markup {
  const lines = DEEDS.flatMap((deed) => input.accounts.filter((line) => line.deed === deed));
  if (lines.length === 0) {
    return html`<section id="accounts" aria-labelledby="accounts-heading"><h2 id="accounts-heading">Left out, capped, filled, assumed</h2><p>Nothing: all input was taken as it came.</p></section>`;
  }
  return html`<section id="accounts" aria-labelledby="accounts-heading"><h2 id="accounts-heading">Left out, capped, filled, assumed</h2><div class="scroll" role="region" tabindex="0" aria-label="What was done to the input"><table><caption>Nothing is repaired in silence</caption><thead><tr><th scope="col">Done</th><th scope="col">What</th><th scope="col" class="number">Count</th><th scope="col">Why</th></tr></thead><tbody>${lines
    .slice(0, MOST_LINES)
    .map(
      (line) =>
        html`<tr><td>${line.deed}</td><th scope="row">${line.what}</th><td class="number">${counted(line.count, line.unit.replace(/s$/, ""), line.unit)}</td><td class="words">${line.why}</td></tr>`,
    )}</tbody></table></div>${more(lines.length, "lines")}</section>`;
}

/** What the figures were made of and by. */
export function provenanceSection(input: ReportInput): Markup {
  const { provenance } = input;
  return html`<section id="provenance" aria-labelledby="provenance-heading"><h2 id="provenance-heading">Provenance</h2><dl class="facts"><div><dt>Software</dt><dd>${provenance.software}</dd></div><div><dt>Run digest</dt><dd class="digest">${provenance.runDigest}</dd></div><div><dt>Plan digest</dt><dd class="digest">${provenance.planDigest}</dd></div><div><dt>Map projection</dt><dd class="words">${input.grid.crs}</dd></div><div><dt>Status</dt><dd>${input.status}</dd></div></dl>${settingsTable(
    input,
  )}${inputsTable(provenance.inputs)}</section>`;
}

function settingsTable({ provenance: { changedSettings } }: ReportInput): Markup {
  if (changedSettings.length === 0)
    return html`<p>No setting differs from its default. Files, window, zone and grid have none.</p>`;
  return html`<h3>Settings that differ from the default</h3><div class="scroll" role="region" tabindex="0" aria-label="Changed settings"><table><caption>By their place in the plan</caption><thead><tr><th scope="col">Setting</th><th scope="col">Value</th><th scope="col">Default</th></tr></thead><tbody>${changedSettings
    .slice(0, MOST_LINES)
    .map(
      ({ path, value, defaultValue }) =>
        html`<tr><th scope="row"><code>${path}</code></th><td class="words">${value}</td><td class="words">${defaultValue}</td></tr>`,
    )}</tbody></table></div>${more(changedSettings.length, "settings")}`;
}

function inputsTable(inputs: readonly ProvenanceInput[]): Markup {
  const tally = new Map<string, number>();
  for (const { kind, use } of inputs) tally.set(`${kind}, ${use}`, (tally.get(`${kind}, ${use}`) ?? 0) + 1);
  return html`<h3>Inputs</h3><ul class="tally">${[...tally].map(
    ([what, count]) => html`<li>${countText(count)} × ${what}</li>`,
  )}</ul><details><summary>Files and their digests</summary><div class="scroll tall" role="region" tabindex="0" aria-label="Input files"><table><caption>SHA-256, first twelve digits; in full in manifest.json</caption><thead><tr><th scope="col">File</th><th scope="col">Kind</th><th scope="col">SHA-256</th><th scope="col">Use</th></tr></thead><tbody>${inputs
    .slice(0, MOST_LINES)
    .map(
      ({ path, kind, sha256, use }) =>
        html`<tr><th scope="row" class="words">${path}</th><td>${kind}</td><td class="digest">${sha256.slice(0, 12)}</td><td>${use}</td></tr>`,
    )}</tbody></table></div>${more(inputs.length, "files")}</details>`;
}

const TERMS: readonly (readonly [string, string])[] = [
  ["Depth", "Rain that fell in a stated time, in millimetres: 1 mm is one litre on each square metre."],
  [
    "Observed",
    "Share of area and time in which a radar could see rain if there was any. What was not observed is not counted as dry.",
  ],
  ["≥", "At least: part of the area or time was not observed, and nothing was added for it."],
  ["At cap", "Rain rates above a limit were cut to it, because hail and wet ice look like extreme rain."],
  [
    "Relation",
    "The power law Z = A Rᵇ that turns reflectivity Z into rain rate R. It depends on the kind of rain.",
  ],
  ["radar/gauge", "Radar depth divided by gauge depth, as printed with scores. Below 1 radar is too dry."],
  ["gauge/radar", "The other way about, as printed with factors: what radar depth is multiplied by."],
  ["Mean-field bias", "One gauge/radar factor for the whole field, from all trusted gauges together."],
  ["Cross-validated", "Held against gauges that had no part in the value: each is left out in turn."],
  [
    "Beam height",
    "Height of the centre of the radar beam. The higher it is, the less it tells of rain at the ground.",
  ],
  ["Pair", "A gauge and the radar cell over it, in the same interval and over the time that both observed."],
  [
    "Doubted",
    "Set aside because evidence speaks against it; it takes no part in the adjustment and the scores.",
  ],
];

/** The few words that a reader from outside the trade needs. */
export function glossarySection(): Markup {
  return html`<section id="glossary" aria-labelledby="glossary-heading"><h2 id="glossary-heading">Words used here</h2><dl class="glossary">${TERMS.map(
    ([term, meaning]) => html`<div><dt>${term}</dt><dd>${meaning}</dd></div>`,
  )}</dl></section>`;
}
