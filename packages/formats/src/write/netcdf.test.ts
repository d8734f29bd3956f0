import fs from "node:fs";
import { readFile } from "node:fs/promises";
import { join } from "node:path";
import { afterEach, expect, test, vi } from "vitest";
import {
  FOREIGN_TOOLS,
  FULL_DEVICE,
  lonLatByProj,
  outputOf,
  PROJECTIONS,
  scratchFolder,
  valuesByGdal,
} from "../../test/foreign-tools.ts";
import { createTotalsFile, type TotalsSpec } from "./netcdf.ts";
import { openTotalsLayers, readTotals } from "./read-totals.ts";
import { TOTALS_VARIABLES } from "./totals-variables.ts";

const folder = scratchFolder();
const LAEA = PROJECTIONS.laea;
const HOUR_MS = 3_600_000;
/** 2031-05-03T12:00:00Z is 1 935 576 000 s after the epoch (date -u -d @1935576000). */
const START_MS = 1_935_576_000_000;

const NX = 7;
const NY = 5;
const WET = 3 * NX + 1;

function spec(changes: Partial<TotalsSpec> = {}): TotalsSpec {
  return {
    grid: { crs: LAEA, westM: 94_000, northM: -73_000, cellM: 50, nx: NX, ny: NY },
    projString: LAEA,
    // Not a projection, but a number that tells each cell from every other.
    lonLat: (index) => ({ lonDeg: index / 10, latDeg: 50 + index / 100 }),
    title: "An invented storm – Å",
    cautions: ["radar rain is an estimate", "this one is invented"],
    window: { startEpochMs: START_MS, endEpochMs: START_MS + 2 * HOUR_MS },
    intervals: [0, 1].map((hour) => ({
      startEpochMs: START_MS + hour * HOUR_MS,
      endEpochMs: START_MS + (hour + 1) * HOUR_MS,
    })),
    radarIds: ["NOD-xxabc", "RAD-é"],
    variables: [
      TOTALS_VARIABLES.radar_total,
      TOTALS_VARIABLES.observed_fraction,
      TOTALS_VARIABLES.radar_share,
      TOTALS_VARIABLES.radar_depth,
    ],
    ...changes,
  };
}

/** Cell k holds k plus something, the cell `WET` something of its own, and cell 2 was not observed. */
function plane(added: number): Float32Array {
  const values = Float32Array.from({ length: NX * NY }, (_, index) => index + added);
  values[WET] = 42.5 + added;
  values[2] = Number.NaN;
  return values;
}

async function writeAll(path: string, changes: Partial<TotalsSpec> = {}): Promise<void> {
  const file = await createTotalsFile(path, spec(changes));
  file.writeField2d("radar_total", plane(0));
  file.writeField2d("observed_fraction", new Float32Array(NX * NY).fill(0.5));
  for (const radar of [0, 1]) file.writeShares("radar_share", radar, plane(100 * radar));
  for (const interval of [0, 1]) file.writeInterval("radar_depth", interval, plane(0.25 + interval));
  file.close();
}

afterEach(() => {
  vi.restoreAllMocks();
});

test("the same values give the same bytes whatever the clock says", async () => {
  const paths = [join(folder, "a.nc"), join(folder, "b.nc")];
  await writeAll(paths[0]);
  vi.spyOn(Date, "now").mockReturnValue(2e12);
  await writeAll(paths[1]);
  // The clock of the process is its own again after each call.
  expect(Date.now()).toBe(2e12);
  const [a, b] = await Promise.all(paths.map((path) => readFile(path)));
  expect(a.equals(b)).toBe(true);
});

test("what is read back is what was written, to the bit, and what is not there is left out", async () => {
  const path = join(folder, "read.nc");
  await writeAll(path);
  const read = await readTotals(path, ["radar_total", "radar_depth", "adjusted_total"]);
  expect([...read.keys()]).toEqual(["radar_total", "radar_depth"]);
  expect(read.get("radar_total")).toEqual(plane(0));
  expect(read.get("radar_depth")).toEqual(Float32Array.from([...plane(0.25), ...plane(1.25)]));
  await expect(readTotals(path, ["lat"])).rejects.toThrow("float32");
});

