import { existsSync, readFileSync, writeFileSync } from "node:fs";
import path from "node:path";
import { gateRate, resolveCap } from "@rainreckon/core";
import { afterEach, beforeAll, describe, expect, test } from "vitest";
import { parse, parseDocument } from "yaml";
import { loadPlan } from "../src/plan/load.ts";
import { type RelationFitResult, relationFitSchema } from "../src/relate/fit-schema.ts";
import { measuredRun, pairIntervals, pairsWith } from "../src/relate/measured-run.ts";
import { planConversion } from "../src/relate/plan-conversion.ts";
import { type RelationRankResult, relationRankSchema } from "../src/relate/rank-schema.ts";
import { leftOutLog } from "../src/ui/left-out.ts";
import { writeShowers } from "./explain-world.ts";
import { PLANTED, writeSectors } from "./relate-world.ts";
import { inProcess } from "./run-cli.ts";
import { editPlan, scratchFolder, writeIn } from "./total-kit.ts";

const scratch = scratchFolder("relate");
const world = path.join(scratch, "world");
const run = path.join(world, "run");
let plan: string;

const SILENT = {
  json: true,
  quiet: true,
  debug: false,
  live: false,
  result: () => undefined,
  note: () => undefined,
  strong: (text: string) => text,
};

beforeAll(async () => {
  plan = await writeSectors(world);
  const { status, stderr } = await inProcess(["total", plan, "--out", run, "--workers", "1", "--quiet"]);
  expect([status, stderr]).toEqual([0, ""]);
}, 60_000);

// A command in the process of the tests leaves its status behind.
afterEach(() => {
  process.exitCode = 0;
});

async function fitted(...args: readonly string[]): Promise<RelationFitResult> {
  const { status, stdout, stderr } = await inProcess(["relate", "fit", ...args, "--json", "--quiet"]);
  expect([status, stderr]).toEqual([0, ""]);
  return relationFitSchema.parse(JSON.parse(stdout));
}

async function ranked(...args: readonly string[]): Promise<RelationRankResult> {
  const { status, stdout, stderr } = await inProcess(["relate", "rank", ...args, "--json", "--quiet"]);
  expect([status, stderr]).toEqual([0, ""]);
  return relationRankSchema.parse(JSON.parse(stdout));
}

describe("relate fit of a run", () => {
  let result: RelationFitResult;
  beforeAll(async () => {
    result = await fitted(run, "--interval", "30");
  });

  // Gauges were written from the planted relation and the trapezoids between scans, by the test's own arithmetic; the
  // rest is six decimals of a reading. It can only be found if reflectivity was averaged with the relation's own b.
  test("the relation that the gauges were written from is found, though the plan has another", () => {
    for (const name of ["rate-on-reflectivity", "reduced-major-axis", "bias-free"]) {
      const fit = result.fits.find((one) => one.name === name)!;
      expect(fit.b! / PLANTED.b, name).toBeCloseTo(1, 2);
      expect(fit.a! / PLANTED.a, name).toBeCloseTo(1, 1);
    }
    expect(result.source.averagingExponent).toBeCloseTo(PLANTED.b, 1);
    expect(result.fits.find(({ name }) => name === "bias-free")!.error.biasRatio).toBeCloseTo(1, 6);
    // With the plain mean of Z the exponent is another: rain changes within half an hour.
    expect(Math.abs(result.source.bFromMeanZ! - PLANTED.b)).toBeGreaterThan(0.01);
  });

  test("the gauge that was left out has no part, and is counted", () => {
    expect(result.source).toMatchObject({ kind: "run", gaugeCount: 11, intervalMinutes: 30 });
    expect(result.pairs.count).toBe(44);
    expect(result.source.leftOut).toEqual([{ reason: "the gauge is not trusted", count: 4 }]);
  });

  test("the line for the plan is one that the plan takes", async () => {
    const line = result.offered!.planLine;
    const { relation } = parse(line) as { relation: { a: number; b: number; source: string } };
    expect(relation).toMatchObject({ a: result.offered!.a, b: result.offered!.b });
    expect(relation.source).toMatch(/^fitted to \d+ pairs of 11 gauges over 30 min, 2031-06-01T12:00:00Z to/);
    const edited = editPlan(plan, path.join(world, "fitted.yaml"), (document) => {
      document.setIn(["radars", 0, "relation"], parseDocument(line).get("relation"));
    });
    expect((await loadPlan(edited)).plan.radars[0]!.relation).toEqual(relation);
  });

  test("a plan gives the same as the run that was made from it", async () => {
    const ofPlan = await fitted(plan, "--interval", "30");
    expect(ofPlan.source.kind).toBe("plan");
    expect({ ...ofPlan, source: undefined }).toEqual({ ...result, source: undefined });
  });

  test("the text keeps to 80 columns but for the line for the plan, and draws the pairs", async () => {
    const chart = path.join(scratch, "fit.svg");
    const { status, stdout, stderr } = await inProcess(["relate", "fit", run, "--chart", chart]);
    expect([status, stderr]).toEqual([0, `chart: ${chart}\n`]);
    const wide = stdout.split("\n").filter((line) => line.length > 80 && !line.startsWith("  relation: "));
    expect(wide).toEqual([]);
    expect(stdout).toMatch(/log R on dBZ +\d+/);
    expect(stdout).toMatch(/\|.*F/);
    expect(readFileSync(chart, "utf8").match(/<circle/g)).toHaveLength(22);
  });

  test("a run whose inputs have changed is refused", async () => {
    const file = path.join(world, "gauges/readings.csv");
    const before = readFileSync(file);
    writeFileSync(file, `${before.toString()}\n`);
    const { status, stderr } = await inProcess(["relate", "fit", run, "--quiet"]);
    writeFileSync(file, before);
    expect(status).toBe(2);
    expect(stderr).toMatch(/changed since/);
  });
});

