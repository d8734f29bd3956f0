import { spawnSync } from "node:child_process";
import { existsSync, mkdirSync, readFileSync, renameSync, rmSync } from "node:fs";
import path from "node:path";
import { gunzipSync } from "node:zlib";
import type { Grid } from "@rainreckon/core";
import { type PolarLookup, polarLookup, projection, siteCells } from "@rainreckon/mosaic";

export type WorldSize = "small" | "full";

/** A world on disk, with the truth that maps are held against. Shapes [cells] of the truth's grid. */
export interface TrueWorld {
  readonly folder: string;
  readonly grid: Grid;
  readonly window: { readonly from: string; readonly to: string };
  readonly totalMm: Float32Array;
  /** 1 where no gate of any radar's lowest sweep ever had clutter, a turbine or interference. */
  readonly clutterFree: Uint8Array;
  /** From the nearest radar. */
  readonly rangeKm: Float32Array;
  readonly radars: readonly TrueRadar[];
}

/** The gates of one radar as they truly were. */
export interface TrueRadar {
  readonly node: string;
  /** What was planted: by how much every reflectivity is too high. */
  readonly calibrationErrorDb: number;
  readonly rayCount: number;
  readonly gateCount: number;
  readonly sweeps: readonly { readonly start: string; readonly elevationDeg: number }[];
  /** Which gates of the lowest sweep make which cell of the truth's grid. */
  readonly lowest: PolarLookup;
  /** Shape [rayCount * gateCount]: rain at the ground below, mm/h. */
  rateMmPerHour(sweep: number): Float32Array;
  /** Shape [rayCount * gateCount]: bits of gates.json. */
  flags(sweep: number): Uint8Array;
  readonly falseEchoBits: number;
}

/** Whether a radar of a run is one of the truth: sites are named after their node. */
export function isRadar(siteId: string, node: string): boolean {
  return siteId.toLowerCase().includes(node);
}

/** Makes a world unless the cache holds it. @returns its folder */
export function worldFolder(
  generator: string,
  cache: string,
  world: string,
  seed: number,
  size: WorldSize,
): string {
  const folder = path.join(cache, size === "small" ? world : `${world}-full`, String(seed));
  if (existsSync(path.join(folder, "truth/gates.json"))) return folder;
  const beside = `${folder}.part-${process.pid}`;
  mkdirSync(path.dirname(beside), { recursive: true });
  const args = [generator, beside, "--world", world, "--seed", String(seed), "--size", size, "--gates"];
  const made = spawnSync(process.execPath, args, { encoding: "utf8" });
  if (made.status !== 0) throw new Error(`${world}, seed ${seed}: ${made.stderr}`);
  rmSync(folder, { recursive: true, force: true });
  renameSync(beside, folder);
  return folder;
}

interface TruthFile {
  readonly grid: Grid;
  readonly window: { readonly from: string; readonly to: string };
  readonly files: { readonly total: string };
  readonly planted: {
    readonly radars: readonly {
      readonly node: string;
      readonly lonDeg: number;
      readonly latDeg: number;
      readonly calibrationOffsetDb: number;
    }[];
  };
}

interface GatesFile {
  readonly rateStepMmPerHour: number;
  readonly flags: { readonly groundClutter: number; readonly turbine: number; readonly interference: number };
  readonly radars: readonly {
    readonly node: string;
    readonly file: string;
    readonly rayCount: number;
    readonly gateCount: number;
    readonly gateM: number;
    readonly sweeps: readonly {
      readonly start: string;
      readonly elevationDeg: number;
      readonly byteOffset: number;
    }[];
  }[];
}

