import { copyFileSync, cpSync, mkdirSync, readFileSync, renameSync, rmSync, writeFileSync } from "node:fs";
import path from "node:path";
import { beforeAll, describe, expect, test } from "vitest";
import { explainRun } from "../src/explain/explain.ts";
import { explainCsv } from "../src/explain/explain-csv.ts";
import { explainText } from "../src/explain/explain-text.ts";
import type { Explanation, PointAccount } from "../src/explain/schema.ts";
import { writeShowers } from "./explain-world.ts";
import { inProcess } from "./run-cli.ts";
import { arrayOf, csvRows, editPlan, type ReadArray, readNetCdf, scratchFolder } from "./total-kit.ts";

const scratch = scratchFolder("explain");
const world = path.join(scratch, "world");
const run = path.join(world, "run");
let plan: string;
let arrays: ReadonlyMap<string, ReadArray>;

async function totalOf(from: string, out: string): Promise<void> {
  const { status, stderr } = await inProcess(["total", from, "--out", out, "--workers", "1", "--quiet"]);
  expect([status, stderr]).toEqual([0, expect.not.stringContaining("error")]);
}

beforeAll(async () => {
  plan = await writeShowers(world);
  await totalOf(plan, run);
  arrays = await readNetCdf(path.join(run, "totals.nc"));
}, 60_000);

const array = (name: string) => arrayOf(arrays, name).values;
const TERMINAL = {
  json: true,
  quiet: true,
  debug: false,
  live: false,
  result: () => undefined,
  note: () => undefined,
  strong: (text: string) => text,
};

async function explained(...flags: readonly string[]): Promise<Explanation> {
  const { status, stdout, stderr } = await inProcess(["explain", run, ...flags, "--json"]);
  expect([status, stderr]).toEqual([0, ""]);
  return JSON.parse(stdout) as Explanation;
}

/** Numbers from 0 to 1, the same each time: the minimal standard generator (Park and Miller 1988). */
function* numbers(seed: number): Generator<number> {
  for (let state = seed; ; ) {
    state = (state * 16_807) % 2_147_483_647;
    yield state / 2_147_483_647;
  }
}

/** Cells drawn by lot, each once. */
function drawnCells(count: number): number[] {
  const cells = new Set<number>();
  for (const number of numbers(4711)) {
    cells.add(Math.floor(number * array("radar_total").length));
    if (cells.size === count) break;
  }
  return [...cells];
}

/**
 * What anybody could do with the rows and nothing else: the mean of the gates is the rate of a scan, rates and hours
 * make the parts, parts the hours, and hours the total, rounded to float32 where totals.nc stores them.
 */
function addedUp({ scans, parts, intervals }: PointAccount): number {
  const rateOf = new Map(
    scans.map(({ number, gates, gridValues }) => {
      const rates = [...gates, ...gridValues].flatMap(({ rateMmPerHour }) => rateMmPerHour ?? []);
      return [number, Math.fround(rates.reduce((sum, rate) => sum + rate, 0) / rates.length)];
    }),
  );
  let total = 0;
  for (const { start, end } of intervals) {
    let interval = 0;
    for (const { stepStart, stepEnd, scan, nextScan, hours, nextHours, share } of parts) {
      if (stepStart < start || stepEnd > end) continue;
      interval += share * (hours * rateOf.get(scan)! + nextHours * rateOf.get(nextScan)!);
    }
    total += Math.fround(interval);
  }
  return Math.fround(total);
}

/** Places asked for by the command, once for many tests. */
let asked: Explanation;
beforeAll(async () => {
  asked = await explained("--gauge", "net/G4", "--gauge", "far/G1", "--catchment", "A");
}, 60_000);

