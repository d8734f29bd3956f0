import { markBit, midEpochMs, type OverlapPairs, type PolarEcho } from "@rainreckon/core";
import type { CellLookup } from "./rate-layer.ts";

/** A sweep of one of two radars, on their common grid. */
export interface OverlapSweep {
  readonly echo: PolarEcho;
  /** The sweep's own, from `polarLookup`. */
  readonly lookup: CellLookup;
  /** Shape [ny * nx]: from the radar along the ground; from `siteCells`. */
  readonly distanceM: Float32Array;
}

export interface OverlapSettings {
  /** Most between the mid-times of two sweeps; half a round. */
  readonly maxTimeStepMs: number;
  /** Most between the centres of two beams. */
  readonly maxHeightStepM: number;
  /** Most by which two distances may differ, as a share of their sum. */
  readonly maxDistanceShare: number;
  /** Weakest echo, mean of both radars. */
  readonly leastDbz: number;
  readonly maxSamples: number;
}

/**
 * Beams within 300 m, distances within a ratio of 3 : 5, echo of 15 dBZ: house rules. Echo is chosen by the mean of both
 * radars, because choice by one of them would make the other look weaker.
 */
export const OVERLAP_SETTINGS: OverlapSettings = {
  maxTimeStepMs: 150_000,
  maxHeightStepM: 300,
  maxDistanceShare: 0.25,
  leastDbz: 15,
  maxSamples: 20_000,
};

const COLUMNS = [
  "oneDbz",
  "otherDbz",
  "oneAddedDb",
  "otherAddedDb",
  "oneLossDb",
  "otherLossDb",
  "onePhaseDeg",
  "otherPhaseDeg",
  "heightAslM",
  "weight",
] as const;
type Column = (typeof COLUMNS)[number];

/** One side of a cell: what the gates of a sweep in it show on the mean. */
interface Side {
  dbz: number;
  addedDb: number;
  lossDb: number;
  phaseDeg: number;
}

/** More of the beam behind terrain than this, and the echo says more of the hill than of the radar (house rule). */
const MOST_BLOCKED = 0.1;

/**
 * Gathers what two radars show of the same rain: cells that both see at about equal height, from about equally far, at
 * nearly the same time.
 *
 * Memory is bounded: beyond `maxSamples` an even part is kept, chosen by place and time, so that neither the order of
 * scans nor chance has a say. Screened gates, hail, melting snow and blocked beams are left out.
 */
export class OverlapSamples {
  readonly #settings: OverlapSettings;
  readonly #columns = new Map<Column, number[]>(COLUMNS.map((name) => [name, []]));
  #epochMs: number[] = [];
  #hashes: number[] = [];
  #siteIds: readonly [string, string] | undefined;
  #limit = 2 ** 32;
  #seen = 0;
  /** Cells that two lookups have in common, with weights: worked out once. */
  readonly #common = new WeakMap<CellLookup, WeakMap<CellLookup, CommonCells>>();

  constructor(settings: OverlapSettings = OVERLAP_SETTINGS) {
    this.#settings = settings;
  }

