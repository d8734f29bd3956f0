import { mkdirSync } from "node:fs";
import path from "node:path";
import { describe, expect, test } from "vitest";
import type { Explanation, PointAccount } from "../src/explain/schema.ts";
import {
  planText,
  RATE_MM_PER_HOUR,
  SOUND_AREA,
  SOUND_GAUGES,
  writeAreas,
  writeGauges,
  writeScans,
} from "./even-rain.ts";
import { writeComposite } from "./gridded-files.ts";
import { inProcess } from "./run-cli.ts";
import { arrayOf, csvRows, readNetCdf, scratchFolder, writeIn } from "./total-kit.ts";

const scratch = scratchFolder("explain-others");

function freshFolder(name: string): string {
  const folder = path.join(scratch, name);
  mkdirSync(folder);
  return folder;
}

async function totalIn(folder: string): Promise<void> {
  const args = ["total", path.join(folder, "plan.yaml"), "--out", path.join(folder, "run"), "--quiet"];
  const { status, stderr } = await inProcess(args);
  expect([status, stderr]).toEqual([0, expect.not.stringContaining("error")]);
}

async function explained(folder: string, ...flags: readonly string[]): Promise<Explanation> {
  const { status, stdout, stderr } = await inProcess([
    "explain",
    path.join(folder, "run"),
    ...flags,
    "--json",
  ]);
  expect([status, stderr]).toEqual([0, ""]);
  return JSON.parse(stdout) as Explanation;
}

describe("even rain of a radar whose echo is not worked on", () => {
  test("stored numbers go straight to rain; a mean-field bias weighs each gauge by its radar depth", async () => {
    const folder = freshFolder("plain");
    await writeScans(folder);
    writeGauges(folder, SOUND_GAUGES);
    writeAreas(folder, [SOUND_AREA]);
    writeIn(folder, "plan.yaml", planText({ adjustment: "{ method: mean-field-bias }" }));
    await totalIn(folder);
    const { points, catchments } = await explained(folder, "--gauge", "g1", "--catchment", "A");
    const [point] = points as [PointAccount];
    expect(point.end.exact).toBe(true);
    expect(catchments[0]!.end.exact).toBe(true);
    for (const { gates, passedOver } of point.scans) {
      expect(passedOver).toEqual([]);
      for (const gate of gates) {
        // 40 dBZ or half a decibel more, as it was written.
        expect(gate.stored).toBe(2 * (gate.measuredDbz! + 32));
        expect([gate.dbz, gate.method, gate.relation]).toEqual([gate.measuredDbz, "z", "200/1.6"]);
        expect(Object.values(gate.effectsDb)).toEqual([0, 0, 0, 0, 0]);
        expect(gate.screenedBy).toEqual([]);
        const halves = (gate.measuredDbz! - 40) / 10;
        expect(gate.rateMmPerHour! / (RATE_MM_PER_HOUR * 10 ** (halves / 1.6))).toBeCloseTo(1, 5);
      }
    }
    // Six gauges that read 1.2 times the even rain: factor G/R, each gauge's G/R weighed by its share of all R. With a
    // millimetre more at one of them the factor rises by 1 / sum of R.
    const { adjustment, end } = point;
    const radarMm = adjustment.gauges.reduce((sum, gauge) => sum + gauge.radarMm, 0);
    const gaugeMm = adjustment.gauges.reduce((sum, gauge) => sum + gauge.gaugeMm, 0);
    expect(adjustment.factor).toBeCloseTo(gaugeMm / radarMm, 9);
    for (const gauge of adjustment.gauges) {
      expect(gauge.weight).toBeCloseTo(gauge.radarMm / radarMm, 9);
      expect(gauge.mmPerMm).toBeCloseTo(end.radarMm! / radarMm, 4);
      const without = (gaugeMm - gauge.gaugeMm) / (radarMm - gauge.radarMm);
      expect(gauge.withoutMm).toBeCloseTo(end.radarMm! * without, 4);
    }
    expect(csvRows(path.join(folder, "run", "gauges.csv")).length).toBe(adjustment.gauges.length);
  });
});