describe("200 cells drawn by lot, in one pass", () => {
  let points: readonly PointAccount[];
  let cells: readonly number[];

  beforeAll(async () => {
    cells = drawnCells(200);
    const places = cells.map((cell) => ({ lonDeg: array("lon")[cell]!, latDeg: array("lat")[cell]! }));
    const options = { plan: undefined, from: undefined, to: undefined };
    const explanation = await explainRun(
      run,
      { ...options, asked: { points: places, gauges: [], catchments: [] } },
      TERMINAL,
    );
    ({ points } = explanation);
  }, 60_000);

  test("each ends on the stored float32, radar and adjusted", () => {
    for (const [k, cell] of cells.entries()) {
      const { end, cell: place } = points[k]!;
      expect(place.row * 60 + place.column).toBe(cell);
      for (const [again, stored] of [
        [end.radarMm, array("radar_total")[cell]!],
        [end.adjustedMm, array("adjusted_total")[cell]!],
      ] as const) {
        expect(again ?? Number.NaN).toBe(stored);
      }
      expect(end.exact).toBe(true);
    }
  });

  test("a plain script that is fed the rows comes to the same float32", () => {
    let wet = 0;
    for (const [k, cell] of cells.entries()) {
      if (points[k]!.parts.length === 0) continue;
      const stored = array("radar_total")[cell]!;
      expect(addedUp(points[k]!)).toBe(stored);
      if (stored > 0) wet++;
    }
    expect(wet).toBeGreaterThan(100);
  });

  test("every kind of stretch, share and gate is among them", () => {
    const parts = points.flatMap((point) => point.parts);
    expect(new Set(parts.map(({ kind }) => kind))).toEqual(new Set(["usual", "bridged"]));
    expect(parts.some(({ share }) => share === 1)).toBe(true);
    expect(parts.some(({ share }) => share > 0.05 && share < 0.95)).toBe(true);
    const scans = points.flatMap((point) => point.scans);
    const gates = scans.flatMap((scan) => scan.gates);
    expect(gates.some(({ capped }) => capped)).toBe(true);
    expect(gates.some(({ screenedBy }) => screenedBy.length > 0)).toBe(true);
    expect(gates.some(({ effectsDb }) => effectsDb.attenuation > 0.1)).toBe(true);
    // The hole in the low sweep: the high one speaks, and the account says why.
    const higher = scans.filter(({ elevationDeg }) => elevationDeg === 1.5);
    expect(higher.length).toBeGreaterThan(0);
    for (const { passedOver } of higher)
      expect(passedOver).toMatchObject([{ elevationDeg: 0.5, why: expect.any(String) }]);
    expect(higher.some(({ passedOver }) => passedOver[0]?.why === "not observed")).toBe(true);
  });

  // Stored numbers are those that were written: dBZ = 0.5 stored - 32 (odim-scans.ts), 0 is undetect. Rates are by
  // Z = 200 R^1.6 (Marshall, Hitschfeld and Gunn 1955).
  test("a gate's number, decibels and rate hang together", () => {
    const gates = points.flatMap(({ scans }) => scans.flatMap((scan) => scan.gates));
    const stored = {
      echo: (dbz: number | null) => 2 * (dbz! + 32),
      "below detection": () => 0,
      "not observed": () => 255,
    };
    expect(gates.filter((gate) => gate.stored !== stored[gate.measured](gate.measuredDbz))).toEqual([]);
    const withEcho = gates.filter(({ dbz }) => dbz !== null);
    const astray = withEcho.filter((gate) => {
      const added = Object.values(gate.effectsDb).reduce((sum, db) => sum + db, 0);
      return Math.abs(gate.dbz! - (gate.filledDbz ?? gate.measuredDbz!) - added) > 1e-4;
    });
    expect(astray).toEqual([]);
    const byRelation = withEcho.filter(
      (gate) => gate.method === "z" && !gate.capped && gate.rateMmPerHour !== null,
    );
    expect(byRelation.length).toBeGreaterThan(1000);
    const otherRates = byRelation.filter(
      ({ dbz, rateMmPerHour }) =>
        Math.abs(rateMmPerHour! / (10 ** (dbz! / 10) / 200) ** (1 / 1.6) - 1) > 1e-4,
    );
    expect(otherRates).toEqual([]);
    // Scans of reflectivity alone: neither the size nor the number of drops is known.
    const swept = points.flatMap(({ scans }) => scans.filter((scan) => scan.dropSizeFactor !== null));
    expect(swept.length).toBeGreaterThan(100);
    expect(
      swept.filter(({ dropSizeFactor, dropNumberFactor }) => dropSizeFactor !== 1 || dropNumberFactor !== 1),
    ).toEqual([]);
  });

  test("the radar whose plan says +1 dB has it in every echo, the other none", () => {
    const scans = points.flatMap((point) => point.scans);
    const calibrations = (source: string) =>
      new Set(
        scans
          .filter((scan) => scan.source.includes(source))
          .flatMap(({ gates }) =>
            gates.filter(({ dbz }) => dbz !== null).map(({ effectsDb }) => effectsDb.calibration),
          ),
      );
    expect([calibrations("zzeas"), calibrations("zzwes")]).toEqual([new Set([1]), new Set([0])]);
  });
});

