import { InputError } from "@rainreckon/core";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import {
  DATASET,
  GATES,
  MOMENT,
  type OdimContent,
  oneSweep,
  RAYS,
  ROOT,
  removeTemporary,
  writeOdim,
} from "../../../test/odim-fixture.ts";
import type { ScanFile } from "../scan-file.ts";
import { formatsReady, openScan, recogniseScan } from "../scan-formats.ts";

beforeAll(formatsReady);
const opened: ScanFile[] = [];
afterAll(() => {
  for (const file of opened) file.close();
  removeTemporary();
});

function open(content: OdimContent): { readonly path: string; readonly file: ScanFile } {
  const path = writeOdim(content);
  const file = openScan(path);
  opened.push(file);
  return { path, file };
}

function fault(call: () => unknown): InputError {
  try {
    call();
  } catch (error) {
    if (error instanceof InputError) return error;
    throw error;
  }
  throw new Error("nothing was thrown");
}

/** What opening a file with this content complains of. */
const faultOf = (content: OdimContent) => fault(() => open(content));

test("an ODIM_H5 file is recognised by its first bytes", () => {
  expect(recogniseScan(writeOdim(oneSweep()))).toBe("ODIM_H5");
  expect(recogniseScan(new URL("./odim-file.test.ts", import.meta.url).pathname)).toBeUndefined();
});

// Units and places of attributes: ODIM_H5 2.3, OPERA Data Information Model for HDF5, EUMETNET OPERA (2019):
// rstart in km to the start of the first gate, rscale in m, wavelength in cm, times UTC.
test("the header says in our units what the attributes say in theirs", () => {
  const { path, file } = open(
    oneSweep({
      where: { ...DATASET.where, rstart: 2 },
      how: { NI: 13.25, radconstH: 63.5, NEZ: -41 },
    }),
  );
  expect(file.format).toBe("ODIM_H5");
  expect(file.remarks).toEqual([]);
  expect(file.leftOut).toEqual([]);
  expect(file.inspect()).toEqual([]);
  expect(file.headers).toEqual([
    {
      site: { id: "zzone", name: "Invented", lonDeg: 3.25, latDeg: 52.5, antennaHeightM: 41.5 },
      origin: { path, dataset: "dataset1" },
      elevationDeg: 0.5,
      rayCount: RAYS,
      gateCount: GATES,
      firstGateCentreM: 2250,
      gateLengthM: 500,
      startEpochMs: Date.parse("2031-05-03T12:00:00Z"),
      endEpochMs: Date.parse("2031-05-03T12:00:16Z"),
      quantities: ["DBZH"],
      wavelengthM: 0.053,
      beamWidthDeg: { horizontal: 1.1, vertical: 1.1 },
      nyquistVelocityMPerS: 13.25,
      radarConstantDb: 63.5,
      noiseEquivalentDbz: -41,
      remarks: [],
    },
  ]);
});

test("a sweep brings its rays, its times and its stored numbers", () => {
  const { file } = open(oneSweep());
  const sweep = file.readSweep(0);
  expect([...sweep.azimuthDeg]).toEqual([22.5, 67.5, 112.5, 157.5, 202.5, 247.5, 292.5, 337.5]);
  // Eight rays in 16 s, the third (a1gate 2) first.
  const start = Date.parse("2031-05-03T12:00:00Z");
  expect([...sweep.rayTimeEpochMs].map((time) => (time - start) / 1000)).toEqual([13, 15, 1, 3, 5, 7, 9, 11]);
  expect(sweep.rayTimesDerived).toBe(true);
  const moment = sweep.moments.get("DBZH");
  expect(moment).toEqual({
    quantity: "DBZH",
    stored: MOMENT.values,
    gain: 0.5,
    offset: -32,
    nodata: 255,
    undetect: 0,
  });
});

test("rays out of order bring their gates along", () => {
  const start = [180, 225, 270, 315, 0, 45, 90, 135];
  const { file } = open(
    oneSweep({ how: { startazA: start, stopazA: start.map((azimuth) => azimuth + 45) } }),
  );
  const sweep = file.readSweep(0);
  expect(sweep.raysReordered).toBe(RAYS);
  expect([...sweep.azimuthDeg]).toEqual([22.5, 67.5, 112.5, 157.5, 202.5, 247.5, 292.5, 337.5]);
  // The file's fifth ray, gates 20 to 24, looked to 22.5 degrees.
  expect([...(sweep.moments.get("DBZH")?.stored.slice(0, GATES) ?? [])]).toEqual([20, 21, 22, 23, 24]);
});

