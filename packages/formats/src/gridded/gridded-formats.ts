import { HEAD_BYTES, readHead, signatureOffset } from "../hdf5/index.ts";
import { isClassic } from "../netcdf/index.ts";
import { openCfGrid } from "./cf-grid.ts";
import { openGeoTiffGrid } from "./geotiff-grid.ts";
import type { GriddedFile, GriddedFormat, GriddedOptions } from "./gridded-file.ts";
import { openOdimGrid } from "./odim-grid.ts";

/** Every format of gridded layers that is read; the first that finds itself inside a file opens it. */
export const GRIDDED_FORMATS: readonly GriddedFormat[] = [
  {
    name: "ODIM_H5 composite or image",
    recognise: (head) => signatureOffset(head) !== undefined,
    open: async (path, options) => openOdimGrid(path, options),
  },
  {
    name: "CF NetCDF",
    recognise: (head) => signatureOffset(head) !== undefined || isClassic(head),
    open: async (path, options) => openCfGrid(path, options),
  },
  { name: "GeoTIFF", recognise: isTiff, open: openGeoTiffGrid },
];

/**
 * Opens a file of gridded rain rate, depth or reflectivity, and reads what its layers are, but no values.
 *
 * @param path - the file; nothing else is opened
 * @param options - what the file may not say itself
 * @returns undefined where it is no such file: then it may be a radar scan, a map or a table
 * @throws InputError where it is one, and nothing in it can be used
 * @throws RangeError before `formatsReady` is done
 */
export async function openGridded(
  path: string,
  options: GriddedOptions = {},
): Promise<GriddedFile | undefined> {
  const head = readHead(path, HEAD_BYTES);
  for (const format of GRIDDED_FORMATS) {
    if (!format.recognise(head)) continue;
    const file = await format.open(path, options);
    if (file !== undefined) return file;
  }
  return undefined;
}

function isTiff(head: Uint8Array): boolean {
  const [a, b, c, d] = head;
  return (
    (a === 0x49 && b === 0x49 && (c === 42 || c === 43) && d === 0) ||
    (a === 0x4d && b === 0x4d && c === 0 && (d === 42 || d === 43))
  );
}
