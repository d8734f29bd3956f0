import { createHash } from "node:crypto";
import { svgHyetograph } from "../charts/hyetograph.ts";
import { coarsen, deepestStepMm } from "../charts/steps.ts";
import { html, type Insert, Markup } from "../text/html.ts";
import { mmText, percentText } from "../text/numbers.ts";
import { windowWords, zoned } from "../text/times.ts";
import { svgDepthDuration } from "./depth-duration-chart.ts";
import { durationText } from "./duration-text.ts";
import type { EventIndexInput, EventPageInput, EventPeak, EventRunWords, EventWords } from "./event-input.ts";
import { EVENT_STYLE } from "./event-style.ts";

/**
 * The page of one place: its rain against time, largest depths by duration beside a table of return periods, its
 * events. One file that needs nothing else, made to be printed; the same input gives the same bytes.
 *
 * @throws RangeError where a number is not finite, or a zone does not exist
 */
export function renderEventPage(input: EventPageInput): string {
  const { run, rain, peaks, gaugePeaks, curves, events, notes, untold } = input;
  const graph = coarsen(rain);
  const topMm = deepestStepMm([graph]) || 1;
  const [first, second] = graph.sides;
  const sides = [first, second].flatMap((side) => (side === undefined ? [] : [side.role]));
  const body = html`<p class="of"><span>${run.title}</span><span>${standing(run)}</span></p>
<h1>${[input.id, input.name].filter((word) => word !== "").join(" \u2013 ")}<small>${input.what}</small></h1>
<p class="headline"><strong>${input.headline}</strong> ${windowText(run)}</p>
<p class="small">${input.headlineDetails.join("; ")}.</p>
<div class="charts"><figure>${svgHyetograph("rain", graph, run.zone, topMm)}<figcaption>mm per ${graph.stepMs / 60_000} min: ${sides[0] ?? ""} as bars${sides[1] === undefined ? "" : `, ${sides[1]} as a line`}; hatched: not observed</figcaption></figure><figure>${svgDepthDuration(
    "durations",
    "Largest depth by duration",
    peaks,
    curves,
  )}<figcaption>largest depth by duration, mm${curves.length === 0 ? "" : "; dotted: the table's depths, by return period in years"}; an arrow: at least this</figcaption></figure></div>
<h2>Largest depths by duration</h2>
${peakTable(peaks, run, `Over the whole window; ${input.what}.`)}
${list(untold)}
${gaugePeaks.length > 0 && html`<h3>By the gauge itself</h3>${peakTable(gaugePeaks, run, "Readings of the gauge, a point.")}`}
${list(run.frequency)}
<h2>${events.length === 0 ? "No event" : "Events"}</h2>
${events.map((event) => eventSection(event, run, events.length > 1))}
${list([...run.rules, ...notes])}
${cautions(run)}
${hands()}`;
  return page(`${input.id} – ${run.title}`, run, body);
}

/** The page that leads to those of all places. */
export function renderEventIndex(input: EventIndexInput): string {
  const { run, rows, durationsMinutes, exceedances, areaDuration } = input;
  const body = html`<p class="of"><span>${run.title}</span><span>${standing(run)}</span></p>
<h1>Rain events<small>${windowText(run)}</small></h1>
<h2>Places</h2>
<div class="scroll" tabindex="0" role="region" aria-label="Places"><table><caption>Depth of the window; largest depth in mm of some durations, with its return period in years where there is one. Each duration has its own.</caption><thead><tr><th scope="col">id</th><th scope="col">name</th><th scope="col" class="n">mm</th><th scope="col" class="n">events</th>${durationsMinutes.map(
    (minutes) => html`<th scope="col" class="n">${durationText(minutes)}</th>`,
  )}</tr></thead><tbody>${rows.map(
    (row) =>
      html`<tr><th scope="row"><a href="${row.file}">${row.id}</a></th><td class="words">${row.name}</td><td class="n">${row.depth}</td><td class="n">${row.events}</td>${row.peaks.map(
        (peak) =>
          html`<td class="n">${peak === undefined ? "–" : `${depthText(peak)}${peak.years === "" ? "" : ` (${peak.years})`}`}</td>`,
      )}</tr>`,
  )}</tbody></table></div>
${
  exceedances !== undefined &&
  html`<h2>How many were to be expected</h2><p>${exceedances.words}</p><table><thead><tr><th scope="col" class="n">years</th><th scope="col" class="n">expected in a year, of ${rows.length}</th><th scope="col" class="n">met here</th></tr></thead><tbody>${exceedances.rows.map(
    ({ years, expected, seen }) =>
      html`<tr><th scope="row" class="n">${years}</th><td class="n">${expected}</td><td class="n">${seen}</td></tr>`,
  )}</tbody></table>`
}
${
  areaDuration !== undefined &&
  html`<h2>Depth by area and duration</h2>${areaDuration.words.map((words) => html`<p>${words}</p>`)}<div class="scroll" tabindex="0" role="region" aria-label="Depth by area and duration"><table><caption>Largest mean depth, mm</caption><thead><tr><th scope="col">in</th>${areaDuration.areasKm2.map(
    (km2) => html`<th scope="col" class="n">${km2} km²</th>`,
  )}</tr></thead><tbody>${areaDuration.rows.map(
    ({ durationMinutes, depthMm }) =>
      html`<tr><th scope="row">${durationText(durationMinutes)}</th>${depthMm.map(
        (mm) => html`<td class="n">${Number.isNaN(mm) ? "–" : mmText(mm)}</td>`,
      )}</tr>`,
  )}</tbody></table></div>`
}
${list([...run.rules, ...run.frequency])}
${cautions(run)}`;
  return page(`Rain events – ${run.title}`, run, body);
}

