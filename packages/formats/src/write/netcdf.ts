import type { Interval } from "@rainreckon/core";
import { type AttributeValue, gridMappingAttributes } from "./grid-mapping.ts";
import { Hdf5Output } from "./hdf5-output.ts";
import { epsgCodeOf, type MapReference } from "./map-reference.ts";
import { parseProjection } from "./projection.ts";
import type { TotalsVariable } from "./totals-variables.ts";
import { wellKnownText } from "./wkt.ts";

/** All that a totals file needs before its first value. */
export interface TotalsSpec extends MapReference {
  readonly title: string;
  /** One sentence each; they travel as the file's `comment`. */
  readonly cautions: readonly string[];
  /** The whole time that the totals are about. */
  readonly window: Interval;
  /** In time order; may be empty when no variable is over intervals. */
  readonly intervals: readonly Interval[];
  /** In the order of `radar_share`; may be empty when no variable is over radars. */
  readonly radarIds: readonly string[];
  readonly variables: readonly TotalsVariable[];
  /** More attributes of the file as a whole: references, source, institution. No clock times. */
  readonly attributes?: Readonly<Record<string, AttributeValue>>;
}

/**
 * A totals file that is being written. Values have shape [ny, nx], row 0 in the north, NaN for not observed.
 *
 * The bytes depend on the values and on the order of the calls, and on nothing else. Every method throws
 * InputError when the disk will not take the values; the file is then let go of, incomplete.
 */
export interface TotalsFile {
  /** A variable over the window. */
  writeField2d(name: string, values: Float32Array): void;
  /** One interval of a variable over intervals; only this one is in memory. */
  writeInterval(name: string, intervalIndex: number, values: Float32Array): void;
  /** One radar's plane of a variable over radars. */
  writeShares(name: string, radarIndex: number, values: Float32Array): void;
  /** Finish. @throws RangeError naming the first plane that was declared and never written */
  close(): void;
  /** Let go of the file as it stands, unfinished. */
  abandon(): void;
}

const GRID_MAPPING = "crs";
const TIME_UNITS = "seconds since 1970-01-01 00:00:00";
/** Longitudes and latitudes are made and written this many cells at a time. */
const CELLS_AT_ONCE = 1 << 17;

/**
 * Begin a totals file at exactly this path: NetCDF-4 with CF conventions.
 *
 * It holds `x`, `y` (metres, cell centres, y falling), `lat` and `lon` of each cell, the grid mapping
 * `crs`, `window_end` with its bounds, `time` (interval ends) with `time_bnds`, `radar_id`, and the
 * variables declared. Nothing in it comes from the clock.
 *
 * @param path - where to write; on failure the file is left incomplete for whoever chose the path
 * @throws InputError of kind "usage" when the file cannot be created or the grid's system is not in metres;
 *   RangeError when the spec contradicts itself
 * @remarks CF Conventions 1.8 (2020): coordinates section 4 and 5, bounds 7.1, cell methods 7.3, labels 6.1
 *   (from memory). NetCDF-4 as a dialect of HDF5: NetCDF file format specification, appendix C (from memory).
 */
export async function createTotalsFile(path: string, spec: TotalsSpec): Promise<TotalsFile> {
  checkSpec(spec);
  const mapping = mappingAttributes(spec);
  const file = await Hdf5Output.create(path);
  try {
    writeFrame(file, spec, mapping);
    for (const variable of spec.variables) declare(file, spec, variable);
  } catch (cause) {
    file.abandon();
    throw cause;
  }
  return totalsWriter(file, spec);
}

function totalsWriter(file: Hdf5Output, spec: TotalsSpec): TotalsFile {
  const { nx, ny } = spec.grid;
  const missing = new Set(
    spec.variables.flatMap((variable) =>
      Array.from({ length: planesOf(spec, variable.over) }, (_, plane) => planeName(variable.name, plane)),
    ),
  );

  const writePlane = (name: string, over: TotalsVariable["over"], plane: number, values: Float32Array) => {
    const variable = spec.variables.find((declared) => declared.name === name && declared.over === over);
    if (variable === undefined) throw new RangeError(`no variable ${name} over ${over} was declared`);
    if (values.length !== nx * ny) throw new RangeError(`${name} needs ${ny} rows of ${nx} values`);
    // Written twice, a plane would leave a hole in the file, and its bytes would tell of it.
    if (!missing.delete(planeName(name, plane))) {
      throw new RangeError(`${name} has no plane ${plane} left to write`);
    }
    const leading = over === "window" ? [] : [plane];
    const count = over === "window" ? [ny, nx] : [1, ny, nx];
    file.writeSlab(name, [...leading, 0, 0], count, values);
  };

  return {
    writeField2d: (name, values) => writePlane(name, "window", 0, values),
    writeInterval: (name, intervalIndex, values) => writePlane(name, "intervals", intervalIndex, values),
    writeShares: (name, radarIndex, values) => writePlane(name, "radars", radarIndex, values),
    close: () => {
      const [first] = missing;
      // A plane never written reads as 0 mm, which is a dry hour that never was.
      if (first !== undefined) {
        file.abandon();
        throw new RangeError(`${first} was declared and never written`);
      }
      file.close();
    },
    abandon: () => file.abandon(),
  };
}