describe("a gauge", () => {
  test("stands beside its cell, and what the figure owes to each gauge is told", () => {
    const [point] = asked.points;
    expect(point).toMatchObject({ kind: "gauge", gauge: { network: "net", gaugeId: "G4", cellCount: 1 } });
    const pair = csvRows(path.join(run, "gauges.csv")).find(
      (row) => row.gauge_id === "G4" && row.network === "net",
    )!;
    expect(point!.gauge!.gaugeMm).toBeCloseTo(Number(pair.total_mm), 3);
    expect(point!.gauge!.radarMm).toBeCloseTo(Number(pair.radar_total_mm), 3);
    // A pair is made over the steps that the radar saw, to a twentieth.
    const both = point!.steps.filter(({ observedFraction }) => observedFraction >= 0.95);
    expect(both.reduce((sum, { gaugeMm }) => sum + gaugeMm!, 0)).toBeCloseTo(Number(pair.total_mm), 3);

    // Additive residuals by inverse square distances (Shepard 1968): the figure moves by the gauge's weight.
    const { adjustment, cell, end } = point!;
    expect(adjustment).toMatchObject({ applied: true, method: "idw-additive" });
    const weights = adjustment.gauges.map(({ distanceKm }) => 1 / distanceKm! ** 2);
    const sum = weights.reduce((total, weight) => total + weight, 0);
    expect(adjustment.gauges.length).toBeGreaterThan(5);
    for (const [k, gauge] of adjustment.gauges.entries()) {
      expect(gauge.mmPerMm!).toBeCloseTo(weights[k]! / sum, 4);
      // Without it, the rest share its weight: r' = (r - w e) / (1 - w), e = gauge - radar.
      const share = weights[k]! / sum;
      const residual = end.adjustedMm! - end.radarMm!;
      const error = gauge.gaugeMm - gauge.radarMm;
      expect(gauge.withoutMm!).toBeCloseTo(end.radarMm! + (residual - share * error) / (1 - share), 3);
    }
    expect(cell.sizeM).toBe(1000);
  });

  test("of an id that two networks have must be told by its network", async () => {
    const { status, stderr } = await inProcess(["explain", run, "--gauge", "G1"]);
    expect([status, stderr]).toEqual([2, expect.stringContaining("far/G1 or net/G1")]);
    expect(asked.points.map(({ name }) => name)).toEqual(["net/G4", "far/G1"]);
  });

  test("that is not there is answered by the nearest name", async () => {
    const { status, stderr } = await inProcess(["explain", run, "--gauge", "net/G9x"]);
    expect([status, stderr]).toEqual([
      2,
      expect.stringMatching(/no such gauge[\s\S]*did you mean "net\/G\d"\?/),
    ]);
  });
});