test("a ray without azimuth takes its gates with it", () => {
  const start = [0, 45, Number.NaN, 135, 180, 225, 270, 315];
  const { file } = open(oneSweep({ how: { startazA: start, stopazA: start.map((a) => a + 45) } }));
  const sweep = file.readSweep(0);
  expect(sweep.rayCount).toBe(RAYS - 1);
  expect(sweep.moments.get("DBZH")?.stored).toHaveLength((RAYS - 1) * GATES);
  expect([...(sweep.moments.get("DBZH")?.stored.slice(2 * GATES, 3 * GATES) ?? [])]).toEqual([
    15, 16, 17, 18, 19,
  ]);
  expect(sweep.remarks).toEqual(["1 rays have no azimuth and are left out."]);
});

test("an attribute of a nearer level wins over one further up", () => {
  const { file } = open({
    ...ROOT,
    how: { wavelength: 10.5, beamwidth: 1, NI: 20 },
    what: { ...ROOT.what, gain: 2, offset: -10 },
    datasets: [
      {
        ...DATASET,
        how: { wavelength: 5.4, beamwH: 0.9 },
        data: [
          { what: { quantity: "TH", offset: -20 }, how: { NI: 7.5 }, values: MOMENT.values },
          { what: { quantity: "DBZH", gain: 1 }, values: MOMENT.values },
        ],
      },
    ],
  });
  const [header] = file.headers;
  expect(header.wavelengthM).toBeCloseTo(0.054, 12);
  expect(header.beamWidthDeg).toEqual({ horizontal: 0.9, vertical: 1 });
  expect(header.nyquistVelocityMPerS).toBe(7.5);
  expect(header.quantities).toEqual(["DBZH", "TH"]);
  const { moments } = file.readSweep(0);
  expect(moments.get("TH")).toMatchObject({ gain: 2, offset: -20 });
  expect(moments.get("DBZH")).toMatchObject({ gain: 1, offset: -10 });
  expect(moments.get("DBZH")).not.toHaveProperty("nodata");
});

test("datasets come in the order of their numbers, gaps and tens included", () => {
  const elevations = [0.5, 1, 1.5, 2, 3, 4, 5, 6, 8, 10, 12];
  const { file } = open({
    ...ROOT,
    datasets: elevations.map((elangle) => ({
      ...DATASET,
      where: { ...DATASET.where, elangle },
      data: [MOMENT],
    })),
  });
  expect(file.headers.map(({ elevationDeg }) => elevationDeg)).toEqual(elevations);
  expect(file.headers[10].origin.dataset).toBe("dataset11");
});

test.each([
  ["uint16", Uint16Array.from(MOMENT.values)],
  ["int16", Int16Array.from(MOMENT.values)],
  ["int32", Int32Array.from(MOMENT.values)],
] as const)("%s moments keep their stored numbers", (_type, values) => {
  const moment = open(oneSweep({}, { values })).file.readSweep(0).moments.get("DBZH");
  expect(moment?.stored).toEqual(values);
  expect(moment).toMatchObject({ gain: 0.5, offset: -32 });
});

test("floating moments need no gain; one that has it is brought to physical values", () => {
  const values = Float32Array.from(MOMENT.values);
  const what = { quantity: "DBZH", nodata: 39, undetect: 0 };
  const plain = open(oneSweep({}, { what, values })).file.readSweep(0).moments.get("DBZH");
  expect(plain).toEqual({ quantity: "DBZH", stored: values, gain: 1, offset: 0, nodata: 39, undetect: 0 });

  const scaled = open(oneSweep({}, { what: { ...what, gain: 0.5, offset: -32 }, values }));
  const moment = scaled.file.readSweep(0).moments.get("DBZH");
  expect(moment).toMatchObject({ gain: 1, offset: 0 });
  expect(moment).not.toHaveProperty("undetect");
  expect([...(moment?.stored ?? [])].slice(0, 3)).toEqual([Number.NEGATIVE_INFINITY, -31.5, -31]);
  expect(moment?.stored.at(-1)).toBeNaN();
});

