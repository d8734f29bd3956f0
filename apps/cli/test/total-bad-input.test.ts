import {
  copyFileSync,
  existsSync,
  mkdirSync,
  readdirSync,
  readFileSync,
  rmSync,
  symlinkSync,
  truncateSync,
} from "node:fs";
import path from "node:path";
import h5wasm from "h5wasm/node";
import { beforeAll, describe, expect, test } from "vitest";
import {
  area,
  box,
  planText,
  RADAR,
  SOUND_AREA,
  SOUND_GAUGES,
  scanAt,
  spoilChunk,
  sweepAt,
  writeAreas,
  writeGauges,
  writeScans,
} from "./even-rain.ts";
import { writeVolume } from "./odim-scans.ts";
import { type CliResult, ensureBuilt } from "./run-cli.ts";
import { csvRows, manifestOf, type RunManifest, scratchFolder, total, writeIn } from "./total-kit.ts";

const scratch = scratchFolder("bad-input");
/** Short pairs: a mistaken unit is told by several wet intervals, not by one. */
const PAIRS = { pairs: "{ interval: PT5M }" };

beforeAll(ensureBuilt);

describe("a folder in which nearly everything that can be wrong is wrong", () => {
  const folder = path.join(scratch, "pile");
  const run = path.join(folder, "run");
  let result: CliResult;
  let lines: string[];

  beforeAll(async () => {
    await writeScans(folder, [20, 25, 30, 40, 45, 50]);
    await writeVolume(scanAt(folder, 25), RADAR, [
      sweepAt(25),
      sweepAt(25, { elevationDeg: 2, without: ["rscale"] }),
    ]);
    await writeVolume(scanAt(folder, 30), RADAR, [sweepAt(30, { without: ["rstart"] })]);
    truncateSync(await writeVolume(scanAt(folder, 20), RADAR, [sweepAt(20)]), 3000);
    spoilChunk(await writeVolume(scanAt(folder, 40), RADAR, [sweepAt(40)]));
    await writeVolume(scanAt(folder, 45), RADAR, [sweepAt(45, { quantity: "TH" })]);
    await writeVolume(scanAt(folder, 50), RADAR, [sweepAt(50, { gain: 0 })]);
    const scan = (name: string) => path.join(folder, "scans", name);
    await writeVolume(scan("a-second-site.h5"), { ...RADAR, lonDeg: 4.5 }, [sweepAt(30)]);
    await writeVolume(scan("day-before.h5"), RADAR, [sweepAt(-1440)]);
    await writeVolume(scan("not-planned.h5"), { ...RADAR, node: "zzoth" }, [sweepAt(30)]);
    copyFileSync(scanAt(folder, 10), scan("zz-copy.h5"));
    writeIn(folder, "scans/words.h5", "this is no scan\n");
    const other = new h5wasm.File(scan("other.h5"), "w");
    other.create_dataset({ name: "numbers", data: new Float64Array(3) });
    other.close();

    writeGauges(folder, [
      ...SOUND_GAUGES,
      { id: "007", times: 1.2 },
      { id: "NO", times: 1.2 },
      { id: "12:30", times: 1.2 },
      { id: "homeless", times: 1, station: "" },
      { id: "far", times: 1, station: "far,Far,9.1,48.2" },
      { id: "swapped", times: 1, station: "swapped,Swapped,52.6,3.1" },
      { id: "nowhere", times: 1, station: "nowhere,Nowhere,3.1,97" },
      { id: "tenfold", times: 10 },
      { id: "inches", times: 1 / 25.4 },
      { id: "per-hour", times: 12 },
    ]);
    writeAreas(folder, [
      SOUND_AREA,
      area("007", "Leading zeros", [box(2.9, 52.4)]),
      area("NO", "Not a no", [box(2.9, 52.6)]),
      area("bow", "Bow tie", [
        [
          [3.1, 52.3],
          [3.2, 52.4],
          [3.2, 52.3],
          [3.1, 52.4],
          [3.1, 52.3],
        ],
      ]),
      area("out", "Outside", [box(12, 48)]),
      area("edge", "At the edge", [box(3.59, 52.5)]),
    ]);
    result = total(writeIn(folder, "plan.yaml", planText(PAIRS)), "run", ["--strict"]);
    lines = result.stderr.trimEnd().split("\n");
  });

  test.each([
    [
      "truncated scan",
      /^scans\/round-25\.h5: the file is cut short: 3000 of \d+ bytes are there; fetch it again$/,
    ],
    [
      "chunk that fails to decode",
      /^scans\/round-45\.h5, dataset1\/data1\/data: .*cannot be decoded; fetch it again$/,
    ],
    ["HDF5 that is not ODIM", /^scans\/other\.h5: .*is not ODIM_H5.*; leave it out/],
    ["no HDF5 at all", /^scans\/words\.h5: not a radar scan of a known format; leave it out/],
    [
      "sweep without DBZH, with TH",
      /^scans\/round-50\.h5, dataset1: no DBZH; the sweep offers TH; .*set moment: TH; set moment of radar zzeve in the plan$/,
    ],
    ["one sweep of a file that cannot be used", /^scans\/round-30\.h5, dataset2.*: .*; .+$/],
    [
      "what a reader had to assume",
      /^radar zzeve: The file does not say where the first gate begins; .* \(1 sweep\); nothing to do, if that is right$/,
    ],
    ["gain 0", /^scans\/round-55\.h5, dataset1\/data1: the gain of DBZH is 0 .*; correct what\/gain/],
    [
      "two sites with one id",
      /^scans\/a-second-site\.h5, dataset1: radar id "zzeve" stands 10\d\.\d km from .*two sites with one id; keep the files of one site in this run$/,
    ],
    [
      "scan outside the window",
      /^radar zzeve: 1 sweep lies outside the window; nothing to do, or widen the window/,
    ],
    [
      "radar that is not planned",
      /^scans\/not-planned\.h5: radar "zzoth" is not in the plan .*; run plan --update/,
    ],
    ["scan under two names", /^scans\/zz-copy\.h5: same bytes as scans\/round-15\.h5; nothing to do/],
    ["gauge without a station", /^net homeless: it has readings but no station; add it to the stations file/],
    ["gauge outside the grid", /^net far: it lies outside the grid; widen the grid/],
    [
      "swapped coordinates",
      /^net swapped: its coordinates 52\.6, 3\.1 look swapped: .*; exchange them in the stations file/,
    ],
    ["no place on Earth", /^net nowhere: its coordinates 3\.1, 97 are no place on Earth; check them/],
    [
      "polygon that crosses itself",
      /^areas\.geojson, feature \d: catchment "bow": its outline crosses itself near .*; repair/,
    ],
    ["polygon outside", /^areas\.geojson, catchment out: it lies outside the grid; widen the grid/],
    [
      "polygon partly outside",
      /^areas\.geojson, catchment edge: \d+ % of it lies outside the grid and counts as not observed;/,
    ],
  ] as const)("one line for: %s", (_, line) => {
    expect(lines.filter((one) => line.test(one))).toHaveLength(1);
  });

  test("nothing else is said, and all of it stands in the manifest, with no path of this machine", () => {
    const { notices } = manifestOf(run);
    expect(notices).toHaveLength(19);
    expect(lines).toHaveLength(20);
    expect(lines.at(-1)).toBe(
      "19 things were left out, doubted or assumed; all of it stands in manifest.json",
    );
    for (const file of ["manifest.json", "report.html", "README.txt", "scores.json"])
      expect(readFileSync(path.join(run, file), "utf8")).not.toContain(scratch);
  });

  test("the rest goes on; only --strict makes it 1", () => {
    expect(result.status).toBe(1);
    expect(result.stdout).toMatch(/^at least \d+\.\d mm over all catchments together/m);
    expect(total(path.join(folder, "plan.yaml"), "run").status).toBe(0);
    // The run is there already: what was left out in making it still counts.
    expect(total(path.join(folder, "plan.yaml"), "run", ["--strict"]).status).toBe(1);
  });

  test("what is missing is not dry: the minutes of spoilt scans are not observed", () => {
    const sound = csvRows(path.join(run, "catchments.csv")).filter((row) => row.catchment_id === "A");
    // Scans are left from -5 to 15, at 25, 30, 35, and from 55 on. Between 15 and 25 the hole is bridged (10 min);
    // between 35 and 55 it is longer than 12.5 min, so 20 of 60 minutes are not observed.
    expect(sound[0]).toMatchObject({ depth_mm: "", radar_mm: "", observed_fraction: (40 / 60).toFixed(4) });
    expect(sound[0]!.reason).toMatch(/^observed only 66 %: the depth seen is a lower bound$/);
    expect(Number(sound[0]!.depth_observed_mm)).toBeGreaterThan(0);
    const hole = sound.find(
      (row) => row.start === "2031-06-01T12:40:00Z" && row.end === "2031-06-01T12:45:00Z",
    );
    expect(hole).toMatchObject({
      depth_mm: "",
      depth_observed_mm: "",
      reason: "not observed",
      max_cell_mm: "",
    });
  });

  test("the manifest says of each scan what became of it", () => {
    const of = new Map(manifestOf(run).inputs.map((input) => [input.path, input]));
    expect(of.get("scans/round-15.h5")).toMatchObject({ use: "used" });
    expect(of.get("scans/zz-copy.h5")).toMatchObject({ use: "duplicate" });
    for (const name of [
      "round-25",
      "round-45",
      "round-50",
      "round-55",
      "a-second-site",
      "day-before",
      "words",
    ]) {
      const input = of.get(`scans/${name}.h5`);
      expect(input?.use, name).toBe("left out");
      expect(input?.reason, name).toMatch(/\w/);
    }
  });

  test("ids keep their zeros and their colons, and are nowhere read as numbers, times or a no", () => {
    const gauges = csvRows(path.join(run, "gauges.csv")).map((row) => row.gauge_id);
    expect(gauges).toEqual(expect.arrayContaining(["007", "NO", "12:30"]));
    const areas = new Set(csvRows(path.join(run, "catchments.csv")).map((row) => row.catchment_id));
    expect([...areas]).toEqual(["A", "007", "NO", "edge"]);
  });

  test("units that look wrong are named with their factor, and those gauges shape nothing", () => {
    const gauges = new Map(csvRows(path.join(run, "gauges.csv")).map((row) => [row.gauge_id, row]));
    for (const [id, words] of [
      ["tenfold", /10 times too large/],
      ["inches", /25\.4 times too small \(inches read as mm\?\)/],
      ["per-hour", /12 times too large \(mm\/h read as mm per 5 min\?\)/],
    ] as const) {
      const gauge = gauges.get(id)!;
      expect(gauge.verdict, id).toBe("leave out");
      expect(`${gauge.cause} ${gauge.evidence}`, id).toMatch(words);
    }
    const used = csvRows(path.join(run, "pairs.csv")).filter(({ used }) => used === "yes");
    const ids = new Set(used.map((row) => row.gauge_id));
    expect([...ids].sort()).toEqual(["007", "12:30", "NO", "g1", "g2", "g3", "g4", "g5", "g6"]);
  });
});

