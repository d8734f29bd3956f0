import type { ArealReductionTable, FrequencyTable } from "@rainreckon/core";

/** A return period, or the end of the table that it lies beyond. */
export interface ReturnPeriod {
  readonly years: number;
  /** below: shorter than `years`; above: longer than it; at: this one. Nothing is extrapolated. */
  readonly is: "below" | "at" | "above";
}

/**
 * Reduced variate of Gumbel's distribution, y = -ln(-ln(1 - 1/T)): depths of annual maxima are nearly linear in it.
 *
 * @param periodYears - above 1
 * @remarks Gumbel (1958), Statistics of Extremes, Columbia University Press.
 */
export function reducedVariate(periodYears: number): number {
  return -Math.log(-Math.log1p(-1 / periodYears));
}

/** The inverse of {@link reducedVariate}. */
export function periodOfVariate(y: number): number {
  return -1 / Math.expm1(-Math.exp(-y));
}

/**
 * Return period in annual maxima of what has a return period in a partial-duration series: 1 / (1 - exp(-1/T)).
 *
 * @remarks Langbein (1949), Annual floods and the partial-duration flood series, Transactions of the American
 * Geophysical Union 30, 879-881.
 */
export function annualFromPartial(partialYears: number): number {
  return -1 / Math.expm1(-1 / partialYears);
}

/** The inverse of {@link annualFromPartial}. @param annualYears - above 1 */
export function partialFromAnnual(annualYears: number): number {
  return -1 / Math.log1p(-1 / annualYears);
}

/** Depths of a table, or an end of its interval: shape [durations][periods]. */
export type TableColumn = "depthMm" | "lowMm" | "highMm";

/**
 * Depths of each return period of a table at a duration, log-log between the durations of the table.
 *
 * @returns shape [periods]; undefined outside the table's durations, and where it has no such column
 */
export function depthsAtDuration(
  table: FrequencyTable,
  durationMin: number,
  column: TableColumn = "depthMm",
): readonly number[] | undefined {
  const rows = table[column];
  if (rows === undefined) return undefined;
  const place = placeAmong(table.durationsMin, durationMin);
  if (place === undefined) return undefined;
  const [k, share] = place;
  return rows[k].map((mm, t) => {
    const next = rows[k + 1]?.[t];
    // A depth of 0 has no logarithm, and beyond the last row nothing is asked for.
    return share === 0 || next === undefined ? mm : Math.exp(mix(Math.log(mm), Math.log(next), share));
  });
}

/**
 * Depth of a duration and return period: first log-log in duration, then linear in the variate of the period.
 *
 * @returns NaN outside the table
 */
export function frequencyDepthMm(table: FrequencyTable, durationMin: number, periodYears: number): number {
  const depths = depthsAtDuration(table, durationMin);
  const { periodsYears } = table;
  if (depths === undefined) return Number.NaN;
  const exact = periodsYears.indexOf(periodYears);
  if (exact >= 0) return depths[exact];
  const after = periodsYears.findIndex((years) => years > periodYears);
  if (after <= 0) return Number.NaN;
  const variate = variateOf(table);
  const [low, high] = [variate(periodsYears[after - 1]), variate(periodsYears[after])];
  return mix(depths[after - 1], depths[after], (variate(periodYears) - low) / (high - low));
}

/**
 * Return period of a depth that fell in a duration: log-log in duration, then linear in the variate of the period.
 * That variate is Gumbel's for annual maxima, and the logarithm of the period for a partial-duration series, in which
 * exponentially distributed exceedances lie on a line.
 *
 * @param areal - factor on the table's depths, such as an areal reduction; 1 where there is none
 * @param column - the table's depths, or an end of its own interval
 * @returns undefined where the duration lies outside the table, or it has no such column
 */
export function returnPeriod(
  table: FrequencyTable,
  durationMin: number,
  depthMm: number,
  areal = 1,
  column: TableColumn = "depthMm",
): ReturnPeriod | undefined {
  const depths = depthsAtDuration(table, durationMin, column)?.map((mm) => mm * areal);
  const { periodsYears } = table;
  if (depths === undefined || Number.isNaN(depthMm)) return undefined;
  const last = depths.length - 1;
  if (depthMm < depths[0]) return { years: periodsYears[0], is: "below" };
  if (depthMm > depths[last]) return { years: periodsYears[last], is: "above" };
  const exact = depths.indexOf(depthMm);
  if (exact >= 0) return { years: periodsYears[exact], is: "at" };
  const after = depths.findIndex((mm) => mm > depthMm);
  const variate = variateOf(table);
  const share = (depthMm - depths[after - 1]) / (depths[after] - depths[after - 1]);
  const v = mix(variate(periodsYears[after - 1]), variate(periodsYears[after]), share);
  return { years: table.series === "PDS" ? Math.exp(v) : periodOfVariate(v), is: "at" };
}

/** The same in the other series: years counted as annual maxima, or as all exceedances. */
export function inSeries(
  period: ReturnPeriod,
  from: FrequencyTable["series"],
  to: "AMS" | "PDS",
): ReturnPeriod {
  if (from === to || from === "unknown") return period;
  const years = to === "AMS" ? annualFromPartial(period.years) : partialFromAnnual(period.years);
  return { ...period, years };
}

/**
 * Areal reduction of a duration and area, linear in the logarithms of both between the entries of a table.
 *
 * @returns undefined outside the table: nothing is extrapolated
 */
export function arealReduction(
  table: ArealReductionTable,
  durationMin: number,
  areaKm2: number,
): number | undefined {
  const duration = placeAmong(table.durationsMin, durationMin);
  const area = placeAmong(table.areasKm2, areaKm2);
  if (duration === undefined || area === undefined) return undefined;
  const [d, ofDuration] = duration;
  const [a, ofArea] = area;
  const at = (row: readonly number[]) => (ofArea === 0 ? row[a] : mix(row[a], row[a + 1], ofArea));
  const here = at(table.factor[d]);
  return ofDuration === 0 ? here : mix(here, at(table.factor[d + 1]), ofDuration);
}

function variateOf({ series }: FrequencyTable): (years: number) => number {
  return series === "PDS" ? Math.log : reducedVariate;
}

/** Where a value stands among ascending ones: the one before it, and the share of the way on, in logarithms. */
function placeAmong(ascending: readonly number[], value: number): readonly [number, number] | undefined {
  const exact = ascending.indexOf(value);
  if (exact >= 0) return [exact, 0];
  const after = ascending.findIndex((one) => one > value);
  if (after <= 0) return undefined;
  const [low, high] = [Math.log(ascending[after - 1]), Math.log(ascending[after])];
  return [after - 1, (Math.log(value) - low) / (high - low)];
}

function mix(a: number, b: number, share: number): number {
  return a + (b - a) * share;
}
