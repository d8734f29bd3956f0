import { readFileSync, statSync } from "node:fs";
import path from "node:path";
import { InputError } from "@rainreckon/core";
import { fromArrayBuffer, type GeoTIFFImage } from "geotiff";
import { fileNameTime } from "./file-name-time.ts";
import {
  type GriddedFile,
  type GriddedHeader,
  type GriddedOptions,
  type GriddedQuantity,
  type GridPlace,
  MAX_CELLS,
} from "./gridded-file.ts";
import { type Measure, measureOf } from "./quantities.ts";
import { soundLayer } from "./sound-values.ts";
import { checkTiff } from "./tiff-sizes.ts";

const MAX_FILE_BYTES = 1_000_000_000;
const MAX_BANDS = 64;
const IMAGE_DATE_TIME = 306;
const USER_DEFINED = 32_767;
const PIXEL_IS_POINT = 2;

/**
 * Opens a GeoTIFF with rain rate, depth or reflectivity in its first band. Its time is that of the options, else of its
 * DateTime tag, else of its name, both taken as UTC; what it holds is told by its unit or description.
 *
 * @returns undefined where nothing tells that it holds rain or reflectivity on a map
 * @throws InputError where it is damaged, or lacks time or place
 * @see OGC GeoTIFF Standard 1.1 (2019); TIFF 6.0 (Aldus, 1992)
 */
export async function openGeoTiffGrid(
  filePath: string,
  options: GriddedOptions,
): Promise<GriddedFile | undefined> {
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
  const tags = await orDamaged(filePath, () => describe(image));
  const measure =
    options.quantity === undefined
      ? measureOf(tags.unit, [tags.description, path.basename(filePath)])
      : measureOfOption(options.quantity, tags);
  const place = placeOf(image, options, filePath);
  if (measure === undefined || place === undefined) return undefined;
  const { span, remarks } = await timeOf(image, filePath, measure, options);
  const header: GriddedHeader = {
    origin: { path: filePath, dataset: "band 1" },
    quantity: measure.quantity,
    nx,
    ny,
    place,
    ...span,
    remarks,
  };
  return {
    format: "GeoTIFF",
    headers: [header],
    remarks: [],
    leftOut: [],
    async readLayer(index) {
      if (index !== 0) throw new RangeError(`there is no layer ${index}; ${filePath} has 1`);
      return soundLayer(header, await valuesOf(image, filePath, measure, tags));
    },
    close: () => undefined,
  };
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
async function orDamaged<T>(where: string, work: () => Promise<T>): Promise<T> {
  try {
    return await work();
  } catch (cause) {
    throw new InputError("the file is damaged: the picture cannot be decoded", where, "fetch it again", {
      cause,
    });
  }
}

interface Tags {
  readonly unit: string | undefined;
  readonly description: string;
  readonly gain: number;
  readonly offset: number;
}

async function describe(image: GeoTIFFImage): Promise<Tags> {
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

/** What the plan says it is; the file's own unit still says in which one. */
function measureOfOption(quantity: GriddedQuantity, tags: Tags): Measure {
  const told = measureOf(tags.unit, [tags.description, "rain"]);
  return told?.quantity === quantity ? told : { quantity, factor: 1 };
}

function placeOf(image: GeoTIFFImage, options: GriddedOptions, where: string): GridPlace | undefined {
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

async function timeOf(
  image: GeoTIFFImage,
  filePath: string,
  measure: Measure,
  options: GriddedOptions,
): Promise<{ span: { startEpochMs: number; endEpochMs: number }; remarks: readonly string[] }> {
  const tag = await orDamaged(filePath, async () => image.fileDirectory.loadValue(IMAGE_DATE_TIME));
  const fromTag =
    typeof tag === "string" ? fileNameTime(tag.replace(/\0.*$/, "").replaceAll(":", "-")) : undefined;
  const fromName = fileNameTime(path.basename(filePath));
  // A name with start and end tells more than a tag with one instant.
  const isSpan = fromName !== undefined && fromName.endEpochMs > fromName.startEpochMs;
  const span = options.time ?? (isSpan ? fromName : (fromTag ?? fromName));
  if (span === undefined) {
    throw new InputError(
      "nothing says what time it is of",
      filePath,
      "give its time in the plan, or in the file's name",
    );
  }
  if (measure.quantity === "depthMm" && span.endEpochMs === span.startEpochMs) {
    throw new InputError(
      "a depth with an instant, but no start and end",
      filePath,
      "give both in the file's name or the plan",
    );
  }
  const source = span === fromTag ? "DateTime tag" : "name";
  return {
    span,
    remarks: options.time === undefined ? [`The time is taken from the file's ${source}, as UTC.`] : [],
  };
}

async function valuesOf(
  image: GeoTIFFImage,
  where: string,
  measure: Measure,
  tags: Tags,
): Promise<Float32Array> {
  const rasters = await orDamaged(where, async () => image.readRasters({ samples: [0] }));
  const band = (Array.isArray(rasters) ? rasters[0] : undefined) as ArrayLike<number> | undefined;
  const cellCount = image.getWidth() * image.getHeight();
  if (band === undefined || band.length !== cellCount) {
    throw new InputError("the file is damaged: the picture has not its cells", where, "fetch it again");
  }
  const nodata = image.getGDALNoData();
  const values = new Float32Array(cellCount);
  for (let cell = 0; cell < cellCount; cell++) {
    const code = band[cell] as number;
    values[cell] = code === nodata ? Number.NaN : (code * tags.gain + tags.offset) * measure.factor;
  }
  return values;
}
