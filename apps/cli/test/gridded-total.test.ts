import { copyFileSync, mkdirSync, readFileSync, writeFileSync } from "node:fs";
import path from "node:path";
import { fileURLToPath } from "node:url";
import { cutWindow } from "@rainreckon/accumulation";
import { beforeAll, describe, expect, test } from "vitest";
import { loadPlan } from "../src/plan/load.ts";
import { prepareRun } from "../src/total/prepare.ts";
import { runUnit } from "../src/total/run-unit.ts";
import { leftOutLog } from "../src/ui/left-out.ts";
import { type CompositeToWrite, writeComposite } from "./gridded-files.ts";
import { RAYS, storedDbz, writeVolume } from "./odim-scans.ts";
import { inProcess } from "./run-cli.ts";
import {
  arrayOf,
  editPlan,
  fingerprints,
  manifestOf,
  NO_ECHO_WORK,
  type ReadArray,
  readNetCdf,
  scratchFolder,
} from "./total-kit.ts";

const FIXTURES = fileURLToPath(new URL("../../../packages/formats/test/fixtures", import.meta.url));
const NOON = Date.UTC(2031, 4, 3, 12);
const MINUTE = 60_000;
const LAEA = "+proj=laea +lat_0=52 +lon_0=4 +ellps=GRS80 +units=m +no_defs";
const NX = 40;
const scratch = scratchFolder("gridded");
let folders = 0;

function freshFolder(): string {
  const folder = path.join(scratch, String(folders++));
  mkdirSync(folder);
  return folder;
}

/** cs2cs (PROJ 9.1.1): x = -20 km, y = 20 km of the plane above lies at 3.7076163117 east, 52.1793841661 north. */
const ON_THE_PLANE = {
  nx: NX,
  ny: NX,
  projdef: LAEA,
  cellM: 1000,
  cornerLonDeg: 3.7076163117,
  cornerLatDeg: 52.1793841661,
};

const GRID = { crs: LAEA, westM: -20_000, northM: 20_000, cellM: 1000, nx: NX, ny: NX };

/** Writes a plan for a folder with the command, on the plane above. */
async function planFor(folder: string, change: Readonly<Record<string, unknown>> = {}): Promise<string> {
  const plan = path.join(folder, "plan.yaml");
  const { status, stderr } = await inProcess(["plan", folder, "-o", plan, "--quiet"]);
  expect([status, stderr]).toEqual([0, expect.not.stringContaining("error")]);
  return editPlan(plan, plan, (document) => {
    for (const [key, value] of Object.entries({ grid: GRID, echo: NO_ECHO_WORK, ...change }))
      document.setIn(key.split("."), document.createNode(value));
  });
}

async function totalOf(plan: string, name = "run"): Promise<ReadonlyMap<string, ReadArray>> {
  const out = path.join(path.dirname(plan), name);
  const { status, stderr } = await inProcess(["total", plan, "--out", out, "--workers", "1", "--quiet"]);
  expect([status, stderr]).toEqual([0, expect.not.stringContaining("error")]);
  return readNetCdf(path.join(out, "totals.nc"));
}

const values = (arrays: ReadonlyMap<string, ReadArray>, name: string) => [...arrayOf(arrays, name).values];

/** Depths of half a millimetre by stored number, from one minute to another. */
async function writeDepth(
  folder: string,
  from: number,
  to: number,
  stored: (cell: number) => number,
): Promise<void> {
  await writeComposite(path.join(folder, "acrr", `sum-${from}-${to}.h5`), {
    ...ON_THE_PLANE,
    quantity: "ACRR",
    startEpochMs: NOON + from * MINUTE,
    endEpochMs: NOON + to * MINUTE,
    stored: Uint8Array.from({ length: NX * NX }, (_, cell) => stored(cell)),
    gain: 0.5,
  });
}

