import { InputError } from "@rainreckon/core";
import { type Hdf5File, openHdf5 } from "../hdf5/index.ts";
import { type Level, LevelAttributes } from "../radar/odim/levels.ts";
import { odimEpochMs } from "../radar/odim/times.ts";
import {
  type GriddedFile,
  type GriddedHeader,
  type GriddedOptions,
  type GriddedQuantity,
  type GridPlace,
  MAX_CELLS,
} from "./gridded-file.ts";
import { soundLayer } from "./sound-values.ts";

const QUANTITIES: Readonly<Record<string, GriddedQuantity>> = {
  RATE: "rainRateMmPerHour",
  ACRR: "depthMm",
  DBZH: "reflectivityDbz",
  TH: "reflectivityDbz",
};
const MAX_DATASETS = 1000;

interface Layer {
  readonly header: GriddedHeader;
  readonly array: string;
  readonly gain: number;
  readonly offset: number;
  readonly nodata: number | undefined;
  readonly undetect: number | undefined;
}

/**
 * Opens an ODIM_H5 composite or image (COMP, IMAGE) with RATE, ACRR, DBZH or TH on a projected grid.
 *
 * @returns undefined where it is an HDF5 file of another kind
 * @throws InputError where it is damaged, or no layer can be used
 * @see ODIM_H5 2.3, EUMETNET OPERA (2019): table 3, "where" of geographical image data; rows run from north to south
 */
export function openOdimGrid(path: string, _options: GriddedOptions): GriddedFile | undefined {
  const file = openHdf5(path);
  try {
    const root: Level = { path: "", children: new Set(file.children("/")) };
    const object = new LevelAttributes(file, [root]).text("what", "object");
    if (object === "COMP" || object === "IMAGE") return readStructure(file, root);
    file.close();
    return undefined;
  } catch (error) {
    file.close();
    throw error;
  }
}

function readStructure(file: Hdf5File, root: Level): GriddedFile {
  const layers: Layer[] = [];
  const leftOut: InputError[] = [];
  for (const dataset of numbered(root, "dataset").slice(0, MAX_DATASETS)) {
    const level: Level = { path: `/${dataset}`, children: new Set(file.children(`/${dataset}`)) };
    for (const data of numbered(level, "data")) {
      const nearest: Level = {
        path: `${level.path}/${data}`,
        children: new Set(file.children(`${level.path}/${data}`)),
      };
      try {
        layers.push(readLayerHeader(file, [nearest, level, root], `${dataset}/${data}`));
      } catch (error) {
        if (!(error instanceof InputError)) throw error;
        leftOut.push(error);
      }
    }
  }
  if (layers.length === 0) {
    throw (
      leftOut[0] ?? new InputError("the file holds no dataset", file.path, "leave it out, or fetch it again")
    );
  }
  return {
    format: "ODIM_H5",
    headers: layers.map(({ header }) => header),
    remarks: [],
    leftOut,
    async readLayer(index) {
      const layer = layers[index];
      if (layer === undefined)
        throw new RangeError(`there is no layer ${index}; ${file.path} has ${layers.length}`);
      return soundLayer(layer.header, valuesOf(file, layer));
    },
    close: () => file.close(),
  };
}

