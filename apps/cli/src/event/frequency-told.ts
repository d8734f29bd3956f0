import {
  arealReduction,
  inSeries,
  type ReturnPeriod,
  returnPeriod,
  type TableColumn,
} from "@rainreckon/accumulation";
import type { ArealReductionTable, FrequencyTable } from "@rainreckon/core";
import type { PeriodTold } from "./schema.ts";

/** The user's own table, and how its periods are to be shown. */
export interface Frequency {
  readonly table: FrequencyTable;
  readonly shownAs: FrequencyTable["series"];
  readonly arealReduction: ArealReductionTable | undefined;
}

/** A depth whose return period is asked for. */
export interface DepthAsked {
  readonly durationMinutes: number;
  /** 0 for a gauge: a point. */
  readonly areaKm2: number;
  readonly depthMm: number;
  readonly p10Mm: number | null;
  readonly p90Mm: number | null;
  readonly lowerBound: boolean;
}

/** Two significant figures, and never more: "1.4", "12", "120". */
export function yearsText(years: number): string {
  return String(Number(years.toPrecision(2)));
}

/** "<2", ">100", "12"; of a depth that is a lower bound "≥12", or that so far as seen it lies below the table. */
export function periodText({ years, is }: ReturnPeriod, lowerBound: boolean): string {
  if (is === "above") return `>${yearsText(years)}`;
  if (is === "below") return lowerBound ? `<${yearsText(years)} as seen` : `<${yearsText(years)}`;
  return lowerBound ? `≥${yearsText(years)}` : yearsText(years);
}

/** What the table says of a depth; the interval of the depth is carried through. */
export function periodOf(frequency: Frequency, asked: DepthAsked): PeriodTold {
  const { table, shownAs } = frequency;
  const factor = factorOf(frequency, asked);
  const at = (mm: number | null, column: TableColumn = "depthMm"): ReturnPeriod | undefined => {
    if (mm === null) return undefined;
    const period = returnPeriod(table, asked.durationMinutes, mm, factor ?? 1, column);
    if (period === undefined || shownAs === "unknown") return period;
    return inSeries(period, table.series, shownAs);
  };
  const textOf = (period: ReturnPeriod | undefined) =>
    period === undefined ? null : periodText(period, false);
  const period = at(asked.depthMm);
  const [least, most] = [table.durationsMin[0], table.durationsMin[table.durationsMin.length - 1]];
  return {
    text: period === undefined ? "–" : periodText(period, asked.lowerBound),
    years: period?.years ?? null,
    is: period?.is ?? null,
    lowText: textOf(at(asked.p10Mm)),
    highText: textOf(at(asked.p90Mm)),
    tableLowText: textOf(at(asked.depthMm, "highMm")),
    tableHighText: textOf(at(asked.depthMm, "lowMm")),
    arealReduction: factor ?? null,
    reason: period === undefined ? `the table reaches from ${least} to ${most} min` : null,
  };
}

/** Factor on the table's depths; undefined where they are taken as they are. */
function factorOf(
  { table, arealReduction: reductions }: Frequency,
  { durationMinutes, areaKm2 }: DepthAsked,
): number | undefined {
  if (reductions === undefined || table.kind === "areal" || areaKm2 === 0) return undefined;
  return arealReduction(reductions, durationMinutes, areaKm2);
}

/** What must be said of comparing a place with the table, in sentences. */
export function comparisonNotes(
  { table, arealReduction: reductions }: Frequency,
  areaKm2: number,
  isCatchment: boolean,
  reducedEverywhere: boolean,
): string[] {
  const notes: string[] = [];
  if (table.kind === "areal") {
    if (table.areaKm2 === undefined)
      notes.push(
        "The table is of areal depths and does not say of which area: periods hold for that area only.",
      );
    else if (areaKm2 > 2 * table.areaKm2 || areaKm2 < table.areaKm2 / 2)
      notes.push(
        `The table is of means over ${table.areaKm2} km2, and this depth is one over ${areaText(areaKm2)} km2: its periods are not those of this area.`,
      );
    return notes;
  }
  if (reductions !== undefined && reducedEverywhere) return notes;
  if (isCatchment) {
    notes.push(
      reductions === undefined
        ? `A mean over ${areaText(areaKm2)} km2 is compared with depths at a point, which are deeper: the periods come out too short. Give --areal-reduction.`
        : `The areal reduction does not reach to ${areaText(areaKm2)} km2 in all durations: there the mean is compared with depths at a point, and its periods come out too short.`,
    );
  } else if (areaKm2 > 0) {
    notes.push(
      `The depth of a grid cell of ${areaText(areaKm2)} km2 is compared with depths at a point, which may be deeper in showers.`,
    );
  }
  return notes;
}

export function areaText(km2: number): string {
  return km2 < 10 ? String(Number(km2.toPrecision(2))) : km2.toFixed(0);
}

/** What a table says of itself, and how it is read, in sentences. */
export function tableWords({ table, shownAs, arealReduction: reductions }: Frequency): string[] {
  const words: string[] = [];
  words.push(
    table.series === "PDS"
      ? "Between its entries a depth lies log-log in duration, then in the logarithm of the period."
      : "Between its entries a depth lies log-log in duration, then in Gumbel's reduced variate of the period. Outside nothing is extrapolated.",
  );
  if (table.series === "unknown")
    words.push(
      "The table does not say whether its periods count annual maxima (AMS) or all exceedances (PDS): below some 10 years that makes a difference.",
    );
  if (table.kind === "unknown")
    words.push(
      "It does not say whether its depths are at a point or over an area; they are taken for those at a point.",
    );
  if (table.source === "") words.push("It does not say whose it is.");
  if (shownAs !== table.series && table.series !== "unknown")
    words.push(
      `Periods are shown as ${shownAs}: 1/T(AMS) = 1 - exp(-1/T(PDS)) (Langbein 1949, Transactions of the American Geophysical Union 30, 879-881).`,
    );
  if (reductions !== undefined)
    words.push(
      `Depths at a point are multiplied by an areal reduction${reductions.source === "" ? "" : ` (${reductions.source})`}.`,
    );
  return words;
}