describe("depths that a composite has summed already", () => {
  const first = (cell: number) => (cell === 7 ? 255 : cell % 200);
  const second = (cell: number) => (3 * cell) % 100;
  let folder: string;
  let plan: string;

  beforeAll(async () => {
    folder = freshFolder();
    await writeDepth(folder, 0, 30, first);
    await writeDepth(folder, 10, 40, () => 200);
    await writeDepth(folder, 30, 60, second);
    plan = await planFor(folder, { "intervals.grids": "PT15M" });
  });

  test("add up to what they are, each for its own span; those that overlap are not summed twice", async () => {
    const loaded = await loadPlan(plan);
    expect(loaded.plan.grids).toMatchObject([{ id: "depth", quantity: "depth", use: true }]);
    expect(loaded.plan.radars).toEqual([]);
    expect(loaded.plan.window).toMatchObject({ from: "2031-05-03T12:00:00Z", to: "2031-05-03T13:00:00Z" });
    const arrays = await totalOf(plan);
    const total = values(arrays, "radar_total");
    for (let cell = 0; cell < NX * NX; cell++) {
      const expected = cell === 7 ? 0.5 * second(cell) : 0.5 * (first(cell) + second(cell));
      expect(total[cell]).toBeCloseTo(expected, 4);
    }
    const observed = values(arrays, "observed_fraction");
    expect([observed[6], observed[7]]).toEqual([1, 0.5]);
    expect(new Set(values(arrays, "bridged_fraction"))).toEqual(new Set([0]));
    expect(new Set(values(arrays, "edge_fraction"))).toEqual(new Set([0]));
    expect(values(arrays, "beam_height").every((height) => Number.isNaN(height) || height < -9000)).toBe(
      true,
    );

    const manifest = manifestOf(path.join(folder, "run"));
    expect(manifest.inputs.map(({ path: name, use }) => [name, use])).toEqual([
      ["acrr/sum-0-30.h5", "used"],
      ["acrr/sum-10-40.h5", "left out"],
      ["acrr/sum-30-60.h5", "used"],
    ]);
    expect(manifest.counts).toMatchObject({ radars: 0, grids: 1, gridLayersDecoded: 2, gridCellsRead: 3200 });
    const cautions = (manifest.headline.cautions as string[]).join("\n");
    expect(cautions).toContain("whether it was adjusted to gauges already, is not known");
    expect(cautions).not.toContain("Nobody chose the relation");
    const readme = readFileSync(path.join(folder, "run", "README.txt"), "utf8");
    expect(readme).toContain("missing where gridded rain alone spoke");
  });

  test("give the same bytes again, and in other units of work", async () => {
    await totalOf(plan, "again");
    expect(fingerprints(path.join(folder, "again"))).toEqual(fingerprints(path.join(folder, "run")));

    const silent = { note: () => undefined, result: () => undefined, strong: (text: string) => text };
    const terminal = { ...silent, json: false, quiet: true, debug: false, live: false };
    const progress = { advance: () => undefined, end: () => undefined };
    const run = await prepareRun(await loadPlan(plan), leftOutLog(terminal), () => progress);
    expect(run.jobs).toHaveLength(1);
    const whole = await runUnit(run.shape, run.jobs[0]!);
    for (const [number, interval] of run.intervals.entries()) {
      const steps = cutWindow(interval, run.stepMs, interval.startEpochMs);
      const part = await runUnit(run.shape, { number, intervals: [interval], steps });
      expect(part.intervals[0]).toEqual(whole.intervals[number]);
    }
  });

  test("a sum that ends before the next begins leaves a hole that is not bridged", async () => {
    const hole = freshFolder();
    await writeDepth(hole, 0, 20, () => 2);
    await writeDepth(hole, 25, 45, () => 4);
    const arrays = await totalOf(
      await planFor(hole, { "window.to": "2031-05-03T13:00:00Z", "intervals.grids": "PT1H" }),
    );
    expect(values(arrays, "radar_total")[0]).toBeCloseTo(3, 5);
    expect(values(arrays, "observed_fraction")[0]).toBeCloseTo(40 / 60, 6);
  });
});

