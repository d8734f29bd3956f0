import type { Estimate, OverlapDifference } from "./overlap-difference.ts";

/** What gauges tell of a radar. */
export interface GaugeEvidence {
  /** 10 log10 of gauge rain over radar rain, mean over the field. */
  readonly ratioDb: number;
  readonly standardErrorDb: number;
  /** Exponent of the Z-R relation that made the radar's rain. */
  readonly exponentB: number;
}

/** All that is known of one radar by itself. */
export interface RadarEvidence {
  readonly siteId: string;
  /** From `ConsistencyLearner`. */
  readonly consistency?: Estimate | undefined;
  readonly gauges?: GaugeEvidence | undefined;
}

/** One source's word on a radar: how much more it shows than is true. */
export interface CalibrationWord {
  readonly source: "consistency" | "gauges" | "overlap";
  /** The other radar of an overlap, which the value is relative to. */
  readonly relativeTo?: string;
  readonly valueDb: number;
  readonly lowDb: number;
  readonly highDb: number;
}

/** What is proposed for one radar. Nothing of it is applied by itself. */
export interface CalibrationProposal {
  readonly siteId: string;
  /** How much more the radar shows than is true, by all sources together; NaN where there is none. */
  readonly errorDb: number;
  /** Interval of 95 %. */
  readonly lowDb: number;
  readonly highDb: number;
  /** To be added to every reflectivity, in tenths of a dB; undefined where nothing is proposed. */
  readonly offsetDb: number | undefined;
  /** Why, or why not. */
  readonly reason: string;
  readonly words: readonly CalibrationWord[];
}

/**
 * What each absolute source is wrong by in common for all radars, as a standard deviation. Consistency: shapes of drops;
 * the four of `DROP_SHAPES` have KDP / Z spread by 1.2 dB at a ZDR of 1.2 dB, 1.0 at 1.5 dB and 0.7 at 2 dB. Gauges: a Z-R
 * relation that does not fit the storm, which looks just like a calibration error (house rule).
 */
const COMMON_ERROR_DB = { consistency: 1, gauges: 2 } as const;
/**
 * What consistency is wrong by for each radar by itself: ZDR's own calibration, and loss. 0.5 dB is claimed for the method
 * where the shape is known (Goddard, Tan and Thurai 1994, from memory).
 */
const OWN_CONSISTENCY_ERROR_DB = 0.4;
/** Radars are rarely farther off; keeps what nobody knows from being infinite (house rule). */
const UNKNOWN_DB = 6;
const INTERVAL = 1.96;
const LEAST_OFFSET_DB = 0.5;
/** Of two radars that cannot both read true, one is named where it is farther off by this than the other (house rule). */
const FARTHER_OFF_DB = 1;

/**
 * Proposes one calibration offset for each radar.
 *
 * Rule (ours): consistency of Z, ZDR and KDP gives the absolute level; overlaps tie radars to each other; gauges weigh by
 * their spread, and little, since they cannot tell a calibration from drops of unusual size. All are joined by least
 * squares weighted with their errors, those that a source makes for all radars alike among them. Where sources contradict
 * each other by more than their errors allow, all errors are raised by as much (Birge 1932, Phys. Rev. 40, 207-227). An
 * offset is proposed only where it is 0.5 dB or more and the interval of 95 % leaves out 0. What a source is wrong by for
 * all radars alike does not make them differ: where the interval of the difference of two radars leaves out 0, one of them
 * is off in any case, and an offset is proposed to the one that is farther off by 1 dB or more.
 *
 * @param overlaps - from `overlapDifference`; those of radars that are not listed are passed over
 * @returns in the order of `radars`; what was found is on top of any offset that the echo had been given already
 */
