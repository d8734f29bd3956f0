import {
  InputError,
  type Moment,
  type RadarSite,
  type StoredValues,
  type SweepHeader,
} from "@rainreckon/core";
import {
  cfTimeUnits,
  type NetcdfFile,
  numberAttribute,
  textAttribute,
  variablePath,
} from "../../netcdf/index.ts";
import type { RayTable, SweepSource } from "../sourced-scan.ts";
import { type NamedVariable, odimNames } from "./moment-names.ts";
import { packedMoment, packing } from "./packed-moment.ts";
import { type Gates, gatesOf } from "./ranges.ts";

const MAX_RAYS = 36_000;
const LONGEST_SWEEP_MS = 3_600_000;
const SPEED_OF_LIGHT_M_PER_S = 299_792_458;

/** Rays that one group of a file holds together: all of a CfRadial 1 file, or one sweep of FM 301. */
export interface RadialBlock {
  readonly file: NetcdfFile;
  /** "" at the root. */
  readonly group: string;
  readonly gates: Gates;
  readonly rays: RayTable;
  /** Rays in the block, those between sweeps included. */
  readonly rayCount: number;
  /** Variable of each ODIM quantity. */
  readonly variables: ReadonlyMap<string, string>;
  readonly ragged?: Ragged;
  readonly remarks: readonly string[];
}

/** Where the gates of each ray lie in moments that are stored as one long list. */
interface Ragged {
  readonly start: Float64Array;
  readonly count: Float64Array;
  readonly points: number;
}

/** What stands beside the rays of a block. */
export interface SweepFrame {
  readonly site: RadarSite;
  readonly dataset: string;
  readonly firstRay: number;
  readonly lastRay: number;
  readonly fixedAngleDeg?: number;
}

/** Reads where and when the rays of a group looked, and which moments it has. @throws InputError where that cannot be */
export function radialBlock(file: NetcdfFile, group: string): RadialBlock {
  const at = (name: string) => variablePath(group, name);
  const rayCount = file.shapeOf(at("time"))?.[0] ?? 0;
  if (rayCount < 1) {
    throw new InputError(
      "there are no rays",
      `${file.path}, ${at("time")}`,
      "leave the file out, or fetch it again",
    );
  }
  const ragged = raggedOf(file, group, rayCount);
  const gates = gatesOf(file, at("range"));
  const rays = {
    azimuthDeg: perRay(file, at("azimuth"), rayCount),
    elevationDeg: perRay(file, at("elevation"), rayCount),
    timeEpochMs: rayTimes(file, at("time"), rayCount),
  };
  const wanted = ragged === undefined ? [rayCount, gates.gateCount] : [ragged.points];
  const candidates: NamedVariable[] = [];
  for (const name of file.variables(group)) {
    const shape = file.shapeOf(at(name));
    if (shape === undefined || shape.length !== wanted.length) continue;
    if (!shape.every((length, axis) => length === wanted[axis])) continue;
    candidates.push(named(file, at(name), name));
  }
  const { byQuantity, remarks } = odimNames(candidates);
  if (byQuantity.size === 0) {
    throw new InputError("there is no moment", `${file.path}, ${group || "root"}`, "leave the file out");
  }
  return {
    file,
    group,
    gates,
    rays,
    rayCount,
    variables: byQuantity,
    ...(ragged === undefined ? {} : { ragged }),
    remarks,
  };
}

function named(file: NetcdfFile, path: string, name: string): NamedVariable {
  const standardName = textAttribute(file, path, "standard_name");
  const units = textAttribute(file, path, "units");
  return {
    name,
    ...(standardName === undefined ? {} : { standardName }),
    ...(units === undefined ? {} : { units }),
  };
}

/** One number for each ray, fill values as NaN. */
function perRay(file: NetcdfFile, path: string, rayCount: number): Float64Array {
  if (file.shapeOf(path)?.[0] !== rayCount || file.shapeOf(path)?.length !== 1) {
    throw new InputError(
      `there is not one number for each of ${rayCount} rays`,
      `${file.path}, ${path}`,
      "fetch the file again, or leave it out",
    );
  }
  const values = file.numbers(path);
  const fill = numberAttribute(file, path, "_FillValue");
  return values.map((value) => (value === fill ? Number.NaN : value));
}

function rayTimes(file: NetcdfFile, path: string, rayCount: number): Float64Array {
  const units = textAttribute(file, path, "units") ?? "";
  const scale = cfTimeUnits(units, textAttribute(file, path, "calendar"));
  if (scale === undefined) {
    throw new InputError(
      `"${units.slice(0, 60)}" does not say what the ray times count from`,
      `${file.path}, ${path}`,
      'the units must read like "seconds since 2031-05-03T12:00:00Z", in the standard calendar',
    );
  }
  const latest = Date.UTC(2200, 0, 1);
  return perRay(file, path, rayCount).map((value) => {
    const epochMs = scale.originEpochMs + value * scale.stepMs;
    return Math.abs(epochMs) < latest ? epochMs : Number.NaN;
  });
}