describe("remarks", () => {
  const remarksOf = (content: OdimContent) => open(content).file.headers[0].remarks;

  test("a sweep without times of its own has the file's nominal time", () => {
    const { file } = open(oneSweep({ what: { product: "SCAN" } }));
    expect(file.headers[0].startEpochMs).toBe(Date.parse("2031-05-03T12:00:00Z"));
    expect(file.headers[0].remarks).toEqual([
      "The sweep has no times of its own; the file's nominal time stands for them.",
    ]);
  });

  test("a start in km that no radar can have is taken as metres", () => {
    const { file } = open(oneSweep({ where: { ...DATASET.where, rstart: 1000 } }));
    expect(file.headers[0].firstGateCentreM).toBe(1250);
    expect(file.headers[0].remarks[0]).toContain("taken as metres");
  });

  test("counts that are not given come from the array", () => {
    const { file } = open(oneSweep({ where: { elangle: 0.5, rscale: 500, rstart: 0 } }));
    expect(file.headers[0]).toMatchObject({ rayCount: RAYS, gateCount: GATES });
    expect(file.headers[0].remarks).toHaveLength(1);
  });

  test("a beam width or wavelength that cannot be is left out, and neither is made up", () => {
    const odd = open({ ...oneSweep(), how: { wavelength: 0, beamwidth: 90 } }).file.headers[0];
    expect(odd.remarks).toEqual([
      "wavelength is 0 cm, which cannot be; it is left out.",
      "beamwidth is 90 degrees, which cannot be; it is left out.",
    ]);
    expect(odd).not.toHaveProperty("wavelengthM");
    const bare = { ...oneSweep(), how: {} };
    expect(remarksOf(bare)).toEqual([]);
    expect(open(bare).file.headers[0]).not.toHaveProperty("beamWidthDeg");
  });

  test("another major version, a first ray that is none, a quantity given twice", () => {
    const { file } = open({ ...oneSweep(), conventions: "ODIM_H5/V3_0" });
    expect(file.remarks[0].what).toContain("ODIM_H5/V3_0");
    const ray = open(oneSweep({ where: { ...DATASET.where, a1gate: 99 } })).file.readSweep(0);
    expect(ray.remarks[0]).toContain("given as 99");
    expect(remarksOf(oneSweep({ data: [MOMENT, MOMENT] }))).toEqual([
      "data2 holds DBZH once more; the first one counts.",
    ]);
  });
});