describe("rates at instants, in another projection", () => {
  // PROJ 9.1.1: by invproj, 538000 5792000 of UTM zone 31 lies at 3.5569752160 east, 52.2770560585 north; by cs2cs, 578500 5766500,
  // the centre of column 40 and row 25 from there, is x = 9921.326, y = 4855.283 of the plane: column 29, row 15.
  const UTM = {
    projdef: "+proj=utm +zone=31 +ellps=GRS80 +units=m +no_defs",
    nx: 60,
    ny: 60,
    cellM: 1000,
    quantity: "RATE" as const,
    gain: 0.1,
  };
  const corner = { cornerLonDeg: 3.556975216, cornerLatDeg: 52.2770560585 };

  test("are integrated by trapezoids, holes up to the longest gap are bridged, places and holes kept", async () => {
    const folder = freshFolder();
    const stored = new Uint8Array(3600).fill(60);
    for (const row of [24, 25, 26]) stored.fill(255, row * 60 + 39, row * 60 + 42);
    for (const minute of [0, 5, 10, 20, 25, 30]) {
      await writeComposite(path.join(folder, `rate-${String(minute).padStart(2, "0")}.h5`), {
        ...UTM,
        ...corner,
        startEpochMs: NOON + minute * MINUTE,
        endEpochMs: NOON + minute * MINUTE,
        stored,
      } satisfies CompositeToWrite);
    }
    const plan = await planFor(folder, { "intervals.grids": "PT30M" });
    expect((await loadPlan(plan)).plan.grids).toMatchObject([
      { quantity: "rate", medianStepMinutes: 5, maxGapMinutes: 12.5 },
    ]);
    const arrays = await totalOf(plan);
    const total = values(arrays, "radar_total");
    const holes = total.flatMap((mm, cell) => (Number.isNaN(mm) ? [cell] : []));
    expect(holes).toContain(15 * NX + 29);
    for (const cell of holes) {
      expect(Math.abs(Math.floor(cell / NX) - 15)).toBeLessThanOrEqual(2);
      expect(Math.abs((cell % NX) - 29)).toBeLessThanOrEqual(2);
    }
    // 6 mm/h for half an hour.
    for (const mm of total) if (!Number.isNaN(mm)) expect(mm).toBeCloseTo(3, 5);
    expect(values(arrays, "bridged_fraction")[0]).toBeCloseTo(10 / 30, 6);
    expect(values(arrays, "observed_fraction")[0]).toBeCloseTo(1, 6);
  });
});