export function proposeCalibration(
  radars: readonly RadarEvidence[],
  overlaps: readonly OverlapDifference[],
): readonly CalibrationProposal[] {
  const count = radars.length;
  // Unknowns: the error of each radar, then what consistency and gauges are wrong by in common.
  const [consistencyAt, gaugesAt] = [count, count + 1];
  const normal = new NormalEquations(count + 2);
  normal.add([[consistencyAt, 1]], 0, COMMON_ERROR_DB.consistency);
  normal.add([[gaugesAt, 1]], 0, COMMON_ERROR_DB.gauges);
  const words: CalibrationWord[][] = radars.map(() => []);
  radars.forEach(({ consistency, gauges }, at) => {
    normal.add([[at, 1]], 0, UNKNOWN_DB);
    if (consistency !== undefined) {
      const { valueDb } = consistency;
      const standardErrorDb = Math.hypot(consistency.standardErrorDb, OWN_CONSISTENCY_ERROR_DB);
      normal.add(
        [
          [at, 1],
          [consistencyAt, 1],
        ],
        valueDb,
        standardErrorDb,
      );
      words[at]?.push(
        wordOf("consistency", valueDb, Math.hypot(standardErrorDb, COMMON_ERROR_DB.consistency)),
      );
    }
    if (gauges !== undefined) {
      // A radar that reads too high makes more rain than the gauges catch: Z of that factor of rain, to the power b.
      const valueDb = -gauges.exponentB * gauges.ratioDb;
      const errorDb = gauges.exponentB * gauges.standardErrorDb;
      normal.add(
        [
          [at, 1],
          [gaugesAt, 1],
        ],
        valueDb,
        errorDb,
      );
      words[at]?.push(wordOf("gauges", valueDb, Math.hypot(errorDb, COMMON_ERROR_DB.gauges)));
    }
  });
  for (const { oneSiteId, otherSiteId, valueDb, standardErrorDb } of overlaps) {
    const one = radars.findIndex(({ siteId }) => siteId === oneSiteId);
    const other = radars.findIndex(({ siteId }) => siteId === otherSiteId);
    if (one < 0 || other < 0) continue;
    normal.add(
      [
        [one, 1],
        [other, -1],
      ],
      valueDb,
      standardErrorDb,
    );
    words[one]?.push({ ...wordOf("overlap", valueDb, standardErrorDb), relativeTo: otherSiteId });
    words[other]?.push({ ...wordOf("overlap", 0 - valueDb, standardErrorDb), relativeTo: oneSiteId });
  }
  const { value, error, errorOfDifference } = normal.solve();
  const discord = normal.discord(value, words.filter((said) => said.length > 0).length);
  return radars.map(({ siteId }, at) => {
    const own = value[at] as number;
    const said = words[at] as CalibrationWord[];
    const nearer = radars.findIndex((_, other) => {
      const theirs = value[other] as number;
      return (
        other !== at &&
        (words[other] as CalibrationWord[]).length > 0 &&
        Math.abs(own) - Math.abs(theirs) >= FARTHER_OFF_DB &&
        Math.abs(own - theirs) > INTERVAL * discord * errorOfDifference(at, other)
      );
    });
    const beside =
      nearer < 0
        ? undefined
        : { siteId: radars[nearer]?.siteId as string, differenceDb: own - (value[nearer] as number) };
    return proposalOf(siteId, own, (error[at] as number) * discord, said, beside);
  });
}

function wordOf(source: CalibrationWord["source"], valueDb: number, errorDb: number): CalibrationWord {
  return { source, valueDb, lowDb: valueDb - INTERVAL * errorDb, highDb: valueDb + INTERVAL * errorDb };
}

function proposalOf(
  siteId: string,
  errorDb: number,
  standardErrorDb: number,
  words: readonly CalibrationWord[],
  beside: { readonly siteId: string; readonly differenceDb: number } | undefined,
): CalibrationProposal {
  if (words.length === 0) {
    const reason = "nothing tells: no ZDR and PHIDP in rain, no overlap with another radar, no gauges";
    return {
      siteId,
      errorDb: Number.NaN,
      lowDb: Number.NaN,
      highDb: Number.NaN,
      offsetDb: undefined,
      reason,
      words,
    };
  }
  const lowDb = errorDb - INTERVAL * standardErrorDb;
  const highDb = errorDb + INTERVAL * standardErrorDb;
  const holdsZero = lowDb <= 0 && highDb >= 0;
  const isSmall = Math.abs(errorDb) < LEAST_OFFSET_DB;
  const interval = `${lowDb.toFixed(1)} to ${highDb.toFixed(1)} dB`;
  const reason = isSmall
    ? `reads true within ${LEAST_OFFSET_DB} dB (${interval})`
    : holdsZero && beside !== undefined
      ? `reads ${Math.abs(errorDb).toFixed(1)} dB too ${errorDb > 0 ? "high" : "low"} (${interval}): it stands ${Math.abs(beside.differenceDb).toFixed(1)} dB ${beside.differenceDb > 0 ? "above" : "below"} ${beside.siteId}, and is farther off`
      : holdsZero
        ? `may read true: ${errorDb.toFixed(1)} dB, but anything from ${interval} fits`
        : `reads ${Math.abs(errorDb).toFixed(1)} dB too ${errorDb > 0 ? "high" : "low"} (${interval})`;
  // The sum keeps an offset of nothing at 0, not -0.
  const offsetDb =
    isSmall || (holdsZero && beside === undefined) ? undefined : 0 - Math.round(10 * errorDb) / 10;
  return { siteId, errorDb, lowDb, highDb, offsetDb, reason, words };
}