test("intervals are read one at a time, each as it was written", async () => {
  const path = join(folder, "layers.nc");
  await writeAll(path);
  const layers = await openTotalsLayers(path, "radar_depth");
  expect([1, 0].map((index) => layers!.layer(index))).toEqual([plane(1.25), plane(0.25)]);
  expect(() => layers!.layer(2)).toThrow("there is no layer 2");
  layers!.close();
  expect(await openTotalsLayers(path, "adjusted_depth")).toBeUndefined();
});

test("a write that fails alone, whichever one, ends the file with one clear fault", async () => {
  const path = join(folder, "full.nc");
  const write = fs.writeSync;
  let failAt = 0;
  let calls = 0;
  let failed = false;
  vi.spyOn(fs, "writeSync").mockImplementation((...args: unknown[]) => {
    if (++calls === failAt) {
      failed = true;
      throw Object.assign(new Error("ENOSPC: no space left on device, write"), { code: "ENOSPC" });
    }
    return Reflect.apply(write, fs, args);
  });
  const printed = vi.spyOn(process.stderr, "write");
  let faults = 0;
  do {
    calls = 0;
    failed = false;
    failAt++;
    const outcome = await writeAll(path).catch((fault: unknown) => fault);
    if (!failed) {
      expect(outcome).toBeUndefined();
      continue;
    }
    faults++;
    expect(outcome, `write ${failAt}`).toMatchObject({
      name: "InputError",
      kind: "midway",
      where: path,
      what: "no space left while writing",
    });
  } while (failed);
  // Eight planes' worth of chunks and the frame around them: well over ten writes.
  expect(faults).toBeGreaterThan(10);
  expect(printed).not.toHaveBeenCalled();
});

test("after a fault the file is let go of: further calls say the same, and no descriptor stays open", async () => {
  // Where the system keeps no such list, only the first half is seen.
  const list = "/proc/self/fd";
  const descriptors = () => (fs.existsSync(list) ? fs.readdirSync(list).length : 0);
  await writeAll(join(folder, "warm.nc"));
  const before = descriptors();
  for (let time = 0; time < 5; time++) {
    const path = join(folder, `broken-${time}.nc`);
    const file = await createTotalsFile(path, spec());
    vi.spyOn(fs, "writeSync").mockImplementation(() => {
      throw Object.assign(new Error("ENOSPC"), { code: "ENOSPC" });
    });
    const fault = expect.objectContaining({ kind: "midway", where: path });
    expect(() => file.writeField2d("radar_total", plane(0))).toThrow(fault);
    expect(() => file.writeInterval("radar_depth", 0, plane(0))).toThrow(fault);
    vi.restoreAllMocks();
  }
  expect(descriptors()).toBe(before);
});

test.skipIf(!FULL_DEVICE)(
  "a device that is always full is a failure midway (skipped where there is no /dev/full)",
  async () => {
    await expect(createTotalsFile("/dev/full", spec())).rejects.toMatchObject({ kind: "midway" });
  },
);

test("a missing folder, or a folder in the file's place, is wrong usage", async () => {
  await expect(createTotalsFile(join(folder, "no", "a.nc"), spec())).rejects.toMatchObject({ kind: "usage" });
  await expect(createTotalsFile(folder, spec())).rejects.toMatchObject({ kind: "usage", where: folder });
});

test("a plane that was declared and never written stops the file, for it would read as 0 mm", async () => {
  const file = await createTotalsFile(
    join(folder, "gap.nc"),
    spec({ variables: [TOTALS_VARIABLES.radar_depth] }),
  );
  file.writeInterval("radar_depth", 0, plane(0));
  expect(() => file.close()).toThrow("radar_depth[1] was declared and never written");
});

test("a plane of another size, written twice, out of range, or never declared is the caller's mistake", async () => {
  const file = await createTotalsFile(join(folder, "mistakes.nc"), spec());
  file.writeField2d("radar_total", plane(0));
  expect(() => file.writeField2d("radar_total", plane(0))).toThrow(RangeError);
  expect(() => file.writeField2d("observed_fraction", new Float32Array(3))).toThrow(RangeError);
  expect(() => file.writeInterval("radar_depth", 2, plane(0))).toThrow(RangeError);
  expect(() => file.writeInterval("radar_total", 0, plane(0))).toThrow(RangeError);
  expect(() => file.writeShares("adjusted_total", 0, plane(0))).toThrow(RangeError);
  file.abandon();
});