describe("text for people", () => {
  test("text is at most 100 columns wide, leaves the small scans out and says so", () => {
    const text = explainText(asked);
    const lines = text.split("\n");
    expect(lines.filter((line) => line.length > 100)).toEqual([]);
    expect(lines[0]).toMatch(/^\d+\.\d\d mm \(adjusted\) at gauge net\/G4: how it came to be$/);
    expect(text).toMatch(/… \d+ of \d+ scans are left out here/);
    expect(text).toContain("The same to the last bit: the account ends on what is stored.");
    expect(text).toContain("The same to the last digit written: the account ends on what is stored.");
    expect(text).toContain("ray/gate ");
    expect(text).toContain("Adjusted by inverse distances, additive residuals, from 9 gauges");
    // By construction: no account that went astray may read as if it had not.
    const [first] = asked.points as [PointAccount];
    const astray = { ...asked, points: [{ ...first, end: { ...first.end, exact: false } }] };
    expect(explainText(astray)).toContain("NOT THE SAME");
  });

  test("part of the window is widened to whole steps and told as part of the whole", async () => {
    const { span, points } = await explained(
      "--gauge",
      "G4",
      "--from",
      "2031-06-01T12:12Z",
      "--to",
      "2031-06-01T14:31+01:00",
    );
    expect(span).toEqual({ start: "2031-06-01T12:10:00Z", end: "2031-06-01T13:35:00Z" });
    const [{ steps, end, parts, intervals }] = points as [PointAccount];
    expect(steps.length).toBe(17);
    expect(intervals).toEqual([]);
    expect(parts.reduce((sum, { depthMm }) => sum + depthMm, 0)).toBeCloseTo(end.spanRadarMm!, 9);
    expect(end.exact).toBe(true);
    const none = await inProcess(["explain", run, "--gauge", "G4", "--from", "2031-06-01T15:00Z"]);
    expect([none.status, none.stderr]).toEqual([2, expect.stringContaining("lies outside the window")]);
  });

  test("the schema is printed", async () => {
    const { status, stdout } = await inProcess(["explain", "--schema"]);
    expect(status).toBe(0);
    expect(JSON.parse(stdout)).toMatchObject({ type: "object", properties: { points: { type: "array" } } });
  });
});

describe("a catchment", () => {
  test("ends on its row of catchments.csv, step by step", async () => {
    const [catchment] = asked.catchments;
    const rows = csvRows(path.join(run, "catchments.csv"));
    const window = rows.find((row) => row.start!.includes("T12:00") && row.end!.includes("T14:00"))!;
    expect(catchment!.end).toMatchObject({
      exact: true,
      storedDepthObservedMm: window.depth_observed_mm,
    });
    expect(catchment!.end.radarMm!.toFixed(3)).toBe(window.radar_mm);
    const sum = catchment!.steps.reduce((total, { radarMm }) => total + radarMm!, 0);
    expect(sum).toBeCloseTo(Number(window.radar_mm), 3);
    expect(catchment!.steps.length).toBe(24);
    for (const { shares } of catchment!.steps)
      expect(Object.values(shares).reduce((total, share) => total + share, 0)).toBeCloseTo(1, 9);
    const rainy = catchment!.scans.filter(({ meanRateMmPerHour }) => (meanRateMmPerHour ?? 0) > 1);
    expect(rainy.length).toBeGreaterThan(5);
    expect(rainy.every(({ files, observedShare }) => files.length > 0 && observedShare > 0)).toBe(true);
    const csv = await explainCsv({ ...asked, points: [] });
    expect(csv.split("\n").filter((line) => line.startsWith("A,step,")).length).toBe(24);
    expect(csv.split("\n").filter((line) => line.startsWith("A,scan,")).length).toBe(catchment!.scans.length);
  });

  test("that is not there", async () => {
    const { status, stderr } = await inProcess(["explain", run, "--catchment", "Ab"]);
    expect([status, stderr]).toEqual([2, expect.stringContaining('did you mean "A"?')]);
  });
});

