import { swatch } from "../charts/hatch.ts";
import { gaugeMark, ROLE_WORDS } from "../charts/marks.ts";
import { type ScatterPoint, scatterWords, svgScatter } from "../charts/scatter.ts";
import type { ReportGauge, ReportInput, ReportRadarVerdict } from "../input.ts";
import { missing, orMissing } from "../text/figures.ts";
import { html, type Markup } from "../text/html.ts";
import { counted, mmText, percentText, ratioText } from "../text/numbers.ts";

function points(
  gauges: readonly ReportGauge[],
  depth: (gauge: ReportGauge) => number,
  side: string,
): ScatterPoint[] {
  return gauges
    .map((gauge, index) => ({ gauge, index }))
    .filter(({ gauge }) => Number.isFinite(gauge.gaugeMm) && Number.isFinite(depth(gauge)))
    .map(({ gauge, index }) => ({
      key: `g${index}`,
      label: gauge.id,
      role: gauge.role,
      gaugeMm: gauge.gaugeMm,
      radarMm: depth(gauge),
      words: scatterWords(`${gauge.id} (${gauge.network})`, gauge.gaugeMm, depth(gauge), side),
    }));
}

function reasonFor(gauge: ReportGauge): string {
  return gauge.reason === undefined || gauge.reason === ""
    ? "gauge and radar observed no time together"
    : gauge.reason;
}

function ratioCell(gauge: ReportGauge): Markup {
  if (!Number.isFinite(gauge.gaugeMm) || !Number.isFinite(gauge.radarMm)) return missing(reasonFor(gauge));
  if (gauge.gaugeMm === 0) return missing("the gauge measured no rain");
  return html`${ratioText(gauge.radarMm / gauge.gaugeMm)}`;
}

function roleCell(gauge: ReportGauge): Markup {
  return html`<td class="role">${swatch(gaugeMark(gauge.role, 8, 7, ""), 16)}${ROLE_WORDS[gauge.role]}</td>`;
}

function gaugeHead(gauge: ReportGauge): Markup {
  const name = gauge.name === undefined ? "" : `${gauge.name}, `;
  return html`<th scope="row"><span class="id">${gauge.id}</span><span class="sub">${name}${gauge.network}</span></th>`;
}

function numbersTable(gauges: readonly ReportGauge[], adjusted: boolean): Markup {
  return html`<div class="scroll tall" role="region" tabindex="0" aria-label="Gauge against radar, numbers"><table><caption>Over the time that gauge and radar both observed</caption><thead><tr><th scope="col">Gauge</th><th scope="col">Part</th><th scope="col" class="number">Gauge mm</th><th scope="col" class="number">Radar mm</th><th scope="col" class="number">radar/gauge</th>${
    adjusted && html`<th scope="col" class="number">Adjusted without it mm</th>`
  }</tr></thead><tbody>${gauges.map(
    (gauge) =>
      html`<tr>${gaugeHead(gauge)}${roleCell(gauge)}<td class="number">${orMissing(gauge.gaugeMm, mmText, reasonFor(gauge))}</td><td class="number">${orMissing(gauge.radarMm, mmText, reasonFor(gauge))}</td><td class="number">${ratioCell(gauge)}</td>${
        adjusted &&
        html`<td class="number">${orMissing(gauge.crossValidatedMm, mmText, "no adjusted value without this gauge")}</td>`
      }</tr>`,
  )}</tbody></table></div>`;
}