describe("relate rank", () => {
  test("the planted relation is told from all others, alone and after bias, and errs by next to nothing", async () => {
    const result = await ranked(
      run,
      "--interval",
      "30",
      "--relation",
      "300,1.4",
      "fulton-1998-300/1.4",
      "250,1.2",
      "75,2",
    );
    expect(result.source).toMatchObject({ gaugeCount: 11, gaugesNotTrusted: 1 });
    for (const ranking of [result.relations.alone, result.relations.afterBias]) {
      const [first, second, ...others] = ranking.rows;
      // The same relation under two names: a tie, and not a difference.
      expect([first!.a, first!.b, second!.a, second!.b]).toEqual([300, 1.4, 300, 1.4]);
      // Rates below 0.1 mm/h are none to the radar.
      expect(first!.errorMm).toBeLessThan(0.01);
      expect(second!.toldApart).toBe(false);
      expect(others.map(({ toldApart }) => toldApart)).toEqual(others.map(() => true));
      expect(first!.biasRatio).toBeCloseTo(1, 3);
    }
    expect(result.plan).toEqual({ name: "marshall-1955-200/1.6", cap: "53 dBZ" });
  });

  test("all published relations for rain, in 80 columns; caps that nothing reached are not ranked", async () => {
    const { status, stdout } = await inProcess(["relate", "rank", run, "--quiet"]);
    expect(status).toBe(0);
    expect(stdout.split("\n").filter((line) => line.length > 80)).toEqual([]);
    expect(stdout).toMatch(/joss-1970-300\/1\.5/);
    expect(stdout).not.toMatch(/sekhon/);
    expect(stdout).toMatch(/Caps cannot be ranked: no gate/);
  });

  test("caps below the rain cut it, and are ranked", async () => {
    const result = await ranked(run, "--caps", "35dBZ,none", "--order", "alone");
    const { rows } = result.caps.ranks.alone;
    expect(rows.map(({ cap }) => cap).sort()).toEqual(["35 dBZ", "53 dBZ", "none"]);
    expect(result.caps.atCap.find(({ cap }) => cap === "35 dBZ")!.gatesShare).toBeGreaterThan(0.2);
    const low = rows.find(({ cap }) => cap === "35 dBZ")!;
    const open = rows.find(({ cap }) => cap === "none")!;
    expect(low.biasRatio!).toBeLessThan(open.biasRatio! - 0.2);
    expect(result.caps.ranks.alone.chosen).not.toBe("35 dBZ");
  });
});

// Two radars out of step, holes, a core above the cap: the depths of the run itself are the check value.
test("the reflectivity over gauges makes the run's own depths, whole and in parts", async () => {
  const showers = await writeShowers(path.join(scratch, "showers"));
  const file = editPlan(showers, path.join(scratch, "showers", "hour.yaml"), (document) => {
    // Several cells for a gauge: one alone is the world of sectors.
    document.setIn(["pairs", "cell"], "mean3x3");
    document.setIn(["window", "to"], "2031-06-01T13:00:00Z");
  });
  const measured = await measuredRun(file, undefined, leftOutLog(SILENT), SILENT);
  const { relation, cap, minRateMmPerHour } = planConversion(measured.run.loaded.plan);
  const settings = { relation, cap: resolveCap(cap, relation), minRateMmPerHour, offsetDb: 0 };
  const intervals = pairIntervals(measured, 10 * 60_000);
  let wet = 0;
  for (const gauge of measured.gauges) {
    const depth = gauge.echo.integral((dbz) => gateRate(dbz, settings).rate);
    const [whole] = pairsWith(measured, gauge, depth, pairIntervals(measured, undefined));
    const own = gauge.paired.byInterval[0]!;
    expect(whole!.used).toBe(own.used);
    expect(whole!.commonFraction).toBeCloseTo(own.commonFraction, 9);
    if (!own.used) continue;
    // Rates are stored as float32.
    expect(Math.abs(whole!.radarMm - own.radarMm)).toBeLessThanOrEqual(1e-5 * Math.max(1, own.radarMm));
    const parts = pairsWith(measured, gauge, depth, intervals).filter(({ radarMm }) => radarMm > 0);
    expect(parts.reduce((sum, { radarMm }) => sum + radarMm, 0)).toBeCloseTo(whole!.radarMm, 6);
    if (own.radarMm > 0.2) wet++;
  }
  expect(wet).toBeGreaterThan(4);
}, 60_000);

