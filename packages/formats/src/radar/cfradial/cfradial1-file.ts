import { InputError } from "@rainreckon/core";
import { type NetcdfFile, openNetcdf } from "../../netcdf/index.ts";
import type { ScanFile } from "../scan-file.ts";
import { type SweepSource, sourcedScan } from "../sourced-scan.ts";
import { radialBlock, radialSweep } from "./radial-block.ts";
import { cfradialSite } from "./site.ts";

const MAX_SWEEPS = 1000;
const MARKS = ["time", "range", "azimuth", "elevation", "sweep_start_ray_index", "sweep_end_ray_index"];

/**
 * Opens a CfRadial 1 file, NetCDF-3 or NetCDF-4.
 *
 * @returns undefined where it is a NetCDF or HDF5 file that holds something else
 * @throws InputError where it is damaged, or no sweep in it can be used
 * @see CfRadial data file format, version 1.4 (Dixon and others, 2016)
 */
export function openCfradial1(path: string): ScanFile | undefined {
  const file = openNetcdf(path);
  try {
    if (MARKS.some((name) => file.shapeOf(name) === undefined)) {
      file.close();
      return undefined;
    }
    return readStructure(file);
  } catch (error) {
    file.close();
    throw error;
  }
}

function readStructure(file: NetcdfFile): ScanFile {
  const site = cfradialSite(file);
  const block = radialBlock(file, "");
  const [starts, ends] = ["sweep_start_ray_index", "sweep_end_ray_index"].map((name) =>
    file.numbers(name),
  ) as [Float64Array, Float64Array];
  const angles = file.shapeOf("fixed_angle") === undefined ? new Float64Array() : file.numbers("fixed_angle");
  if (starts.length !== ends.length || starts.length > MAX_SWEEPS || starts.length === 0) {
    throw new InputError(
      `the file claims ${starts.length} sweep starts and ${ends.length} ends`,
      `${file.path}, sweep_start_ray_index`,
      `a volume has 1 to ${MAX_SWEEPS} sweeps: fetch the file again`,
    );
  }
  const sweeps: SweepSource[] = [];
  const leftOut: InputError[] = [];
  starts.forEach((firstRay, index) => {
    const fixedAngleDeg = angles[index];
    try {
      const frame = { site, dataset: `sweep ${index}`, firstRay, lastRay: ends[index] as number };
      sweeps.push(radialSweep(block, fixedAngleDeg === undefined ? frame : { ...frame, fixedAngleDeg }));
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      leftOut.push(error);
    }
  });
  if (sweeps.length === 0) throw leftOut[0];
  return sourcedScan(
    file.path,
    "CfRadial 1",
    sweeps,
    { remarks: strayRays(file, starts, ends, block.rayCount), leftOut },
    () => file.close(),
  );
}

/** Rays while the antenna moves from one sweep to the next belong to none. */
function strayRays(file: NetcdfFile, starts: Float64Array, ends: Float64Array, rayCount: number) {
  const inSweeps = starts.reduce((sum, start, index) => sum + (ends[index] as number) - start + 1, 0);
  const between = rayCount - inSweeps;
  if (!(between > 0)) return [];
  return [
    {
      what: `${between} of ${rayCount} rays lie between sweeps and belong to none`,
      where: file.path,
      fix: "nothing to do",
    },
  ];
}
