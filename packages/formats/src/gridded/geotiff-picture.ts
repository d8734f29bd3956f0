import { readFileSync, statSync } from "node:fs";
import { InputError } from "@rainreckon/core";
import { fromArrayBuffer, type GeoTIFFImage } from "geotiff";
import { type GriddedOptions, type GridPlace, MAX_CELLS } from "./gridded-file.ts";
import { checkTiff } from "./tiff-sizes.ts";

const MAX_FILE_BYTES = 1_000_000_000;
const MAX_BANDS = 64;
const USER_DEFINED = 32_767;
const PIXEL_IS_POINT = 2;

/**
 * The first picture of a GeoTIFF, its sizes held against the file's length.
 *
 * @throws InputError where the file cannot be read, is damaged, or claims more than `MAX_CELLS`
 */
export async function pictureOf(filePath: string): Promise<GeoTIFFImage> {
  const bytes = readWhole(filePath);
  checkTiff(bytes, filePath);
  const image = await orDamaged(filePath, async () => {
    const tiff = await fromArrayBuffer(
      bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.byteLength) as ArrayBuffer,
    );
    return tiff.getImage(0);
  });
  const [nx, ny] = [image.getWidth(), image.getHeight()];
  if (!(nx >= 1 && ny >= 1 && nx * ny <= MAX_CELLS && image.getSamplesPerPixel() <= MAX_BANDS)) {
    throw new InputError(`the picture claims ${nx} by ${ny} cells`, filePath, `1 to ${MAX_CELLS} are read`);
  }
  return image;
}

function readWhole(filePath: string): Buffer {
  try {
    if (statSync(filePath).size <= MAX_FILE_BYTES) return readFileSync(filePath);
  } catch (cause) {
    throw new InputError("cannot be opened", filePath, "check that the file exists and may be read", {
      cause,
    });
  }
  throw new InputError("the file is larger than 1 GB", filePath, "cut it to the area of interest");
}

/** The library throws errors of every kind at a damaged file. */
export async function orDamaged<T>(where: string, work: () => Promise<T>): Promise<T> {
  try {
    return await work();
  } catch (cause) {
    throw new InputError("the file is damaged: the picture cannot be decoded", where, "fetch it again", {
      cause,
    });
  }
}

/** What the metadata of a picture says of its numbers: physical = stored * gain + offset. */
export interface PictureTags {
  readonly unit: string | undefined;
  readonly description: string;
  readonly gain: number;
  readonly offset: number;
}

export async function describePicture(image: GeoTIFFImage): Promise<PictureTags> {
  const [band, whole] = [await image.getGDALMetadata(0), await image.getGDALMetadata()];
  const text = (name: string) => {
    const value = band?.[name] ?? whole?.[name];
    return value === undefined ? undefined : String(value);
  };
  const number = (name: string, otherwise: number) => {
    const value = Number(text(name) ?? otherwise);
    return Number.isFinite(value) ? value : otherwise;
  };
  return {
    unit: text("UNITTYPE") ?? text("units"),
    description: text("DESCRIPTION") ?? text("long_name") ?? "",
    gain: number("SCALE", 1) || 1,
    offset: number("OFFSET", 0),
  };
}

/**
 * Where a picture lies.
 *
 * @returns undefined where it says nothing of it
 * @throws InputError where it is turned, or its system has no code and none is given
 */
export function placeOf(image: GeoTIFFImage, options: GriddedOptions, where: string): GridPlace | undefined {
  const fields = image.fileDirectory;
  if (!fields.hasTag("ModelPixelScale") && !fields.hasTag("ModelTransformation")) return undefined;
  let origin: number[];
  let resolution: number[];
  let keys: Record<string, unknown>;
  try {
    [origin, resolution] = [image.getOrigin(), image.getResolution()];
    keys = (image.getGeoKeys() ?? {}) as Record<string, unknown>;
  } catch (cause) {
    throw new InputError("the file is damaged: its place cannot be read", where, "fetch it again", { cause });
  }
  const code = [keys.ProjectedCSTypeGeoKey, keys.GeographicTypeGeoKey].find(
    (key) => typeof key === "number" && key > 0 && key < USER_DEFINED,
  );
  const isUserDefined = keys.ProjectedCSTypeGeoKey === USER_DEFINED;
  const crs = options.crs ?? (code === undefined || isUserDefined ? undefined : `EPSG:${code}`);
  if (crs === undefined) {
    throw new InputError("its coordinate system has no EPSG code", where, "name it (crs) in the plan");
  }
  const [west, north, cellWidth, height] = [origin[0], origin[1], resolution[0], resolution[1]];
  const cellHeight = -(height ?? Number.NaN);
  if (![west, north].every(Number.isFinite) || !(Number(cellWidth) > 0 && cellHeight > 0)) {
    throw new InputError(
      "it is turned, mirrored or of no size",
      where,
      "resample it to rows from north to south",
    );
  }
  // A pixel that stands for a point is centred on the corner that is given.
  const shift = keys.GTRasterTypeGeoKey === PIXEL_IS_POINT ? 0.5 : 0;
  return {
    kind: "affine",
    crs,
    west: (west as number) - shift * (cellWidth as number),
    north: (north as number) + shift * cellHeight,
    cellWidth: cellWidth as number,
    cellHeight,
  };
}

/** The numbers of the first band as the file has them: shape [ny, nx]. */
export async function bandOf(image: GeoTIFFImage, where: string): Promise<ArrayLike<number>> {
  const rasters = await orDamaged(where, async () => image.readRasters({ samples: [0] }));
  const band = (Array.isArray(rasters) ? rasters[0] : undefined) as ArrayLike<number> | undefined;
  if (band === undefined || band.length !== image.getWidth() * image.getHeight()) {
    throw new InputError("the file is damaged: the picture has not its cells", where, "fetch it again");
  }
  return band;
}
