import { existsSync, readFileSync } from "node:fs";
import { join } from "node:path";
import type { Moment, Sweep } from "@rainreckon/core";
import { beforeAll, describe, expect, test } from "vitest";
import { formatsReady, openScan } from "./scan-formats.ts";

/** Real scans in CfRadial and Archive Level II; see real.test.ts for where they are and what `expected.json` is. */
const folder = process.env.RAINRECKON_REAL;

interface Expected {
  readonly file: string;
  readonly format: string;
  readonly quantity: string;
  readonly standardName?: string;
  readonly sweep: number;
  readonly elevationDeg: number;
  readonly rays: number;
  readonly gates: number;
  readonly firstGateM: number;
  readonly gateLengthM: number;
  readonly valid: number;
  readonly belowThreshold?: number;
  readonly rangeFolded?: number;
  readonly mean: number;
  readonly max: number;
  readonly firstRayMsOfDay?: number;
  readonly lastRayMsOfDay?: number;
}

/** `expected.json` has the variables' own names; by their standard name, or interface document, they are these. */
const ODIM: Readonly<Record<string, string>> = { reflectivity_at_cor: "DBZH", "REF (DBZH)": "DBZH" };

describe.skipIf(folder === undefined)(
  "real scans of other formats (skipped unless RAINRECKON_REAL is set)",
  () => {
    const real = folder ?? "";
    const all: readonly Expected[] = existsSync(join(real, "expected.json"))
      ? JSON.parse(readFileSync(join(real, "expected.json"), "utf8"))
      : [];
    const rows = all.filter(({ format }) => format !== "ODIM_H5");

    beforeAll(formatsReady);

    test("the folder holds both formats", () => {
      const formats = new Set(rows.map(({ format }) => format.split(" (")[0]));
      expect([...formats].sort()).toEqual(["Archive Level II", "CfRadial 1"]);
    });

    test.each(rows.map((row) => [`${row.file} sweep ${row.sweep} ${row.quantity}`, row] as const))(
      "%s",
      (_, row) => {
        const file = openScan(join(real, row.file));
        try {
          expect(row.format).toContain(file.format);
          expect(file.leftOut).toEqual([]);
          expect(file.inspect()).toEqual([]);
          // Cuts of Level II are numbered from 1, sweeps of CfRadial from 0.
          const index = file.format === "CfRadial 1" ? row.sweep : row.sweep - 1;
          const quantity = ODIM[row.quantity] ?? row.quantity;
          const sweep = file.readSweep(index, [quantity]);
          expect(sweep).toMatchObject({ rayCount: row.rays, gateCount: row.gates });
          expect(Math.abs(sweep.elevationDeg - row.elevationDeg)).toBeLessThanOrEqual(6e-4);
          expect(Math.abs(sweep.firstGateCentreM - row.firstGateM)).toBeLessThanOrEqual(6e-4);
          expect(Math.abs(sweep.gateLengthM - row.gateLengthM)).toBeLessThanOrEqual(6e-4);
          const moment = sweep.moments.get(quantity) as Moment;
          const counts = summarise(moment);
          expect(counts.valid).toBe(row.valid);
          expect(counts.undetect).toBe(row.belowThreshold ?? 0);
          expect(counts.nodata).toBe(row.rangeFolded ?? row.rays * row.gates - row.valid);
          // Printed to four decimals; packed values are summed in float32 there.
          expect(Math.abs(counts.mean - row.mean)).toBeLessThanOrEqual(1.1e-4);
          expect(Math.abs(counts.max - row.max)).toBeLessThanOrEqual(6e-5);
          checkTimes(sweep, row);
        } finally {
          file.close();
        }
      },
    );

    // Read with ncdump: sweep_start_ray_index 28, 394, 763, 1131; sweep_end_ray_index 389, 755, 1122, 1484; 1485 rays.
    test("rays between sweeps belong to none, and are counted", () => {
      const file = openScan(join(real, "example_plot_ppi_single_sweep.nc"));
      expect(file.remarks.map(({ what }) => what)).toEqual([
        "47 of 1485 rays lie between sweeps and belong to none",
      ]);
      // frequency 3.529e10 Hz; radar_beam_width_h 0.314.
      expect(file.headers[0]?.wavelengthM).toBeCloseTo(299_792_458 / 3.529e10, 9);
      expect(file.headers[0]?.beamWidthDeg?.horizontal).toBeCloseTo(0.314, 6);
      expect(file.headers[0]?.remarks[0]).toBe("The variable reflectivity_at_cor is taken as DBZH.");
      file.close();
    });

    // Read with ncdump: time[0] = -58.985 s from 2023-08-01T20:00:00Z; azimuth[0..2] 315.34, 316.05, 316.75.
    test("ray times before the reference time, and rays that begin in the north-west", () => {
      const name = all.find(({ file }) => file.includes("PRref"))?.file ?? "";
      const file = openScan(join(real, name));
      const sweep = file.readSweep(0);
      file.close();
      expect(sweep.startEpochMs).toBeCloseTo(Date.parse("2023-08-01T20:00:00Z") - 58_985, 3);
      expect(sweep.raysReordered).toBe(512);
      expect(
        sweep.azimuthDeg.every(
          (azimuth, ray) => ray === 0 || azimuth >= (sweep.azimuthDeg[ray - 1] as number),
        ),
      ).toBe(true);
      expect(sweep.azimuthDeg.findIndex((azimuth) => Math.abs(azimuth - 315.34) < 0.001)).toBeGreaterThan(
        440,
      );
    });
  },
);

function checkTimes(sweep: Sweep, row: Expected): void {
  if (row.firstRayMsOfDay === undefined || row.lastRayMsOfDay === undefined) return;
  const day = Date.parse("2016-06-01T00:00:00Z");
  expect(sweep.startEpochMs).toBe(day + row.firstRayMsOfDay);
  expect(sweep.endEpochMs).toBe(day + row.lastRayMsOfDay);
}

function summarise({ stored, gain, offset, nodata, undetect }: Moment) {
  const counts = { nodata: 0, undetect: 0, valid: 0, mean: 0, max: Number.NEGATIVE_INFINITY };
  let sum = 0;
  for (const code of stored) {
    if (code === nodata || Number.isNaN(code)) counts.nodata += 1;
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
