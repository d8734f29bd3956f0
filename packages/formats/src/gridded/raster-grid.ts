import { type Grid, InputError } from "@rainreckon/core";
import { pictureOf, placeOf } from "./geotiff-picture.ts";

const USAGE = { kind: "usage" } as const;

/**
 * The grid that a GeoTIFF lies on, whatever its cells hold: to lay one's own maps cell upon cell.
 *
 * @throws InputError of kind "usage" where the file is no GeoTIFF with a place, is in degrees, or its cells are not
 *   square; `where` is the path as it was handed in
 */
export async function readRasterGrid(filePath: string): Promise<Grid> {
  const image = await asUsage(() => pictureOf(filePath));
  const place = await asUsage(async () => placeOf(image, {}, filePath));
  if (place?.kind !== "affine")
    throw new InputError("nothing says where this picture lies", filePath, "name a GeoTIFF of a map", USAGE);
  const { crs, west, north, cellWidth, cellHeight } = place;
  if (image.getGeoKeys()?.GTModelTypeGeoKey === GEOGRAPHIC)
    throw new InputError(
      `its cells are in degrees (${crs})`,
      filePath,
      "name a raster in a projected system in metres",
      USAGE,
    );
  if (Math.abs(cellWidth / cellHeight - 1) > 1e-6)
    throw new InputError(
      `its cells are not square: ${cellWidth} by ${cellHeight} m`,
      filePath,
      "name a raster of square cells",
      USAGE,
    );
  return {
    crs,
    westM: west,
    northM: north,
    cellM: cellWidth,
    nx: image.getWidth(),
    ny: image.getHeight(),
  };
}

/** ModelTypeGeographic of the OGC GeoTIFF Standard 1.1 (2019), 7.2.3. */
const GEOGRAPHIC = 2;

/** A file that the user names by hand is a matter of usage, whatever is wrong with it. */
async function asUsage<T>(work: () => Promise<T>): Promise<T> {
  try {
    return await work();
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    const fix = error.fix.includes("plan") ? "name a raster whose system has an EPSG code" : error.fix;
    throw new InputError(error.what, error.where, fix, { ...USAGE, cause: error });
  }
}
