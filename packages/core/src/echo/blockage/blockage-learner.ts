import { midEpochMs } from "../../model/radar.ts";
import type { PolarEcho } from "../polar-echo.ts";
import { findSectors } from "./blocked-sectors.ts";

/** Rays are gathered by whole degrees of azimuth, gates by 2 km of range (house rule). */
export const LEARNED_RAYS = 360;
export const LEARNED_BLOCK_M = 2000;
const MOST_BLOCKS = 150;

/** Only rain that the sweep above clearly sees is compared, and no difference counts for more than this. */
const WET_DBZ = 15;
const MOST_DIFFERENCE_DB = 15;
/** Two sweeps look at the same rain where they are this near to each other (house rule). */
const MOST_ELEVATION_STEP_DEG = 2.5;
const MOST_TIME_STEP_MS = 600_000;
/**
 * Farther apart in height showers and widespread rain differ by decibels, and a direction that saw only one of them would
 * pass for blocked. Obstacles stand near enough to be found within this (house rule).
 */
const MOST_HEIGHT_STEP_M = 500;
/** Above this nothing on the ground stands in a beam that is of use for rain (house rule). */
const HIGHEST_ELEVATION_DEG = 10;

/** What the scans tell of obstacles at one elevation, by whole degrees of azimuth. Shapes [360]. */
export interface LearnedSweepBlockage {
  readonly elevationDeg: number;
  /** Rounds that were compared. */
  readonly roundCount: number;
  /** Two-way loss behind the obstacle; 0 where there is none; NaN where the scans cannot tell. */
  readonly lossDb: Float32Array;
  readonly standardErrorDb: Float32Array;
  /** Slant range from which on the loss holds. */
  readonly fromRangeM: Float32Array;
  /** Slant range up to which there was rain to compare. */
  readonly toRangeM: Float32Array;
}

/** What the scans tell of obstacles round one radar, lowest elevation first. */
export interface LearnedBlockage {
  readonly sweeps: readonly LearnedSweepBlockage[];
}

/** Sums over rounds of a pair of elevations, by ray and block of range: what `findSectors` looks through. */
export interface DifferenceSums {
  readonly elevationDeg: number;
  readonly aboveElevationDeg: number;
  roundCount: number;
  /** Shape [rays * blocks] each: rounds with rain, sum of differences in hundredths of a dB, sum of their squares. */
  readonly rounds: Uint16Array;
  readonly sumCentiDb: Float64Array;
  readonly sumSquareDb2: Float64Array;
}

interface Blocks {
  readonly elevationDeg: number;
  readonly midMs: number;
  readonly siteId: string;
  /** Shape [rays * blocks]: mean Z, mm6 m-3; NaN where too little was observed. */
  readonly z: Float64Array;
}

/**
 * Learns from the scans of one radar in which directions something stands in the beam: there a sweep always echoes less
 * than the sweep above it does in the same rain, compared with what it echoes less in other directions. So neither a
 * gradient of rain (both sweeps see it), nor the vertical profile (all directions have it) passes for an obstacle.
 *
 * Echo that is seen above and not at all below counts as far less. That obstacles show in long-term means of echo is
 * common practice; the comparison by pairs of sweeps, which needs hours instead of months, is ours.
 */
export class BlockageLearner {
  readonly #sums = new Map<string, DifferenceSums>();
  #below: Blocks | undefined;

  /**
   * Takes in a sweep: those of a round in order of elevation, lowest first. Screened gates are left out; the others count
   * as they were measured, so that a blockage that was corrected already is found all the same.
   */
  add(echo: PolarEcho): void {
    const { header } = echo;
    if (header.elevationDeg > HIGHEST_ELEVATION_DEG) return;
    const above: Blocks = {
      elevationDeg: header.elevationDeg,
      midMs: midEpochMs(header),
      siteId: header.site.id,
      z: meanZByBlock(echo),
    };
    const below = this.#below;
    this.#below = above;
    if (below === undefined || below.siteId !== above.siteId) return;
    const step = above.elevationDeg - below.elevationDeg;
    if (!(step > 0.05 && step <= MOST_ELEVATION_STEP_DEG)) return;
    if (Math.abs(above.midMs - below.midMs) > MOST_TIME_STEP_MS) return;
    this.#compare(below, above);
  }