/** Reads the truth of a world that lies in a folder. */
export function trueWorld(folder: string): TrueWorld {
  const file = (name: string) => path.join(folder, "truth", name);
  const truth = JSON.parse(readFileSync(file("truth.json"), "utf8")) as TruthFile;
  const gates = JSON.parse(readFileSync(file("gates.json"), "utf8")) as GatesFile;
  const { grid, window } = truth;
  const map = projection(grid.crs);
  const cellCount = grid.nx * grid.ny;
  const rangeKm = new Float32Array(cellCount).fill(Number.POSITIVE_INFINITY);
  const clutterFree = new Uint8Array(cellCount).fill(1);
  const falseEchoBits = gates.flags.groundClutter | gates.flags.turbine | gates.flags.interference;
  const radars = gates.radars.map((radar): TrueRadar => {
    const { node, rayCount, gateCount, gateM, sweeps } = radar;
    const placed = truth.planted.radars.find((one) => one.node === node);
    if (placed === undefined) throw new Error(`${folder}: no place of radar ${node}`);
    const site = { id: node, lonDeg: placed.lonDeg, latDeg: placed.latDeg, antennaHeightM: 0 };
    const fromSite = siteCells(grid, map, site);
    for (let cell = 0; cell < cellCount; cell++) {
      rangeKm[cell] = Math.min(rangeKm[cell], fromSite.distanceM[cell] / 1000);
    }
    const elevationDeg = Math.min(...sweeps.map((sweep) => sweep.elevationDeg));
    const lowest = polarLookup(
      grid,
      map,
      fromSite,
      {
        site,
        elevationDeg,
        azimuthDeg: Float64Array.from({ length: rayCount }, (_, ray) => ray + 0.5),
        gateCount,
        firstGateCentreM: gateM / 2,
        gateLengthM: gateM,
        beamWidthDeg: 1,
      },
      { effectiveRadiusFactor: 4 / 3, maxBeamHeightM: 20_000, taperM: 0, blockedSectors: [] },
    );
    // Kept packed: unpacked, the gates of a world at full size take a gigabyte.
    let unpacked: WeakRef<Buffer> | undefined;
    const bytes = (): Buffer => {
      const known = unpacked?.deref();
      if (known !== undefined) return known;
      const fresh = gunzipSync(readFileSync(file(radar.file)));
      unpacked = new WeakRef(fresh);
      return fresh;
    };
    const gateTotal = rayCount * gateCount;
    const one: TrueRadar = {
      node,
      calibrationErrorDb: placed.calibrationOffsetDb,
      rayCount,
      gateCount,
      sweeps,
      lowest,
      rateMmPerHour: (sweep) => {
        const from = sweeps[sweep].byteOffset + 2 * gateTotal;
        const content = bytes();
        return Float32Array.from(
          { length: gateTotal },
          (_, gate) => content.readUInt16LE(from + 2 * gate) * gates.rateStepMmPerHour,
        );
      },
      flags: (sweep) => {
        const from = sweeps[sweep].byteOffset + 4 * gateTotal;
        return Uint8Array.from(bytes().subarray(from, from + gateTotal));
      },
      falseEchoBits,
    };
    const dirty = new Uint8Array(gateTotal);
    for (let sweep = 0; sweep < sweeps.length; sweep++) {
      if (sweeps[sweep].elevationDeg !== elevationDeg) continue;
      const flags = one.flags(sweep);
      for (let gate = 0; gate < gateTotal; gate++) if ((flags[gate] & falseEchoBits) !== 0) dirty[gate] = 1;
    }
    const { cells, start, gates: gatesOf } = lowest;
    for (let k = 0; k < cells.length; k++) {
      for (let at = start[k]; at < start[k + 1]; at++)
        if (dirty[gatesOf[at]] === 1) clutterFree[cells[k]] = 0;
    }
    return one;
  });
  return {
    folder,
    grid: {
      crs: grid.crs,
      westM: grid.westM,
      northM: grid.northM,
      cellM: grid.cellM,
      nx: grid.nx,
      ny: grid.ny,
    },
    window,
    totalMm: floats(file(truth.files.total), cellCount),
    clutterFree,
    rangeKm,
    radars,
  };
}

/** Little-endian float32 numbers of a file. */
export function floats(file: string, count: number): Float32Array {
  const bytes = readFileSync(file);
  if (bytes.length !== 4 * count) throw new Error(`${file}: ${bytes.length} bytes, wanted ${4 * count}`);
  return Float32Array.from({ length: count }, (_, i) => bytes.readFloatLE(4 * i));
}
