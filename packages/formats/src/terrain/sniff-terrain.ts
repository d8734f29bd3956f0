import path from "node:path";
import { InputError } from "@rainreckon/core";
import { describePicture, orDamaged, pictureOf, placeOf } from "../gridded/geotiff-picture.ts";
import { readHead } from "../hdf5/index.ts";

const TIFF_HEADS = ["II*\u0000", "MM\u0000*", "II+\u0000", "MM\u0000+"];
/** Words of the trade for heights of the ground. */
const TERRAIN_WORDS = /terrain|elevation|topograph|bathymetr|orograph|(^|[^a-z])(dem|dtm|dsm)([^a-z]|$)/i;
const HEIGHT_UNIT = /^(m|met(er|re)s?|ft|feet)$/i;

/** A picture on the map whose numbers may be heights of the ground. */
export interface TerrainGuess {
  readonly nx: number;
  readonly ny: number;
  readonly crs: string;
  readonly cellWidth: number;
  /** What speaks for it. */
  readonly reason: string;
}

/**
 * Tells whether a file may be a terrain model: a GeoTIFF with a place, and a unit of length or a word for it.
 *
 * @returns undefined where nothing speaks for it
 * @throws InputError where it is a TIFF and damaged
 */
export async function sniffTerrain(filePath: string): Promise<TerrainGuess | undefined> {
  const head = Buffer.from(readHead(filePath, 4)).toString("latin1");
  if (!TIFF_HEADS.includes(head)) return undefined;
  const image = await pictureOf(filePath);
  const { unit, description } = await orDamaged(filePath, () => describePicture(image));
  const name = path.basename(filePath);
  const reason = TERRAIN_WORDS.test(description)
    ? `it calls itself "${description}"`
    : TERRAIN_WORDS.test(name)
      ? "by its name"
      : HEIGHT_UNIT.test((unit ?? "").trim())
        ? `its numbers are in ${unit}`
        : undefined;
  if (reason === undefined) return undefined;
  try {
    const place = placeOf(image, {}, filePath);
    if (place?.kind !== "affine") return undefined;
    const { crs, cellWidth } = place;
    return { nx: image.getWidth(), ny: image.getHeight(), crs, cellWidth, reason };
  } catch (error) {
    // A picture that lies nowhere, or askew, is no terrain model that can be used; it may be anything else.
    if (error instanceof InputError) return undefined;
    throw error;
  }
}