function planeName(name: string, plane: number): string {
  return `${name}[${plane}]`;
}

function planesOf(spec: TotalsSpec, over: TotalsVariable["over"]): number {
  if (over === "window") return 1;
  return over === "intervals" ? spec.intervals.length : spec.radarIds.length;
}

function checkSpec(spec: TotalsSpec): void {
  const taken = new Set(["x", "y", "lat", "lon", GRID_MAPPING, "nv", "time", "time_bnds"]);
  for (const name of ["window_end", "window_bnds", "radar", "radar_id", "radar_id_length"]) taken.add(name);
  for (const { name, over } of spec.variables) {
    if (!/^[A-Za-z][A-Za-z0-9_]*$/.test(name)) throw new RangeError(`${name} is no name for a variable`);
    if (taken.has(name)) throw new RangeError(`two variables are named ${name}`);
    taken.add(name);
    if (planesOf(spec, over) === 0) throw new RangeError(`${name} is over ${over}, and there are none`);
  }
  for (const { startEpochMs, endEpochMs } of [spec.window, ...spec.intervals]) {
    if (!(startEpochMs < endEpochMs)) throw new RangeError(`interval from ${startEpochMs} to ${endEpochMs}`);
  }
}

function mappingAttributes(spec: TotalsSpec): Record<string, AttributeValue> {
  const projection = parseProjection(spec.projString);
  const code = epsgCodeOf(spec.grid.crs);
  const text = spec.crsWkt ?? wellKnownText(projection);
  return {
    ...gridMappingAttributes(projection),
    ...(spec.crsWkt === undefined ? {} : { crs_wkt: spec.crsWkt }),
    // Not CF, but what tools look for where CF has no name for a projection or no place for its shift.
    ...(text === undefined ? {} : { spatial_ref: text }),
    ...(code === undefined ? {} : { epsg_code: `EPSG:${code}` }),
    proj4: spec.projString,
  };
}

/** Everything but the variables: dimensions, coordinates, bounds, grid mapping, what the file says of itself. */
function writeFrame(file: Hdf5Output, spec: TotalsSpec, mapping: Record<string, AttributeValue>): void {
  const { grid, window, intervals, radarIds } = spec;
  file.setAttributes("/", {
    Conventions: "CF-1.8",
    title: spec.title,
    comment: spec.cautions.join("\n"),
    ...spec.attributes,
  });

  writeCoordinate(
    file,
    "y",
    Float64Array.from({ length: grid.ny }, (_, row) => centreYM(grid, row)),
    {
      standard_name: "projection_y_coordinate",
      long_name: "y of the cell's centre",
      units: "m",
      axis: "Y",
    },
  );
  writeCoordinate(
    file,
    "x",
    Float64Array.from({ length: grid.nx }, (_, column) => centreXM(grid, column)),
    {
      standard_name: "projection_x_coordinate",
      long_name: "x of the cell's centre",
      units: "m",
      axis: "X",
    },
  );
  makeDimension(file, "nv", 2);
  file.createDataset(GRID_MAPPING, { type: "<i", shape: [] }, Int32Array.of(0));
  file.setAttributes(GRID_MAPPING, mapping);
  writeLonLat(file, spec);

  file.createDataset("window_end", { type: "<d", shape: [] }, seconds([window.endEpochMs]));
  file.setAttributes("window_end", {
    standard_name: "time",
    long_name: "end of the window",
    units: TIME_UNITS,
    calendar: "standard",
    bounds: "window_bnds",
  });
  file.createDataset(
    "window_bnds",
    { type: "<d", shape: [2] },
    seconds([window.startEpochMs, window.endEpochMs]),
  );
  file.attachScales("window_bnds", ["nv"]);

  if (intervals.length > 0) writeTime(file, intervals);
  if (radarIds.length > 0) writeRadarIds(file, radarIds);
}

function centreXM(grid: MapReference["grid"], column: number): number {
  return grid.westM + (column + 0.5) * grid.cellM;
}

function centreYM(grid: MapReference["grid"], row: number): number {
  return grid.northM - (row + 0.5) * grid.cellM;
}

function writeCoordinate(
  file: Hdf5Output,
  name: string,
  values: Float64Array,
  attributes: Record<string, string>,
): void {
  file.createDataset(name, { type: "<d", shape: [values.length] }, values);
  file.makeScale(name, name);
  file.setAttributes(name, attributes);
}