function raggedOf(file: NetcdfFile, group: string, rayCount: number): Ragged | undefined {
  if (textAttribute(file, "", "n_gates_vary")?.toLowerCase() !== "true") return undefined;
  const start = variablePath(group, "ray_start_index");
  const count = variablePath(group, "ray_n_gates");
  if (file.shapeOf(start) === undefined || file.shapeOf(count) === undefined) return undefined;
  const starts = perRay(file, start, rayCount);
  const counts = perRay(file, count, rayCount);
  const points = starts.reduce((most, from, ray) => Math.max(most, from + (counts[ray] as number)), 0);
  return { start: starts, count: counts, points };
}

/**
 * One sweep of a block.
 *
 * @throws InputError where its rays, elevation or times cannot be
 */
export function radialSweep(block: RadialBlock, frame: SweepFrame): SweepSource {
  const { file } = block;
  const { firstRay, lastRay } = frame;
  const where = `${file.path}, ${frame.dataset}`;
  const rayCount = lastRay - firstRay + 1;
  const inside =
    Number.isInteger(firstRay) && Number.isInteger(lastRay) && firstRay >= 0 && lastRay < block.rayCount;
  if (!inside || !(rayCount >= 1 && rayCount <= MAX_RAYS)) {
    throw new InputError(
      `the sweep runs from ray ${firstRay} to ray ${lastRay}, of ${block.rayCount}`,
      where,
      `a sweep has 1 to ${MAX_RAYS} rays of the file: fetch it again`,
    );
  }
  const rays: RayTable = {
    azimuthDeg: block.rays.azimuthDeg.slice(firstRay, lastRay + 1),
    elevationDeg: block.rays.elevationDeg.slice(firstRay, lastRay + 1),
    timeEpochMs: block.rays.timeEpochMs.slice(firstRay, lastRay + 1),
  };
  const remarks: string[] = [...block.remarks];
  mustTurn(rays, where);
  const header: SweepHeader = {
    site: frame.site,
    origin: { path: file.path, dataset: frame.dataset },
    elevationDeg: elevationOf(rays, frame.fixedAngleDeg, where, remarks),
    rayCount,
    gateCount: block.gates.gateCount,
    firstGateCentreM: block.gates.firstGateCentreM,
    gateLengthM: block.gates.gateLengthM,
    ...spanOf(rays, where),
    quantities: [...block.variables.keys()].sort(),
    ...instrument(block, firstRay, lastRay),
    remarks,
  };
  const variableOf = (quantity: string) => variablePath(block.group, block.variables.get(quantity) as string);
  if (REFLECTIVITIES.some((quantity) => tellsNoUndetect(block, quantity))) {
    remarks.push(
      "The file has no code for 'observed, below detection': gates without a value count as not observed.",
    );
  }
  return {
    header,
    rays: () => rays,
    check: (quantity) => void packing(file, variableOf(quantity)),
    moment: (quantity) => readMoment(block, quantity, variableOf(quantity), firstRay, lastRay),
  };
}

/** What rain is made from: here a dry gate and one that was not looked at must not be mixed up. */
const REFLECTIVITIES = ["DBZH", "TH"] as const;

function tellsNoUndetect({ file, group, variables }: RadialBlock, quantity: string): boolean {
  const variable = variables.get(quantity);
  return (
    variable !== undefined && numberAttribute(file, variablePath(group, variable), "_Undetect") === undefined
  );
}

function readMoment(
  block: RadialBlock,
  quantity: string,
  variable: string,
  firstRay: number,
  lastRay: number,
): Moment {
  const scale = packing(block.file, variable);
  const all = block.file.stored(variable);
  const { gateCount } = block.gates;
  if (block.ragged === undefined) {
    return packedMoment(quantity, all.slice(firstRay * gateCount, (lastRay + 1) * gateCount), scale);
  }
  const isFloat = all instanceof Float32Array || all instanceof Float64Array;
  // Rays shorter than the longest are filled up with "not observed", for which whole numbers need a code.
  const nodata = scale.nodata ?? (isFloat ? Number.NaN : undefined);
  const where = `${block.file.path}, ${variable}`;
  if (nodata === undefined) {
    throw new InputError("rays differ in length and the moment has no _FillValue", where, "add a _FillValue");
  }
  return packedMoment(quantity, unrolled(block.ragged, all, nodata, block, firstRay, lastRay), scale);
}

function unrolled(
  ragged: Ragged,
  all: StoredValues,
  nodata: number,
  { gates: { gateCount }, file }: RadialBlock,
  firstRay: number,
  lastRay: number,
): StoredValues {
  const Kind = all.constructor as new (length: number) => StoredValues;
  const filled = new Kind((lastRay - firstRay + 1) * gateCount).fill(nodata);
  for (let ray = firstRay; ray <= lastRay; ray++) {
    const start = ragged.start[ray] as number;
    const count = ragged.count[ray] as number;
    if (!(start >= 0 && count >= 0 && count <= gateCount && start + count <= all.length)) {
      throw new InputError(
        `ray ${ray} claims ${count} gates from place ${start}, of ${all.length}`,
        `${file.path}, ray_n_gates`,
        "fetch the file again",
      );
    }
    filled.set(all.subarray(start, start + count), (ray - firstRay) * gateCount);
  }
  return filled;
}