interface Observation {
  readonly terms: readonly (readonly [at: number, factor: number])[];
  readonly value: number;
  readonly error: number;
}

/** Weighted least squares of few unknowns by its normal equations. */
class NormalEquations {
  readonly #size: number;
  readonly #matrix: Float64Array;
  readonly #right: Float64Array;
  readonly #observations: Observation[] = [];

  constructor(size: number) {
    this.#size = size;
    this.#matrix = new Float64Array(size * size);
    this.#right = new Float64Array(size);
  }

  /**
   * How many times their errors the observations are off, on the mean; 1 where they agree, or none is more than is needed.
   *
   * @param unknowns - how many the observations, those of 0 left out, decide
   */
  discord(value: Float64Array, unknowns: number): number {
    const said = this.#observations.filter(({ terms }) => terms.length > 1);
    const spare = said.length - unknowns;
    if (spare <= 0) return 1;
    const squares = said.reduce((sum, observation) => {
      const fitted = observation.terms.reduce(
        (total, [at, factor]) => total + factor * (value[at] as number),
        0,
      );
      return sum + ((observation.value - fitted) / observation.error) ** 2;
    }, 0);
    return Math.sqrt(Math.max(1, squares / spare));
  }

  /** One observation: a sum of factors times unknowns has a value, with its error. */
  add(terms: Observation["terms"], value: number, error: number): void {
    this.#observations.push({ terms, value, error: Math.max(error, 0.01) });
    const weight = 1 / Math.max(error, 0.01) ** 2;
    for (const [row, one] of terms) {
      this.#right[row] = (this.#right[row] as number) + weight * one * value;
      for (const [column, other] of terms) {
        const at = row * this.#size + column;
        this.#matrix[at] = (this.#matrix[at] as number) + weight * one * other;
      }
    }
  }

  /** Values of the unknowns with their standard errors; every unknown has an observation of its own, so there is one answer. */
  solve(): {
    readonly value: Float64Array;
    readonly error: Float64Array;
    errorOfDifference(one: number, other: number): number;
  } {
    const inverse = inverseOf(this.#matrix, this.#size);
    const value = new Float64Array(this.#size);
    const error = new Float64Array(this.#size);
    for (let row = 0; row < this.#size; row++) {
      for (let column = 0; column < this.#size; column++) {
        value[row] =
          (value[row] as number) +
          (inverse[row * this.#size + column] as number) * (this.#right[column] as number);
      }
      error[row] = Math.sqrt(inverse[row * this.#size + row] as number);
    }
    const covariance = (row: number, column: number) => inverse[row * this.#size + column] as number;
    return {
      value,
      error,
      errorOfDifference: (one, other) =>
        Math.sqrt(covariance(one, one) + covariance(other, other) - 2 * covariance(one, other)),
    };
  }
}

/** Inverse of a symmetric positive definite matrix by Gauss and Jordan, which needs no exchange of rows for such a one. */
function inverseOf(matrix: Float64Array, size: number): Float64Array {
  const work = matrix.slice();
  const inverse = new Float64Array(size * size);
  for (let at = 0; at < size; at++) inverse[at * size + at] = 1;
  for (let pivot = 0; pivot < size; pivot++) {
    const scale = 1 / (work[pivot * size + pivot] as number);
    for (const rows of [work, inverse]) {
      for (let k = 0; k < size; k++) rows[pivot * size + k] = (rows[pivot * size + k] as number) * scale;
    }
    for (let row = 0; row < size; row++) {
      const factor = work[row * size + pivot] as number;
      if (row === pivot || factor === 0) continue;
      for (const rows of [work, inverse]) {
        for (let k = 0; k < size; k++) {
          rows[row * size + k] =
            (rows[row * size + k] as number) - factor * (rows[pivot * size + k] as number);
        }
      }
    }
  }
  return inverse;
}