describe("a run that cannot be made", () => {
  const folder = path.join(scratch, "cannot");
  beforeAll(async () => {
    await writeScans(folder, [0, 5, 10, 20, 25, 35, 40, 50, 55]);
    writeIn(folder, "plan.yaml", planText({ gauges: "", catchments: "" }));
  });

  /** Runs a plan that has a change, and expects three lines a fault and nothing left behind. */
  function refused(change: Readonly<Record<string, string>>, out = "never"): CliResult {
    const plan = writeIn(folder, "changed.yaml", planText({ gauges: "", catchments: "", ...change }));
    const result = total(plan, out);
    expect(result.stdout).toBe("");
    expect(existsSync(path.join(folder, "never"))).toBe(false);
    return result;
  }

  test("no scan at all: exit 3", () => {
    mkdirSync(path.join(folder, "empty"), { recursive: true });
    const { status, stderr } = refused({ scans: '["empty/*.h5"]' });
    expect(status).toBe(3);
    expect(stderr).toMatch(/^empty\/\*\.h5: no file matches; mend the path/);
    expect(stderr).toMatch(
      /\nerror: no usable scan is left\n {2}where: 0 files under empty.*\n {2}fix: {3}\S/,
    );
  });

  test("scans of another day only: exit 3", () => {
    const { status, stderr } = refused({
      window: "{ from: 2031-07-01T12:00:00Z, to: 2031-07-01T13:00:00Z }",
    });
    expect(status).toBe(3);
    expect(stderr).toMatch(/^radar zzeve: 6 sweeps lie outside the window; /);
    expect(stderr).toContain("\nerror: no usable scan is left\n");
  });

  test("one round in reach of the window is an instant too, whatever lies further off: exit 3", () => {
    const { status, stderr } = refused({
      window: "{ from: 2031-06-01T13:15:00Z, to: 2031-06-01T14:15:00Z }",
    });
    expect(status, stderr).toBe(3);
    expect(stderr).toContain("error: one instant per site is a rate, not a total\n");
  });

  test.each([
    [
      { titel: "x" },
      /^error: there is no key "titel" here\n {2}where: changed\.yaml, line \d+, .*\n {2}fix: {3}did you mean "title"\?/,
    ],
    [
      { grid: "{ crs: EPSG:3035, westM: wide, northM: 1, cellM: 1000, nx: 5, ny: 5 }" },
      /error: grid\.westM: .*\n {2}where: changed\.yaml, line \d+, grid\.westM\n {2}fix: {3}\S/,
    ],
    [
      { window: "{ from: 2031-06-01T13:00:00Z, to: 2031-06-01T12:00:00Z }" },
      /error: the window ends \(.*\) before it starts \(.*\)\n {2}where: changed\.yaml, line 2, .*\n {2}fix: {3}put from before to/,
    ],
    [
      { grid: "{ crs: EPSG:999999, westM: 0, northM: 1, cellM: 1000, nx: 5, ny: 5 }" },
      /error: .*EPSG:999999.*\n {2}where: plan, grid\.crs: EPSG:999999\n {2}fix: {3}\S/,
    ],
  ] as const)("plan with %j: exit 2, with its place", (change, told) => {
    const { status, stderr } = refused(change);
    expect(status).toBe(2);
    expect(stderr).toMatch(told);
  });

  test.each([
    ["under a file", "plan.yaml/run", /error: there is no way to this file/],
    ["a file", "plan.yaml", /error: the output is not a folder/],
    ["a place where nothing can be made", "/proc/rainreckon-run", /error: this folder cannot be written/],
    ["a folder with other things", "scans", /error: this folder holds other files/],
  ] as const)("--out is %s: exit 2", (_, out, told) => {
    const before = readdirSync(path.join(folder, "scans"));
    const { status, stderr } = refused({}, out);
    expect(status).toBe(2);
    expect(stderr).toMatch(told);
    expect(stderr).toMatch(/\n {2}where: .*\n {2}fix: {3}choose another/);
    expect(readdirSync(path.join(folder, "scans"))).toEqual(before);
  });
});

