import type { OverlapPairs } from "./overlap-pairs.ts";
import { median, type RobustLine, robustLine, TIME_BLOCKS, timeBlocks } from "./robust-line.ts";

/** Two-way loss per degree of rain's phase, as a neighbour radar teaches it. */
export interface LearnedAlpha {
  readonly alphaDbPerDeg: number;
  readonly standardError: number;
  readonly sampleCount: number;
  /** What the neighbour shows more where nothing lies between: a difference in calibration. */
  readonly differenceDb: number;
  readonly differenceErrorDb: number;
}

/** Factor of the law k = a Z^b that Hitschfeld and Bordan use, as a neighbour radar teaches it. */
export interface LearnedFactor {
  readonly factor: number;
  readonly standardError: number;
  readonly sampleCount: number;
  readonly differenceDb: number;
}

const LEAST_SAMPLES = 200;
/** A tenth of the samples must lie behind so much, or there is nothing to learn from (house rule). */
const LEAST_PHASE_DEG = 8;
const LEAST_LOSS_DB = 1;
/** What is learned must be so many of its standard errors. */
const LEAST_ERRORS = 3;

/**
 * Learns what rain takes from the first radar's echo per degree of its phase, from a neighbour that sees the same rain:
 * Z of the neighbour less its own, against its own phase. The level of that line is the difference in calibration, so that
 * neither passes for the other.
 *
 * @param pairs - `one` is the radar to be taught; both as they were before any attenuation was corrected, which is
 *   worked out from `oneAddedDb` and `otherAddedDb`
 * @param neighbourDbPerDeg - two-way loss of the neighbour's echo per degree of its own phase: customary for its band
 * @returns undefined for too few samples, too little phase, or where the slope is not three times its error
 */
export function learnAttenuationFromOverlap(
  pairs: OverlapPairs,
  neighbourDbPerDeg: number,
): LearnedAlpha | undefined {
  const fit = attenuationLine(pairs, neighbourDbPerDeg);
  if (fit === undefined || !(fit.line.slope > LEAST_ERRORS * fit.line.slopeError)) return undefined;
  return {
    alphaDbPerDeg: fit.line.slope,
    standardError: fit.line.slopeError,
    sampleCount: fit.sampleCount,
    differenceDb: fit.line.level,
    differenceErrorDb: fit.line.levelError,
  };
}

/**
 * The line behind {@link learnAttenuationFromOverlap}, whatever its slope.
 *
 * @returns undefined for too few samples, or too little phase
 */
export function attenuationLine(
  pairs: OverlapPairs,
  neighbourDbPerDeg: number,
): { readonly line: RobustLine; readonly sampleCount: number } | undefined {
  const { onePhaseDeg, otherPhaseDeg } = pairs;
  const used = Array.from(onePhaseDeg.keys()).filter((at) => !Number.isNaN(onePhaseDeg[at]));
  if (used.length < LEAST_SAMPLES) return undefined;
  const phase = Float64Array.from(used, (at) => onePhaseDeg[at] as number);
  if (highTenth(phase) < LEAST_PHASE_DEG) return undefined;
  const line = robustLine(
    {
      x: phase,
      // A neighbour without phase is taken to lose nothing.
      y: Float64Array.from(
        used,
        (at) => excessDb(pairs, at) + neighbourDbPerDeg * ((otherPhaseDeg[at] as number) || 0),
      ),
      weight: Float64Array.from(used, (at) => pairs.weight[at] as number),
      block: blocksOf(pairs, used),
    },
    "line",
  );
  return line === undefined ? undefined : { line, sampleCount: used.length };
}

/** What the neighbour shows more, both without what was added for attenuation. */
function excessDb({ oneDbz, otherDbz, oneAddedDb, otherAddedDb }: OverlapPairs, at: number): number {
  const one = (oneDbz[at] as number) - (oneAddedDb[at] as number);
  const other = (otherDbz[at] as number) - (otherAddedDb[at] as number);
  return other - one;
}

function blocksOf({ epochMs }: OverlapPairs, used: readonly number[]): Int32Array {
  return timeBlocks(
    Float64Array.from(used, (at) => epochMs[at] as number),
    TIME_BLOCKS,
  );
}