test.each([
  ["two variables of one name", { variables: [TOTALS_VARIABLES.radar_total, TOTALS_VARIABLES.radar_total] }],
  ["a name of the frame", { variables: [{ ...TOTALS_VARIABLES.radar_total, name: "lat" }] }],
  ["a name with a slash", { variables: [{ ...TOTALS_VARIABLES.radar_total, name: "a/b" }] }],
  ["intervals that are not there", { intervals: [] }],
  ["radars that are not there", { radarIds: [] }],
  ["a window that ends as it starts", { window: { startEpochMs: 0, endEpochMs: 0 } }],
])("%s: refused before a file is made", async (name, changes) => {
  const path = join(folder, `${name}.nc`);
  await expect(createTotalsFile(path, spec(changes))).rejects.toThrow(RangeError);
  expect(fs.existsSync(path)).toBe(false);
});

test.skipIf(!FOREIGN_TOOLS)(
  "ncdump prints the frame that CF asks for (RAINRECKON_FOREIGN_TOOLS=1)",
  async () => {
    const path = join(folder, "dump.nc");
    await writeAll(path, { crsWkt: 'PROJCS["handed in"]', attributes: { source: "radar", institution: "" } });
    const text = outputOf("ncdump", [path]).replace(/[ \t]+/g, " ");
    for (const line of [
      "y = 5 ;\n x = 7 ;",
      "time = 2 ;",
      "radar = 2 ;",
      ':Conventions = "CF-1.8" ;',
      ':title = "An invented storm – Å" ;',
      ':comment = "radar rain is an estimate\\nthis one is invented" ;',
      ':source = "radar" ;',
      "float radar_total(y, x) ;",
      "radar_total:_FillValue = NaNf ;",
      'radar_total:units = "mm" ;',
      'radar_total:standard_name = "lwe_thickness_of_precipitation_amount" ;',
      'radar_total:cell_methods = "area: mean window_end: sum" ;',
      'radar_total:grid_mapping = "crs" ;',
      'radar_total:coordinates = "window_end lat lon" ;',
      'radar_total:ancillary_variables = "observed_fraction" ;',
      "float radar_depth(time, y, x) ;",
      'radar_depth:cell_methods = "area: mean time: sum" ;',
      "float radar_share(radar, y, x) ;",
      'radar_share:coordinates = "window_end radar_id lat lon" ;',
      "double time(time) ;",
      'time:units = "seconds since 1970-01-01 00:00:00" ;',
      'time:bounds = "time_bnds" ;',
      "double time_bnds(time, nv) ;",
      "char radar_id(radar, radar_id_length) ;",
      "double lat(y, x) ;",
      'crs:grid_mapping_name = "lambert_azimuthal_equal_area" ;',
      `crs:proj4 = "${LAEA}" ;`,
      'crs:crs_wkt = "PROJCS[\\"handed in\\"]" ;',
      "y = -73025, -73075, -73125, -73175, -73225 ;",
      "x = 94025, 94075,",
      "time = 1935579600, 1935583200 ;",
      "time_bnds =\n 1935576000, 1935579600,\n 1935579600, 1935583200 ;",
      "window_end = 1935583200 ;",
      "window_bnds = 1935576000, 1935583200 ;",
      'radar_id =\n "NOD-xxabc",\n "RAD-\\303\\251" ;',
      "radar_total =\n 0, 1, _, 3, 4, 5, 6,",
      "21, 42.5, 23,",
      "radar_depth =\n 0.25, 1.25, _, 3.25,",
      "1.25, 2.25, _, 4.25,",
    ]) {
      expect(text).toContain(line);
    }
    expect(text).not.toContain("institution");
  },
);

test.skipIf(!FOREIGN_TOOLS)(
  "h5py reads latitudes of many chunks at their cells (RAINRECKON_FOREIGN_TOOLS=1)",
  async () => {
    const path = join(folder, "wide.nc");
    const grid = { ...spec().grid, nx: 1000, ny: 301 };
    const file = await createTotalsFile(path, spec({ grid, variables: [TOTALS_VARIABLES.radar_total] }));
    file.writeField2d(
      "radar_total",
      Float32Array.from({ length: 301_000 }, (_, index) => index),
    );
    file.close();
    const script = `
import h5py, json, numpy, sys
f = h5py.File(sys.argv[1])
n = numpy.arange(301000).reshape(301, 1000)
print(json.dumps([bool((abs(f['lat'][:] - (50 + n / 100)) < 1e-9).all()), bool((abs(f['lon'][:] - n / 10) < 1e-9).all()),
  bool((f['radar_total'][:] == n).all()), f['lat'].chunks, f['radar_total'].compression]))`;
    const found = JSON.parse(outputOf("/usr/bin/python3", ["-c", script, path]));
    expect(found).toEqual([true, true, true, [131, 1000], "gzip"]);
  },
);

