import { cpSync, existsSync, mkdirSync, readFileSync, symlinkSync } from "node:fs";
import path from "node:path";
import { beforeAll, describe, expect, test } from "vitest";
import { area, box, planText, RADAR, spoilChunk, writeAreas } from "./even-rain.ts";
import { RAYS, SWEEP_SECONDS, storedDbz, writeVolume } from "./odim-scans.ts";
import { type CliResult, ensureBuilt, inProcess } from "./run-cli.ts";
import { fingerprints, manifestOf, type RunManifest, scratchFolder, total, writeIn } from "./total-kit.ts";

// Small runs whose answer can be worked out by hand: a few cells between two invented radars.
const scratch = scratchFolder("contracts");
const FROM = Date.UTC(2031, 5, 1, 12);
const GRID =
  "{ crs: +proj=laea +lat_0=52.5 +lon_0=3.2 +ellps=GRS80 +units=m, westM: -2000, northM: 2000, cellM: 1000, nx: 4, ny: 4 }";
/** Marked by hand: a relation that somebody chose. */
const RADARS = "[{ id: zzeve, medianRoundMinutes: 5, maxGapMinutes: 12.5, relation: marshall-1955-200/1.6 }]";

const IN_USE = /<th scope="row">[^<]* <span class="mark">in use<\/span>/;

beforeAll(ensureBuilt);

/** Even rain of one radar at each of some minutes. */
async function writeEven(folder: string, minutes: readonly number[], dbz = 40, radar = RADAR): Promise<void> {
  const stored = new Uint8Array(RAYS * RADAR.gateCount).fill(storedDbz(dbz));
  for (const minute of minutes) {
    const startEpochMs = FROM + minute * 60_000 - (SWEEP_SECONDS / 2) * 1000;
    const file = path.join(folder, "scans", `${radar.node}-${1000 + minute}.h5`);
    await writeVolume(file, radar, [{ elevationDeg: 0.5, startEpochMs, stored }]);
  }
}

const every = (step: number, from: number, to: number) =>
  Array.from({ length: Math.floor((to - from) / step) + 1 }, (_, k) => from + k * step);

function writePlan(
  folder: string,
  change: Readonly<Record<string, string>> = {},
  name = "plan.yaml",
): string {
  const parts = { gauges: "", catchments: "", grid: GRID, radars: RADARS, ...change };
  return writeIn(folder, name, planText(parts));
}

function run(plan: string, out: string, flags: readonly string[] = []): Promise<CliResult> {
  return inProcess(["total", plan, "--out", path.join(path.dirname(plan), out), ...flags]);
}

describe("a run is the same only where its outputs would be", () => {
  test("marking a relation as chosen is another run, since its first caution goes away", async () => {
    const folder = path.join(scratch, "mark");
    await writeEven(folder, every(5, -5, 65));
    const marked = (mark: string) =>
      writePlan(folder, {
        radars: `\n  - id: zzeve\n    medianRoundMinutes: 5\n    maxGapMinutes: 12.5\n    relation: marshall-1955-200/1.6 # ${mark}`,
      });
    expect((await run(marked("default"), "run")).status).toBe(0);
    const caution = /Nobody chose the relation/;
    const out = path.join(folder, "run");
    expect(String(manifestOf(out).headline.cautions)).toMatch(caution);
    const again = await run(marked("chosen: stratiform rain"), "run");
    expect([again.status, again.stderr]).toEqual([2, expect.stringContaining("holds another run")]);
    expect((await run(marked("chosen: stratiform rain"), "run", ["--force"])).status).toBe(0);
    expect(String(manifestOf(out).headline.cautions)).not.toMatch(caution);
  });
});

