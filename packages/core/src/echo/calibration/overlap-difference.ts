import { attenuationLine } from "./overlap-attenuation.ts";
import { type OverlapPairs, turned } from "./overlap-pairs.ts";
import { robustLine, TIME_BLOCKS, timeBlocks } from "./robust-line.ts";

/** An estimate in dB with its standard error. */
export interface Estimate {
  readonly valueDb: number;
  readonly standardErrorDb: number;
}

/** How much more one radar shows than another. */
export interface OverlapDifference extends Estimate {
  readonly oneSiteId: string;
  readonly otherSiteId: string;
  readonly sampleCount: number;
}

/** Behind more loss than this a difference says more of the correction than of the radars (house rule). */
const MOST_LOSS_DB = 3;
const LEAST_SAMPLES = 100;
/**
 * What is left in common to all samples: beams that are not quite filled alike, rain that moved between the scans, a loss
 * not known quite (house rule).
 */
const COMMON_ERROR_DB = 0.2;

/** Share of a customary loss that may be wrong: the spread of published coefficients (see `phaseCoefficients`). */
const LOSS_DOUBT = 0.3;

/** Two-way loss per degree of rain's phase that is customary for each radar's band. */
export interface OverlapCoefficients {
  readonly oneDbPerDeg: number;
  readonly otherDbPerDeg: number;
}

/**
 * How much more one radar shows than the other in the same rain.
 *
 * Where the phase of the radar that rain takes more from is known, its loss per degree is found together with the
 * difference, since a wrong one would pass for it. Else a robust mean of differences behind little loss is taken, and
 * what its correction may be wrong by makes part of the error. A comparison of radars at equal range and height is common
 * practice.
 *
 * @returns undefined for fewer than 100 samples, or four blocks of time
 */
export function overlapDifference(
  pairs: OverlapPairs,
  coefficients?: OverlapCoefficients,
): OverlapDifference | undefined {
  const names = { oneSiteId: pairs.oneSiteId, otherSiteId: pairs.otherSiteId };
  if (coefficients !== undefined) {
    const { oneDbPerDeg, otherDbPerDeg } = coefficients;
    const isOneTaught = oneDbPerDeg >= otherDbPerDeg;
    const fit = attenuationLine(isOneTaught ? pairs : turned(pairs), Math.min(oneDbPerDeg, otherDbPerDeg));
    if (fit !== undefined) {
      const teacherPhase = isOneTaught ? pairs.otherPhaseDeg : pairs.onePhaseDeg;
      const doubtDb = LOSS_DOUBT * Math.min(oneDbPerDeg, otherDbPerDeg) * meanOf(teacherPhase);
      return {
        ...names,
        valueDb: isOneTaught ? -fit.line.level : fit.line.level,
        standardErrorDb: Math.hypot(fit.line.levelError, COMMON_ERROR_DB, doubtDb),
        sampleCount: fit.sampleCount,
      };
    }
  }
  const mean = meanDifference(pairs);
  return mean === undefined ? undefined : { ...names, ...mean };
}

function meanDifference(pairs: OverlapPairs): (Estimate & { readonly sampleCount: number }) | undefined {
  const { oneDbz, otherDbz, oneLossDb, otherLossDb, weight, epochMs } = pairs;
  // A loss that was not estimated cannot rule a sample out.
  const used = Array.from(oneDbz.keys()).filter(
    (at) => !((oneLossDb[at] as number) + (otherLossDb[at] as number) > MOST_LOSS_DB),
  );
  if (used.length < LEAST_SAMPLES) return undefined;
  const line = robustLine(
    {
      x: new Float64Array(used.length),
      y: Float64Array.from(used, (at) => (oneDbz[at] as number) - (otherDbz[at] as number)),
      weight: Float64Array.from(used, (at) => weight[at] as number),
      block: timeBlocks(
        Float64Array.from(used, (at) => epochMs[at] as number),
        TIME_BLOCKS,
      ),
    },
    "level",
  );
  if (line === undefined) return undefined;
  const lossOf = (side: Float32Array) => meanOf(Float32Array.from(used, (at) => side[at] as number));
  const doubtDb = LOSS_DOUBT * Math.max(lossOf(oneLossDb), lossOf(otherLossDb));
  return {
    valueDb: line.level,
    standardErrorDb: Math.hypot(line.levelError, COMMON_ERROR_DB, doubtDb),
    sampleCount: used.length,
  };
}

/** Mean of what is known; 0 where nothing is. */
function meanOf(values: Float32Array): number {
  let [sum, count] = [0, 0];
  for (const value of values) {
    if (Number.isNaN(value)) continue;
    sum += value;
    count++;
  }
  return count === 0 ? 0 : sum / count;
}