describe("reflectivity", () => {
  test("becomes rain cell by cell under the plan's relation and cap, and blends with radars by weight", async () => {
    const folder = freshFolder();
    const stored = new Uint8Array(NX * NX).fill(storedDbz(40));
    stored[0] = storedDbz(60);
    stored[1] = 0;
    for (const minute of [0, 5, 10]) {
      await writeComposite(path.join(folder, "grids", `dbz-${minute}.h5`), {
        ...ON_THE_PLANE,
        quantity: "DBZH",
        startEpochMs: NOON + minute * MINUTE,
        endEpochMs: NOON + minute * MINUTE,
        stored,
        gain: 0.5,
        offset: -32,
      });
    }
    const plan = await planFor(folder, { "intervals.grids": "PT10M" });
    const arrays = await totalOf(plan);
    const total = values(arrays, "radar_total");
    // Z = 200 R^1.6 (Marshall and others, 1955), solved by hand: 40 dBZ is 11.53 mm/h; the cap of 53 dBZ is 74.87 mm/h.
    expect(total[40]).toBeCloseTo(11.53 / 6, 2);
    expect(total[0]).toBeCloseTo(74.87 / 6, 2);
    expect(total[1]).toBe(0);
    const alone = manifestOf(path.join(folder, "run"));
    // The layer stamped on the window's start belongs to the time before.
    expect(alone.counts).toMatchObject({ gridCellsCapped: 2, gatesCapped: 0 });
    const under = alone.headline.underRelations as { name: string; mm: number }[];
    expect(new Set(under.map(({ mm }) => mm)).size).toBe(3);
    expect((alone.headline.cautions as string[])[0]).toContain("Nobody chose the relation");

    const gateCount = 15;
    const radar = { node: "zzmix", lonDeg: 4, latDeg: 52, gateM: 1000, gateCount };
    const wet = new Uint8Array(RAYS * gateCount).fill(storedDbz(40));
    for (const minute of [0, 5, 10]) {
      const startEpochMs = NOON + minute * MINUTE - 10_000;
      await writeVolume(path.join(folder, "scans", `round-${minute}.h5`), radar, [
        { elevationDeg: 0.5, startEpochMs, stored: wet },
      ]);
    }
    const beside = path.join(folder, "both.yaml");
    const { status } = await inProcess(["plan", folder, "-o", beside, "--quiet"]);
    expect(status).toBe(0);
    expect((await loadPlan(beside)).plan).toMatchObject({ radars: [{ use: true }], grids: [{ use: false }] });
    editPlan(beside, beside, (document) => {
      document.setIn(["grid"], document.createNode(GRID));
      document.setIn(["grids", 0, "use"], true);
      document.setIn(
        ["window"],
        document.createNode({
          ...(document.toJS() as { window: object }).window,
          from: "2031-05-03T12:00:00Z",
          to: "2031-05-03T12:10:00Z",
        }),
      );
      document.setIn(["intervals", "grids"], "PT10M");
      document.setIn(["echo"], document.createNode(NO_ECHO_WORK));
    });
    const both = await totalOf(beside, "both");
    const [middle, corner] = [20 * NX + 25, 0];
    expect(values(both, "radar_total")[middle]).toBeCloseTo(11.53 / 6, 2);
    const { shape, values: shares } = arrayOf(both, "radar_share");
    expect(shape).toEqual([2, NX, NX]);
    expect(shares[middle]! + shares[NX * NX + middle]!).toBeCloseTo(1, 5);
    expect(shares[middle]).toBeGreaterThan(0.05);
    expect(shares[NX * NX + corner]).toBe(1);
    // 5.5 km from an antenna at 50 m, at half a degree: 50 + 48 + 2 m; the grid has no say in it.
    expect(values(both, "beam_height")[middle]).toBeCloseTo(100, -1);
    expect(values(both, "beam_height")[corner]! > 0).toBe(false);
  });
});

