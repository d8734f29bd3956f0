import { ticks } from "d3-array";
import { scaleLinear, scaleLog } from "d3-scale";
import { interpolateViridis } from "d3-scale-chromatic";
import { area, line } from "d3-shape";
import { html, type Markup } from "../text/html.ts";
import { svgNumber } from "../text/numbers.ts";
import { chartPage } from "./chart-page.ts";

/** One radar of a budget chart. Shapes [ranges]; NaN where nothing is known. */
export interface BudgetCurve {
  readonly name: string;
  /** The name with what tells the radar apart. */
  readonly label: string;
  /** Ascending. */
  readonly rangeKm: readonly number[];
  readonly weakestEchoDbz: readonly number[];
  /** Lower half-power edge, centre and upper edge of the beam. */
  readonly beamLowM: readonly number[];
  readonly beamCentreM: readonly number[];
  readonly beamHighM: readonly number[];
  /** Two-way loss behind the rain, one a rain rate of the chart. Shape [rates]. */
  readonly rainLossDb: readonly number[];
}

export interface BudgetChart {
  readonly title: string;
  /** What the heights stand above: "antenna", "mean sea level". */
  readonly heightsAbove: string;
  readonly rainKm: number;
  readonly rainRatesMmPerHour: readonly number[];
  /** Marks of the right-hand axis: rain rates and the reflectivity that the relation in use gives them. */
  readonly rateTicks: readonly { readonly mmPerHour: number; readonly dbz: number }[];
  readonly relation: string;
  readonly radars: readonly BudgetCurve[];
}

const WIDTH = 760;
const LEFT = 78;
const RIGHT = 104;
const PANEL = 220;
const GAP = 78;
/** Of the first panel, below title, key and its own heading. */
const HEAD = 96;
const INNER = WIDTH - LEFT - RIGHT;
/** Lines that differ in more than colour: they stay apart in print and for any eye. */
const DASHES = ["none", "9 4", "3 3", "12 3 3 3"];
const LABEL_STEP = 15;

interface Styled extends BudgetCurve {
  readonly colour: string;
  readonly dash: string;
}

/**
 * The budgets of radars side by side as one SVG: weakest echo by range, loss behind rain, and the beam.
 *
 * @param id - unique on the page
 * @throws RangeError where there is no radar, or a radar without ranges
 */
export function svgBudget(id: string, chart: BudgetChart): Markup {
  if (chart.radars.length === 0 || chart.radars.some(({ rangeKm }) => rangeKm.length === 0))
    throw new RangeError("a budget chart needs a radar, and ranges for each");
  const many = chart.radars.length;
  const radars = chart.radars.map(
    (curve, k): Styled => ({
      ...curve,
      colour: interpolateViridis(many === 1 ? 0.3 : (0.8 * k) / (many - 1)),
      dash: DASHES[k % DASHES.length] as string,
    }),
  );
  const top = HEAD + LABEL_STEP * many;
  const lossTop = top + PANEL + GAP;
  const lossHeight = 30 * chart.rainRatesMmPerHour.length + 10;
  const beamTop = lossTop + lossHeight + GAP;
  const height = beamTop + PANEL + 46;
  const farKm = Math.max(...radars.flatMap(({ rangeKm }) => rangeKm));
  const x = scaleLinear([0, farKm], [LEFT, LEFT + INNER]);
  return html`<svg xmlns="http://www.w3.org/2000/svg" role="img" aria-labelledby="${id}-title ${id}-desc" viewBox="0 0 ${WIDTH} ${height}" width="${WIDTH}" height="${height}" font-family="system-ui, sans-serif" font-size="12" fill="#1c2227"><title id="${id}-title">${chart.title}</title><desc id="${id}-desc">Weakest echo seen by range, two-way loss behind rain, and height of the beam, for ${radars.map(({ label }) => label).join(", ")}.</desc><rect width="${WIDTH}" height="${height}" fill="#ffffff"/><text x="${LEFT}" y="26" font-size="17" font-weight="650">${chart.title}</text>${weakestPanel(
    radars,
    chart,
    x,
    top,
  )}${lossPanel(radars, chart, lossTop, lossHeight)}${beamPanel(radars, chart, x, beamTop)}${radars.map(
    ({ label, colour, dash }, k) =>
      html`<g transform="translate(${LEFT} ${48 + LABEL_STEP * k})"><path d="M0 0H34" stroke="${colour}" stroke-width="2.4" stroke-dasharray="${dash}"/>${mark(k, 17, 0, colour)}<text x="44" y="4">${label}</text></g>`,
  )}</svg>`;
}

/** A whole page that holds the chart and nothing from elsewhere. */
export function budgetPage(chart: BudgetChart): string {
  return chartPage(chart.title, svgBudget("budget", chart));
}