/** Value that a tenth lies above. */
function highTenth(values: Float64Array): number {
  const sorted = values.toSorted();
  return sorted[Math.floor(0.9 * sorted.length)] as number;
}

/** Factors that are tried: a drop spectrum may halve or double what a law of rain takes, hardly more (house rule). */
const FACTORS = Array.from({ length: 41 }, (_, k) => 4 ** ((k - 20) / 20));
/** Between two of them, as a share. */
const STEP = 4 ** (1 / 20) - 1;

/**
 * Learns by how much the law k = a Z^b must be raised so that echo corrected by Hitschfeld and Bordan (1954, J. Meteorol.
 * 11, 58-67) agrees with a neighbour's, where there is no phase: of factors from 0.25 to 4 the one with the least scatter
 * about a level.
 *
 * @param pairs - `one` is the radar to be taught; `oneLossDb` is its loss by Hitschfeld-Bordan with a factor of `factorUsed`
 * @param exponent - b of the law
 * @param factorUsed - the factor behind `oneLossDb`
 * @returns undefined for too few samples, too little loss, or where one factor is hardly better than another
 */
export function learnFactorFromOverlap(
  pairs: OverlapPairs,
  exponent: number,
  factorUsed = 1,
): LearnedFactor | undefined {
  const used = Array.from(pairs.oneLossDb.keys()).filter((at) => Number.isFinite(pairs.oneLossDb[at]));
  if (used.length < LEAST_SAMPLES) return undefined;
  const lossDb = Float64Array.from(used, (at) => pairs.oneLossDb[at] as number);
  if (highTenth(lossDb) < LEAST_LOSS_DB) return undefined;
  const excess = Float64Array.from(
    used,
    (at) => excessDb(pairs, at) + ((pairs.otherLossDb[at] as number) || 0),
  );
  const block = blocksOf(pairs, used);
  const whole = bestFactor(excess, lossDb, exponent, factorUsed, block, undefined);
  const blocks = [...new Set(block)];
  if (whole === undefined || blocks.length < 4) return undefined;
  const parts = blocks.map((left) => bestFactor(excess, lossDb, exponent, factorUsed, block, left));
  const logs = parts.map((part) => Math.log(part?.factor ?? Number.NaN));
  const mean = logs.reduce((sum, value) => sum + value, 0) / logs.length;
  const squares = logs.reduce((sum, value) => sum + (value - mean) ** 2, 0);
  // No finer than the factors that are tried.
  const relativeError = Math.max(STEP / 2, Math.sqrt((squares * (logs.length - 1)) / logs.length));
  if (!(relativeError < 1 / LEAST_ERRORS)) return undefined;
  return { ...whole, standardError: relativeError * whole.factor, sampleCount: used.length };
}

function bestFactor(
  excess: Float64Array,
  lossDb: Float64Array,
  exponent: number,
  factorUsed: number,
  block: Int32Array,
  left: number | undefined,
): { readonly factor: number; readonly differenceDb: number } | undefined {
  let best: { factor: number; differenceDb: number } | undefined;
  let least = Number.POSITIVE_INFINITY;
  for (const factor of FACTORS) {
    const off: number[] = [];
    for (let at = 0; at < excess.length; at++) {
      if (block[at] === left) continue;
      // 1 - bracket is proportional to the factor; a bracket that runs out cannot be compared.
      const taken = -Math.expm1((-exponent * (lossDb[at] as number) * Math.LN10) / 10);
      const bracket = 1 - (taken * factor) / factorUsed;
      if (bracket > 0.1) off.push((excess[at] as number) + (10 / exponent) * Math.log10(bracket));
    }
    if (2 * off.length < excess.length) continue;
    const differenceDb = median(off);
    const scatter = off.reduce((sum, value) => sum + Math.abs(value - differenceDb), 0) / off.length;
    if (scatter >= least) continue;
    least = scatter;
    best = { factor, differenceDb };
  }
  // At either end nothing says that a factor beyond it would not fit better.
  return best?.factor === FACTORS[0] || best?.factor === FACTORS.at(-1) ? undefined : best;
}