/** Gauge against radar: the scatter with its table, before and after adjustment. */
export function scatterSection(input: ReportInput): Markup {
  const { gauges } = input;
  if (gauges.length === 0) {
    return html`<section id="gauges-radar" aria-labelledby="scatter-heading"><h2 id="scatter-heading">Gauge against radar</h2><p>The run had no gauges, so nothing here checks the radar.</p></section>`;
  }
  const radar = points(gauges, (gauge) => gauge.radarMm, "radar");
  const adjusted = points(gauges, (gauge) => gauge.crossValidatedMm, "adjusted without it");
  const dropped = gauges.length - radar.length;
  const dry = radar.filter((point) => point.gaugeMm === 0 && point.radarMm === 0).length;
  return html`<section id="gauges-radar" aria-labelledby="scatter-heading"><h2 id="scatter-heading">Gauge against radar</h2><p class="lead">Each mark is one gauge and the radar cell over it. On the solid line they agree; outside the dashed lines they differ by more than a factor of two. Both axes follow the square root, so that small depths have room and zeros still show.</p><div class="beside"><div><figure>${svgScatter(
    "scatter-radar",
    "Gauge against radar",
    "radar, mm",
    radar,
  )}<figcaption>Radar before adjustment.${dry > 1 && ` ${counted(dry, "gauge")} without rain on either side share the corner.`}${dropped > 0 && html` ${counted(dropped, "gauge")} without both depths not drawn; the reasons are with the verdicts below.`}</figcaption></figure>${
    adjusted.length > 0 &&
    html`<figure>${svgScatter("scatter-adjusted", "Gauge against adjusted radar", "adjusted radar, mm", adjusted)}<figcaption>After adjustment, each gauge left out of the adjustment that it is held against.</figcaption></figure>`
  }</div>${numbersTable(gauges, adjusted.length > 0)}</div></section>`;
}

/** What each gauge is worth, why, and on what evidence. */
export function verdictSection(input: ReportInput): Markup {
  const { gauges } = input;
  if (gauges.length === 0) return html``;
  const order = { doubted: 0, "left-out": 1, used: 2 };
  const sorted = [...gauges].sort((a, b) => order[a.role] - order[b.role]);
  return html`<section id="gauges" aria-labelledby="verdict-heading"><h2 id="verdict-heading">Gauges: verdict, cause, evidence</h2><div class="scroll" role="region" tabindex="0" aria-label="Verdict on each gauge"><table><caption>Doubted gauges first</caption><thead><tr><th scope="col">Gauge</th><th scope="col">Part</th><th scope="col">Verdict</th><th scope="col">Likely cause</th><th scope="col">Evidence</th><th scope="col">Radar</th><th scope="col" class="number">Range km</th><th scope="col" class="number">Time shared</th></tr></thead><tbody>${sorted.map(
    (gauge) =>
      html`<tr>${gaugeHead(gauge)}${roleCell(gauge)}<td>${gauge.verdict}</td><td class="words">${wordsOrDash(causeOf(gauge), "no cause was found or looked for")}</td><td class="words evidence">${wordsOrDash(gauge.evidence, "no evidence was recorded")}</td><td class="name">${wordsOrDash(gauge.radarId ?? "", "no radar observed this gauge")}</td><td class="number">${orMissing(gauge.rangeKm ?? Number.NaN, (km) => String(Math.round(km)), "no radar observed this gauge")}</td><td class="number">${orMissing(gauge.commonFraction, percentText, reasonFor(gauge))}</td></tr>`,
  )}</tbody></table></div>${radarVerdicts(input.radarVerdicts ?? [])}</section>`;
}

function radarVerdicts(radars: readonly ReportRadarVerdict[]): Markup | false {
  if (radars.length === 0) return false;
  return html`<h3>Radars</h3><div class="scroll" role="region" tabindex="0" aria-label="Verdict on each radar"><table><caption>By the gauges in use and by each other</caption><thead><tr><th scope="col">Radar</th><th scope="col">Verdict</th><th scope="col">Likely cause</th><th scope="col">Evidence</th></tr></thead><tbody>${radars.map(
    ({ radarId, verdict, cause, sentence }) =>
      html`<tr><th scope="row"><span class="id">${radarId}</span></th><td>${verdict}</td><td class="words">${wordsOrDash(cause, "no cause was found or looked for")}</td><td class="words evidence">${sentence}</td></tr>`,
  )}</tbody></table></div>`;
}

/** The cause that was found; for a gauge without one, why it could not take part. */
function causeOf(gauge: ReportGauge): string {
  return gauge.cause === "" ? (gauge.reason ?? "") : gauge.cause;
}

function wordsOrDash(words: string, reason: string): Markup {
  return words === "" ? missing(reason) : html`${words}`;
}
