import { readFileSync, writeFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { InputError, type Moment, type Sweep } from "@rainreckon/core";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { FOREIGN_TOOLS, outputOf } from "../../../test/foreign-tools.ts";
import { removeTemporary, temporaryPath } from "../../../test/odim-fixture.ts";
import { formatsReady, openScan, recogniseScan } from "../scan-formats.ts";
import { odimNames } from "./moment-names.ts";

/**
 * The fixtures are written by ncgen (Unidata) from the .cdl files beside them; what is expected here is read off
 * those. With RAINRECKON_FOREIGN_TOOLS=1 ncgen writes them again, and all must come out the same.
 */
const fixtures = new URL("../../../test/fixtures/", import.meta.url);
const fixture = (name: string) => fileURLToPath(new URL(name, fixtures));

beforeAll(formatsReady);
afterAll(removeTemporary);

function sweepOf(path: string, index = 0): Sweep {
  const file = openScan(path);
  try {
    expect(file.inspect()).toEqual([]);
    return file.readSweep(index);
  } finally {
    file.close();
  }
}

/** Physical values of one ray: NaN not observed, -Infinity below detection. */
function ray(sweep: Sweep, quantity: string, index: number): number[] {
  const { stored, gain, offset, nodata, undetect } = sweep.moments.get(quantity) as Moment;
  return [...stored.slice(index * sweep.gateCount, (index + 1) * sweep.gateCount)].map((code) => {
    if (code === nodata) return Number.NaN;
    return code === undetect ? Number.NEGATIVE_INFINITY : code * gain + offset;
  });
}

function checkVersion1(path: string): void {
  const file = openScan(path);
  expect(file.format).toBe("CfRadial 1");
  expect(file.headers).toHaveLength(2);
  expect(file.leftOut).toEqual([]);
  expect(file.remarks.map(({ what }) => what)).toEqual(["1 of 9 rays lie between sweeps and belong to none"]);
  file.close();
  const low = sweepOf(path);
  const reference = Date.parse("2031-05-03T12:00:00Z");
  expect(low).toMatchObject({
    site: { id: "AT-52.5000-3.2500", name: "Invented", lonDeg: 3.25, latDeg: 52.5, antennaHeightM: 41.5 },
    origin: { path, dataset: "sweep 0" },
    elevationDeg: 0.5,
    rayCount: 4,
    gateCount: 5,
    firstGateCentreM: 250,
    gateLengthM: 500,
    startEpochMs: reference - 3500,
    endEpochMs: reference - 500,
    beamWidthDeg: { horizontal: 1, vertical: 1.25 },
    nyquistVelocityMPerS: 12,
    rayTimesDerived: false,
    raysReordered: 4,
    quantities: ["DBZH", "RHOHV", "SQIH", "VRADH", "WRADH", "equalled"],
  });
  expect(low.wavelengthM).toBeCloseTo(299_792_458 / 5.6e9, 8);
  expect([...low.azimuthDeg]).toEqual([0, 90, 180, 270]);
  expect([...low.rayTimeEpochMs]).toEqual([-1500, -500, -3500, -2500].map((ms) => reference + ms));
  // value = stored * 0.5 - 10: file rows 2 and 3 are the rays at 0 and 90 degrees.
  expect(ray(low, "DBZH", 0)).toEqual([0, 0.5, 1, 1.5, 2]);
  expect(ray(low, "DBZH", 1)).toEqual([5, Number.NaN, Number.NaN, Number.NEGATIVE_INFINITY, 7]);
  // -56 as an unsigned byte is 200, -1 is 255, the fill value; signed, -50 is -0.5.
  expect(ray(low, "WRADH", 1)[0]).toBeCloseTo(20, 5);
  expect(ray(low, "WRADH", 1)[1]).toBeNaN();
  expect(ray(low, "SQIH", 1)[0]).toBeCloseTo(-0.5, 6);
  expect(ray(low, "SQIH", 1)[1]).toBeNaN();
  expect(ray(low, "RHOHV", 0)).toEqual([0.75, Number.NaN, 0.5, 0.5, 0.5]);
  const high = sweepOf(path, 1);
  expect(high).toMatchObject({ elevationDeg: 1.5, rayCount: 4, nyquistVelocityMPerS: 16 });
  expect(ray(high, "DBZH", 0)).toEqual([25, 25.5, 26, 26.5, 27]);
  expect(high.remarks).toContain("The variable DBZ is taken as DBZH.");
}

function checkRagged(path: string): void {
  const sweep = sweepOf(path);
  expect(sweep.site).toMatchObject({ lonDeg: -150, latDeg: -33.5 });
  expect(sweep.site).not.toHaveProperty("name");
  expect(ray(sweep, "DBZH", 0)).toEqual([0.5, 1, 1.5, 2]);
  expect(ray(sweep, "DBZH", 1)).toEqual([2.5, 3, Number.NaN, Number.NaN]);
  expect(ray(sweep, "DBZH", 2)).toEqual([3.5, 4, 4.5, Number.NaN]);
  expect(sweep.remarks).toEqual([
    "The sweep has no elevation of its own; the median of its rays stands for it.",
    "The file has no code for 'observed, below detection': gates without a value count as not observed.",
  ]);
}

function checkVersion2(path: string): void {
  const file = openScan(path);
  expect(file.format).toBe("CfRadial 2");
  expect(file.headers.map(({ origin }) => origin.dataset)).toEqual(["sweep_0001", "sweep_0002"]);
  expect(file.leftOut.map(({ what, where }) => `${where.replace(path, "PATH")}: ${what}`)).toEqual([
    "PATH, sweep_0003: a fan of rays at one azimuth, not a sweep",
  ]);
  file.close();
  const low = sweepOf(path);
  const reference = Date.parse("2031-05-03T12:00:00Z");
  expect(low).toMatchObject({
    site: { name: "Invented two" },
    elevationDeg: 0.5,
    rayCount: 4,
    gateCount: 3,
    firstGateCentreM: 100,
    gateLengthM: 200,
    startEpochMs: reference,
    endEpochMs: reference + 750,
    remarks: [],
  });
  expect(low.beamWidthDeg?.horizontal).toBeCloseTo(0.95, 6);
  expect([...low.azimuthDeg]).toEqual([45, 135, 225, 315]);
  // value = stored * 0.5 - 32; file row 0 is the ray at 315 degrees.
  expect(ray(low, "DBZH", 3)).toEqual([Number.NEGATIVE_INFINITY, 0, 0.5]);
  expect(ray(low, "DBZH", 1)).toEqual([Number.NaN, -30, -29.5]);
  expect(ray(low, "VRADH", 3)).toEqual([1, -1, 2]);
  const high = sweepOf(path, 1);
  expect(high.gateLengthM).toBeCloseTo(100, 4);
  expect(ray(high, "DBZH", 0)).toEqual([1, 2, 3, 4, 5, Number.NaN]);
}

test.each([
  ["cfradial1-classic.nc", checkVersion1],
  ["cfradial1-hdf5.nc", checkVersion1],
  ["cfradial1-ragged.nc", checkRagged],
  ["cfradial1-ragged-hdf5.nc", checkRagged],
  ["cfradial2.nc", checkVersion2],
] as const)("%s has what its CDL says", (name, check) => {
  expect(recogniseScan(fixture(name))).toBeDefined();
  check(fixture(name));
});

describe.skipIf(!FOREIGN_TOOLS)("written anew by ncgen (skipped unless RAINRECKON_FOREIGN_TOOLS=1)", () => {
  test.each([
    ["cfradial1.cdl", "classic", checkVersion1],
    ["cfradial1.cdl", "64-bit-offset", checkVersion1],
    ["cfradial1.cdl", "nc4", checkVersion1],
    ["cfradial1.cdl", "nc7", checkVersion1],
    ["cfradial1-ragged.cdl", "classic", checkRagged],
    ["cfradial1-ragged.cdl", "nc4", checkRagged],
    ["cfradial2.cdl", "nc4", checkVersion2],
  ] as const)("%s as %s", (cdl, kind, check) => {
    const path = temporaryPath("written.nc");
    outputOf("ncgen", ["-k", kind, "-o", path, fixture(cdl)]);
    check(path);
  });
});

describe("faults", () => {
  /** The classic fixture with one text in its header replaced by another of equal length. */
  function changed(from: string | Buffer, to: string | Buffer, name = "cfradial1-classic.nc"): string {
    const bytes = readFileSync(fixture(name));
    const at = bytes.indexOf(from);
    expect(at).toBeGreaterThan(0);
    Buffer.from(to as string).copy(bytes, at);
    const path = temporaryPath("changed.nc");
    writeFileSync(path, bytes);
    return path;
  }

  function fault(path: string): InputError {
    try {
      openScan(path).close();
    } catch (error) {
      if (error instanceof InputError) return error;
      throw error;
    }
    throw new Error("nothing was thrown");
  }

  test("a NetCDF file that holds something else", () => {
    const error = fault(changed("sweep_start_ray_index", "sweep_stert_ray_index"));
    expect(error.what).toBe("it starts like a radar scan, but is not CfRadial 1 inside");
  });

  test("time units that say nothing, and a calendar of models", () => {
    expect(fault(changed("seconds since 2031", "seconds after 2031")).what).toContain(
      "does not say what the ray times count from",
    );
    expect(fault(changed("gregorian", "360_day  ")).where).toMatch(/changed\.nc, time$/);
  });

  test("a position that cannot be", () => {
    const latitude = Buffer.alloc(8);
    latitude.writeDoubleBE(52.5);
    const beyond = Buffer.alloc(8);
    beyond.writeDoubleBE(91);
    expect(fault(changed(latitude, beyond)).what).toBe("the radar's latitude is 91");
  });

  test("a sweep that ends beyond the rays is left out, the other is read", () => {
    const ends = Buffer.alloc(8);
    ends.writeInt32BE(3);
    ends.writeInt32BE(8, 4);
    const beyond = Buffer.from(ends);
    beyond.writeInt32BE(9, 4);
    const file = openScan(changed(ends, beyond));
    expect(file.headers).toHaveLength(1);
    expect(file.leftOut.map(({ what }) => what)).toEqual(["the sweep runs from ray 5 to ray 9, of 9"]);
    file.close();
  });

  test("a size that the header claims is held against the file before anything is allocated", () => {
    // The record count stands behind the magic: two thousand million rays.
    const bytes = readFileSync(fixture("cfradial1-classic.nc"));
    bytes.writeUInt32BE(2_000_000_000, 4);
    const path = temporaryPath("huge.nc");
    writeFileSync(path, bytes);
    expect(fault(path).what).toMatch(/larger than the 64000000|cut short/);
  });

  test("gates that are not evenly spaced", () => {
    const range = Buffer.alloc(8);
    range.writeFloatBE(250);
    range.writeFloatBE(750, 4);
    const uneven = Buffer.from(range);
    uneven.writeFloatBE(950, 4);
    expect(fault(changed(range, uneven)).what).toBe("gates are not evenly spaced: gate 1 lies at 950 m");
  });
});

describe("names of moments", () => {
  test("ODIM's own name, then a name in use, then the standard name; the first has it", () => {
    const { byQuantity, remarks } = odimNames([
      { name: "cor", standardName: "equivalent_reflectivity_factor", units: "dBZ" },
      { name: "REF", units: "dBZ" },
      { name: "DBZH", units: "dBZ" },
      { name: "vel" },
    ]);
    expect(Object.fromEntries(byQuantity)).toEqual({ DBZH: "DBZH", VRADH: "vel", cor: "cor", REF: "REF" });
    expect(remarks).toEqual(["The variable vel is taken as VRADH."]);
  });

  test("a linear reflectivity is not taken for decibels", () => {
    const { byQuantity } = odimNames([{ name: "reflectivity", units: "mm6 m-3" }]);
    expect([...byQuantity.keys()]).toEqual(["reflectivity"]);
  });

  test("a name from Object.prototype is no standard name", () => {
    expect([...odimNames([{ name: "x", standardName: "constructor" }]).byQuantity.keys()]).toEqual(["x"]);
  });
});