  /**
   * Takes in a sweep of each radar; those too far apart in time are passed over.
   *
   * @throws RangeError where the radars are not those of the first call, or the same
   */
  add(one: OverlapSweep, other: OverlapSweep): void {
    const ids = [one.echo.header.site.id, other.echo.header.site.id] as const;
    this.#siteIds ??= ids;
    if (ids[0] === ids[1] || ids[0] !== this.#siteIds[0] || ids[1] !== this.#siteIds[1]) {
      throw new RangeError(
        `an overlap is of two radars, ${this.#siteIds.join(" and ")}, got ${ids.join(" and ")}`,
      );
    }
    const oneMs = midEpochMs(one.echo.header);
    const otherMs = midEpochMs(other.echo.header);
    if (Math.abs(oneMs - otherMs) > this.#settings.maxTimeStepMs) return;
    const { cells, weight } = this.#commonCells(one, other);
    const [mine, theirs] = [side(), side()];
    for (let k = 0; k < cells.length; k++) {
      const cell = cells[k];
      if (!sideOf(one, cell, mine) || !sideOf(other, cell, theirs)) continue;
      if (!(mine.dbz + theirs.dbz >= 2 * this.#settings.leastDbz)) continue;
      this.#seen++;
      const hash = mixed(cell, oneMs, otherMs);
      if (hash >= this.#limit) continue;
      this.#push(hash, oneMs, {
        oneDbz: mine.dbz,
        otherDbz: theirs.dbz,
        oneAddedDb: mine.addedDb,
        otherAddedDb: theirs.addedDb,
        oneLossDb: mine.lossDb,
        otherLossDb: theirs.lossDb,
        onePhaseDeg: mine.phaseDeg,
        otherPhaseDeg: theirs.phaseDeg,
        heightAslM: (one.lookup.beamHeightAslM[cell] + other.lookup.beamHeightAslM[cell]) / 2,
        weight: weight[k],
      });
    }
  }

  #push(hash: number, epochMs: number, sample: Readonly<Record<Column, number>>): void {
    this.#hashes.push(hash);
    this.#epochMs.push(epochMs);
    for (const [name, values] of this.#columns) values.push(sample[name]);
    while (this.#hashes.length > this.#settings.maxSamples) {
      this.#limit /= 2;
      const kept = this.#hashes.map((value) => value < this.#limit);
      const thin = (values: readonly number[]) => values.filter((_, at) => kept[at]);
      for (const [name, values] of this.#columns) this.#columns.set(name, thin(values));
      this.#epochMs = thin(this.#epochMs);
      this.#hashes = thin(this.#hashes);
    }
  }

  #commonCells(one: OverlapSweep, other: OverlapSweep): CommonCells {
    let ofOne = this.#common.get(one.lookup);
    if (ofOne === undefined) {
      ofOne = new WeakMap();
      this.#common.set(one.lookup, ofOne);
    }
    let common = ofOne.get(other.lookup);
    if (common === undefined) {
      common = commonCells(one, other, this.#settings);
      ofOne.set(other.lookup, common);
    }
    return common;
  }

  /** @returns undefined where the radars never saw the same rain */
  finish(): OverlapPairs | undefined {
    if (this.#siteIds === undefined || this.#hashes.length === 0) return undefined;
    const order = Array.from(this.#hashes.keys()).sort(
      (a, b) => this.#hashes[a] - this.#hashes[b] || this.#epochMs[a] - this.#epochMs[b],
    );
    const column = (name: Column) => {
      const values = this.#columns.get(name) as readonly number[];
      return Float32Array.from(order, (at) => values[at]);
    };
    return {
      oneSiteId: this.#siteIds[0],
      otherSiteId: this.#siteIds[1],
      count: order.length,
      seen: this.#seen,
      oneDbz: column("oneDbz"),
      otherDbz: column("otherDbz"),
      oneAddedDb: column("oneAddedDb"),
      otherAddedDb: column("otherAddedDb"),
      oneLossDb: column("oneLossDb"),
      otherLossDb: column("otherLossDb"),
      onePhaseDeg: column("onePhaseDeg"),
      otherPhaseDeg: column("otherPhaseDeg"),
      heightAslM: column("heightAslM"),
      weight: column("weight"),
      epochMs: Float64Array.from(order, (at) => this.#epochMs[at]),
    };
  }
}

interface CommonCells {
  readonly cells: readonly number[];
  readonly weight: readonly number[];
}

function commonCells(one: OverlapSweep, other: OverlapSweep, settings: OverlapSettings): CommonCells {
  const cells: number[] = [];
  const weight: number[] = [];
  for (const cell of one.lookup.cells) {
    if (other.lookup.position[cell] < 0) continue;
    const heightM = Math.abs(one.lookup.beamHeightAslM[cell] - other.lookup.beamHeightAslM[cell]);
    const [near, far] = [one.distanceM[cell], other.distanceM[cell]];
    const share = Math.abs(near - far) / (near + far);
    if (!(heightM <= settings.maxHeightStepM && share <= settings.maxDistanceShare)) continue;
    cells.push(cell);
    weight.push(
      (1 - heightM / (2 * settings.maxHeightStepM)) * (1 - share / (2 * settings.maxDistanceShare)),
    );
  }
  return { cells, weight };
}

function side(): Side {
  return { dbz: Number.NaN, addedDb: 0, lossDb: Number.NaN, phaseDeg: Number.NaN };
}

const UNFIT = markBit("hail") | markBit("melting") | markBit("snow") | markBit("lost-in-attenuation");

/** Fills `into` with the mean of a cell. @returns false where a gate of it is not fit for comparison, or it shows nothing */
function sideOf({ echo, lookup }: OverlapSweep, cell: number, into: Side): boolean {
  const position = lookup.position[cell];
  const added = echo.effectsDb.get("attenuation");
  let [z, addedDb, lossDb, phaseDeg] = [0, 0, 0, 0];
  const [from, to] = [lookup.start[position], lookup.start[position + 1]];
  for (let k = from; k < to; k++) {
    const gate = lookup.gates[k];
    const dbz = echo.dbz[gate];
    if (Number.isNaN(dbz) || echo.screenedBy[gate] !== 0 || (echo.marks[gate] & UNFIT) !== 0) return false;
    if (echo.blockedFraction !== undefined && echo.blockedFraction[gate] > MOST_BLOCKED) return false;
    z += Math.exp(dbz * (Math.LN10 / 10));
    addedDb += added === undefined ? 0 : added[gate];
    lossDb += echo.twoWayLossDb === undefined ? Number.NaN : echo.twoWayLossDb[gate];
    phaseDeg += echo.rainPhaseDeg === undefined ? Number.NaN : echo.rainPhaseDeg[gate];
  }
  const count = to - from;
  into.dbz = 10 * Math.log10(z / count);
  into.addedDb = addedDb / count;
  into.lossDb = lossDb / count;
  into.phaseDeg = phaseDeg / count;
  return Number.isFinite(into.dbz);
}

/** 32 bits that place and time decide, evenly spread (finaliser of MurmurHash3, A. Appleby, public domain). */
function mixed(cell: number, oneMs: number, otherMs: number): number {
  let h =
    (cell ^
      Math.imul(Math.round(oneMs / 1000), 0x9e3779b1) ^
      Math.imul(Math.round(otherMs / 1000), 0x85ebca77)) |
    0;
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b);
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
  return (h ^ (h >>> 16)) >>> 0;
}