function readLayerHeader(file: Hdf5File, levels: readonly Level[], dataset: string): Layer {
  const attributes = new LevelAttributes(file, levels);
  const where = `${file.path}, ${dataset}`;
  const quantity = attributes.text("what", "quantity") ?? "";
  if (!Object.hasOwn(QUANTITIES, quantity)) {
    const known = Object.keys(QUANTITIES).join(", ");
    throw new InputError(
      `it holds ${quantity.slice(0, 20) || "nothing named"}`,
      where,
      `a total starts from ${known}`,
    );
  }
  const nx = attributes.number("where", "xsize") ?? 0;
  const ny = attributes.number("where", "ysize") ?? 0;
  if (!(Number.isInteger(nx) && Number.isInteger(ny) && nx >= 1 && ny >= 1 && nx * ny <= MAX_CELLS)) {
    throw new InputError(
      `the grid claims ${nx} by ${ny} cells`,
      where,
      `where/xsize and ysize must make 1 to ${MAX_CELLS}`,
    );
  }
  const array = `/${dataset}/data`;
  const shape = file.describe(array)?.shape ?? [];
  if (shape.length !== 2 || shape[0] !== ny || shape[1] !== nx) {
    throw new InputError(
      `the array is ${shape.join(" by ") || "not there"}, but the grid has ${ny} rows of ${nx}`,
      where,
      "correct where/xsize and ysize, or fetch the file again",
    );
  }
  const gain = attributes.number("what", "gain");
  const offset = attributes.number("what", "offset");
  if (
    gain === undefined ||
    offset === undefined ||
    !(gain !== 0 && Number.isFinite(gain) && Number.isFinite(offset))
  ) {
    throw new InputError(
      `the gain is ${gain} and the offset ${offset}`,
      where,
      "correct what/gain and what/offset",
    );
  }
  return {
    header: {
      origin: { path: file.path, dataset },
      quantity: QUANTITIES[quantity] as GriddedQuantity,
      nx,
      ny,
      place: placeOf(attributes, where),
      ...spanOf(attributes, where),
      remarks: quantity === "TH" ? ["TH is reflectivity from which clutter was not taken out."] : [],
    },
    array,
    gain,
    offset,
    nodata: attributes.number("what", "nodata"),
    undetect: attributes.number("what", "undetect"),
  };
}

function placeOf(attributes: LevelAttributes, where: string): GridPlace {
  const crs = attributes.text("where", "projdef");
  const cellWidth = attributes.number("where", "xscale");
  const cellHeight = attributes.number("where", "yscale");
  const lonDeg = attributes.number("where", "UL_lon");
  const latDeg = attributes.number("where", "UL_lat");
  const known = crs !== undefined && /\+proj=/.test(crs);
  const sizes = cellWidth !== undefined && cellHeight !== undefined && cellWidth > 0 && cellHeight > 0;
  const corner =
    lonDeg !== undefined && latDeg !== undefined && Math.abs(lonDeg) <= 360 && Math.abs(latDeg) <= 90;
  if (!known || !sizes || !corner) {
    const missing = !known
      ? "projection (projdef)"
      : !sizes
        ? "cell size (xscale, yscale)"
        : "corner (UL_lon, UL_lat)";
    throw new InputError(`the grid has no usable ${missing}`, where, "fetch the file again, or leave it out");
  }
  return { kind: "corner", crs, lonDeg, latDeg, cellWidth, cellHeight };
}

function spanOf(attributes: LevelAttributes, where: string): { startEpochMs: number; endEpochMs: number } {
  const nominal = instant(attributes, "date", "time");
  const startEpochMs = instant(attributes, "startdate", "starttime") ?? nominal;
  const endEpochMs = instant(attributes, "enddate", "endtime") ?? startEpochMs;
  if (startEpochMs === undefined || endEpochMs === undefined || endEpochMs < startEpochMs) {
    throw new InputError(
      "the layer has no time that can be",
      where,
      "correct what/startdate to endtime, or date and time",
    );
  }
  return { startEpochMs, endEpochMs };
}

function instant(attributes: LevelAttributes, date: string, time: string): number | undefined {
  const [day, clock] = [attributes.text("what", date), attributes.text("what", time)];
  return day === undefined || clock === undefined ? undefined : odimEpochMs(day, clock);
}

function valuesOf(file: Hdf5File, { header, array, gain, offset, nodata, undetect }: Layer): Float32Array {
  const stored = file.read(array);
  const dry = header.quantity === "reflectivityDbz" ? Number.NEGATIVE_INFINITY : 0;
  const values = new Float32Array(stored.length);
  for (let cell = 0; cell < stored.length; cell++) {
    const code = stored[cell] as number;
    values[cell] = code === nodata ? Number.NaN : code === undetect ? dry : code * gain + offset;
  }
  return values;
}

/** Names like "dataset1", "dataset2", in the order of their numbers. */
function numbered(level: Level, stem: string): readonly string[] {
  const number = (name: string) => Number(name.slice(stem.length));
  return [...level.children]
    .filter((name) => name.startsWith(stem) && /^\d{1,6}$/.test(name.slice(stem.length)))
    .sort((a, b) => number(a) - number(b));
}