/** A sweep turns in azimuth; a fan of rays at one azimuth is another thing. */
function mustTurn({ azimuthDeg, elevationDeg }: RayTable, where: string): void {
  const elevations = elevationDeg.filter((angle) => Number.isFinite(angle));
  const climb = Math.max(...chunked(elevations, Math.max)) - Math.min(...chunked(elevations, Math.min));
  const azimuths = azimuthDeg.filter((angle) => Number.isFinite(angle));
  const from = azimuths[0] ?? 0;
  const turn = azimuths.reduce(
    (most, angle) => Math.max(most, 180 - Math.abs(((((angle - from) % 360) + 360) % 360) - 180)),
    0,
  );
  if (climb > 5 && turn < climb) {
    throw new InputError("a fan of rays at one azimuth, not a sweep", where, "leave it out");
  }
}

/** The extreme of a list too long to be arguments of one call. */
function chunked(values: Float64Array, pick: (...values: number[]) => number): number[] {
  const extremes: number[] = [];
  for (let at = 0; at < values.length; at += 10_000) extremes.push(pick(...values.subarray(at, at + 10_000)));
  return extremes;
}

function elevationOf(
  { elevationDeg }: RayTable,
  fixedAngleDeg: number | undefined,
  where: string,
  remarks: string[],
): number {
  const sorted = elevationDeg.filter((angle) => angle >= -10 && angle <= 90).sort();
  const median = sorted[Math.floor(sorted.length / 2)];
  const fixed = fixedAngleDeg !== undefined && fixedAngleDeg >= -10 && fixedAngleDeg <= 90;
  if (median === undefined) {
    throw new InputError("the rays have no elevation between -10 and 90 degrees", where, "leave it out");
  }
  if (!fixed) {
    remarks.push("The sweep has no elevation of its own; the median of its rays stands for it.");
    return median;
  }
  if (Math.abs(median - fixedAngleDeg) > 0.5) {
    const [meant, found] = [fixedAngleDeg.toFixed(2), median.toFixed(2)];
    remarks.push(`The sweep is to be at ${meant} degrees, but its rays are at ${found}; the rays count.`);
    return median;
  }
  return fixedAngleDeg;
}

function spanOf({ timeEpochMs }: RayTable, where: string): { startEpochMs: number; endEpochMs: number } {
  let startEpochMs = Number.POSITIVE_INFINITY;
  let endEpochMs = Number.NEGATIVE_INFINITY;
  for (const time of timeEpochMs) {
    if (time < startEpochMs) startEpochMs = time;
    if (time > endEpochMs) endEpochMs = time;
  }
  if (!(endEpochMs >= startEpochMs)) {
    throw new InputError("no ray of the sweep has a time", where, "leave it out, or fetch the file again");
  }
  if (endEpochMs - startEpochMs > LONGEST_SWEEP_MS) {
    const minutes = Math.round((endEpochMs - startEpochMs) / 60_000);
    throw new InputError(
      `the sweep takes ${minutes} minutes`,
      where,
      "no antenna takes an hour for one turn",
    );
  }
  return { startEpochMs, endEpochMs };
}

type Instrument = Pick<SweepHeader, "wavelengthM" | "beamWidthDeg" | "nyquistVelocityMPerS">;

function instrument({ file, group, rayCount }: RadialBlock, firstRay: number, lastRay: number): Instrument {
  const hertz = first(file, ["frequency"], 1.5e8, 3e11);
  const horizontal = first(file, ["radar_beam_width_h", "radar_parameters/radar_beam_width_h"], 0.05, 20);
  const vertical = first(file, ["radar_beam_width_v", "radar_parameters/radar_beam_width_v"], 0.05, 20);
  const either = horizontal ?? vertical;
  const nyquist = variablePath(group, "nyquist_velocity");
  const velocities = file.shapeOf(nyquist)?.[0] === rayCount ? file.numbers(nyquist) : new Float64Array();
  const middle = velocities[Math.floor((firstRay + lastRay) / 2)];
  return {
    ...(hertz === undefined ? {} : { wavelengthM: SPEED_OF_LIGHT_M_PER_S / hertz }),
    ...(either === undefined
      ? {}
      : { beamWidthDeg: { horizontal: horizontal ?? either, vertical: vertical ?? either } }),
    ...(middle !== undefined && middle > 0.1 && middle < 1000 ? { nyquistVelocityMPerS: middle } : {}),
  };
}

function first(
  file: NetcdfFile,
  names: readonly string[],
  lowest: number,
  highest: number,
): number | undefined {
  for (const name of names) {
    if (file.shapeOf(name) === undefined) continue;
    const value = file.numbers(name)[0];
    if (value !== undefined && value >= lowest && value <= highest) return value;
  }
  return undefined;
}