function peakTable(peaks: readonly EventPeak[], { zone }: EventRunWords, caption: string): Markup {
  if (peaks.length === 0) return html`<p>None of the durations can be told.</p>`;
  const withInterval = peaks.some(({ p10Mm }) => !Number.isNaN(p10Mm));
  const withYears = peaks.some(({ years }) => years !== "");
  const withBetween = peaks.some(({ yearsBetween }) => yearsBetween !== "");
  const withTable = peaks.some(({ yearsOfTable }) => yearsOfTable !== "");
  const head = (words: string, numeric = true) =>
    html`<th scope="col"${numeric && new Markup(' class="n"')}>${words}</th>`;
  const cell = (words: string) => html`<td class="n">${words === "" ? "–" : words}</td>`;
  return html`<div class="scroll" tabindex="0" role="region" aria-label="Largest depths"><table><caption>${caption}</caption><thead><tr>${head("in")}${head("mm")}${withInterval && head("p10 to p90")}${head("mm/h")}${head("from", false)}${withYears && head("years")}${withBetween && head("p10 to p90")}${withTable && head("by the table’s own interval")}${head("remarks", false)}</tr></thead><tbody>${peaks.map(
    (peak) =>
      html`<tr><th scope="row" class="n">${durationText(peak.durationMinutes)}</th>${cell(depthText(peak))}${
        withInterval && cell(Number.isNaN(peak.p10Mm) ? "" : `${mmText(peak.p10Mm)} to ${mmText(peak.p90Mm)}`)
      }${cell(mmText(peak.meanMmPerHour))}<td>${zoned(peak.startEpochMs, zone).toFormat("d LLL HH:mm")}</td>${withYears && cell(peak.years)}${withBetween && cell(peak.yearsBetween)}${withTable && cell(peak.yearsOfTable)}<td class="words">${remarksOf(peak)}</td></tr>`,
  )}</tbody></table></div>`;
}

function remarksOf({ atCap, observedFraction, lowerBound }: EventPeak): string {
  const remarks = [
    ...(atCap ? ["at the hail cap"] : []),
    ...(observedFraction < 0.995 ? [`${percentText(observedFraction)} observed`] : []),
    ...(lowerBound ? ["at least this"] : []),
  ];
  return remarks.join(", ");
}

function depthText({ depthMm, lowerBound }: EventPeak): string {
  return `${lowerBound ? "≥ " : ""}${mmText(depthMm)}`;
}

function eventSection(event: EventWords, run: EventRunWords, withPeaks: boolean): Markup {
  const words = windowWords(event, run.zone);
  return html`<h3>Event ${event.number}: ${event.depth}</h3><p>${words.local} (${words.zone})${!words.localIsUtc && `; ${words.utc} UTC`}</p>${list(event.details)}${withPeaks && peakTable(event.peaks, run, "Over windows that share time with this event.")}`;
}

function standing({ status, runDigest }: EventRunWords): string {
  return `${status}, run ${runDigest.slice(0, 16)}`;
}

function windowText({ window, zone }: EventRunWords): string {
  const words = windowWords(window, zone);
  return `${words.local} (${words.zone})${words.localIsUtc ? "" : `; ${words.utc} UTC`}`;
}

function cautions({ cautions: all }: EventRunWords): Markup {
  return html`<section class="caution"><h2>Cautions</h2>${list(all)}</section>`;
}

/** Lines to be filled in by hand. */
function hands(): Markup {
  return html`<div class="hands"><div>Prepared by</div><div>Checked by</div><div>Date</div></div>`;
}

function list(lines: readonly string[]): Insert {
  return lines.length > 0 && html`<ul>${lines.map((line) => html`<li>${line}</li>`)}</ul>`;
}

function page(title: string, { software }: EventRunWords, body: Markup): string {
  const hash = createHash("sha256").update(EVENT_STYLE).digest("base64");
  const policy = `default-src 'none'; style-src 'sha256-${hash}'; base-uri 'none'; form-action 'none'`;
  return html`<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="${policy}">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="referrer" content="no-referrer">
<title>${title}</title>
<style>${new Markup(EVENT_STYLE)}</style>
</head>
<body>
<main>
${body}
</main>
<footer>${software}. Depths in mm. Radar rain is an estimate from echo aloft.</footer>
</body>
</html>
`.text;
}