  #compare(below: Blocks, above: Blocks): void {
    const key = `${below.elevationDeg.toFixed(1)} ${above.elevationDeg.toFixed(1)}`;
    let sums = this.#sums.get(key);
    if (sums === undefined) {
      sums = {
        elevationDeg: below.elevationDeg,
        aboveElevationDeg: above.elevationDeg,
        roundCount: 0,
        rounds: new Uint16Array(LEARNED_RAYS * MOST_BLOCKS),
        sumCentiDb: new Float64Array(LEARNED_RAYS * MOST_BLOCKS),
        sumSquareDb2: new Float64Array(LEARNED_RAYS * MOST_BLOCKS),
      };
      this.#sums.set(key, sums);
    }
    sums.roundCount++;
    const wetZ = 10 ** (WET_DBZ / 10);
    const stepRad = ((above.elevationDeg - below.elevationDeg) * Math.PI) / 180;
    const lastBlock = Math.min(MOST_BLOCKS, Math.floor(MOST_HEIGHT_STEP_M / stepRad / LEARNED_BLOCK_M));
    for (let block = 0; block < below.z.length; block++) {
      if (block % MOST_BLOCKS >= lastBlock) continue;
      const zAbove = above.z[block] as number;
      const zBelow = below.z[block] as number;
      if (!(zAbove >= wetZ) || Number.isNaN(zBelow)) continue;
      const db = 10 * Math.log10(zBelow / zAbove);
      const held = Math.min(MOST_DIFFERENCE_DB, Math.max(-MOST_DIFFERENCE_DB, db));
      sums.rounds[block] = (sums.rounds[block] as number) + 1;
      // Whole hundredths, so that the sum does not depend on the order of rounds.
      const centiDb = Math.round(100 * held);
      sums.sumCentiDb[block] = (sums.sumCentiDb[block] as number) + centiDb;
      sums.sumSquareDb2[block] = (sums.sumSquareDb2[block] as number) + (centiDb / 100) ** 2;
    }
  }

  /** @returns elevations that could be compared with one above; a loss of the one above is added to those below */
  finish(): LearnedBlockage {
    const pairs = [...this.#sums.values()].sort(
      (one, other) =>
        other.elevationDeg - one.elevationDeg || one.aboveElevationDeg - other.aboveElevationDeg,
    );
    const found: LearnedSweepBlockage[] = [];
    for (const sums of pairs) {
      if (found.some((sweep) => Math.abs(sweep.elevationDeg - sums.elevationDeg) < 0.05)) continue;
      const above = found.find((sweep) => Math.abs(sweep.elevationDeg - sums.aboveElevationDeg) < 0.05);
      found.push(findSectors(sums, above));
    }
    return { sweeps: found.reverse() };
  }
}

/** Mean Z by degree of azimuth and block of range; a gate below detection counts as none. */
function meanZByBlock({ header, azimuthDeg, measuredDbz, screenedBy }: PolarEcho): Float64Array {
  const { gateCount, firstGateCentreM, gateLengthM } = header;
  const z = new Float64Array(LEARNED_RAYS * MOST_BLOCKS);
  const observed = new Uint16Array(LEARNED_RAYS * MOST_BLOCKS);
  const looked = new Uint16Array(LEARNED_RAYS * MOST_BLOCKS);
  const blockOfGate = new Int32Array(gateCount);
  for (let gate = 0; gate < gateCount; gate++) {
    blockOfGate[gate] = Math.floor((firstGateCentreM + gate * gateLengthM) / LEARNED_BLOCK_M);
  }
  for (let ray = 0; ray < azimuthDeg.length; ray++) {
    const row = Math.min(LEARNED_RAYS - 1, Math.floor(azimuthDeg[ray] as number)) * MOST_BLOCKS;
    for (let gate = 0; gate < gateCount; gate++) {
      const block = blockOfGate[gate] as number;
      if (block < 0) continue;
      if (block >= MOST_BLOCKS) break;
      looked[row + block] = (looked[row + block] as number) + 1;
      const at = ray * gateCount + gate;
      const value = measuredDbz[at] as number;
      if (Number.isNaN(value) || screenedBy[at] !== 0) continue;
      observed[row + block] = (observed[row + block] as number) + 1;
      if (value > -30) z[row + block] = (z[row + block] as number) + Math.exp(value * (Math.LN10 / 10));
    }
  }
  for (let block = 0; block < z.length; block++) {
    const count = observed[block] as number;
    z[block] = 2 * count > (looked[block] as number) ? (z[block] as number) / count : Number.NaN;
  }
  return z;
}
