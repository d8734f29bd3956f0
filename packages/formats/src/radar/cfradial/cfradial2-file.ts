import { InputError, type RadarSite } from "@rainreckon/core";
import { type NetcdfFile, openNetcdf, variablePath } from "../../netcdf/index.ts";
import type { ScanFile } from "../scan-file.ts";
import { type SweepSource, sourcedScan } from "../sourced-scan.ts";
import { radialBlock, radialSweep } from "./radial-block.ts";
import { cfradialSite } from "./site.ts";

const MAX_SWEEPS = 1000;
const MARKS = ["time", "range", "azimuth", "elevation"];

/**
 * Opens a CfRadial 2 file, as WMO FM 301 has it: a group "sweep_0001" and so on for each sweep.
 *
 * @returns undefined where it is an HDF5 file that holds something else
 * @throws InputError where it is damaged, or no sweep in it can be used
 * @see WMO-No. 306, Manual on Codes, FM 301-2022 CF-Radial
 */
export function openCfradial2(path: string): ScanFile | undefined {
  const file = openNetcdf(path);
  try {
    const groups = file.groups().filter((name) => /^sweep_\d{1,6}$/.test(name));
    if (groups.length === 0) {
      file.close();
      return undefined;
    }
    if (groups.length > MAX_SWEEPS) {
      throw new InputError(
        `the file claims ${groups.length} sweeps`,
        path,
        `no volume has more than ${MAX_SWEEPS}`,
      );
    }
    return readGroups(file, groups.sort());
  } catch (error) {
    file.close();
    throw error;
  }
}

function readGroups(file: NetcdfFile, groups: readonly string[]): ScanFile {
  const site = cfradialSite(file);
  const sweeps: SweepSource[] = [];
  const leftOut: InputError[] = [];
  for (const group of groups) {
    try {
      sweeps.push(readGroup(file, group, site));
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      leftOut.push(error);
    }
  }
  if (sweeps.length === 0) throw leftOut[0];
  return sourcedScan(file.path, "CfRadial 2", sweeps, { remarks: [], leftOut }, () => file.close());
}

function readGroup(file: NetcdfFile, group: string, site: RadarSite): SweepSource {
  const absent = MARKS.find((name) => file.shapeOf(variablePath(group, name)) === undefined);
  if (absent !== undefined) {
    throw new InputError(`the sweep has no ${absent}`, `${file.path}, ${group}`, "leave it out");
  }
  const block = radialBlock(file, group);
  const angle = ["sweep_fixed_angle", "fixed_angle"]
    .map((name) => variablePath(group, name))
    .find((name) => file.shapeOf(name) !== undefined);
  const fixedAngleDeg = angle === undefined ? undefined : file.numbers(angle)[0];
  const frame = { site, dataset: group, firstRay: 0, lastRay: block.rayCount - 1 };
  return radialSweep(block, fixedAngleDeg === undefined ? frame : { ...frame, fixedAngleDeg });
}