describe("the headline under other relations", () => {
  const radarsWith = (eve: string, bee: string) =>
    `[{ id: zzeve, medianRoundMinutes: 5, maxGapMinutes: 12.5, ${eve} }, { id: zzbee, medianRoundMinutes: 6, maxGapMinutes: 15, ${bee} }]`;
  const folder = path.join(scratch, "relations");
  const mixed = path.join(folder, "mixed");
  const NAMES = ["marshall-1955-200/1.6", "fulton-1998-300/1.4", "rosenfeld-1993-250/1.2"];

  beforeAll(async () => {
    await writeEven(folder, every(5, -5, 65), 35);
    // The second radar turns every 6 minutes and stops at 32: from 35 on the first one speaks alone.
    await writeEven(folder, every(6, -4, 32), 45, { ...RADAR, node: "zzbee", lonDeg: 3.4 });
    const period =
      "periods: [{ from: 2031-06-01T12:10:00Z, to: 2031-06-01T12:30:00Z, relation: rosenfeld-1993-250/1.2 }]";
    const radars = radarsWith(`relation: fulton-1998-300/1.4, ${period}`, "relation: marshall-1955-200/1.6");
    expect((await run(writePlan(folder, { radars }), "mixed")).status).toBe(0);
  });

  test.each(NAMES)("%s is what a run with it at all radars and times comes to", async (name) => {
    const out = name.slice(0, 4);
    const radars = radarsWith(`relation: ${name}`, `relation: ${name}`);
    expect((await run(writePlan(folder, { radars }, `${out}.yaml`), out)).status).toBe(0);
    const under = manifestOf(mixed).headline.underRelations as { name: string; mm: number }[];
    const rerun = manifestOf(path.join(folder, out)).headline.districtRadarMm as number;
    expect(under.find((one) => one.name === name)?.mm).toBeCloseTo(rerun, 9);
    expect(readFileSync(path.join(folder, out, "report.html"), "utf8")).toMatch(IN_USE);
  });

  test("none of them is called the one in use where a radar or a period has its own", () => {
    expect(readFileSync(path.join(mixed, "report.html"), "utf8")).not.toMatch(IN_USE);
    const { headline } = manifestOf(mixed);
    const under = headline.underRelations as { mm: number }[];
    for (const { mm } of under)
      expect(Math.abs(mm - (headline.districtRadarMm as number))).toBeGreaterThan(0.01);
  });

  test("a period alone is enough for that", async () => {
    const period =
      "periods: [{ from: 2031-06-01T12:10:00Z, to: 2031-06-01T12:30:00Z, relation: rosenfeld-1993-250/1.2 }]";
    const radars = radarsWith(
      `relation: marshall-1955-200/1.6, ${period}`,
      "relation: marshall-1955-200/1.6",
    );
    expect((await run(writePlan(folder, { radars }, "period.yaml"), "period")).status).toBe(0);
    expect(readFileSync(path.join(folder, "period", "report.html"), "utf8")).not.toMatch(IN_USE);
  });
});

describe("a cell that met the cap in a large catchment", () => {
  test("is told as such, though it is a hair of the catchment's depth", async () => {
    const folder = path.join(scratch, "hail");
    await writeEven(folder, every(5, -5, 65));
    // One gate of one scan at 60 dBZ; the cap of 53 dBZ is 103 mm/h, against 11.5 mm/h all around.
    const stored = new Uint8Array(RAYS * RADAR.gateCount).fill(storedDbz(40));
    stored[45 * RADAR.gateCount + 30] = storedDbz(60);
    const startEpochMs = FROM + 30 * 60_000 - (SWEEP_SECONDS / 2) * 1000;
    const file = path.join(folder, "scans", "zzeve-1030.h5");
    await writeVolume(file, RADAR, [{ elevationDeg: 0.5, startEpochMs, stored }]);
    writeAreas(folder, [area("big", "Big", [box(3, 52.5, 0.4)])]);
    const plan = writePlan(folder, {
      catchments: "{ file: areas.geojson, id: id, name: name }",
      grid: "{ crs: +proj=laea +lat_0=52.5 +lon_0=3 +ellps=GRS80 +units=m, westM: -50000, northM: 50000, cellM: 1000, nx: 100, ny: 100 }",
    });
    expect((await run(plan, "run")).status).toBe(0);
    const out = path.join(folder, "run");
    expect(manifestOf(out).counts.gatesCapped).toBe(1);
    const html = readFileSync(path.join(out, "report.html"), "utf8");
    const row = /<tr><th scope="row"><span class="id">Big<.*?<\/tr>/s.exec(html)?.[0] ?? "";
    const columns = row.split("<td");
    // Depth, share observed, radar, adjusted, wettest cell.
    expect(columns[5]).toContain(">at cap<");
    for (const other of [1, 2, 3, 4]) expect(columns[other]).not.toContain(">at cap<");
  });
});

