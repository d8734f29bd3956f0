import path from "node:path";
import { InputError } from "@rainreckon/core";
import { cfTimeUnits, type NetcdfFile, openNetcdf, textAttribute } from "../netcdf/index.ts";
import { packedMoment, packing } from "../radar/cfradial/packed-moment.ts";
import { fileNameTime } from "./file-name-time.ts";
import { crsOfGridMapping } from "./grid-mapping.ts";
import {
  type GriddedFile,
  type GriddedHeader,
  type GriddedOptions,
  type GridPlace,
  MAX_CELLS,
} from "./gridded-file.ts";
import { type Measure, measureOf } from "./quantities.ts";
import { soundLayer } from "./sound-values.ts";

const MAX_LAYERS = 100_000;
const UNEVEN_SHARE = 0.02;

/** One variable of rain, and the axes it stands on. */
interface Field {
  readonly variable: string;
  readonly measure: Measure;
  readonly nx: number;
  readonly ny: number;
  readonly times: readonly Span[];
  readonly place: GridPlace;
  /** Whether rows run from south to north, and columns from east to west, in the file. */
  readonly flipRows: boolean;
  readonly flipColumns: boolean;
  readonly remarks: readonly string[];
}

interface Span {
  readonly startEpochMs: number;
  readonly endEpochMs: number;
}

/**
 * Opens gridded rain rate, depth or reflectivity in CF NetCDF, classic or NetCDF-4.
 *
 * @returns undefined where no variable is rain or reflectivity on a map
 * @throws InputError where it is damaged, or has such variables and none can be used
 * @see CF Conventions 1.11 (2023), sections 4 and 5, "Coordinate Types" and "Coordinate Systems"
 */
export function openCfGrid(filePath: string, options: GriddedOptions): GriddedFile | undefined {
  const file = openNetcdf(filePath);
  try {
    // Reflectivity by azimuth and range is a polar scan, however much it looks like rows and columns.
    const isPolar = file.shapeOf("azimuth") !== undefined && file.shapeOf("range") !== undefined;
    const rain = isPolar ? [] : rainVariables(file, options);
    if (rain.length === 0) {
      file.close();
      return undefined;
    }
    return readStructure(file, rain, options);
  } catch (error) {
    file.close();
    throw error;
  }
}

function rainVariables(file: NetcdfFile, options: GriddedOptions): { variable: string; measure: Measure }[] {
  return file.variables("").flatMap((variable) => {
    const rank = file.shapeOf(variable)?.length ?? 0;
    if (rank !== 2 && rank !== 3) return [];
    const names = [
      variable,
      ...["standard_name", "long_name"].map((name) => textAttribute(file, variable, name) ?? ""),
    ];
    const measure = measureOf(textAttribute(file, variable, "units"), names);
    if (measure !== undefined && (options.quantity === undefined || options.quantity === measure.quantity)) {
      return [{ variable, measure }];
    }
    return [];
  });
}

function readStructure(
  file: NetcdfFile,
  rain: readonly { variable: string; measure: Measure }[],
  options: GriddedOptions,
): GriddedFile {
  const fields: Field[] = [];
  const leftOut: InputError[] = [];
  for (const { variable, measure } of rain) {
    try {
      fields.push(fieldOf(file, variable, measure, options));
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      leftOut.push(error);
    }
  }
  if (fields.length === 0) throw leftOut[0];
  const layers = fields.flatMap((field) =>
    field.times.map((span, time) => ({ field, time, header: headerOf(file, field, span) })),
  );
  return {
    format: `CF ${file.kind}`,
    headers: layers.map(({ header }) => header),
    remarks: [],
    leftOut,
    async readLayer(index) {
      const layer = layers[index];
      if (layer === undefined)
        throw new RangeError(`there is no layer ${index}; ${file.path} has ${layers.length}`);
      return soundLayer(layer.header, valuesOf(file, layer.field, layer.time));
    },
    close: () => file.close(),
  };
}

function headerOf(file: NetcdfFile, field: Field, span: Span): GriddedHeader {
  return {
    origin: { path: file.path, dataset: field.variable },
    quantity: field.measure.quantity,
    nx: field.nx,
    ny: field.ny,
    place: field.place,
    ...span,
    remarks: field.remarks,
  };
}

function fieldOf(file: NetcdfFile, variable: string, measure: Measure, options: GriddedOptions): Field {
  const where = `${file.path}, ${variable}`;
  const shape = file.shapeOf(variable) as readonly number[];
  const [ny, nx] = shape.slice(-2) as [number, number];
  if (!(nx >= 1 && ny >= 1 && nx * ny <= MAX_CELLS)) {
    throw new InputError(`the grid claims ${nx} by ${ny} cells`, where, `1 to ${MAX_CELLS} are read`);
  }
  packing(file, variable);
  const remarks: string[] = [];
  const layerCount = shape.length === 3 ? (shape[0] as number) : 1;
  const times = timesOf(file, layerCount, measure, where, options, remarks);
  const placed = placeOf(file, variable, nx, ny, options, where, remarks);
  return { variable, measure, nx, ny, times, ...placed, remarks };
}

