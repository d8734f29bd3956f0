import { scaleLinear, scaleLog } from "d3-scale";
import { interpolateViridis } from "d3-scale-chromatic";
import { html, type Markup } from "../text/html.ts";
import { svgNumber } from "../text/numbers.ts";
import { chartPage } from "./chart-page.ts";

/** A power law Z = A R^b on a chart. */
export interface RelationLine {
  readonly name: string;
  readonly a: number;
  readonly b: number;
}

/** Pairs of reflectivity and rain rate with the relations fitted to them. */
export interface RelationChart {
  readonly title: string;
  /** One sentence below the title: how many pairs of what. */
  readonly about: string;
  /** Finite reflectivities and rates above 0. Shapes [pairs]. */
  readonly dbz: ArrayLike<number>;
  readonly rateMmPerHour: ArrayLike<number>;
  /** At most eight. */
  readonly fitted: readonly RelationLine[];
  /** Published relations, drawn thin behind the others. */
  readonly published: readonly RelationLine[];
}

const WIDTH = 760;
const LEFT = 70;
const INNER = WIDTH - LEFT - 30;
const HEIGHT = 460;
const HEAD = 66;
const KEY_STEP = 18;
const RATE_TICKS = [0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1, 2, 5, 10, 20, 50, 100, 200, 500, 1000];
/** Lines that differ in more than colour: they stay apart in print and for any eye. */
const DASHES = ["none", "9 4", "3 3", "12 3 3 3", "1 4", "14 5", "5 2 1 2", "7 7"];

/**
 * Reflectivity in dBZ against rain rate on a logarithmic axis, where a power law is a straight line.
 *
 * @param id - unique on the page
 * @throws RangeError where the two sides differ in length, or a pair has no place on the axes
 */