function panelTitle(words: string, sub: string, top: number): Markup {
  return html`<text x="${LEFT}" y="${top - 24}" font-weight="650">${words}</text><text x="${LEFT}" y="${top - 9}" fill="#5b656d" font-size="11">${sub}</text>`;
}

function rangeAxis(x: (km: number) => number, farKm: number, top: number): Markup {
  const floor = top + PANEL;
  return html`${ticks(0, farKm, 8).map(
    (km) =>
      html`<path d="M${svgNumber(x(km))} ${top}V${floor}" stroke="#e4e2dc"/><text x="${svgNumber(x(km))}" y="${floor + 16}" text-anchor="middle">${km}</text>`,
  )}<path d="M${LEFT} ${floor}H${LEFT + INNER}" stroke="#5b656d"/><text x="${LEFT + INNER / 2}" y="${floor + 32}" text-anchor="middle">slant range, km</text>`;
}

function weakestPanel(
  radars: readonly Styled[],
  chart: BudgetChart,
  x: (km: number) => number,
  top: number,
): Markup {
  const values = radars.flatMap(({ weakestEchoDbz }) => weakestEchoDbz.filter(Number.isFinite));
  const head = panelTitle(
    "Weakest echo that is seen",
    `dBZ on the left; on the right the rain rate it stands for (${chart.relation}). Rain below the line is not seen.`,
    top,
  );
  if (values.length === 0) {
    return html`${head}<text x="${LEFT}" y="${top + 24}" fill="#8a4b08">How sensitive these radars are is not known.</text>`;
  }
  // The first kilometres dive to depths that no one asks about.
  const low = Math.max(Math.min(...values), Math.max(...values) - 50);
  const y = scaleLinear(
    [Math.floor(low / 5) * 5, Math.ceil((Math.max(...values) + 1) / 5) * 5],
    [top + PANEL, top],
  );
  const [bottomDbz, topDbz] = y.domain() as [number, number];
  return html`${head}${rangeAxis(x, Math.max(...radars.flatMap(({ rangeKm }) => rangeKm)), top)}${ticks(
    bottomDbz,
    topDbz,
    7,
  ).map(
    (dbz) =>
      html`<path d="M${LEFT} ${svgNumber(y(dbz))}H${LEFT + INNER}" stroke="#e4e2dc"/><text x="${LEFT - 8}" y="${svgNumber(y(dbz) + 4)}" text-anchor="end">${String(dbz).replace("-", "\u2212")}</text>`,
  )}${chart.rateTicks
    .filter(({ dbz }) => dbz >= bottomDbz && dbz <= topDbz)
    .map(
      ({ mmPerHour, dbz }) =>
        html`<path d="M${LEFT + INNER} ${svgNumber(y(dbz))}h6" stroke="#5b656d"/><text x="${LEFT + INNER + 10}" y="${svgNumber(y(dbz) + 4)}">${mmPerHour} mm/h</text>`,
    )}${radars.map(({ rangeKm, weakestEchoDbz, colour, dash }) => {
    const shown = weakestEchoDbz.map((dbz, k) => ({ km: rangeKm[k] as number, dbz }));
    const path = line<(typeof shown)[number]>()
      .defined(({ dbz }) => dbz >= bottomDbz)
      .x(({ km }) => svgNumber(x(km)))
      .y(({ dbz }) => svgNumber(y(dbz)))(shown);
    return html`<path class="weakest" d="${path ?? ""}" fill="none" stroke="${colour}" stroke-width="2.4" stroke-dasharray="${dash}"/>`;
  })}`;
}

/** Losses from which half and nine tenths of Z are gone. */
const TOLD_LOSSES_DB: readonly (readonly [number, string])[] = [
  [3.01, "half of Z lost"],
  [10, "nine tenths"],
];