/** A variable that stands for an axis: by its standard name, its axis, its units or, last, its own name. */
function axis(
  file: NetcdfFile,
  standardNames: readonly string[],
  unit: RegExp,
  names: readonly string[],
  rank: number,
): string | undefined {
  const candidates = file.variables("").filter((name) => file.shapeOf(name)?.length === rank);
  return (
    candidates.find((name) => standardNames.includes(textAttribute(file, name, "standard_name") ?? "")) ??
    candidates.find((name) => unit.test(textAttribute(file, name, "units") ?? "")) ??
    candidates.find((name) => names.includes(name.toLowerCase()))
  );
}

const NEVER = /$^/;

function placeOf(
  file: NetcdfFile,
  variable: string,
  nx: number,
  ny: number,
  options: GriddedOptions,
  where: string,
  remarks: string[],
): Pick<Field, "place" | "flipRows" | "flipColumns"> {
  const mapping = textAttribute(file, variable, "grid_mapping")?.split(/[\s:]/)[0];
  const said =
    mapping !== undefined && file.variables("").includes(mapping)
      ? crsOfGridMapping(file, mapping)
      : undefined;
  const x = axis(file, ["projection_x_coordinate"], NEVER, ["x"], 1);
  const y = axis(file, ["projection_y_coordinate"], NEVER, ["y"], 1);
  const crs = options.crs ?? said;
  if (x !== undefined && y !== undefined && crs !== undefined && !/\+proj=longlat/.test(crs)) {
    return affine(evenAxis(file, x, nx, where), evenAxis(file, y, ny, where), crs);
  }
  const degreesEast = /^degrees?_?e(ast)?$/i;
  const degreesNorth = /^degrees?_?n(orth)?$/i;
  const lon = axis(file, ["longitude"], degreesEast, ["lon", "longitude"], 1);
  const lat = axis(file, ["latitude"], degreesNorth, ["lat", "latitude"], 1);
  if (
    lon !== undefined &&
    lat !== undefined &&
    file.shapeOf(lon)?.[0] === nx &&
    file.shapeOf(lat)?.[0] === ny
  ) {
    if (crs === undefined) remarks.push("The file names no figure of the Earth; WGS 84 is taken.");
    const geographic = crs ?? "+proj=longlat +datum=WGS84 +no_defs";
    return affine(evenAxis(file, lon, nx, where), evenAxis(file, lat, ny, where), geographic);
  }
  const lon2 = axis(file, ["longitude"], degreesEast, ["lon", "longitude"], 2);
  const lat2 = axis(file, ["latitude"], degreesNorth, ["lat", "latitude"], 2);
  if (lon2 !== undefined && lat2 !== undefined) {
    const [lonDeg, latDeg] = [positions(file, lon2, nx, ny, where), positions(file, lat2, nx, ny, where)];
    return { place: { kind: "positions", lonDeg, latDeg }, flipRows: false, flipColumns: false };
  }
  throw new InputError(
    mapping !== undefined && said === undefined
      ? "its grid mapping is of a kind that is not read"
      : "nothing says where its cells lie",
    where,
    "name its coordinate system (crs) in the plan, or add x and y, or lon and lat",
  );
}

interface EvenAxis {
  readonly least: number;
  readonly step: number;
  readonly count: number;
  readonly falls: boolean;
}

function affine(x: EvenAxis, y: EvenAxis, crs: string): Pick<Field, "place" | "flipRows" | "flipColumns"> {
  return {
    place: {
      kind: "affine",
      crs,
      west: x.least - x.step / 2,
      north: y.least + (y.count - 0.5) * y.step,
      cellWidth: x.step,
      cellHeight: y.step,
    },
    flipRows: !y.falls,
    flipColumns: x.falls,
  };
}

function evenAxis(file: NetcdfFile, variable: string, count: number, where: string): EvenAxis {
  const shape = file.shapeOf(variable);
  if (shape?.[0] !== count || count < 2) {
    throw new InputError(
      `its axis ${variable} has ${shape?.[0]} places for ${count} cells`,
      where,
      "fetch the file again",
    );
  }
  const factor = /^(km|kilomet)/i.test(textAttribute(file, variable, "units") ?? "") ? 1000 : 1;
  const values = file.numbers(variable).map((value) => value * factor);
  const step = ((values[count - 1] as number) - (values[0] as number)) / (count - 1);
  const uneven = values.findIndex(
    (value, index) =>
      !(Math.abs(value - (values[0] as number) - index * step) <= UNEVEN_SHARE * Math.abs(step)),
  );
  if (uneven >= 0 || !(Math.abs(step) > 0)) {
    throw new InputError(
      `its axis ${variable} is not evenly spaced at place ${uneven}`,
      where,
      "resample it to even cells",
    );
  }
  const [first, last] = [values[0] as number, values[count - 1] as number];
  return { least: Math.min(first, last), step: Math.abs(step), count, falls: step < 0 };
}

