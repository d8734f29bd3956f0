import { existsSync, readFileSync } from "node:fs";
import { join } from "node:path";
import type { Moment } from "@rainreckon/core";
import { beforeAll, describe, expect, test } from "vitest";
import { formatsReady, openScan, recogniseScan } from "./scan-formats.ts";

/**
 * Real scans are not part of the project: RAINRECKON_REAL names the folder that holds them, and `expected.json`
 * there the counts, worked out with general-purpose HDF5 libraries in another language. Set and missing is a
 * failure; unset, these checks are skipped.
 */
const folder = process.env.RAINRECKON_REAL;

interface Expected {
  readonly file: string;
  readonly format: string;
  readonly site: string;
  readonly dataset: string;
  readonly quantity: string;
  readonly elevationDeg: number;
  readonly rays: number;
  readonly gates: number;
  readonly gateLengthM: number;
  readonly start: string;
  readonly end: string;
  readonly nodata: number;
  readonly undetect: number;
  readonly valid: number;
  readonly mean: number;
  readonly max: number;
}

describe.skipIf(folder === undefined)("real ODIM_H5 scans (skipped unless RAINRECKON_REAL is set)", () => {
  const real = folder ?? "";
  const expected: readonly Expected[] = existsSync(join(real, "expected.json"))
    ? JSON.parse(readFileSync(join(real, "expected.json"), "utf8"))
    : [];
  const odim = expected.filter(({ format }) => format === "ODIM_H5");

  beforeAll(formatsReady);

  test("the folder holds the scans that are expected", () => {
    expect(odim.length).toBeGreaterThan(0);
    expect(odim.map(({ file }) => file).filter((file) => !existsSync(join(real, file)))).toEqual([]);
  });

  test.each(odim.map((row) => [`${row.file} ${row.dataset} ${row.quantity}`, row] as const))(
    "%s",
    (_name, row) => {
      const path = join(real, row.file);
      expect(recogniseScan(path)).toBe("ODIM_H5");
      const file = openScan(path);
      try {
        expect(file.leftOut).toEqual([]);
        const index = file.headers.findIndex(({ origin }) => origin.dataset === row.dataset);
        const header = file.headers[index];
        expect(header).toMatchObject({
          elevationDeg: row.elevationDeg,
          rayCount: row.rays,
          gateCount: row.gates,
          gateLengthM: row.gateLengthM,
          firstGateCentreM: row.gateLengthM / 2,
          startEpochMs: epochMs(row.start),
          endEpochMs: epochMs(row.end),
        });
        expect(row.site).toContain(`NOD:${header.site.id}`);
        const sweep = file.readSweep(index, [row.quantity]);
        const counts = summarise(sweep.moments.get(row.quantity) as Moment);
        expect(counts).toMatchObject({ nodata: row.nodata, undetect: row.undetect, valid: row.valid });
        // The means are printed to four decimals.
        expect(Math.abs(counts.mean - row.mean)).toBeLessThanOrEqual(5.1e-5);
        expect(counts.max).toBe(row.max);
      } finally {
        file.close();
      }
    },
  );

  // Read with ncdump: startazA[0] 359.5, stopazA[0] 0.5; startazT[0] 1681973403.294, stopazT[0] 1681973403.405.
  test("ray azimuths and times are the middle of what the file gives", () => {
    const file = openScan(join(real, "T_PAZA63_C_LFPW_20230420065041.h5"));
    const sweep = file.readSweep(0);
    file.close();
    expect([...sweep.azimuthDeg]).toEqual(Array.from({ length: 360 }, (_, ray) => ray));
    expect(sweep.rayTimesDerived).toBe(false);
    expect(sweep.rayTimeEpochMs[0]).toBeCloseTo(1_681_973_403_349.5, 2);
    expect(sweep.site).toEqual({
      id: "frave",
      name: "Avesnes",
      lonDeg: 3.81181,
      latDeg: 50.12832,
      antennaHeightM: expect.closeTo(208.8, 6),
    });
    expect(sweep).toMatchObject({
      wavelengthM: 0.053,
      beamWidthDeg: { horizontal: 1.1, vertical: 1.1 },
      radarConstantDb: 71,
      nyquistVelocityMPerS: expect.closeTo(58.6052413, 6),
    });
    expect([...sweep.moments.keys()]).toEqual(["DBZH", "TH", "VRADH"]);
  });

  // Read with ncdump: a1gate 17 of 720 rays in 60 s; radarconstH 10.9826, beamwidth 0.95, no wavelength.
  test("ray times are derived where a file has none, and a missing wavelength stays missing", () => {
    const file = openScan(join(real, "T_PAGZ35_C_ENMI_20170421090837.hdf"));
    const sweep = file.readSweep(0);
    file.close();
    expect(sweep.rayTimesDerived).toBe(true);
    const start = Date.parse("2017-04-21T09:07:37Z");
    expect(sweep.rayTimeEpochMs[17] - start).toBeCloseTo(60_000 / 720 / 2, 3);
    expect(sweep.rayTimeEpochMs[16] - start).toBeCloseTo(60_000 - 60_000 / 720 / 2, 3);
    expect(sweep.azimuthDeg[0]).toBe(0.25);
    expect(sweep).not.toHaveProperty("wavelengthM");
    expect(sweep).toMatchObject({ radarConstantDb: 10.9826, beamWidthDeg: { horizontal: 0.95 } });
  });
});

function epochMs(stamp: string): number {
  const [, year, month, day, hour, minute, second] =
    /^(\d{4})(\d\d)(\d\d)(\d\d)(\d\d)(\d\d)$/.exec(stamp) ?? [];
  return Date.parse(`${year}-${month}-${day}T${hour}:${minute}:${second}Z`);
}

function summarise({ stored, gain, offset, nodata, undetect }: Moment) {
  const counts = { nodata: 0, undetect: 0, valid: 0, mean: 0, max: Number.NEGATIVE_INFINITY };
  let sum = 0;
  for (const code of stored) {
    if (code === nodata) counts.nodata += 1;
    else if (code === undetect) counts.undetect += 1;
    else {
      counts.valid += 1;
      sum += code * gain + offset;
      counts.max = Math.max(counts.max, code * gain + offset);
    }
  }
  counts.mean = sum / counts.valid;
  return counts;
}