describe("faults, told apart", () => {
  test.each([
    ["IMAGE", "not a polar scan, this is a Cartesian image (IMAGE)"],
    ["COMP", "not a polar scan, this is a Cartesian composite of several radars (COMP)"],
    ["XYZ", "not a polar scan, this is an object that is not known here (XYZ)"],
  ])("object %s", (object, what) => {
    expect(faultOf({ ...oneSweep(), what: { ...ROOT.what, object } }).what).toBe(what);
  });

  test("HDF5 that is not ODIM, and a file without datasets", () => {
    expect(faultOf({ datasets: [] }).what).toContain("it starts like a radar scan, but is not ODIM_H5");
    expect(faultOf({ ...ROOT, datasets: [] }).what).toBe("the file holds no dataset");
  });

  test.each([
    [{ lat: 95 }, "the radar's lat is 95"],
    [{ lon: 400 }, "the radar's lon is 400"],
    [{ height: 20_000 }, "the radar's height is 20000"],
    [{ lat: Number.NaN }, "the radar's lat is NaN"],
  ])("site %o", (where, what) => {
    const error = faultOf({ ...oneSweep(), where: { ...ROOT.where, ...where } });
    expect(error.what).toBe(what);
    expect(error.where).toMatch(/scan\.h5, where$/);
  });

  test("a site without a position", () => {
    expect(faultOf({ ...oneSweep(), where: { lat: 52 } }).what).toBe("the radar's lon is missing");
  });

  test.each([
    [{ elangle: 91 }, "the elevation is 91 degrees"],
    [{ elangle: "low" }, "the attribute elangle is not a number"],
    [{ nrays: 0 }, "the sweep claims 0 rays"],
    [{ nbins: 2_000_000_000 }, "the sweep claims 2000000000 gates"],
    [{ rscale: 0 }, "the gate length is 0 m"],
    [{ rstart: -5 }, "the first gate begins at -5 km"],
  ])("geometry %o", (where, what) => {
    const error = faultOf(oneSweep({ where: { ...DATASET.where, ...where } }));
    expect(error.what).toBe(what);
    expect(error.where).toContain("scan.h5, dataset1");
  });

  test.each([
    [{ endtime: "115959" }, "the sweep runs from 2031-05-03T12:00:00.000Z to 2031-05-03T11:59:59.000Z"],
    [{ startdate: "19310503" }, '"19310503" and "120000" are no date and time'],
    [{ enddate: "20310504" }, "the sweep runs from 2031-05-03T12:00:00.000Z to 2031-05-04T12:00:16.000Z"],
  ])("times %o", (what, message) => {
    expect(faultOf(oneSweep({ what: { ...DATASET.what, ...what } })).what).toBe(message);
  });

  test("a sweep without the moment asked for says what it offers", () => {
    const { path, file } = open(oneSweep({}, { what: { ...MOMENT.what, quantity: "TH" } }));
    const error = fault(() => file.readSweep(0, ["DBZH"]));
    expect(error.line).toBe(
      `${path}, dataset1: the sweep has no DBZH; it offers TH; name one of these as the moment of this radar, or leave the file out`,
    );
    expect(() => file.readSweep(1)).toThrow(RangeError);
  });

  test.each([
    [{ what: { ...MOMENT.what, gain: 0 } }, "the gain of DBZH is 0 and its offset -32"],
    [{ what: { quantity: "DBZH", offset: 0 } }, "DBZH has no gain"],
    [{ what: { quantity: "DBZH", gain: 1 } }, "DBZH has no offset"],
    [{ shape: [5, 8] }, "the array of DBZH is 5 by 8, but the sweep has 8 rays of 5 gates"],
    [{ shape: [40] }, "the array of DBZH is 40, but the sweep has 8 rays of 5 gates"],
    [{ values: Int8Array.from(MOMENT.values) }, "the array holds int8, which is not read"],
    [{ where: { rscale: 250, nrays: 8, nbins: 5 } }, "the gates of DBZH are 250 m long"],
  ])("moment %#", (moment, what) => {
    // A geometry of the first moment is the sweep's own, so the faulty moment comes second.
    const first = { ...MOMENT, what: { ...MOMENT.what, quantity: "TH" } };
    const { path, file } = open(oneSweep({ data: [first, { ...MOMENT, ...moment }] }));
    const [seen] = file.inspect();
    const error = fault(() => file.readSweep(0, ["DBZH"]));
    expect(error.what).toContain(what);
    expect(error.where).toContain(`${path}, dataset1/data2`);
    expect(seen.line).toBe(error.line);
    // The other moment of the same sweep can still be read.
    expect(file.readSweep(0, ["TH"]).moments.size).toBe(1);
  });

  test("a moment without its array", () => {
    const { values: _values, ...noArray } = MOMENT;
    const { file } = open(
      oneSweep({ data: [noArray, { ...MOMENT, what: { ...MOMENT.what, quantity: "TH" } }] }),
    );
    expect(fault(() => file.readSweep(0, ["DBZH"])).what).toBe("DBZH has no array");
  });

  test("one faulty sweep is left out and named; the others are read", () => {
    const { path, file } = open({
      ...ROOT,
      datasets: [
        { ...DATASET, data: [MOMENT] },
        { ...DATASET, where: { ...DATASET.where, elangle: -40 }, data: [MOMENT] },
        { ...DATASET, data: [] },
      ],
    });
    expect(file.headers.map(({ origin }) => origin.dataset)).toEqual(["dataset1"]);
    expect(file.leftOut.map(({ where, what }) => `${where}: ${what}`)).toEqual([
      `${path}, dataset2: the elevation is -40 degrees`,
      `${path}, dataset3: the dataset holds no moment`,
    ]);
  });
});
