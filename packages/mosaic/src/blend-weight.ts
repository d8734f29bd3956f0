/** What decides how loudly a radar speaks for a cell. */
export interface BlendWeightInput {
  /** Beam centre above the antenna. */
  readonly beamHeightM: number;
  readonly groundDistanceM: number;
  /** Ground distance at which this sweep's coverage ends. */
  readonly coverageM: number;
  /** Width over which the weight falls to 0 before the end of coverage. */
  readonly taperM: number;
}

/** Weight left at the very edge, so that a radar alone still speaks there; shares are relative anyway. */
export const LEAST_WEIGHT = 1e-6;
/** Height and distance at which trust in a beam has clearly fallen. Our choice: nothing published fixes them. */
const HEIGHT_SCALE_M = 2000;
const DISTANCE_SCALE_M = 100_000;

/**
 * The weight of one radar at one cell: falls with beam height (the beam sees less of what reaches the
 * ground), with distance (it sees it through a wider beam), and linearly to 0 over the last stretch of coverage, so that no
 * seam shows where a radar ends. What single gates lose on the way is the matter of {@link trustIn}.
 *
 * The form is ours; that weights fall with height and range is common practice.
 *
 * @returns a number in [1e-6, 1]
 */
export function blendWeight(input: BlendWeightInput): number {
  const height = Math.exp(-((input.beamHeightM / HEIGHT_SCALE_M) ** 2));
  const distance = 1 / (1 + (input.groundDistanceM / DISTANCE_SCALE_M) ** 2);
  const left = input.coverageM - input.groundDistanceM;
  const edge = input.taperM > 0 ? Math.min(1, Math.max(0, left / input.taperM)) : 1;
  return Math.max(LEAST_WEIGHT, height * distance * edge);
}

/**
 * How far a gate's echo is to be trusted for what was lost on the way to it: what is left of the power after
 * terrain took its share on the way out and back, and rain and gas theirs. House rule: a correction brings the echo
 * back, but not the certainty.
 *
 * @param blockedFraction - share of the beam that terrain takes, 0 to 1; 0 where nothing is known of it
 * @param twoWayLossDb - loss both ways, dB, at least 0; 0 where nothing is known of it
 * @returns 0 to 1, a factor on the blend weight
 */
export function trustIn(blockedFraction: number, twoWayLossDb: number): number {
  return (1 - blockedFraction) ** 2 * 10 ** (-twoWayLossDb / 10);
}