describe("a sweep that was sent again", () => {
  const here = path.join(scratch, "sent-again");
  const there = path.join(scratch, "elsewhere", "copied");
  const AGAIN = "zzeve-1030b.h5";

  beforeAll(async () => {
    await writeEven(here, every(5, -5, 65), 30);
    const stored = new Uint8Array(RAYS * RADAR.gateCount).fill(storedDbz(45));
    const startEpochMs = FROM + 30 * 60_000 - (SWEEP_SECONDS / 2) * 1000;
    await writeVolume(path.join(here, "scans", AGAIN), RADAR, [{ elevationDeg: 0.5, startEpochMs, stored }]);
    cpSync(here, there, { recursive: true });
  });

  test.each(["first", "last"])("with other content: the %s by name counts", async (rule) => {
    const plan = writePlan(here, { rain: `{ resent: ${rule} }` }, `${rule}.yaml`);
    expect((await run(plan, rule)).status).toBe(0);
    const rate = (dbz: number) => (10 ** (dbz / 10) / 200) ** (1 / 1.6);
    // Even rain for an hour; a heavier scan counts for 5 minutes, as the middle of two trapezoids.
    const depthMm = rate(30) + (rule === "last" ? (rate(45) - rate(30)) / 12 : 0);
    const out = manifestOf(path.join(here, rule));
    expect(out.headline.districtRadarMm).toBeCloseTo(depthMm, 5);
    const [left, kept] = rule === "last" ? ["zzeve-1030.h5", AGAIN] : [AGAIN, "zzeve-1030.h5"];
    expect(out.inputs.filter(({ use }) => use !== "used")).toMatchObject([
      {
        path: `scans/${left}`,
        reason: `sent again with other content, the ${rule} counts: scans/${kept} dataset1`,
      },
    ]);
  });

  test("is told alike wherever the folder lies: the same bytes", async () => {
    for (const folder of [here, there]) expect((await run(writePlan(folder), "run")).status).toBe(0);
    expect(fingerprints(path.join(there, "run"))).toEqual(fingerprints(path.join(here, "run")));
  });
});

test("where no scan can be decoded there is no total, dry or otherwise: exit 3", async () => {
  const folder = path.join(scratch, "damaged");
  // Noise of half a decibel, so that there is a packed array to damage.
  const stored = Uint8Array.from(
    { length: RAYS * RADAR.gateCount },
    (_, k) => storedDbz(40) + (((k * 7919) % 13) % 2),
  );
  for (const minute of [0, 5, 10]) {
    const startEpochMs = FROM + minute * 60_000 - (SWEEP_SECONDS / 2) * 1000;
    const file = path.join(folder, "scans", `scan-${minute}.h5`);
    spoilChunk(await writeVolume(file, RADAR, [{ elevationDeg: 0.5, startEpochMs, stored }]));
  }
  const { status, stderr, stdout } = await run(writePlan(folder), "run");
  expect(stderr.match(/cannot be decoded/g)).toHaveLength(3);
  expect(stderr.trimEnd().split("\n").slice(-3)).toEqual([
    "error: no scan is left: 3 sweeps could not be decoded, and the rest observe nothing",
    "  where: radars zzeve",
    "  fix:   see the lines above, and fetch the files again",
  ]);
  expect([status, stdout]).toEqual([3, ""]);
});

// /dev/full takes every write for one to a full disk.
describe.skipIf(!existsSync("/dev/full"))("a worker (skipped where there is no /dev/full)", () => {
  test("that meets a full disk says so, and where, as the program itself would", async () => {
    const folder = path.join(scratch, "full");
    await writeEven(folder, every(1, 0, 30));
    const plan = writePlan(folder, {
      window: "{ from: 2031-06-01T12:00:00Z, to: 2031-06-01T12:30:00Z }",
      radars: "[{ id: zzeve, medianRoundMinutes: 1, maxGapMinutes: 2.5 }]",
      intervals: "{ grids: PT15M }",
    });
    const { runDigest } = JSON.parse(total(plan, "run", ["--dry-run", "--json"]).stdout) as RunManifest;
    const unfinished = path.join(folder, "run", ".unfinished");
    writeIn(unfinished, "run.json", JSON.stringify({ runDigest }));
    mkdirSync(path.join(unfinished, "units"));
    const full = path.join(unfinished, "units", "unit-00001.part");
    symlinkSync("/dev/full", full);
    const { status, stderr } = total(plan, "run", ["--workers", "2"]);
    expect(stderr.trimEnd().split("\n").slice(-3)).toEqual([
      "error: the disk is full",
      `  where: ${full}`,
      expect.stringMatching(/^ {2}fix: {3}.*again/),
    ]);
    expect(status).toBe(1);
  });
});
