import path from "node:path";
import { InputError } from "@rainreckon/core";
import type { GeoTIFFImage } from "geotiff";
import { fileNameTime } from "./file-name-time.ts";
import {
  bandOf,
  describePicture,
  orDamaged,
  type PictureTags,
  pictureOf,
  placeOf,
} from "./geotiff-picture.ts";
import type { GriddedFile, GriddedHeader, GriddedOptions, GriddedQuantity } from "./gridded-file.ts";
import { type Measure, measureOf } from "./quantities.ts";
import { soundLayer } from "./sound-values.ts";

const IMAGE_DATE_TIME = 306;

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
  const image = await pictureOf(filePath);
  const [nx, ny] = [image.getWidth(), image.getHeight()];
  const tags = await orDamaged(filePath, () => describePicture(image));
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

/** What the plan says it is; the file's own unit still says in which one. */
function measureOfOption(quantity: GriddedQuantity, tags: PictureTags): Measure {
  const told = measureOf(tags.unit, [tags.description, "rain"]);
  return told?.quantity === quantity ? told : { quantity, factor: 1 };
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
  tags: PictureTags,
): Promise<Float32Array> {
  const band = await bandOf(image, where);
  const values = new Float32Array(band.length);
  const nodata = image.getGDALNoData();
  for (let cell = 0; cell < values.length; cell++) {
    const code = band[cell] as number;
    values[cell] = code === nodata ? Number.NaN : (code * tags.gain + tags.offset) * measure.factor;
  }
  return values;
}
