/** Points of a line y = level + slope x, each with its weight and the block of time it belongs to. */
export interface LinePoints {
  readonly x: Float64Array;
  readonly y: Float64Array;
  readonly weight: Float64Array;
  readonly block: Int32Array;
}

export interface RobustLine {
  readonly level: number;
  readonly slope: number;
  readonly levelError: number;
  readonly slopeError: number;
}

/** Huber's constant: 95 % as good as least squares where errors are normal. */
const HUBER = 1.345;
const DEVIATIONS_PER_MAD = 1.4826;
const TURNS = 20;
/** dB, and dB per degree, that a line may still move. */
const STILL = 1e-4;
/** Into so many blocks of time a run is cut. */
export const TIME_BLOCKS = 10;
/** Fewer blocks of time than this say nothing of the scatter between them. */
export const LEAST_BLOCKS = 4;

/**
 * A line through points with outliers: weighted least squares, points beyond 1.345 deviations held back in proportion.
 * Its errors are those of leaving out each block of time in turn, since points of one time err together.
 *
 * Sources: Huber (1964), Annals of Mathematical Statistics 35, 73-101; jackknife by blocks: Kuensch (1989), Annals of
 * Statistics 17, 1217-1241.
 *
 * @param fitted - "level" holds the slope at 0
 * @returns undefined for fewer than four blocks, or where x does not vary and a slope is asked for
 */
export function robustLine(points: LinePoints, fitted: "level" | "line"): RobustLine | undefined {
  const blocks = [...new Set(points.block)];
  if (blocks.length < LEAST_BLOCKS) return undefined;
  const whole = huberFit(points, fitted, undefined, undefined);
  if (whole === undefined) return undefined;
  // From the line of all points, so that few turns are left to do.
  const parts = blocks.map((left) => huberFit(points, fitted, left, whole));
  if (parts.some((part) => part === undefined)) return undefined;
  const spread = (of: (line: Line) => number): number => {
    const values = parts.map((part) => of(part as Line));
    const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
    const squares = values.reduce((sum, value) => sum + (value - mean) ** 2, 0);
    return Math.sqrt((squares * (values.length - 1)) / values.length);
  };
  return {
    ...whole,
    levelError: spread(({ level }) => level),
    slopeError: spread(({ slope }) => slope),
  };
}

interface Line {
  readonly level: number;
  readonly slope: number;
}

/** @param left - a block that is left out */
function huberFit(
  points: LinePoints,
  fitted: "level" | "line",
  left: number | undefined,
  start: Line | undefined,
): Line | undefined {
  const { block } = points;
  const used = Int32Array.from(block.keys()).filter((at) => block[at] !== left);
  const trust = new Float64Array(used.length).fill(1);
  let line = start ?? leastSquares(points, used, fitted, trust);
  for (let turn = 0; turn < TURNS && line !== undefined; turn++) {
    for (let k = 0; k < used.length; k++) trust[k] = Math.abs(residual(points, used[k] as number, line));
    const held = HUBER * DEVIATIONS_PER_MAD * median(trust);
    // All on the line: nothing to hold back.
    if (!(held > 1e-9)) return line;
    for (let k = 0; k < used.length; k++) trust[k] = Math.min(1, held / (trust[k] as number));
    const next = leastSquares(points, used, fitted, trust);
    if (next === undefined) return undefined;
    const moved = Math.abs(next.level - line.level) + Math.abs(next.slope - line.slope);
    line = next;
    if (moved < STILL) break;
  }
  return line;
}

function residual({ x, y }: LinePoints, at: number, { level, slope }: Line): number {
  return (y[at] as number) - level - slope * (x[at] as number);
}

function leastSquares(
  { x, y, weight }: LinePoints,
  used: Int32Array,
  fitted: "level" | "line",
  trust: Float64Array,
): Line | undefined {
  let [sum, sumX, sumY, sumXX, sumXY] = [0, 0, 0, 0, 0];
  for (let k = 0; k < used.length; k++) {
    const at = used[k] as number;
    const w = (weight[at] as number) * (trust[k] as number);
    const [atX, atY] = [x[at] as number, y[at] as number];
    sum += w;
    sumX += w * atX;
    sumY += w * atY;
    sumXX += w * atX * atX;
    sumXY += w * atX * atY;
  }
  if (!(sum > 0)) return undefined;
  if (fitted === "level") return { level: sumY / sum, slope: 0 };
  const spread = sumXX - (sumX * sumX) / sum;
  if (!(spread > 1e-9 * sum)) return undefined;
  const slope = (sumXY - (sumX * sumY) / sum) / spread;
  return { level: (sumY - slope * sumX) / sum, slope };
}

/** Middle value; NaN of none. */
export function median(values: ArrayLike<number>): number {
  const sorted = Float64Array.from(values).sort();
  const upper = sorted[Math.floor(sorted.length / 2)] ?? Number.NaN;
  const lower = sorted[Math.floor((sorted.length - 1) / 2)] ?? Number.NaN;
  return (lower + upper) / 2;
}

/** Blocks of time of equal numbers of instants, at most `most`: the block of each value. */
export function timeBlocks(epochMs: Float64Array, most: number): Int32Array {
  const instants = [...new Set(epochMs)].sort((one, other) => one - other);
  const blockCount = Math.min(most, instants.length);
  const blockOf = new Map(
    instants.map((instant, k) => [instant, Math.floor((k * blockCount) / instants.length)]),
  );
  return Int32Array.from(epochMs, (instant) => blockOf.get(instant) as number);
}
