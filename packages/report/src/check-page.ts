import { html, Markup } from "./text/html.ts";
import { svgNumber } from "./text/numbers.ts";

/** One gauge of the page: depths over the time that both sides observed, NaN where there is none. */
export interface CheckRow {
  readonly gauge: string;
  readonly name: string;
  readonly gaugeMm: number;
  readonly radarMm: number;
  readonly verdict: string;
  readonly cause: string;
  readonly evidence: string;
  /** Who decided otherwise, and why; empty where nobody did. */
  readonly override: string;
  readonly findings: readonly { readonly check: string; readonly sentence: string }[];
}

/** One group of a radar's bias; NaN where it is not known. */
export interface CheckBias {
  readonly label: string;
  readonly gauges: number;
  readonly ratio: number;
  readonly low: number;
  readonly high: number;
}

export interface CheckRadar {
  readonly radar: string;
  readonly verdict: string;
  readonly cause: string;
  readonly sentence: string;
  /** All together first, then by range, sector, time. */
  readonly groups: readonly CheckBias[];
}

export interface CheckPage {
  readonly title: string;
  readonly window: string;
  readonly trust: string;
  readonly cautions: readonly string[];
  /** Worst first. */
  readonly gauges: readonly CheckRow[];
  readonly radars: readonly CheckRadar[];
}

const BAR_WIDTH = 110;
const CLASSES: Readonly<Record<string, string>> = {
  "leave out": "out",
  "use with care": "care",
  "too little rain to judge": "little",
  use: "use",
};

const STYLE = `:root{color-scheme:light dark;--ink:#1c2227;--soft:#5b656d;--line:#dcdad4;--page:#fbfaf8;--gauge:#2f6f86;--radar:#c4620a;--out:#8a2b0f;--care:#8a4b08}
@media (prefers-color-scheme:dark){:root{--ink:#e6e8e6;--soft:#a3adb3;--line:#343b40;--page:#14181b;--gauge:#5fa9c4;--radar:#f0a04b;--out:#ff9f80;--care:#f0c07c}}
*{box-sizing:border-box}body{margin:0 auto;max-width:1100px;padding:24px;background:var(--page);color:var(--ink);font:15px/1.5 system-ui,-apple-system,"Segoe UI",Roboto,"Helvetica Neue",Arial,sans-serif;font-variant-numeric:tabular-nums}
h1{font-size:1.5rem;margin:0}h2{font-size:1.15rem;margin:32px 0 8px}h3{font-size:1rem;margin:20px 0 4px}p{margin:6px 0;max-width:72ch}.soft{color:var(--soft);font-weight:400}tbody th{white-space:nowrap}
.scroll{overflow-x:auto}table{border-collapse:collapse;width:100%}th,td{text-align:left;padding:6px 12px 6px 0;border-bottom:1px solid var(--line);vertical-align:top}td.n,th.n{text-align:right;white-space:nowrap}
.out{color:var(--out);font-weight:650}.care{color:var(--care);font-weight:650}.little,.note{color:var(--soft)}.note{font-size:.9em;max-width:64ch}
svg{display:block}details{font-size:.9em;color:var(--soft)}summary{cursor:pointer}
@media print{body{padding:0;max-width:none}tr{break-inside:avoid}details{display:none}}`;

/**
 * What the checks make of gauges and radars, as one offline page without script.
 *
 * Every text may come from a stranger's file; it is escaped.
 */
export function checkPage(page: CheckPage): string {
  const depths = page.gauges.flatMap(({ gaugeMm, radarMm }) => [gaugeMm, radarMm]).filter(Number.isFinite);
  const most = Math.max(1, ...depths);
  return `<!doctype html>\n${
    html`<html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width,initial-scale=1"><meta http-equiv="Content-Security-Policy" content="default-src 'none'; style-src 'unsafe-inline'"><title>${page.title}: gauges and radars</title><style>${new Markup(STYLE)}</style></head><body>
<header><h1>${page.title}</h1><p class="soft">${page.window}</p><p><strong>${page.trust}</strong></p></header>
<main><h2>Gauges</h2>${
      page.gauges.length === 0
        ? html`<p>No gauge stands beside the radar.</p>`
        : html`<div class="scroll" tabindex="0" role="region" aria-label="Gauges, worst first"><table><thead><tr><th scope="col">Gauge</th><th scope="col" class="n">Gauge, mm</th><th scope="col" class="n">Radar, mm</th><th scope="col"><span aria-hidden="true">Side by side</span></th><th scope="col">Verdict and likely cause</th></tr></thead><tbody>${page.gauges.map((row) => gaugeRow(row, most))}</tbody></table></div>`
    }
<h2>Radars</h2>${page.radars.map(radarSection)}
<h2>Cautions</h2><ul>${page.cautions.map((caution) => html`<li>${caution}</li>`)}</ul></main></body></html>`
      .text
  }\n`;
}

function gaugeRow(row: CheckRow, most: number): Markup {
  const { gauge, name, gaugeMm, radarMm, verdict, cause, evidence, override, findings } = row;
  return html`<tr><th scope="row">${gauge}${name !== "" && html`<br><span class="soft">${name}</span>`}</th><td class="n">${depth(gaugeMm)}</td><td class="n">${depth(radarMm)}</td><td>${bars(gaugeMm, radarMm, most)}</td><td><span class="${CLASSES[verdict] ?? "use"}">${verdict}</span>${cause !== "" && html`: ${cause}`}<p class="note">${evidence}</p>${
    override !== "" && html`<p class="note">By override: ${override}</p>`
  }${
    findings.length > 0 &&
    html`<details><summary>${findings.length === 1 ? "1 finding" : `${findings.length} findings`}</summary><ul>${findings.map(
      ({ check, sentence }) => html`<li>${check}: ${sentence}</li>`,
    )}</ul></details>`
  }</td></tr>`;
}

function bars(gaugeMm: number, radarMm: number, most: number): Markup {
  const bar = (mm: number, y: number, colour: string) =>
    Number.isFinite(mm) &&
    html`<rect x="0" y="${y}" width="${svgNumber(Math.max(1, (mm / most) * BAR_WIDTH))}" height="8" fill="${colour}"/>`;
  return html`<svg width="${BAR_WIDTH}" height="22" aria-hidden="true">${bar(gaugeMm, 2, "var(--gauge)")}${bar(radarMm, 12, "var(--radar)")}</svg>`;
}

function radarSection({ radar, verdict, cause, sentence, groups }: CheckRadar): Markup {
  return html`<h3>${radar}: <span class="${CLASSES[verdict] ?? "use"}">${verdict}</span>${cause !== "" && html`: ${cause}`}</h3><p>${sentence}</p><div class="scroll" tabindex="0" role="region" aria-label="Radar ${radar} beside the gauges"><table><thead><tr><th scope="col">Where or when</th><th scope="col" class="n">Gauges</th><th scope="col" class="n">Radar/gauge</th><th scope="col" class="n">95 % interval</th></tr></thead><tbody>${groups.map(
    ({ label, gauges, ratio, low, high }) =>
      html`<tr><th scope="row">${label}</th><td class="n">${gauges}</td><td class="n">${ratioText(ratio)}</td><td class="n">${ratioText(low)} to ${ratioText(high)}</td></tr>`,
  )}</tbody></table></div>`;
}

function depth(mm: number): string {
  return Number.isFinite(mm) ? mm.toFixed(1) : "–";
}

function ratioText(ratio: number): string {
  return Number.isFinite(ratio) ? ratio.toFixed(2) : "–";
}
