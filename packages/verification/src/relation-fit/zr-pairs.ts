/** Reflectivity and rain rate of the same place and time. Shapes [n]. */
export interface ZrPairs {
  /** dBZ; -Infinity is observed, below detection. Never NaN. */
  readonly dbz: Float64Array;
  /** mm/h, 0 or more. Never NaN. */
  readonly rateMmPerHour: Float64Array;
}

/** A power law Z = A R^b, Z in mm6 m-3 and R in mm/h. NaN where the pairs do not give one. */
export interface PowerLaw {
  readonly a: number;
  readonly b: number;
}

export const NO_LAW: PowerLaw = { a: Number.NaN, b: Number.NaN };

/** Which pairs each kind of fit rests on. */
export interface PairChoice {
  /** Both sides reach the least rate: for logarithms. */
  readonly both: readonly number[];
  /** Either side reaches it: for sums. */
  readonly either: readonly number[];
}

/**
 * Picks pairs by a least rate, the reflectivity held against that which a relation gives for it.
 *
 * To ask for the gauge's side alone would keep what the radar's noise lifted and drop what it pressed down, or the
 * other way round.
 *
 * @param leastRateMmPerHour - above 0
 * @param leastDbz - the reflectivity of that rate
 * @throws RangeError where a pair holds NaN or a rate below 0, or the two sides differ in length
 */
export function choosePairs(
  { dbz, rateMmPerHour }: ZrPairs,
  leastRateMmPerHour: number,
  leastDbz: number,
): PairChoice {
  if (dbz.length !== rateMmPerHour.length) throw new RangeError("as many reflectivities as rain rates");
  const both: number[] = [];
  const either: number[] = [];
  for (let i = 0; i < dbz.length; i++) {
    if (Number.isNaN(dbz[i]) || dbz[i] === Number.POSITIVE_INFINITY || !(rateMmPerHour[i] >= 0)) {
      throw new RangeError(`pair ${i} is no pair: ${dbz[i]} dBZ, ${rateMmPerHour[i]} mm/h`);
    }
    const wetGauge = rateMmPerHour[i] >= leastRateMmPerHour;
    const wetRadar = dbz[i] >= leastDbz;
    if (wetGauge && wetRadar) both.push(i);
    if (wetGauge || wetRadar) either.push(i);
  }
  return { both, either };
}

/** Some of the pairs, in the order of their indices. */
export function pickPairs({ dbz, rateMmPerHour }: ZrPairs, indices: readonly number[]): ZrPairs {
  return {
    dbz: Float64Array.from(indices, (i) => dbz[i]),
    rateMmPerHour: Float64Array.from(indices, (i) => rateMmPerHour[i]),
  };
}
