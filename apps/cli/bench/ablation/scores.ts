import { additiveScores } from "@rainreckon/verification";

/** Ground distance from the nearest radar at which one band of bias ends and the next begins, km. */
export const RANGE_BANDS_KM = [15, 30, 45, 60] as const;

/** How one map of depths compares with the truth on a set of cells. */
export interface MapScore {
  readonly cells: number;
  readonly rmseMm: number;
  /** Sum of the estimate over sum of the truth. */
  readonly biasRatio: number;
  readonly correlation: number;
  /** The same ratio by distance from the nearest radar, NaN where a band has no rain. Shape [bands + 1]. */
  readonly biasByRange: readonly number[];
}

/**
 * Scores of a map of depths against the truth.
 *
 * @param estimateMm - shape [cells]; finite wherever `use` is 1
 * @param use - shape [cells]; 1 for cells that count
 * @param rangeKm - shape [cells]; distance from the nearest radar
 */
export function scoreMap(
  estimateMm: Float32Array,
  truthMm: Float32Array,
  use: Uint8Array,
  rangeKm: Float32Array,
): MapScore {
  const cells = cellsOf(use);
  const radarMm = Float64Array.from(cells, (cell) => estimateMm[cell]);
  const gaugeMm = Float64Array.from(cells, (cell) => truthMm[cell]);
  const scores = additiveScores({ radarMm, gaugeMm });
  const estimateByBand = new Float64Array(RANGE_BANDS_KM.length + 1);
  const truthByBand = new Float64Array(RANGE_BANDS_KM.length + 1);
  for (const cell of cells) {
    const found = RANGE_BANDS_KM.findIndex((endKm) => rangeKm[cell] < endKm);
    const band = found < 0 ? RANGE_BANDS_KM.length : found;
    estimateByBand[band] += estimateMm[cell];
    truthByBand[band] += truthMm[cell];
  }
  return {
    cells: cells.length,
    rmseMm: scores.rootMeanSquareErrorMm.value,
    biasRatio: scores.biasRatio.value,
    correlation: scores.pearsonCorrelation.value,
    biasByRange: Array.from(estimateByBand, (sum, band) =>
      truthByBand[band] > 0 ? sum / truthByBand[band] : Number.NaN,
    ),
  };
}

function cellsOf(use: Uint8Array): number[] {
  const cells: number[] = [];
  for (let cell = 0; cell < use.length; cell++) if (use[cell] === 1) cells.push(cell);
  return cells;
}

/**
 * Cells that every map observed for at least a share of the window: only on these can maps be compared.
 *
 * @param observed - shape [maps][cells]
 */
export function commonCells(observed: readonly Float32Array[], leastShare: number): Uint8Array {
  return Uint8Array.from(observed[0], (_, cell) =>
    observed.every((map) => map[cell] >= leastShare) ? 1 : 0,
  );
}

/** Value below which a share of the numbers lies: nearest rank. NaN of none. */
export function nearestRank(values: Iterable<number>, share: number): number {
  const ascending = [...values].sort((a, b) => a - b);
  if (ascending.length === 0) return Number.NaN;
  return ascending[Math.max(0, Math.ceil(share * ascending.length) - 1)];
}

/** Median; the mean of the middle two of an even number. NaN of none. */
export function median(values: readonly number[]): number {
  const ascending = values.toSorted((a, b) => a - b);
  const middle = ascending.length / 2;
  if (ascending.length === 0) return Number.NaN;
  return ascending.length % 2 === 1
    ? ascending[Math.floor(middle)]
    : (ascending[middle - 1] + ascending[middle]) / 2;
}

/** Depth from which a cell counts as wet, mm; house rule. */
const WET_MM = 1;

/** What a correction must leave alone where its artefact is absent. */
export interface Extremes {
  /** 95th percentile of the storm total over wet cells, mm. */
  readonly wet95Mm: number;
  /** Most rain of any cell in any hour of the window, mm. */
  readonly peakHourMm: number;
}

/** @param hoursMm - shape [hours][cells] */
export function extremesOf(
  totalMm: Float32Array,
  hoursMm: readonly Float32Array[],
  use: Uint8Array,
): Extremes {
  const counts = (mm: number, cell: number) => use[cell] === 1 && mm >= WET_MM;
  let peakHourMm = Number.NaN;
  for (const hour of hoursMm) {
    for (let cell = 0; cell < hour.length; cell++) {
      if (use[cell] === 1 && !(hour[cell] <= peakHourMm) && !Number.isNaN(hour[cell])) {
        peakHourMm = hour[cell];
      }
    }
  }
  return { wet95Mm: nearestRank(totalMm.filter(counts), 0.95), peakHourMm };
}
