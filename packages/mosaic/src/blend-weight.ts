/** What decides how loudly a radar speaks for a cell. */
export interface BlendWeightInput {
  /** Beam centre above the antenna. */
  readonly beamHeightM: number;
  readonly groundDistanceM: number;
  /** Ground distance at which this sweep's coverage ends. */
  readonly coverageM: number;
  /** Width over which the weight falls to 0 before the end of coverage. */
  readonly taperM: number;
  /** Share of the beam that terrain takes, 0 to 1; 0 where nothing is known of it. */
  readonly blockedFraction: number;
  /** Two-way loss on the way to the cell, dB; 0 where nothing is known of it. */
  readonly twoWayLossDb: number;
}

/** Weight left at the very edge, so that a radar alone still speaks there; shares are relative anyway. */
const FLOOR = 1e-6;
/** Height and distance at which trust in a beam has clearly fallen. Our choice: nothing published fixes them. */
const HEIGHT_SCALE_M = 2000;
const DISTANCE_SCALE_M = 100_000;

/**
 * The weight of one radar at one cell: falls with beam height (the beam sees less of what reaches the
 * ground), with distance (it sees it through a wider beam), with blockage and loss, and linearly to 0 over
 * the last stretch of coverage, so that no seam shows where a radar ends.
 *
 * The form is ours; that weights fall with height and range is common practice.
 *
 * @returns a number in [1e-6, 1]
 */
export function blendWeight(input: BlendWeightInput): number {
  const height = Math.exp(-((input.beamHeightM / HEIGHT_SCALE_M) ** 2));
  const distance = 1 / (1 + (input.groundDistanceM / DISTANCE_SCALE_M) ** 2);
  const seen = (1 - input.blockedFraction) ** 2 * 10 ** (-input.twoWayLossDb / 10);
  const left = input.coverageM - input.groundDistanceM;
  const edge = input.taperM > 0 ? Math.min(1, Math.max(0, left / input.taperM)) : 1;
  return Math.max(FLOOR, height * distance * seen * edge);
}