// /dev/full takes every write for one to a full disk: the kernel's own ENOSPC, on the path that the run writes to.
describe.skipIf(!existsSync("/dev/full"))("a full disk (skipped where there is no /dev/full)", () => {
  test("exit 1 with the place, at whatever it was met; the same command goes on once there is room", async () => {
    const folder = path.join(scratch, "full");
    await writeScans(folder, [10, 20, 25, 35, 40, 50, 55]);
    const plan = writeIn(folder, "plan.yaml", planText({ gauges: "", catchments: "" }));
    const { runDigest } = JSON.parse(total(plan, "run", ["--dry-run", "--json"]).stdout) as RunManifest;
    const unfinished = path.join(folder, "run", ".unfinished");
    writeIn(unfinished, "run.json", JSON.stringify({ runDigest }));
    for (const [part, file] of [
      ["units", "unit-00000.part"],
      ["out", "totals.nc"],
      ["out", "report.html"],
    ] as const) {
      mkdirSync(path.join(unfinished, part), { recursive: true });
      const full = path.join(unfinished, part, file);
      rmSync(full, { force: true });
      symlinkSync("/dev/full", full);
      const { status, stderr, stdout } = total(plan, "run");
      const [what, where, fix] = stderr.trimEnd().split("\n").slice(-3);
      expect(what).toMatch(/^error: (the disk is full|no space left while writing)$/);
      expect(where).toBe(`  where: ${full}`);
      expect(fix).toMatch(/^ {2}fix: {3}.*again/);
      expect(status).toBe(1);
      expect(stdout).toBe("");
      expect(existsSync(path.join(folder, "run", "manifest.json"))).toBe(false);
      rmSync(full, { force: true });
    }
    const again = total(plan, "run");
    expect(again.status, again.stderr).toBe(0);
    expect(again.stdout).toContain("(1 unit of work was there from before)");
    expect(manifestOf(path.join(folder, "run")).runDigest).toBe(runDigest);
  });
});