function positions(file: NetcdfFile, variable: string, nx: number, ny: number, where: string): Float64Array {
  const shape = file.shapeOf(variable);
  const values = shape?.[0] === ny && shape[1] === nx ? file.numbers(variable) : undefined;
  if (values === undefined || !values.every((degrees) => Math.abs(degrees) <= 360)) {
    throw new InputError(`its positions ${variable} do not fit its cells`, where, "fetch the file again");
  }
  return values;
}

function timesOf(
  file: NetcdfFile,
  layerCount: number,
  measure: Measure,
  where: string,
  options: GriddedOptions,
  remarks: string[],
): readonly Span[] {
  if (layerCount > MAX_LAYERS)
    throw new InputError(`it claims ${layerCount} layers`, where, "split the file");
  const since = /\bsince\b/i;
  const names = file
    .variables("")
    .filter(
      (name) =>
        (file.shapeOf(name)?.length ?? 2) <= 1 && since.test(textAttribute(file, name, "units") ?? ""),
    );
  const time =
    names.find((name) => textAttribute(file, name, "standard_name") === "time") ??
    names.find((name) => textAttribute(file, name, "axis") === "T") ??
    names.find((name) => name === "time");
  if (time !== undefined) return spansOf(file, time, layerCount, measure, where);
  const fromName = layerCount === 1 ? (options.time ?? fileNameTime(path.basename(file.path))) : undefined;
  if (fromName === undefined) {
    throw new InputError(
      "nothing says what time it is of",
      where,
      "give its time in the plan, or in the file's name",
    );
  }
  if (options.time === undefined) remarks.push("The time is taken from the file's name, as UTC.");
  return [checkedSpan(fromName, measure, where)];
}

function spansOf(
  file: NetcdfFile,
  time: string,
  layerCount: number,
  measure: Measure,
  where: string,
): readonly Span[] {
  const units = textAttribute(file, time, "units") ?? "";
  const scale = cfTimeUnits(units, textAttribute(file, time, "calendar"));
  const values = file.numbers(time);
  if (scale === undefined || values.length !== layerCount) {
    throw new InputError(
      scale === undefined
        ? `"${units.slice(0, 60)}" does not say what its times count from`
        : `it has ${layerCount} layers and ${values.length} times`,
      where,
      "correct the time coordinate",
    );
  }
  const epochMs = (value: number) => scale.originEpochMs + value * scale.stepMs;
  const name = textAttribute(file, time, "bounds");
  const boundsShape = name === undefined ? undefined : file.shapeOf(name);
  const bounded =
    boundsShape?.at(-1) === 2 &&
    boundsShape.reduce((product, length) => product * length, 1) === 2 * layerCount;
  const bounds = bounded ? file.numbers(name as string) : undefined;
  return Array.from(values, (value, index) => {
    const startEpochMs = epochMs(bounds?.[2 * index] ?? value);
    const endEpochMs = epochMs(bounds?.[2 * index + 1] ?? value);
    return checkedSpan({ startEpochMs, endEpochMs }, measure, where);
  });
}

function checkedSpan(span: Span, measure: Measure, where: string): Span {
  const latest = Date.UTC(2200, 0, 1);
  if (
    !(
      Math.abs(span.startEpochMs) < latest &&
      span.endEpochMs >= span.startEpochMs &&
      span.endEpochMs < latest
    )
  ) {
    throw new InputError("a layer's time cannot be", where, "correct the time coordinate");
  }
  if (measure.quantity === "depthMm" && span.endEpochMs === span.startEpochMs) {
    throw new InputError(
      "a depth with an instant, but no start and end",
      where,
      "add bounds to the time coordinate, or give start and end in the plan",
    );
  }
  return span;
}

function valuesOf(file: NetcdfFile, field: Field, time: number): Float32Array {
  const { nx, ny, measure } = field;
  const all = file.stored(field.variable);
  const stored = all.slice(time * nx * ny, (time + 1) * nx * ny);
  const {
    gain,
    offset,
    nodata,
    undetect,
    stored: coded,
  } = packedMoment(field.variable, stored, packing(file, field.variable));
  const isReflectivity = measure.quantity === "reflectivityDbz";
  const values = new Float32Array(nx * ny);
  for (let row = 0; row < ny; row++) {
    const from = (field.flipRows ? ny - 1 - row : row) * nx;
    for (let column = 0; column < nx; column++) {
      const code = coded[from + (field.flipColumns ? nx - 1 - column : column)] as number;
      values[row * nx + column] = physical(code);
    }
  }
  return values;

  function physical(code: number): number {
    if (code === nodata || Number.isNaN(code)) return Number.NaN;
    if (code === undetect || code === Number.NEGATIVE_INFINITY)
      return isReflectivity ? Number.NEGATIVE_INFINITY : 0;
    return (code * gain + offset) * measure.factor;
  }
}