function lossPanel(radars: readonly Styled[], chart: BudgetChart, top: number, height: number): Markup {
  const unknown = radars.filter(({ rainLossDb }) => !rainLossDb.some((db) => db > 0));
  const without = unknown.length === 0 ? "" : ` Not known: ${unknown.map(({ name }) => name).join(", ")}.`;
  const head = panelTitle(
    `Loss behind ${chart.rainKm} km of even rain`,
    `dB, both ways; logarithmic. ITU-R P.838-3.${without}`,
    top,
  );
  const losses = radars.flatMap(({ rainLossDb }) => rainLossDb.filter((db) => db > 0));
  if (losses.length === 0) {
    return html`${head}<text x="${LEFT}" y="${top + 24}" fill="#8a4b08">Without a wavelength no loss can be told.</text>`;
  }
  const x = scaleLog([Math.min(0.1, ...losses) / 1.2, Math.max(20, ...losses) * 1.2], [LEFT, LEFT + INNER]);
  const decades = [0.001, 0.01, 0.1, 0.3, 1, 3, 10, 30, 100, 300, 1000];
  const [least, most] = x.domain() as [number, number];
  const rowY = (row: number) => top + 20 + 30 * row;
  return html`${head}${decades
    .filter((db) => db >= least && db <= most)
    .map(
      (db) =>
        html`<path d="M${svgNumber(x(db))} ${top}V${top + height}" stroke="#e4e2dc"/><text x="${svgNumber(x(db))}" y="${top + height + 16}" text-anchor="middle">${db}</text>`,
    )}${TOLD_LOSSES_DB.map(
    ([db, words]) =>
      html`<path d="M${svgNumber(x(db))} ${top}V${top + height}" stroke="#8a4b08" stroke-dasharray="2 3"/><text x="${svgNumber(x(db))}" y="${top + height + 31}" text-anchor="middle" fill="#8a4b08" font-size="11">${words}</text>`,
  )}${chart.rainRatesMmPerHour.map(
    (rate, row) =>
      html`<text x="${LEFT - 8}" y="${rowY(row) + 4}" text-anchor="end">${rate} mm/h</text><path d="M${LEFT} ${rowY(row)}H${LEFT + INNER}" stroke="#cfcdc6"/>${radars.map(
        ({ rainLossDb, colour, label }, k) => {
          const db = rainLossDb[row] as number;
          if (!(db > 0)) return false;
          return html`<g class="loss">${mark(k, x(db), rowY(row), colour)}<title>${label}, ${rate} mm/h: ${db.toPrecision(3)} dB</title></g>`;
        },
      )}`,
  )}`;
}

function beamPanel(
  radars: readonly Styled[],
  chart: BudgetChart,
  x: (km: number) => number,
  top: number,
): Markup {
  const highest = Math.max(
    100,
    ...radars.flatMap(({ beamHighM, beamCentreM }) => [...beamHighM, ...beamCentreM].filter(Number.isFinite)),
  );
  const lowest = Math.min(
    0,
    ...radars.flatMap(({ beamLowM, beamCentreM }) => [...beamLowM, ...beamCentreM].filter(Number.isFinite)),
  );
  const y = scaleLinear([lowest / 1000, highest / 1000], [top + PANEL, top]);
  return html`${panelTitle(
    `The beam, km above ${chart.heightsAbove}`,
    "Shaded between its half-power points; the line is its centre. Rain that forms or fades below is not seen.",
    top,
  )}${rangeAxis(x, Math.max(...radars.flatMap(({ rangeKm }) => rangeKm)), top)}${ticks(
    lowest / 1000,
    highest / 1000,
    6,
  ).map(
    (km) =>
      html`<path d="M${LEFT} ${svgNumber(y(km))}H${LEFT + INNER}" stroke="#e4e2dc"/><text x="${LEFT - 8}" y="${svgNumber(y(km) + 4)}" text-anchor="end">${String(km).replace("-", "\u2212")}</text>`,
  )}${radars.map(({ rangeKm, beamLowM, beamCentreM, beamHighM, colour, dash }) => {
    const places = rangeKm.map((km, k) => ({
      km,
      low: beamLowM[k] as number,
      centre: beamCentreM[k] as number,
      high: beamHighM[k] as number,
    }));
    const band = area<(typeof places)[number]>()
      .defined(({ low, high }) => Number.isFinite(low) && Number.isFinite(high))
      .x(({ km }) => svgNumber(x(km)))
      .y0(({ low }) => svgNumber(y(low / 1000)))
      .y1(({ high }) => svgNumber(y(high / 1000)))(places);
    const centre = line<(typeof places)[number]>()
      .x(({ km }) => svgNumber(x(km)))
      .y((place) => svgNumber(y(place.centre / 1000)))(places);
    return html`<path class="beam-band" d="${band ?? ""}" fill="${colour}" fill-opacity="0.13"/><path class="beam-centre" d="${centre ?? ""}" fill="none" stroke="${colour}" stroke-width="2" stroke-dasharray="${dash}"/>`;
  })}`;
}

/** A mark whose shape tells the radars apart without colour. */
function mark(k: number, atX: number, atY: number, colour: string): Markup {
  const [px, py] = [svgNumber(atX), svgNumber(atY)];
  const shapes = [
    html`<circle cx="${px}" cy="${py}" r="5" fill="${colour}"/>`,
    html`<path d="M${px} ${svgNumber(py - 6)}l6 11h-12z" fill="${colour}"/>`,
    html`<rect x="${svgNumber(px - 4.5)}" y="${svgNumber(py - 4.5)}" width="9" height="9" fill="${colour}"/>`,
    html`<path d="M${px} ${svgNumber(py - 6)}l6 6l-6 6l-6 -6z" fill="${colour}"/>`,
  ];
  return shapes[k % shapes.length] as Markup;
}
