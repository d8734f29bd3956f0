import { InputError, type TerrainGrid } from "@rainreckon/core";
import { bandOf, describePicture, orDamaged, pictureOf, placeOf } from "../gridded/geotiff-picture.ts";

/** No land lies lower or higher; codes such as -32768 or 9999, which files use without declaring them, do. */
const LOWEST_LAND_M = -1000;
const HIGHEST_LAND_M = 9000;

const METRES = /^(m|met(er|re)s?)?$/i;
const FEET = /^(ft|f(ee|oo)t|us survey f(ee|oo)t)$/i;
const M_PER_FOOT = 0.3048;

/**
 * Reads a terrain model: heights of the ground in the first band of a GeoTIFF, in metres or feet as its unit says (metres
 * where it says none), in any coordinate system with an EPSG code.
 *
 * @returns heights with NaN where the file has none, or one that no land has; both counted in `unknownCells`
 * @throws InputError where it is damaged, larger than 1 GB or 64 million cells, or has no place
 * @see OGC GeoTIFF Standard 1.1 (2019)
 */
export async function readTerrain(filePath: string): Promise<TerrainGrid> {
  const image = await pictureOf(filePath);
  const [nx, ny] = [image.getWidth(), image.getHeight()];
  const tags = await orDamaged(filePath, () => describePicture(image));
  const place = placeOf(image, {}, filePath);
  if (place?.kind !== "affine") {
    throw new InputError("a picture without a place on the map", filePath, "give a GeoTIFF of heights", {
      kind: "usage",
    });
  }
  const unit = (tags.unit ?? "").trim();
  if (!METRES.test(unit) && !FEET.test(unit)) {
    throw new InputError(`its unit is "${unit}"`, filePath, "give heights in metres or feet", {
      kind: "usage",
    });
  }
  const metres = METRES.test(unit) ? 1 : M_PER_FOOT;
  const band = await bandOf(image, filePath);
  const heightAslM = new Float32Array(band.length);
  const nodata = image.getGDALNoData();
  let unknownCells = 0;
  for (let cell = 0; cell < heightAslM.length; cell++) {
    const code = band[cell] as number;
    const height = (code * tags.gain + tags.offset) * metres;
    const isHeight = code !== nodata && height >= LOWEST_LAND_M && height <= HIGHEST_LAND_M;
    heightAslM[cell] = isHeight ? height : Number.NaN;
    if (!isHeight) unknownCells++;
  }
  const { crs, west, north, cellWidth, cellHeight } = place;
  return { crs, west, north, cellWidth, cellHeight, nx, ny, heightAslM, unknownCells };
}
