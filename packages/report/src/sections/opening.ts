import { ROLE_WORDS } from "../charts/marks.ts";
import type { Caution, ReportInput } from "../input.ts";
import { depthInText, missing, rangeWords } from "../text/figures.ts";
import { html, type Markup } from "../text/html.ts";
import { counted, countText, mmText, percentText, ratioText } from "../text/numbers.ts";
import { windowWords } from "../text/times.ts";

/** Cautions that fit the first screen; the rest are a click away, in the section that lists them all. */
const FIRST_SCREEN_CAUTIONS = 4;

/** All cautions, the one that the relation was nobody's choice first, otherwise as handed in. */
export function orderedCautions(cautions: readonly Caution[]): Caution[] {
  return [
    ...cautions.filter((caution) => caution.kind === "relation-not-chosen"),
    ...cautions.filter((caution) => caution.kind !== "relation-not-chosen"),
  ];
}

/** Title, reference, author and standing. */
export function titleBlock(input: ReportInput): Markup {
  return html`<div class="title-block"><h1>${input.title}</h1><p class="standing"><span class="badge ${input.status}">${
    input.status === "final" ? "Final" : "Provisional"
  }</span>${input.reference !== "" && html`<span>Reference ${input.reference}</span>`}${
    input.author !== "" && html`<span>By ${input.author}</span>`
  }</p></div>`;
}

/** The one sentence that the report is for. */
export function headlineSentence(input: ReportInput): Markup {
  const { place, depth, basis, range } = input.headline;
  const words = windowWords(input.window, input.zone);
  const when = words.localIsUtc
    ? html`${words.utc} UTC`
    : html`${words.local} <span class="aside">(${words.zone}; ${words.utc} UTC)</span>`;
  const wettest = wettestCatchment(input);
  const share = html`<span class="aside">(${percentText(depth.observedFraction)} observed, ${
    basis === "adjusted" ? "radar adjusted to gauges" : "radar alone"
  }${range !== undefined && html`; in 8 cases of 10 between ${rangeWords(range, " and ")}\u00a0mm`})</span>`;
  const fell = Number.isFinite(depth.mm)
    ? html`${place} received <strong>${depthInText(depth, input.minObserved)}</strong> of rain ${share}`
    : html`How much rain fell on ${place} is not known ${missing(depth.reason ?? "nothing was observed")} ${share}`;
  return html`<p class="headline">${fell} from ${when}${
    wettest &&
    html`; the wettest catchment was ${wettest.name} with <strong>${depthInText(wettest.depth, input.minObserved)}</strong>`
  }.</p>`;
}

function wettestCatchment(input: ReportInput) {
  const known = input.catchments.filter(({ depth }) => Number.isFinite(depth.mm));
  return known.reduce<(typeof known)[number] | undefined>(
    (best, next) => (best === undefined || next.depth.mm > best.depth.mm ? next : best),
    undefined,
  );
}

/** What the figure rests on, in four facts. */
export function trustLine(input: ReportInput): Markup {
  return html`<dl class="trust"><div><dt>Observed</dt><dd><b>${percentText(
    input.headline.depth.observedFraction,
  )}</b><span>of area and time</span></dd></div><div><dt>Gauges</dt>${gaugeFact(
    input,
  )}</div><div><dt>Adjustment</dt>${adjustmentFact(input)}</div><div><dt>Cross-validated error</dt>${errorFact(
    input,
  )}</div></dl>`;
}

function gaugeFact(input: ReportInput): Markup {
  const { gauges } = input;
  if (gauges.length === 0) return html`<dd><b>none</b><span>no gauge checks these figures</span></dd>`;
  const count = (role: (typeof gauges)[number]["role"]) =>
    gauges.filter((gauge) => gauge.role === role).length;
  return html`<dd><b>${countText(count("used"))} ${ROLE_WORDS.used}</b><span>${countText(count("doubted"))} doubted, ${countText(
    count("left-out"),
  )} left out, of ${countText(gauges.length)}</span></dd>`;
}

function adjustmentFact({ adjustment }: ReportInput): Markup {
  if (!adjustment.applied) return html`<dd><b>none</b><span>${adjustment.reason}</span></dd>`;
  return html`<dd><b>× ${ratioText(adjustment.factor)}</b><span>${adjustment.method}, gauge/radar${
    adjustment.limited && ", cut at the plan's limit"
  }</span></dd>`;
}

function errorFact({ crossValidation }: ReportInput): Markup {
  if ("reason" in crossValidation) return html`<dd><b>–</b><span>${crossValidation.reason}</span></dd>`;
  const { errorMm, errorPercent, what } = crossValidation;
  return html`<dd><b>${mmText(errorMm)} mm, ${percentText(errorPercent / 100)}</b><span>${what}</span></dd>`;
}

function cautionItem({ text, detail }: Caution): Markup {
  return html`<li><strong>${text}</strong>${detail !== undefined && html` <span>${detail}</span>`}</li>`;
}

/** What could change the figure, most important first. */
export function firstCautions(input: ReportInput): Markup {
  const cautions = orderedCautions(input.cautions);
  const rest = cautions.length - FIRST_SCREEN_CAUTIONS;
  if (cautions.length === 0) return html``;
  return html`<section class="cautions" aria-labelledby="cautions-heading"><h2 id="cautions-heading">What could change these figures</h2><ol>${cautions
    .slice(0, FIRST_SCREEN_CAUTIONS)
    .map(
      cautionItem,
    )}</ol>${rest > 0 && html`<p><a href="#limits">${counted(rest, "more caution")}</a> below.</p>`}</section>`;
}

/** Every caution, and what radar rain is not for. */
export function limitsSection(input: ReportInput): Markup {
  const cautions = orderedCautions(input.cautions);
  return html`<section id="limits" aria-labelledby="limits-heading"><h2 id="limits-heading">Cautions and limits of use</h2>${
    cautions.length > 0 && html`<ol>${cautions.map(cautionItem)}</ol>`
  }<ul><li>Radar rain is an estimate. It is worked out from echoes aloft, and what reaches the ground can differ.</li><li>A single cell of the map is less certain than a mean over a catchment.</li><li>A gauge measures a few hundred square centimetres and a cell of the map a great deal more: part of every difference between them is neither's fault.</li><li>“≥” stands before depths of which a part of the area or time was not observed: the true depth is at least that. “At cap” marks depths that a capped rain rate went into: they may be too low.</li><li>These figures do not replace official warnings, local codes or the judgement of a licensed practitioner. They are not enough alone for decisions on dam safety or warnings.</li></ul></section>`;
}
