import { cpSync, existsSync, mkdirSync, mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { fileURLToPath } from "node:url";
import { afterAll, describe, expect, test } from "vitest";
import type { Findings } from "../src/survey/findings.ts";
import { survey } from "../src/survey/survey.ts";
import { walkFiles } from "../src/survey/walk.ts";
import type { Terminal } from "../src/ui/terminal.ts";

/** Files that general-purpose tools wrote; what is expected of them is read off the text files beside them. */
const FIXTURES = fileURLToPath(new URL("../../../packages/formats/test/fixtures", import.meta.url));
const scratch = mkdtempSync(path.join(tmpdir(), "rainreckon-formats-"));
afterAll(() => rmSync(scratch, { recursive: true }));

const SILENT: Terminal = {
  json: true,
  quiet: true,
  debug: false,
  live: false,
  result: () => undefined,
  note: () => undefined,
  strong: (text) => text,
};

let folders = 0;

async function surveyOf(from: string, names: readonly string[]): Promise<Findings> {
  const folder = path.join(scratch, String(folders++));
  mkdirSync(folder);
  for (const name of names) cpSync(path.join(from, name), path.join(folder, name));
  return (await survey([folder], await walkFiles([folder]), SILENT)).findings;
}

test("scans of every format are told by their content and lie side by side", async () => {
  const names = ["cfradial1-classic.nc", "cfradial2.nc", "level2-records.ar2v"];
  const { radars, wrong } = await surveyOf(FIXTURES, names);
  expect(radars.map(({ id, formats, sweepCount }) => [id, formats.join(" and "), sweepCount])).toEqual([
    ["AT-52.5000-3.2500", "CfRadial 1 and CfRadial 2", 4],
    ["ICAO-KZZZ", "Archive Level II", 3],
  ]);
  expect(wrong.some(({ what }) => what === "a fan of rays at one azimuth, not a sweep")).toBe(true);
  expect(wrong.some(({ what }) => what === "1 of 9 rays lie between sweeps and belong to none")).toBe(true);
});

test("gridded rain is recognised, described, and no rain goes into a total twice", async () => {
  const { radars, grids, possible, otherFiles } = await surveyOf(FIXTURES, [
    "grid-rate-hdf5.nc",
    "grid-depth.nc",
    "grid-rate.tif",
  ]);
  expect(radars).toEqual([]);
  expect(otherFiles).toEqual([]);
  expect(
    grids.map(({ name, format, quantity, layerCount, stepMinutes }) => [
      name,
      format,
      quantity,
      layerCount,
      stepMinutes,
    ]),
  ).toEqual([
    ["grid-depth.nc", "CF NetCDF-3", "depthMm", 1, null],
    ["grid-depth.nc", "CF NetCDF-3", "reflectivityDbz", 1, null],
    ["grid-rate-hdf5.nc", "CF NetCDF-4", "rainRateMmPerHour", 2, 5],
    ["grid-rate.tif", "GeoTIFF", "rainRateMmPerHour", 1, null],
  ]);
  expect(grids[3]).toMatchObject({ nx: 3, ny: 2, place: "cells of 1000 m by 1000 m in EPSG:3035" });
  expect(possible[0]).toMatch(/^a total for .* from 1 gridded layer: depth$/);
  expect(possible).toContain(
    "nothing from 1 gridded layer of reflectivity: one instant per site is a rate, not a total",
  );
  expect(possible).toContain(
    '2 gridded layers of rate besides ("rate"), switched off in a plan: no rain should go in twice',
  );
});

const REAL = process.env.RAINRECKON_REAL;

describe.skipIf(REAL === undefined)("real scans (skipped unless RAINRECKON_REAL is set)", () => {
  const real = REAL ?? "";

  test("five files of one moment each are one sweep", async () => {
    expect(existsSync(real)).toBe(true);
    const stem = "Z__C_RJTD_20230801200000_RDR_JMAGPV_RS47937_Gar0p250km0p70deg_PR";
    const names = ["kdp", "psd", "ref", "rhv", "zdr"].map((moment) => `${stem}${moment}_N18_ANAL_cfrad.nc`);
    const { radars } = await surveyOf(real, names);
    expect(radars).toHaveLength(1);
    expect(radars[0]).toMatchObject({
      fileCount: 5,
      sweepCount: 1,
      roundCount: 1,
      resent: { sameFile: 0, otherFile: 0 },
      quantities: ["DBZH", "KDP", "PSIDP", "RHOHV", "ZDR"].map((name) => ({ name, sweepCount: 1 })),
    });
  });

  test("of split cuts, the Doppler ones are no rounds of their own", async () => {
    const { radars, wrong, possible } = await surveyOf(real, ["KLBB20160601_150025_V06"]);
    expect(radars[0]).toMatchObject({ id: "ICAO-KLBB", sweepCount: 11, roundCount: 1 });
    expect(radars[0]?.sweepsPerRound).toEqual({ least: 9, most: 9 });
    expect(wrong.some(({ what }) => what.startsWith("2 Doppler cuts"))).toBe(true);
    expect(possible[0]).toContain("one instant per site is a rate, not a total");
  });

  test("at 35 GHz a rain total means nothing, and that is said", async () => {
    const { radars, wrong } = await surveyOf(real, ["example_plot_ppi_single_sweep.nc"]);
    expect(radars[0]).toMatchObject({ band: "Ka", sweepCount: 4 });
    expect(wrong.some(({ what }) => what.includes("rain takes too much from the beam"))).toBe(true);
  });
});