describe("rain that is gridded already, and no gauges", () => {
  const NOON = Date.UTC(2031, 4, 3, 12);
  const MINUTE = 60_000;
  const NX = 40;
  const LAEA = "+proj=laea +lat_0=52 +lon_0=4 +ellps=GRS80 +units=m +no_defs";

  test("rows say that it is gridded, and end on the stored depth; there is no adjusted figure", async () => {
    const folder = freshFolder("gridded");
    for (const [from, to] of [
      [0, 30],
      [30, 60],
    ] as const) {
      await writeComposite(path.join(folder, "acrr", `sum-${from}-${to}.h5`), {
        quantity: "ACRR",
        startEpochMs: NOON + from * MINUTE,
        endEpochMs: NOON + to * MINUTE,
        nx: NX,
        ny: NX,
        stored: Uint8Array.from({ length: NX * NX }, (_, cell) => (cell + from) % 200),
        gain: 0.5,
        projdef: LAEA,
        cellM: 1000,
        // cs2cs (PROJ 9.1.1): x = -20 km, y = 20 km of the plane above.
        cornerLonDeg: 3.7076163117,
        cornerLatDeg: 52.1793841661,
      });
    }
    const { status } = await inProcess(["plan", folder, "-o", path.join(folder, "plan.yaml"), "--quiet"]);
    expect(status).toBe(0);
    await totalIn(folder);
    const { points } = await explained(folder, "--at", "52.03N 4.04E");
    const [{ scans, parts, end, adjustment }] = points as [PointAccount];
    expect(
      scans.map(({ kind, file, gates, elevationDeg, gridQuantity }) => [
        kind,
        file,
        gates,
        elevationDeg,
        gridQuantity,
      ]),
    ).toEqual([
      ["gridded", "acrr/sum-0-30.h5", [], null, "depthMm"],
      ["gridded", "acrr/sum-30-60.h5", [], null, "depthMm"],
    ]);
    // Two depths of half a millimetre by stored number.
    const values = scans.map(({ gridValues }) => gridValues.map(({ value }) => value!));
    expect(values.flat().every((value) => Number.isInteger(2 * value))).toBe(true);
    const means = values.map((own) => own.reduce((sum, value) => sum + value, 0) / own.length);
    expect(end.radarMm).toBeCloseTo(means[0]! + means[1]!, 4);
    expect(parts.reduce((sum, { depthMm }) => sum + depthMm, 0)).toBeCloseTo(end.radarMm!, 4);
    expect(end).toMatchObject({ exact: true, adjustedMm: null, storedAdjustedMm: null });
    expect(adjustment).toMatchObject({ applied: false, reason: expect.stringMatching(/gauge/), gauges: [] });
    const stored = arrayOf(await readNetCdf(path.join(folder, "run", "totals.nc")), "radar_total").values;
    expect(stored).toContain(end.radarMm);
    const text = await inProcess(["explain", path.join(folder, "run"), "--at", "52.03N 4.04E"]);
    expect(text.stdout).toContain("gridded rain, acrr/sum-0-30.h5");
    expect(text.stdout).toContain("(radar, not adjusted)");
    expect(text.stdout).toMatch(/Not adjusted: .*gauge/);
    const gauge = await inProcess(["explain", path.join(folder, "run"), "--gauge", "G1"]);
    expect([gauge.status, gauge.stderr]).toEqual([2, expect.stringContaining("no such gauge")]);
    const catchment = await inProcess(["explain", path.join(folder, "run"), "--catchment", "A"]);
    expect([catchment.status, catchment.stderr]).toEqual([
      2,
      expect.stringContaining("names no map of catchments"),
    ]);
  });
});
