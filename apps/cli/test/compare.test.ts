import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { afterAll, beforeAll, expect, test } from "vitest";
import { compareSchema } from "../src/compare/compare-runs.ts";
import type { Manifest } from "../src/manifest.ts";
import { cli, ensureBuilt, inProcess } from "./run-cli.ts";

const scratch = mkdtempSync(path.join(tmpdir(), "rainreckon-compare-"));
beforeAll(ensureBuilt);
afterAll(() => rmSync(scratch, { recursive: true }));

const HASH_A = "a".repeat(64);
const HASH_B = "b".repeat(64);

const MANIFEST: Manifest = {
  format: "rainreckon-manifest-1",
  version: "0.1.0",
  status: "provisional",
  title: "A storm that never was",
  runDigest: HASH_A,
  plan: {
    radars: [
      { id: "one", offsetDb: 0 },
      { id: "two", offsetDb: 0 },
    ],
    rain: { minRateMmPerHour: 0.1 },
  },
  planDigest: HASH_A,
  inputs: [
    { path: "radar/1.h5", kind: "scan", sha256: HASH_A, bytes: 10, use: "used" },
    { path: "radar/2.h5", kind: "scan", sha256: HASH_A, bytes: 10, use: "used" },
    { path: "gauges.csv", kind: "gauges", sha256: HASH_A, bytes: 10, use: "used" },
  ],
  outputs: [],
  counts: {},
  notices: [],
  echo: null,
  headline: { districtMm: 20 },
};

const CATCHMENTS = `catchment_id,name,start,end,depth_mm,reason
007,Brook,2031-05-03T12:00:00Z,2031-05-03T13:00:00Z,12.500,
007,Brook,2031-05-03T12:00:00Z,2031-05-03T12:30:00Z,7.000,
NO,"Upper, lower",2031-05-03T12:00:00Z,2031-05-03T13:00:00Z,3.250,
`;

function run(name: string, manifest: Manifest, catchments: string): string {
  const folder = path.join(scratch, name);
  mkdirSync(folder);
  writeFileSync(path.join(folder, "manifest.json"), JSON.stringify(manifest));
  writeFileSync(path.join(folder, "catchments.csv"), catchments);
  return folder;
}

test("tells which figures changed, by how much, and what stands behind them", async () => {
  const a = run("a", MANIFEST, CATCHMENTS);
  const b = run(
    "b",
    {
      ...MANIFEST,
      runDigest: HASH_B,
      plan: {
        radars: [
          { id: "two", offsetDb: 1.5 },
          { id: "one", offsetDb: 0 },
        ],
        rain: { minRateMmPerHour: 0.1 },
      },
      inputs: [
        { path: "radar/1.h5", kind: "scan", sha256: HASH_B, bytes: 11, use: "used" },
        {
          path: "gauges.csv",
          kind: "gauges",
          sha256: HASH_A,
          bytes: 10,
          use: "left out",
          reason: "it cannot be read",
        },
        { path: "radar/3.h5", kind: "scan", sha256: HASH_B, bytes: 10, use: "used" },
      ],
      headline: { districtMm: 21.5 },
    },
    CATCHMENTS.replace("12.500", "14.000").replace("7.000", "8.250").replace("3.250", ""),
  );
  const { status, stdout, stderr } = cli(["compare", a, b, "--json"]);
  expect(stderr).toBe("");
  expect(status).toBe(0);
  const comparison = compareSchema.parse(JSON.parse(stdout));
  expect(comparison.sameFigures).toBe(false);
  // The differences are those planted above.
  expect(
    comparison.figures.map(({ table, of, whole, figure, a: was, b: is, change }) => [
      table,
      of,
      whole,
      figure,
      was,
      is,
      change,
    ]),
  ).toEqual([
    ["headline", "whole run", true, "districtMm", 20, 21.5, 1.5],
    ["catchments", "007 2031-05-03T12:00:00Z 2031-05-03T13:00:00Z", true, "depth_mm", 12.5, 14, 1.5],
    ["catchments", "007 2031-05-03T12:00:00Z 2031-05-03T12:30:00Z", false, "depth_mm", 7, 8.25, 1.25],
    ["catchments", "NO 2031-05-03T12:00:00Z 2031-05-03T13:00:00Z", true, "depth_mm", 3.25, null, null],
  ]);
  expect(comparison.plan).toEqual([{ path: "radars[two].offsetDb", a: 0, b: 1.5 }]);
  expect(comparison.inputs.map(({ path: name, change }) => [name, change])).toEqual([
    ["gauges.csv", "other use"],
    ["radar/1.h5", "other content"],
    ["radar/2.h5", "removed"],
    ["radar/3.h5", "added"],
  ]);
  const text = (await inProcess(["compare", a, b])).stdout;
  expect(text).toMatch(/007 2031-05-03T12:00:00Z 2031-05-03T13:00:00Z +depth, mm +12\.5 +14 +\+1\.5\n/);
  expect(text).toContain("besides: 1 value of single steps or parts");
  expect(text).toMatch(/radars\[two\]\.offsetDb +0 +1\.5\n/);
});

test("two equal runs are the same figures from the same plan and inputs", async () => {
  const one = run("one", MANIFEST, CATCHMENTS);
  const other = run("other", MANIFEST, CATCHMENTS);
  const { status, stdout } = await inProcess(["compare", one, other]);
  expect(status).toBe(0);
  expect(stdout).toContain("Same figures, same plan, same inputs.");
});

test.each([
  ["no-manifest", undefined, /no finished run/],
  ["no-json", "{", /no JSON/],
  ["another-program", JSON.stringify({ format: "else" }), /no manifest of a run/],
] as const)("refuses a folder that is no run: %s", async (name, content, what) => {
  const folder = path.join(scratch, name);
  mkdirSync(folder);
  if (content !== undefined) writeFileSync(path.join(folder, "manifest.json"), content);
  const { status, stdout, stderr } = await inProcess(["compare", folder, folder]);
  expect(status).toBe(2);
  expect(stdout).toBe("");
  expect(stderr).toMatch(/^error: .+\n {2}where: .+\n {2}fix: {3}.+\n$/);
  expect(stderr.split("\n")[0]).toMatch(what);
});
