import { readHead } from "../hdf5/index.ts";
import { openClassic } from "./classic.ts";
import { openHdf5Backed } from "./hdf5-backed.ts";
import type { NetcdfFile } from "./netcdf-file.ts";

/** Whether a file starts like classic NetCDF, version 1 or 2: "CDF" and the version. */
export function isClassic(head: Uint8Array): boolean {
  return (
    head[0] === 0x43 &&
    head[1] === 0x44 &&
    head[2] === 0x46 &&
    (head[3] as number) >= 1 &&
    (head[3] as number) <= 2
  );
}

/** Opens a NetCDF file of either kind. @throws InputError where it is neither, or damaged */
export function openNetcdf(path: string): NetcdfFile {
  return isClassic(readHead(path, 8)) ? openClassic(path) : openHdf5Backed(path);
}
