import {
  type DifferenceSums,
  LEARNED_BLOCK_M,
  LEARNED_RAYS,
  type LearnedSweepBlockage,
} from "./blockage-learner.ts";

/** A block of range counts with this many rounds of rain; a ray with this many, in one block at least (house rule). */
const LEAST_ROUNDS = 4;
/** An obstacle hides all that is behind it: so many blocks of range must show it. */
const LEAST_BLOCKS = 3;
/** A reference needs rain in this many directions. */
const LEAST_RAYS = 40;
/** Loss that is told from none: so much, and so many of its standard errors; fewer where a ray beside it agrees. */
const LEAST_LOSS_DB = 1.5;
const LONE_RAY_ERRORS = 5;
const SECTOR_ERRORS = 3;
/** A median absolute deviation is this share of a standard deviation, for the normal distribution. */
const DEVIATIONS_PER_MAD = 1.4826;

/** The best single obstacle along a ray: where it stands and what it takes. */
interface RayLoss {
  fromBlock: number;
  lossDb: number;
  errorDb: number;
  lastBlock: number;
}

/**
 * Looks through the differences of two sweeps for rays that lose echo from some range on.
 *
 * The reference of a block of range is the median over all directions. What the means of rays scatter about it, and what
 * a ray's own differences scatter from round to round, make its standard error: an obstacle takes the same every time. So an obstacle round more than half of the horizon is not found.
 *
 * @param above - what was found for the upper sweep: its loss is added, since the difference holds it already
 */
export function findSectors(
  sums: DifferenceSums,
  above: LearnedSweepBlockage | undefined,
): LearnedSweepBlockage {
  const blockCount = sums.rounds.length / LEARNED_RAYS;
  const anomaly = anomalies(sums, blockCount);
  const errorBeyond = scatterBeyond(sums, anomaly, blockCount);
  const rays: (RayLoss | undefined)[] = Array.from({ length: LEARNED_RAYS }, (_, ray) =>
    bestObstacle(sums, anomaly, errorBeyond, blockCount, ray),
  );
  const result: LearnedSweepBlockage = {
    elevationDeg: sums.elevationDeg,
    roundCount: sums.roundCount,
    lossDb: new Float32Array(LEARNED_RAYS).fill(Number.NaN),
    standardErrorDb: new Float32Array(LEARNED_RAYS).fill(Number.NaN),
    fromRangeM: new Float32Array(LEARNED_RAYS),
    toRangeM: new Float32Array(LEARNED_RAYS),
  };
  rays.forEach((found, ray) => {
    if (found === undefined) return;
    const isBlocked = isObstacle(found, rays[(ray + 1) % LEARNED_RAYS], rays[(ray + 359) % LEARNED_RAYS]);
    // Not a number where the sweep above could not be judged.
    const addedDb = above?.lossDb[ray] || 0;
    // A loss too small to be told from none may still be there.
    const unsureDb = isBlocked ? 0 : found.lossDb;
    const aboveErrorDb = addedDb > 0 ? (above?.standardErrorDb[ray] as number) : 0;
    result.lossDb[ray] = found.lossDb - unsureDb + addedDb;
    result.standardErrorDb[ray] = Math.hypot(found.errorDb, unsureDb, aboveErrorDb);
    const from = isBlocked ? found.fromBlock * LEARNED_BLOCK_M : Number.POSITIVE_INFINITY;
    const upperFrom = addedDb > 0 ? (above?.fromRangeM[ray] ?? 0) : Number.POSITIVE_INFINITY;
    const start = Math.min(from, upperFrom);
    result.fromRangeM[ray] = Number.isFinite(start) ? start : 0;
    result.toRangeM[ray] = (found.lastBlock + 1) * LEARNED_BLOCK_M;
  });
  return result;
}

function isObstacle(found: RayLoss, ...beside: readonly (RayLoss | undefined)[]): boolean {
  const stands = ({ lossDb, errorDb }: RayLoss, errors: number) =>
    lossDb >= LEAST_LOSS_DB && lossDb >= errors * errorDb;
  if (stands(found, LONE_RAY_ERRORS)) return true;
  return (
    stands(found, SECTOR_ERRORS) &&
    beside.some((other) => other !== undefined && stands(other, SECTOR_ERRORS))
  );
}

