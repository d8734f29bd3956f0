import { FieldSum, type TotalPlanes, totalPlanes } from "@rainreckon/accumulation";
import { COMPANIONS } from "./companions.ts";
import {
  type AreaStepSeries,
  noCounts,
  type RunShape,
  type StepSeries,
  type SweepFault,
  type UnitCounts,
  type UnitJob,
  type UnitResult,
} from "./job.ts";
import type { UnitStore } from "./unit-store.ts";

/** A run put together from its units, but for the depth of each interval, which stays on disk. */
export interface AssembledRun {
  readonly planes: TotalPlanes;
  /** Shape [cells]: depth of the rain that the radars could not have seen; NaN where not observed or not known. */
  readonly unseenMm: Float32Array;
  /** Shape [variants][headline cells]: window depth under each other relation; NaN where not observed. */
  readonly variantMm: readonly Float64Array[];
  /** Sums in float64 that areal figures of the window are made from. */
  readonly sum: FieldSum;
  /** Shapes [gauges or areas][steps of the window]. */
  readonly gauges: StepSeries;
  /** Shape [field cells][steps of the window]: NaN where not observed. */
  readonly fieldMm: readonly Float32Array[];
  readonly areas: AreaStepSeries;
  readonly counts: UnitCounts;
  readonly notices: readonly SweepFault[];
}

/**
 * Adds up the results of all units in time order, holding one unit at a time.
 *
 * Totals are sums of the stored intervals in float64, so they do not depend on how a run was cut or who did
 * which part.
 */
export function assemble(
  shape: RunShape,
  jobs: readonly UnitJob[],
  store: UnitStore,
  windowMs: number,
): AssembledRun {
  const sum = new FieldSum(
    shape.grid.nx * shape.grid.ny,
    shape.radars.length + shape.grids.length,
    shape.variants.length,
    shape.headlineCells.length,
    COMPANIONS,
  );
  const counts = noCounts();
  const notices = new Map<string, SweepFault>();
  const pieces: UnitResult[] = [];
  const unseen = new Float64Array(shape.grid.nx * shape.grid.ny);
  for (const job of jobs) {
    const { intervals, ...rest } = store.load(job);
    for (const interval of intervals) sum.add(interval);
    for (const part of rest.unseenMm) {
      for (let cell = 0; cell < unseen.length; cell++) unseen[cell] += part[cell];
    }
    addCounts(counts, rest.counts);
    // A border scan that fails to decode is met by two units, and told once.
    for (const notice of rest.notices) notices.set(`${notice.where}|${notice.what}`, notice);
    pieces.push({ ...rest, intervals: [], unseenMm: [] });
  }
  const joined = (rowsOf: (piece: UnitResult) => readonly Float64Array[], rows: number): Float64Array[] =>
    Array.from({ length: rows }, (_, row) => {
      const parts = pieces.map((piece) => rowsOf(piece)[row]);
      const whole = new Float64Array(parts.reduce((length, part) => length + part.length, 0));
      let at = 0;
      for (const part of parts) {
        whole.set(part, at);
        at += part.length;
      }
      return whole;
    });
  const gaugeCount = shape.gaugeCells.length;
  const areaCount = shape.areas.length;
  return {
    planes: totalPlanes(sum, windowMs, shape.radars.length),
    unseenMm: Float32Array.from(unseen, (mm, cell) => (sum.observedMs[cell] > 0 ? mm : Number.NaN)),
    variantMm: sum.variantMm,
    sum,
    gauges: {
      depthMm: joined((piece) => piece.gauges.depthMm, gaugeCount),
      observedFraction: joined((piece) => piece.gauges.observedFraction, gaugeCount),
    },
    fieldMm: shape.fieldCells.length === 0 ? [] : joinedField(pieces, shape.fieldCells.length),
    areas: {
      depthMm: joined((piece) => piece.areas.depthMm, areaCount),
      observedFraction: joined((piece) => piece.areas.observedFraction, areaCount),
      maxCellMm: joined((piece) => piece.areas.maxCellMm, areaCount),
      cappedMm: joined((piece) => piece.areas.cappedMm, areaCount),
    },
    counts,
    notices: [...notices.values()].sort((a, b) => (a.where < b.where ? -1 : 1)),
  };
}

function joinedField(pieces: readonly UnitResult[], rows: number): Float32Array[] {
  const length = pieces.reduce((sum, { fieldMm }) => sum + fieldMm[0].length, 0);
  return Array.from({ length: rows }, (_, row) => {
    const whole = new Float32Array(length);
    let at = 0;
    for (const { fieldMm } of pieces) {
      whole.set(fieldMm[row], at);
      at += fieldMm[row].length;
    }
    return whole;
  });
}

function addCounts(sum: UnitCounts, part: UnitCounts): void {
  const { gatesScreened, profileBands, ...plain } = part;
  for (const key of Object.keys(plain) as (keyof typeof plain)[]) sum[key] += plain[key];
  gatesScreened.forEach((gates, screen) => {
    sum.gatesScreened[screen] += gates;
  });
  profileBands.forEach(({ wetGates, addedCentiDb, lostGates }, band) => {
    const into = sum.profileBands[band];
    into.wetGates += wetGates;
    into.addedCentiDb += addedCentiDb;
    into.lostGates += lostGates;
  });
}