describe("what is refused", () => {
  test("a place outside the grid, and one that cannot be read", async () => {
    const outside = await inProcess(["explain", run, "--at", "12.5N 3.0E"]);
    expect([outside.status, outside.stderr]).toEqual([
      2,
      expect.stringContaining("lies outside the grid of the run"),
    ]);
    const bare = await inProcess(["explain", run, "--at", "52.5 3.0"]);
    expect([bare.status, bare.stderr]).toEqual([2, expect.stringContaining("with their letters")]);
    const nothing = await inProcess(["explain", run]);
    expect([nothing.status, nothing.stderr]).toEqual([2, expect.stringContaining("a place is missing")]);
  });

  test("a folder without a run, and a run that has not come to its end", async () => {
    const empty = path.join(scratch, "empty");
    mkdirSync(path.join(empty, ".unfinished"), { recursive: true });
    const unfinished = await inProcess(["explain", empty, "--gauge", "G4"]);
    expect([unfinished.status, unfinished.stderr]).toEqual([2, expect.stringContaining("is not finished")]);
    rmSync(path.join(empty, ".unfinished"), { recursive: true });
    const none = await inProcess(["explain", empty, "--gauge", "G4"]);
    expect([none.status, none.stderr]).toEqual([2, expect.stringContaining("no finished run")]);
  });

  /** Refused with one error that names the file, and as before once it is put back. */
  async function refused(file: string, spoil: () => void, words: string): Promise<void> {
    const kept = path.join(scratch, "kept");
    copyFileSync(file, kept);
    try {
      spoil();
      const { status, stderr } = await inProcess(["explain", run, "--gauge", "G4"]);
      expect([status, stderr.match(/error:/g)?.length]).toEqual([2, 1]);
      expect(stderr).toContain(words);
      expect(stderr).toContain(path.basename(file));
    } finally {
      renameSync(kept, file);
    }
  }

  const turnBit = (file: string) => () => {
    const bytes = readFileSync(file);
    bytes[bytes.length >> 1]! ^= 1;
    writeFileSync(file, bytes);
  };

  test("a file that is missing, or is not what it was", async () => {
    const scan = path.join(world, "scans", "west-50.h5");
    await refused(scan, turnBit(scan), "was changed since");
    await refused(scan, () => rmSync(scan), "is missing");
    for (const name of ["totals.nc", "learned.nc"]) {
      const output = path.join(run, name);
      await refused(output, turnBit(output), "was changed since");
      await refused(output, () => rmSync(output), `no ${name} any more`);
    }
    await refused(
      plan,
      () => editPlan(plan, plan, (document) => document.setIn(["title"], "Other")),
      "is not the one",
    );
  });
});

describe("rows as CSV, of a run that was moved away from its plan", () => {
  test("add up to the stored float32; the plan is named with --plan, and a file that came later has no part", async () => {
    const moved = path.join(scratch, "moved");
    cpSync(run, moved, { recursive: true });
    const lost = await inProcess(["explain", moved, "--gauge", "G4"]);
    expect([lost.status, lost.stderr]).toEqual([2, expect.stringContaining("--plan")]);
    const late = path.join(world, "scans", "west-later.h5");
    copyFileSync(path.join(world, "scans", "west-50.h5"), late);
    const totals = array("radar_total");
    const wettest = Math.max(...totals.filter((mm) => mm > 0));
    const cell = totals.indexOf(wettest);
    const place = `${array("lat")[cell]!.toFixed(6)}N ${array("lon")[cell]!.toFixed(6)}E`;
    const { status, stdout } = await inProcess(["explain", moved, "--at", place, "--csv", "--plan", plan]);
    rmSync(late);
    expect(status).toBe(0);
    const file = path.join(scratch, "rows.csv");
    writeFileSync(file, stdout);
    const rows = csvRows(file);
    const hours = [13, 14].map((hour) =>
      rows
        .filter(
          ({ step_end: end }) =>
            end! > `2031-06-01T${hour - 1}:00:00Z` && end! <= `2031-06-01T${hour}:00:00Z`,
        )
        .reduce((sum, row) => sum + Number(row.depth_mm), 0),
    );
    expect(Math.fround(Math.fround(hours[0]!) + Math.fround(hours[1]!))).toBe(totals[cell]!);
    expect(rows[0]).toMatchObject({
      file: expect.stringMatching(/^scans\/(east|west)-\d+\.h5$/),
      screened_by: expect.stringMatching(/^\[.*\]$/),
    });
    expect(stdout).not.toMatch(/(^|,)[=+@-]/m);
  });
});