test.skipIf(!FOREIGN_TOOLS)(
  "GDAL takes time, unit and nodata as they are meant (RAINRECKON_FOREIGN_TOOLS=1)",
  async () => {
    const path = join(folder, "info.nc");
    await writeAll(path);
    const text = outputOf("gdalinfo", [`NETCDF:${path}:radar_depth`]);
    expect(text).toContain("NETCDF_DIM_time_VALUES={1935579600,1935583200}");
    expect(text).toContain("NoData Value=nan");
    expect(text).toContain("Unit Type: mm");
    expect(text).toContain("Origin = (94000.000000000000000,-73000.000000000000000)");
    expect(text).toContain("Pixel Size = (50.000000000000000,-50.000000000000000)");
  },
);

interface PlacedFile {
  readonly raster: string;
  readonly places: readonly { readonly lonDeg: number; readonly latDeg: number }[];
}

/** A file in that system, and where PROJ says that its wet cell and its last cell of row 0 lie. */
async function placedFile(name: string, projString: string): Promise<PlacedFile> {
  const [x0, y0] = ["x_0", "y_0"].map((key) =>
    Number(new RegExp(`${key}=(\\S+)`).exec(projString)?.[1] ?? 0),
  );
  const grid = { crs: projString, westM: x0 + 90_000, northM: y0 - 70_000, cellM: 50, nx: NX, ny: NY };
  const path = join(folder, `${name}.nc`);
  await writeAll(path, { grid, projString });
  const places = lonLatByProj(projString, [
    [grid.westM + 75, grid.northM - 175],
    [grid.westM + 325, grid.northM - 25],
  ]);
  return { raster: path, places };
}

function depthsByGdal({ raster, places }: PlacedFile): number[] {
  return valuesByGdal(`NETCDF:${raster}:radar_depth`, places, 2);
}

test.skipIf(!FOREIGN_TOOLS).each(Object.entries(PROJECTIONS))(
  "GDAL finds the one wet cell by longitude and latitude: %s (RAINRECKON_FOREIGN_TOOLS=1)",
  async (name, projString) => {
    expect(depthsByGdal(await placedFile(name, projString))).toEqual([43.75, 7.25]);
  },
);

test.skipIf(!FOREIGN_TOOLS)(
  "and finds it by what CF alone can say, without the text that is not CF (RAINRECKON_FOREIGN_TOOLS=1)",
  async () => {
    const files: PlacedFile[] = [];
    for (const [name, projString] of Object.entries(PROJECTIONS)) {
      if (!/towgs84|sterea/.test(projString)) files.push(await placedFile(`${name}, CF alone`, projString));
    }
    const script = `
import h5py, sys
for path in sys.argv[1:]:
    with h5py.File(path, 'r+') as f: del f['crs'].attrs['spatial_ref']`;
    outputOf("/usr/bin/python3", ["-c", script, ...files.map((file) => file.raster)]);
    for (const file of files) expect(depthsByGdal(file), file.raster).toEqual([43.75, 7.25]);
  },
);

test("a system in degrees is wrong usage, said before a file is made", async () => {
  const path = join(folder, "degrees.nc");
  await expect(writeAll(path, { projString: "+proj=longlat +datum=WGS84" })).rejects.toMatchObject({
    name: "InputError",
    kind: "usage",
  });
  expect(fs.existsSync(path)).toBe(false);
});

test.skipIf(!FOREIGN_TOOLS)(
  "a projection that nobody can name here leaves the place to lat and lon (RAINRECKON_FOREIGN_TOOLS=1)",
  async () => {
    const projString = "+proj=somerc +lat_0=46.95 +lon_0=7.44 +x_0=600000 +y_0=200000 +ellps=bessel +units=m";
    const path = join(folder, "unnamed.nc");
    await writeAll(path, { projString });
    const header = outputOf("ncdump", ["-h", path]);
    expect(header).not.toContain("grid_mapping_name");
    expect(header).not.toContain("spatial_ref");
    expect(header).toContain(`crs:proj4 = "${projString}"`);
    expect(header).toContain("double lat(y, x) ;");
  },
);