export function svgRelations(id: string, chart: RelationChart): Markup {
  const pairs = Array.from(chart.rateMmPerHour, (rate, k) => ({ rate, dbz: chart.dbz[k] as number }));
  if (chart.dbz.length !== pairs.length) throw new RangeError("as many reflectivities as rain rates");
  if (pairs.some(({ rate, dbz }) => !(rate > 0 && Number.isFinite(rate) && Number.isFinite(dbz)))) {
    throw new RangeError("a chart of relations needs rates above 0 and finite reflectivities");
  }
  const rates = pairs.length === 0 ? [0.1, 100] : pairs.map(({ rate }) => rate);
  const levels = pairs.length === 0 ? [10, 55] : pairs.map(({ dbz }) => dbz);
  const extent = (values: readonly number[]) =>
    values.reduce(([low, high], value) => [Math.min(low, value), Math.max(high, value)] as const, [
      Number.POSITIVE_INFINITY,
      Number.NEGATIVE_INFINITY,
    ] as readonly [number, number]);
  const [leastRate, mostRate] = extent(rates);
  const [leastDbz, mostDbz] = extent(levels);
  const x = scaleLog([leastRate / 1.3, mostRate * 1.3], [LEFT, LEFT + INNER]);
  const y = scaleLinear(
    [Math.floor((leastDbz - 1) / 5) * 5, Math.ceil((mostDbz + 1) / 5) * 5],
    [HEAD + HEIGHT, HEAD],
  );
  const floor = HEAD + HEIGHT;
  const height = floor + 56 + KEY_STEP * (chart.fitted.length + (chart.published.length > 0 ? 1 : 0)) + 14;
  const colourOf = (k: number) => interpolateViridis((0.85 * k) / Math.max(1, chart.fitted.length - 1));
  const keyY = (k: number) => floor + 56 + KEY_STEP * k;
  return html`<svg xmlns="http://www.w3.org/2000/svg" role="img" aria-labelledby="${id}-title ${id}-desc" viewBox="0 0 ${WIDTH} ${height}" width="${WIDTH}" height="${height}" font-family="system-ui, sans-serif" font-size="12" fill="#1c2227"><title id="${id}-title">${chart.title}</title><desc id="${id}-desc">${chart.about} ${chart.fitted.map(({ name, a, b }) => `${name}: Z = ${figure(a)} R^${b.toFixed(2)}.`).join(" ")}</desc><rect width="${WIDTH}" height="${height}" fill="#ffffff"/><text x="${LEFT}" y="26" font-size="17" font-weight="650">${chart.title}</text><text x="${LEFT}" y="46" fill="#5b656d">${chart.about}</text><clipPath id="${id}-frame"><rect x="${LEFT}" y="${HEAD}" width="${INNER}" height="${HEIGHT}"/></clipPath>${RATE_TICKS.filter(
    (rate) => x(rate) >= LEFT && x(rate) <= LEFT + INNER,
  ).map(
    (rate) =>
      html`<path d="M${svgNumber(x(rate))} ${HEAD}V${floor}" stroke="#e4e2dc"/><text x="${svgNumber(x(rate))}" y="${floor + 16}" text-anchor="middle">${rate}</text>`,
  )}${y
    .ticks(9)
    .map(
      (dbz) =>
        html`<path d="M${LEFT} ${svgNumber(y(dbz))}H${LEFT + INNER}" stroke="#e4e2dc"/><text x="${LEFT - 8}" y="${svgNumber(y(dbz) + 4)}" text-anchor="end">${String(dbz).replace("-", "\u2212")}</text>`,
    )}<rect x="${LEFT}" y="${HEAD}" width="${INNER}" height="${HEIGHT}" fill="none" stroke="#5b656d"/><text x="${LEFT + INNER / 2}" y="${floor + 34}" text-anchor="middle">rain rate, mm/h (logarithmic)</text><text transform="translate(18 ${HEAD + HEIGHT / 2}) rotate(-90)" text-anchor="middle">reflectivity, dBZ</text><g clip-path="url(#${id}-frame)">${chart.published.map(
    (law) =>
      html`<path class="published" d="${linePath(law, x, y)}" stroke="#b3aea4" stroke-width="1" fill="none"><title>${law.name}: Z = ${figure(law.a)} R^${law.b}</title></path>`,
  )}${pairs.map(
    ({ rate, dbz }) =>
      html`<circle class="pair" cx="${svgNumber(x(rate))}" cy="${svgNumber(y(dbz))}" r="2.6" fill="#1c2227" fill-opacity="0.35"/>`,
  )}${chart.fitted.map(
    (law, k) =>
      html`<path class="fitted" d="${linePath(law, x, y)}" stroke="${colourOf(k)}" stroke-width="2.4" stroke-dasharray="${DASHES[k % DASHES.length]}" fill="none"><title>${law.name}</title></path>`,
  )}</g>${chart.fitted.map(
    ({ name, a, b }, k) =>
      html`<path d="M${LEFT} ${keyY(k)}H${LEFT + 40}" stroke="${colourOf(k)}" stroke-width="2.4" stroke-dasharray="${DASHES[k % DASHES.length]}"/><text x="${LEFT + 50}" y="${keyY(k) + 4}">${name}: Z = ${figure(a)} R^${b.toFixed(2)}</text>`,
  )}${
    chart.published.length > 0 &&
    html`<path d="M${LEFT} ${keyY(chart.fitted.length)}H${LEFT + 40}" stroke="#b3aea4"/><text x="${LEFT + 50}" y="${keyY(chart.fitted.length) + 4}" fill="#5b656d">published relations for rain</text>`
  }</svg>`;
}

/** A straight line over the whole width. */
function linePath(
  { a, b }: RelationLine,
  x: ReturnType<typeof scaleLog<number>>,
  y: (dbz: number) => number,
): string {
  const at = (rate: number) =>
    `${svgNumber(x(rate))} ${svgNumber(y(10 * (Math.log10(a) + b * Math.log10(rate))))}`;
  const [least, most] = x.domain() as [number, number];
  return `M${at(least)}L${at(most)}`;
}

/** Three figures. */
function figure(value: number): string {
  return String(Number(value.toPrecision(3)));
}

/** A whole page that holds the chart and nothing from elsewhere. */
export function relationPage(chart: RelationChart): string {
  return chartPage(chart.title, svgRelations("relations", chart));
}