/** Mean difference less the reference of its block. Shape [rays * blocks], NaN where there are too few rounds. */
function anomalies({ rounds, sumCentiDb }: DifferenceSums, blockCount: number): Float64Array {
  const anomaly = new Float64Array(rounds.length).fill(Number.NaN);
  for (let block = 0; block < blockCount; block++) {
    const means: number[] = [];
    for (let at = block; at < rounds.length; at += blockCount) {
      const count = rounds[at] as number;
      if (count < LEAST_ROUNDS) continue;
      anomaly[at] = (sumCentiDb[at] as number) / (100 * count);
      means.push(anomaly[at] as number);
    }
    const reference = means.length >= LEAST_RAYS ? median(means) : Number.NaN;
    for (let at = block; at < rounds.length; at += blockCount) {
      anomaly[at] = (anomaly[at] as number) - reference;
    }
  }
  return anomaly;
}

/** Of a ray from a block on. */
interface Beyond {
  /** Mean anomaly, by rounds. */
  readonly mean: number;
  /** Rounds with rain, added up over blocks, and how many blocks have any. */
  readonly count: number;
  readonly blocks: number;
  /** Standard error of the mean from how it changes from round to round, as though all blocks changed together. */
  readonly changeDb: number;
}

function beyond(
  { rounds, sumCentiDb, sumSquareDb2 }: DifferenceSums,
  anomaly: Float64Array,
  blockCount: number,
  ray: number,
  from: number,
): Beyond {
  let [sum, count, blocks, squares] = [0, 0, 0, 0];
  for (let block = from; block < blockCount; block++) {
    const at = ray * blockCount + block;
    const value = anomaly[at] as number;
    if (Number.isNaN(value)) continue;
    const n = rounds[at] as number;
    const meanDb = (sumCentiDb[at] as number) / (100 * n);
    sum += value * n;
    squares += ((sumSquareDb2[at] as number) - n * meanDb * meanDb) * (n / (n - 1));
    count += n;
    blocks++;
  }
  return { mean: sum / count, count, blocks, changeDb: Math.sqrt((squares / count) * (blocks / count)) };
}

/**
 * Standard error of a ray's mean from each block on: the scatter of all rays, and the median number of rounds behind it.
 */
function scatterBeyond(
  sums: DifferenceSums,
  anomaly: Float64Array,
  blockCount: number,
): readonly { errorDb: number; count: number }[] {
  return Array.from({ length: blockCount }, (_, from) => {
    const all = Array.from({ length: LEARNED_RAYS }, (_, ray) =>
      beyond(sums, anomaly, blockCount, ray, from),
    ).filter(({ count }) => count > 0);
    if (all.length < LEAST_RAYS) return { errorDb: Number.NaN, count: 0 };
    const middle = median(all.map(({ mean }) => mean));
    return {
      errorDb: DEVIATIONS_PER_MAD * median(all.map(({ mean }) => Math.abs(mean - middle))),
      count: median(all.map(({ count }) => count)),
    };
  });
}

/** The one step down that explains most of a ray's anomalies; undefined where there is too little rain to tell. */
function bestObstacle(
  sums: DifferenceSums,
  anomaly: Float64Array,
  errorBeyond: readonly { errorDb: number; count: number }[],
  blockCount: number,
  ray: number,
): RayLoss | undefined {
  let best: RayLoss | undefined;
  let bestGain = -1;
  let lastBlock = -1;
  for (let block = 0; block < blockCount; block++) {
    if (!Number.isNaN(anomaly[ray * blockCount + block] as number)) lastBlock = block;
  }
  for (let from = 0; from <= lastBlock; from++) {
    if (Number.isNaN(anomaly[ray * blockCount + from] as number)) continue;
    const { mean, count, blocks, changeDb } = beyond(sums, anomaly, blockCount, ray, from);
    const scatter = errorBeyond[from] as { errorDb: number; count: number };
    if (blocks < LEAST_BLOCKS || Number.isNaN(scatter.errorDb)) continue;
    // What a step explains: rounds times its square; a ray without loss keeps its first, longest stretch.
    const gain = mean < 0 ? count * mean * mean : 0;
    if (gain <= bestGain) continue;
    bestGain = gain;
    best = {
      fromBlock: from,
      lossDb: Math.max(0, -mean),
      errorDb: Math.hypot(scatter.errorDb * Math.sqrt(Math.max(1, scatter.count / count)), changeDb),
      lastBlock,
    };
  }
  return best;
}

function median(values: readonly number[]): number {
  const sorted = [...values].sort((one, other) => one - other);
  const upper = sorted[Math.floor(sorted.length / 2)] as number;
  const lower = sorted[Math.floor((sorted.length - 1) / 2)] as number;
  return (lower + upper) / 2;
}