/** A dimension without a variable, marked with the words that NetCDF readers look for. */
function makeDimension(file: Hdf5Output, name: string, length: number): void {
  file.createDataset(name, { type: "<f", shape: [length] }, new Float32Array(length));
  file.makeScale(name, `This is a netCDF dimension but not a netCDF variable.${String(length).padStart(10)}`);
}

function writeLonLat(file: Hdf5Output, { grid: { nx, ny }, lonLat }: MapReference): void {
  const rowsAtOnce = Math.min(ny, Math.max(1, Math.floor(CELLS_AT_ONCE / nx)));
  for (const [name, standardName, units] of [
    ["lat", "latitude", "degrees_north"],
    ["lon", "longitude", "degrees_east"],
  ] as const) {
    file.createDataset(name, { type: "<d", shape: [ny, nx], chunks: [rowsAtOnce, nx] });
    file.setAttributes(name, {
      standard_name: standardName,
      long_name: `${standardName} of the cell's centre, WGS 84`,
      units,
    });
    file.attachScales(name, ["y", "x"]);
  }
  for (let row = 0; row < ny; row += rowsAtOnce) {
    const rows = Math.min(rowsAtOnce, ny - row);
    const latDeg = new Float64Array(rows * nx);
    const lonDeg = new Float64Array(rows * nx);
    for (let cell = 0; cell < rows * nx; cell++) {
      const place = lonLat(row * nx + cell);
      latDeg[cell] = place.latDeg;
      lonDeg[cell] = place.lonDeg;
    }
    file.writeSlab("lat", [row, 0], [rows, nx], latDeg);
    file.writeSlab("lon", [row, 0], [rows, nx], lonDeg);
  }
}

function writeTime(file: Hdf5Output, intervals: readonly Interval[]): void {
  writeCoordinate(file, "time", seconds(intervals.map((interval) => interval.endEpochMs)), {
    standard_name: "time",
    long_name: "end of the interval, which itself belongs to the interval",
    units: TIME_UNITS,
    calendar: "standard",
    axis: "T",
    bounds: "time_bnds",
  });
  const bounds = intervals.flatMap(({ startEpochMs, endEpochMs }) => [startEpochMs, endEpochMs]);
  file.createDataset("time_bnds", { type: "<d", shape: [intervals.length, 2] }, seconds(bounds));
  file.attachScales("time_bnds", ["time", "nv"]);
}

function seconds(epochMs: readonly number[]): Float64Array {
  return Float64Array.from(epochMs, (ms) => ms / 1000);
}

/** Names as rows of single characters, which every NetCDF reader takes for text. */
function writeRadarIds(file: Hdf5Output, radarIds: readonly string[]): void {
  const names = radarIds.map((id) => Buffer.from(id, "utf8"));
  const length = Math.max(1, ...names.map((name) => name.length));
  const characters = new Uint8Array(names.length * length);
  names.forEach((name, index) => {
    characters.set(name, index * length);
  });
  const numbers = Int32Array.from(names, (_, index) => index + 1);
  file.createDataset("radar", { type: "<i", shape: [names.length] }, numbers);
  file.makeScale("radar", "radar");
  file.setAttributes("radar", { long_name: "number of the radar in this file; radar_id says which it is" });
  makeDimension(file, "radar_id_length", length);
  const shape = [names.length, length];
  file.createDataset("radar_id", { type: "S1", shape, chunks: shape });
  file.setAttributes("radar_id", { long_name: "identity of the radar", standard_name: "platform_id" });
  file.attachScales("radar_id", ["radar", "radar_id_length"]);
  file.writeSlab("radar_id", [0, 0], shape, characters);
}

const SCALES = { window: ["y", "x"], intervals: ["time", "y", "x"], radars: ["radar", "y", "x"] };
const COORDINATES = {
  window: "window_end lat lon",
  intervals: "lat lon",
  radars: "window_end radar_id lat lon",
};

function declare(file: Hdf5Output, spec: TotalsSpec, variable: TotalsVariable): void {
  const { nx, ny } = spec.grid;
  const { name, over, standardName, cellMethods, ancillary } = variable;
  const present = (ancillary ?? []).filter((other) => spec.variables.some((one) => one.name === other));
  const planes = over === "window" ? [] : [planesOf(spec, over)];
  file.createDataset(name, {
    type: "<f",
    shape: [...planes, ny, nx],
    // One plane a chunk, so that a plane can be written, and read, alone.
    chunks: [...planes.map(() => 1), ny, nx],
  });
  file.setNanFillValue(name, "<f");
  file.setAttributes(name, {
    long_name: variable.longName,
    ...(standardName === undefined ? {} : { standard_name: standardName }),
    units: variable.units,
    ...(cellMethods === undefined ? {} : { cell_methods: cellMethods }),
    grid_mapping: GRID_MAPPING,
    coordinates: COORDINATES[over],
    ...(present.length === 0 ? {} : { ancillary_variables: present.join(" ") }),
    ...variable.attributes,
  });
  file.attachScales(name, SCALES[over]);
}