describe("relate fit of a table", () => {
  const table = (name: string, text: string) => writeIn(scratch, name, text);

  test("pairs on a line give the line; without gauges and times the intervals draw stretches of rows", async () => {
    const rows = Array.from({ length: 60 }, (_, k) => {
      const rate = 0.3 * 1.1 ** ((k * 17) % 60);
      return `${(250 * rate ** 1.5).toFixed(6)},${rate.toFixed(8)}`;
    });
    const file = table("line.csv", `z_mm6_per_m3,rain_rate_mm_per_h\n${rows.join("\n")}\n`);
    const result = await fitted("--pairs", file);
    expect(result.source).toMatchObject({ kind: "pairs", gaugeCount: null, averagingExponent: null });
    expect(result.offered).toMatchObject({ name: "bias-free", a: 250, b: 1.5 });
    expect(result.pairs.drawn).toBe("gauges are too few to draw, 15 blocks of time");
    const held = await fitted("--pairs", file, "--method", "fixed-b", "--relation", "300,1.4");
    expect(held.offered).toMatchObject({ name: "fixed-b", b: 1.4 });
  });

  test("rows that are no pairs are told, counted, and felt under --strict", async () => {
    const rows = Array.from({ length: 12 }, (_, k) => `${20 + k},${1 + k / 3}`);
    const file = table("bad.csv", `reflectivity_dbz,rain_rate_mm_per_h\n${rows.join("\n")}\n"<b>",NaN\n`);
    const { status, stdout, stderr } = await inProcess(["relate", "fit", "--pairs", file, "--strict"]);
    expect(status).toBe(1);
    expect(stderr).toMatch(/bad\.csv, line 14: .*the pair is left out/);
    expect(stdout).toMatch(/Left out: 1 row/);
  });

  test("too few pairs: no relation is offered, and the command has done its work", async () => {
    const file = table("few.csv", "reflectivity_dbz,rain_rate_mm_per_h\n20,1\n30,3\n");
    const { status, stdout } = await inProcess(["relate", "fit", "--pairs", file]);
    expect(status).toBe(0);
    expect(stdout).toMatch(/No relation is offered/);
    expect(stdout).toMatch(/2 pairs are wet on both sides, 10 are needed/);
  });

  test("pairs of one rate: said that A cannot be told from b, with an HTML page of what there is", async () => {
    const rows = Array.from({ length: 60 }, (_, k) => `${28 + (k % 7) / 2},${3 + (k % 5) / 50},g${k % 10}`);
    const file = table("same.csv", `reflectivity_dbz,rain_rate_mm_per_h,gauge\n${rows.join("\n")}\n`);
    const chart = path.join(scratch, "same.html");
    const { status, stdout } = await inProcess(["relate", "fit", "--pairs", file, "--chart", chart]);
    expect(status).toBe(0);
    expect(stdout).toMatch(/These pairs cannot tell A from b:/);
    expect(stdout).toMatch(/the rates are too much alike/);
    expect(stdout).toMatch(/Offered: Z = [\d.]+ R\^1\.6/);
    expect(existsSync(chart)).toBe(true);
  });
});

test.each([
  [["relate", "fit"], 2, /nothing to fit to/],
  [["relate", "fit", "run", "--pairs", "x.csv"], 2, /two things/],
  [["relate", "fit", "--pairs", "no-such.csv"], 3, /cannot be opened/],
  [["relate", "fit", "--pairs", "x.csv", "--method", "best"], 2, /method/],
  [["relate", "fit", "--pairs", "x.csv", "--least-rate", "0"], 2, /0\.01 to 10 mm\/h/],
  [["relate", "rank"], 2, /needs a <target>/],
  [["relate", "rank", "x", "--relation", "sekhon-1970-1780/2.21"], 2, /relation for snow/],
  [["relate", "rank", "x", "--caps", "53"], 2, /write caps with commas/],
  [["relate", "rank", "no-such-plan.yaml"], 2, /no-such-plan\.yaml/],
])("%j exits with %i", async (args, expected, message) => {
  const { status, stderr } = await inProcess(args);
  expect([status, stderr]).toEqual([expected, expect.stringMatching(message)]);
});

test("an interval that is no whole steps is refused", async () => {
  const { status, stderr } = await inProcess(["relate", "fit", run, "--interval", "7", "--quiet"]);
  expect([status, stderr]).toEqual([2, expect.stringMatching(/take a multiple of 5 min/)]);
});