describe("files that other programs wrote", () => {
  test("CF NetCDF with two layers of rate, by way of survey and plan", async () => {
    const folder = freshFolder();
    copyFileSync(path.join(FIXTURES, "grid-rate-hdf5.nc"), path.join(folder, "rate.nc"));
    const plan = path.join(folder, "plan.yaml");
    const { status } = await inProcess(["plan", folder, "-o", plan, "--quiet"]);
    expect(status).toBe(0);
    editPlan(plan, plan, (document) => {
      const crs = "+proj=laea +lat_0=52 +lon_0=10 +x_0=4321000 +y_0=3210000 +ellps=GRS80 +units=m +no_defs";
      document.setIn(
        ["grid"],
        document.createNode({ crs, westM: 0, northM: 12_000, cellM: 1000, nx: 3, ny: 2 }),
      );
    });
    const arrays = await totalOf(plan);
    // grid-rate.cdl: the file's last row is the northern one; instants are the middles of the bounds, 2.5 and 7.5 min,
    // and each end speaks for half a step more. Packed by 0.1: mm over ten minutes.
    const northward = [
      [40, 10],
      [0, 12],
      [1, 7],
      [2, 8],
      [3, 9],
    ].map(([a, b]) => ((a! + b!) * 0.1 * 5) / 60);
    const total = values(arrays, "radar_total");
    for (const [k, cell] of [0, 2, 3, 4, 5].entries()) expect(total[cell]).toBeCloseTo(northward[k]!, 5);
    // The second cell of the first layer is _FillValue: only the last half step is known.
    expect(values(arrays, "observed_fraction")[1]).toBeCloseTo(0.25, 5);
  });

  test("GeoTIFF, whose time stands in its name", async () => {
    const folder = freshFolder();
    for (const [from, to] of [
      ["1200", "1210"],
      ["1210", "1220"],
    ])
      copyFileSync(
        path.join(FIXTURES, "grid-rate.tif"),
        path.join(folder, `rate_20310503T${from}_20310503T${to}.tif`),
      );
    // One byte more behind the last, so that they are not the same file twice.
    const last = path.join(folder, "rate_20310503T1210_20310503T1220.tif");
    writeFileSync(last, Buffer.concat([readFileSync(last), Buffer.of(0)]));
    const plan = path.join(folder, "plan.yaml");
    expect((await inProcess(["plan", folder, "-o", plan, "--quiet"])).status).toBe(0);
    const { plan: written } = await loadPlan(plan);
    expect(written.grids).toMatchObject([{ quantity: "rate", medianStepMinutes: 10 }]);
    await totalOf(plan);
    const manifest = manifestOf(path.join(folder, "run"));
    expect(manifest.inputs.map(({ use }) => use)).toEqual(["used", "used"]);
    // The first lies on the window's start, the middle of its span, and so belongs to the time before.
    expect(manifest.counts).toMatchObject({ grids: 1, gridLayersDecoded: 1 });
  });

  test("survey says what can be made of them; one instant makes no total", async () => {
    const folder = freshFolder();
    copyFileSync(path.join(FIXTURES, "grid-rate.tif"), path.join(folder, "rate.tif"));
    const alone = await inProcess(["survey", folder, "--quiet"]);
    expect(alone.stdout).toContain(
      "nothing from 1 gridded layer of rate: one instant per site is a rate, not a total",
    );
    expect((await inProcess(["plan", folder, "-o", path.join(folder, "p.yaml"), "--quiet"])).status).toBe(3);
    copyFileSync(path.join(FIXTURES, "grid-depth.nc"), path.join(folder, "depth.nc"));
    const depth = await inProcess(["survey", folder, "--quiet"]);
    expect(depth.stdout).toContain("from 1 gridded layer: depth");
    expect(depth.stdout).toContain("whether gauges were used, is not known: ask its maker");
  });
});

test("faults of a plan's grids are named by line and key", async () => {
  const folder = freshFolder();
  const plan = path.join(folder, "plan.yaml");
  const text = (grids: string) =>
    `title: t\nwindow: { from: 2031-05-03T12:00:00Z, to: 2031-05-03T13:00:00Z }\n${grids}\ngrid: { crs: "EPSG:3035", westM: 0, northM: 0, cellM: 1000, nx: 2, ny: 2 }\n`;
  const fault = async (grids: string) => {
    writeFileSync(plan, text(grids));
    return (await inProcess(["total", plan, "--out", path.join(folder, "out")])).stderr;
  };
  expect(await fault("")).toContain("nothing says where rain comes from");
  expect(await fault("grids: [{ id: a, files: [x.h5], quantity: rate }]")).toMatch(
    /a rate at instants needs medianStepMinutes[\s\S]*line 3, grids\[0\]/,
  );
  expect(
    await fault(
      "grids: [{ id: a, files: [x.h5], quantity: depth }, { id: a, files: [y.h5], quantity: depth }]",
    ),
  ).toContain('two sources are called "a"');
  expect(
    await fault(
      "grids: [{ id: a, files: ['*.h5'], quantity: depth, time: { from: 2031-05-03T12:00:00Z, to: 2031-05-03T13:00:00Z } }]",
    ),
  ).toContain("one time cannot hold for several files");
  const missing = await fault("grids: [{ id: a, files: [x.h5], quantity: depth }]");
  expect(missing).toContain("no file matches");
  expect(missing).toContain("nothing usable lies in the window");
});
