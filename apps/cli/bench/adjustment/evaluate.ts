import {
  fieldAdjuster,
  learnMethod,
  METHOD_NAMES,
  type MethodName,
  meanRainShare,
} from "@rainreckon/adjustment";
import { additiveScores } from "@rainreckon/verification";
import { settingsOf } from "../../src/total/adjust.ts";
import type { GatheredWorld } from "./gather.ts";

/** How depths compare with the truth. */
export interface DepthScore {
  readonly rmseMm: number;
  /** Sum of the estimate over sum of the truth. */
  readonly biasRatio: number;
  /** KGE′ (2012). */
  readonly klingGupta: number;
}

export interface CandidateScore {
  readonly name: MethodName;
  readonly total: DepthScore;
  /** All hours of all cells together. */
  readonly hourly: DepthScore;
  /** What cross-validation said of it, mm; NaN where no choice was made. */
  readonly heldOutMm: number;
  readonly clusterHeldOutMm: number;
}

/** Every candidate on one world and seed, on the same radar with the same gauges. */
export interface Measured {
  readonly world: string;
  readonly seed: number;
  readonly cells: number;
  readonly gauges: number;
  /** Gauges that were read and not trusted. */
  readonly notTrusted: number;
  /** What the job took by cross-validation. */
  readonly chosen: MethodName;
  /** Why there was nothing to choose from; empty where there was. */
  readonly refused: string;
  /** The error that the job publishes, mm. */
  readonly publishedMm: number;
  readonly candidates: readonly CandidateScore[];
}

/** Lets every method learn from the gauges that the job trusted, and holds its maps against the truth. */
export function evaluate(world: string, seed: number, gathered: GatheredWorld): Measured {
  const { run, total, comparison, hoursMm, truthTotalMm, truthHoursMm, rangeKm, use } = gathered;
  const { adjustment, choice } = comparison;
  const settings = settingsOf(run, total);
  const gauges = comparison.trusted;
  const share = meanRainShare(gauges);
  const candidates = METHOD_NAMES.map((name): CandidateScore => {
    const learned = learnMethod(name, gauges, settings);
    const adjuster = fieldAdjuster(learned, {
      grid: run.grid,
      totalMm: total.planes.totalMm,
      rangeKm: (cell) => rangeKm[cell],
      share,
    });
    const adjusted = run.intervals.map((interval, k) => adjuster.interval(interval, hoursMm[k]));
    const sumMm = new Float32Array(truthTotalMm.length);
    for (const hour of adjusted) for (const [cell, mm] of hour.entries()) sumMm[cell] += mm;
    const held = choice?.candidates.find((one) => one.name === name);
    return {
      name,
      total: score([sumMm], [truthTotalMm], use),
      hourly: score(adjusted, truthHoursMm, use),
      heldOutMm: held?.errorMm ?? Number.NaN,
      clusterHeldOutMm: held?.clusterErrorMm ?? Number.NaN,
    };
  });
  return {
    world,
    seed,
    cells: use.reduce((sum, one) => sum + one, 0),
    gauges: gauges.length,
    notTrusted: run.gauges.gauges.length - gauges.length,
    chosen: choice?.chosen ?? "none",
    refused: choice === undefined && !adjustment.applied ? adjustment.reason : "",
    publishedMm: choice?.validation.errorMm ?? Number.NaN,
    candidates,
  };
}

function score(maps: readonly Float32Array[], truths: readonly Float32Array[], use: Uint8Array): DepthScore {
  const radarMm: number[] = [];
  const gaugeMm: number[] = [];
  for (const [k, map] of maps.entries()) {
    for (const [cell, mm] of map.entries()) {
      if (use[cell] !== 1 || Number.isNaN(mm)) continue;
      radarMm.push(mm);
      gaugeMm.push(truths[k][cell]);
    }
  }
  const scores = additiveScores({ radarMm: Float64Array.from(radarMm), gaugeMm: Float64Array.from(gaugeMm) });
  return {
    rmseMm: scores.rootMeanSquareErrorMm.value,
    biasRatio: scores.biasRatio.value,
    klingGupta: scores.klingGupta2012.value,
  };
}
