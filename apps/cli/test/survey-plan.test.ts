import {
  copyFileSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  symlinkSync,
  truncateSync,
  writeFileSync,
} from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import type { Notice } from "@rainreckon/core";
import { writeGeoTiff } from "@rainreckon/formats";
import { generateStorm, TINY } from "@rainreckon/test-data/storm";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { parseDocument } from "yaml";
import { planReportSchema } from "../src/commands/plan.ts";
import { loadPlan } from "../src/plan/load.ts";
import { type Findings, surveySchema } from "../src/survey/findings.ts";
import { radarFindings, type SeenSweep } from "../src/survey/radars.ts";
import { survey } from "../src/survey/survey.ts";
import { walkFiles } from "../src/survey/walk.ts";
import type { Terminal } from "../src/ui/terminal.ts";
import { cli, ensureBuilt, inProcess } from "./run-cli.ts";

const scratch = mkdtempSync(path.join(tmpdir(), "rainreckon-survey-"));
const storm = path.join(scratch, "storm");
const [radar] = TINY.radars;

beforeAll(async () => {
  ensureBuilt();
  await generateStorm({ ...TINY, folder: storm });
});
afterAll(() => rmSync(scratch, { recursive: true }));

/** A fresh copy of the storm's scans, to spoil. */
function scansIn(name: string): { folder: string; files: string[] } {
  const folder = path.join(scratch, name);
  mkdirSync(folder, { recursive: true });
  const from = path.join(storm, "radar", radar!.node);
  const files = readdirSync(from)
    .sort()
    .map((file) => {
      copyFileSync(path.join(from, file), path.join(folder, file));
      return path.join(folder, file);
    });
  return { folder, files };
}

const SILENT: Terminal = {
  json: true,
  quiet: true,
  debug: false,
  live: false,
  result: () => undefined,
  note: () => undefined,
  strong: (text) => text,
};

/** What the command finds, without a process of its own: those take their time to start. */
async function surveyed(...paths: string[]): Promise<Findings> {
  return surveySchema.parse((await survey(paths, walkFiles(paths), SILENT)).findings);
}

const toldOf = (findings: Findings) =>
  findings.wrong.map(({ what, where, fix }) => `${where}: ${what}; ${fix}`);

describe("survey of the invented storm", () => {
  test("finds the radar as the storm's preset describes it", async () => {
    const [found, ...others] = (await surveyed(storm)).radars;
    expect(others).toEqual([]);
    expect(found).toMatchObject({
      id: radar!.node,
      name: radar!.name,
      antennaHeightM: radar!.antennaHeightM,
      wavelengthCm: radar!.wavelengthM * 100,
      band: radar!.band,
      beamWidthDeg: radar!.beamWidthDeg,
      roundCount: TINY.minutes / TINY.roundMinutes,
      medianRoundMinutes: TINY.roundMinutes,
      elevationsDeg: radar!.sweeps.map((sweep) => sweep.elevationDeg),
      maxRangeKm: (radar!.gateM * radar!.gateCount) / 1000,
      gaps: [],
    });
    const start = TINY.startEpochMs + radar!.sweeps[0]!.startSecond * 1000;
    expect(Date.parse(found!.firstStart)).toBe(start);
  });

  test("finds the gauges with their stations, and the planted ones that lack something", async () => {
    const findings = await surveyed(storm);
    const truth = JSON.parse(readFileSync(path.join(storm, "truth", "truth.json"), "utf8")) as {
      gauges: { network: string; id: string }[];
    };
    const planted = new Map<string, string[]>();
    for (const { network, id } of truth.gauges) planted.set(network, [...(planted.get(network) ?? []), id]);
    for (const [network, ids] of planted) {
      const found = findings.gauges.find((gauge) => gauge.network.value === network);
      // A gauge that counts tips has no line where no tip fell.
      const text = readFileSync(found!.file, "utf8");
      const written = ids.filter((id) => new RegExp(`(^|[\\n,])${id}[,\\n]`).test(text));
      expect(written.length, network).toBeGreaterThan(1);
      expect([...found!.gaugeIds].sort(), network).toEqual(written.sort());
    }
    expect(findings.gauges.map(({ layout }) => layout.value).sort()).toEqual(["long", "long", "wide"]);
    const told = toldOf(findings).join("\n");
    expect(told).toMatch(
      /saltwater\.csv: gauge SW-10 has readings and no station; add it to .*saltwater_stations\.csv/,
    );
    expect(told).toMatch(/saltwater\.csv: the stamps name no zone; .*zone and dst/);
    expect(told).toMatch(
      /moor_stations\.csv, line 14: station M13 lies \d+ km beyond the reach of every radar/,
    );
    expect(findings.catchments.map(({ polygonCount, idField }) => [polygonCount, idField?.value])).toEqual([
      [5, "id"],
    ]);
  });

  test("ends with what can be made of it and the command to type, which then works", () => {
    const { status, stdout } = cli(["survey", "storm"], scratch);
    expect(status).toBe(0);
    expect(stdout).toMatch(/^17 files under storm\n/);
    expect(stdout).toContain(
      "a total for 2031-05-20 12:00 UTC to 2031-05-20 12:20 UTC (20 min) from 1 radar: zzsal",
    );
    const next = stdout.trimEnd().split("\n").at(-1)!.trim();
    expect(next).toBe("rainreckon plan storm -o plan.yaml");
    const planned = cli([...next.split(" ").slice(1)], scratch);
    expect(planned.status, planned.stderr).toBe(0);
    expect(planned.stdout.trimEnd().split("\n").at(-1)!.trim()).toBe("rainreckon total plan.yaml --out run");
  });
});

describe("survey of spoilt input tells one line each and goes on", () => {
  test("a truncated scan, a table that is none, a copy, a correction, a link that leads out", async () => {
    const { folder, files } = scansIn("spoilt");
    truncateSync(files[1]!, 5000);
    copyFileSync(files[0]!, path.join(folder, "copy.h5"));
    writeFileSync(path.join(folder, "junk.csv"), "no table\nat all\n");
    symlinkSync(path.join(storm, "gauges"), path.join(folder, "out"));
    const findings = await surveyed(folder);
    const told = toldOf(findings);
    expect(told.filter((line) => line.includes(path.basename(files[1]!)))).toHaveLength(1);
    expect(told.filter((line) => line.includes("junk.csv"))).toHaveLength(1);
    expect(told.filter((line) => line.includes("links are not followed"))).toHaveLength(1);
    expect(findings.gauges).toEqual([]);
    expect(findings.radars[0]).toMatchObject({
      roundCount: 3,
      resent: { sameFile: radar!.sweeps.length, otherFile: 0 },
      medianRoundMinutes: 7.5,
    });
  });

  test("a hole is told where it is, with its length", () => {
    const header = (startMinute: number): SeenSweep => ({
      format: "ODIM_H5",
      header: {
        site: { id: "zzhol", lonDeg: 3, latDeg: 52, antennaHeightM: 10 },
        origin: { path: `${startMinute}.h5`, dataset: "dataset1" },
        elevationDeg: 0.5,
        rayCount: 360,
        gateCount: 100,
        firstGateCentreM: 500,
        gateLengthM: 1000,
        startEpochMs: TINY.startEpochMs + startMinute * 60_000,
        endEpochMs: TINY.startEpochMs + startMinute * 60_000 + 30_000,
        quantities: ["DBZH"],
        wavelengthM: 0.053,
        beamWidthDeg: { horizontal: 1, vertical: 1 },
        remarks: [],
      },
    });
    const told: Notice[] = [];
    // Rounds every 5 min; from 12:15 to 12:30 nothing: from the end of one to the start of the next 14 min 30 s.
    const { radars } = radarFindings([0, 5, 10, 15, 30, 35, 40].map(header), (notice) => told.push(notice));
    expect(radars[0]!.medianRoundMinutes).toBe(5);
    expect(radars[0]!.gaps).toEqual([
      { from: "2031-05-20T12:15:30Z", to: "2031-05-20T12:30:00Z", minutes: 14.5 },
    ]);
    expect(told.map(({ what, where }) => `${where}: ${what}`)).toEqual([
      "radar zzhol: no sweep for 14 min 30 s, from 2031-05-20 12:15:30 UTC",
    ]);
  });

  test("names that hold control characters come out harmless", async () => {
    const folder = path.join(scratch, "names");
    mkdirSync(folder);
    writeFileSync(
      path.join(folder, "\u001b[31mred\u0007.csv"),
      "time,<b>=1+1\n2031-05-20T12:05:00Z,0.2\n2031-05-20T12:10:00Z,0.4\n",
    );
    const { stdout, stderr } = await inProcess(["survey", folder]);
    expect(stdout).toContain("[31mred.csv");
    expect(stdout + stderr).not.toMatch(/[\u0000-\u0009\u000b-\u001f\u007f-\u009f]/);
  });

  test("one instant per site is a rate, not a total: exit 3 with that sentence", async () => {
    const { files } = scansIn("single");
    expect((await surveyed(files[0]!)).possible.join()).toContain(
      "one instant per site is a rate, not a total",
    );
    const planned = await inProcess(["plan", files[0]!, "-o", path.join(scratch, "single.yaml"), "--quiet"]);
    expect(planned.status).toBe(3);
    expect(planned.stderr).toMatch(/^error: one instant per site is a rate, not a total\n/);
  });
});

describe("plan", () => {
  const planFile = path.join(scratch, "plans", "storm.yaml");

  test("is written with paths from its own folder, loads, and names what was found", async () => {
    const { status, stdout, stderr } = cli(["plan", "storm", "-o", "plans/storm.yaml", "--json"], scratch);
    expect(status, stderr).toBe(0);
    const report = planReportSchema.parse(JSON.parse(stdout));
    expect(report).toMatchObject({ action: "written", radars: [radar!.node], catchmentCount: 5 });
    const loaded = await loadPlan(planFile);
    expect(loaded.notices).toEqual([]);
    expect(loaded.scanFiles).toHaveLength(4);
    expect(loaded.plan.scans).toEqual(["../storm/**/*.h5"]);
    expect(loaded.plan.window).toEqual({
      from: "2031-05-20T12:00:00Z",
      to: "2031-05-20T12:20:00Z",
      zone: "UTC",
    });
    expect(loaded.plan.radars[0]).toMatchObject({
      medianRoundMinutes: 5,
      maxGapMinutes: 12.5,
      relation: "marshall-1955-200/1.6",
    });
    expect(loaded.plan.gauges.map(({ network }) => network)).toEqual(["moor", "saltwater", "tideway"]);
    expect(loaded.plan.grid).toMatchObject({ cellM: 1000 });
    expect(loaded.plan.grid.crs).toMatch(/^\+proj=laea \+lat_0=52\.5 \+lon_0=3 /);
    for (const { files, stationsFiles } of loaded.gaugeFiles) {
      expect(files).toHaveLength(1);
      expect(readFileSync(stationsFiles[0]!, "utf8")).toMatch(/^id,/);
    }
  });

  test("marks every value as found, guessed or default, and says that the relation was not chosen", () => {
    const text = readFileSync(planFile, "utf8");
    const values = text.split("\n").filter((line) => /^\s*(- )?[\w]+: \S/.test(line));
    expect(values.length).toBeGreaterThan(60);
    expect(values.filter((line) => !/ # (found|guessed|default)\b/.test(line))).toEqual([]);
    expect(text).toMatch(/relation: marshall-1955-200\/1\.6 # default: it was not chosen/);
    expect(text).toMatch(/\n# ---- The rest/);
  });

  test("is not written over without being told to", async () => {
    const before = readFileSync(planFile, "utf8");
    const { status, stderr } = await inProcess(["plan", storm, "-o", planFile]);
    expect(status).toBe(2);
    expect(stderr).toMatch(/error: there is a plan already\n {2}where: .*\n {2}fix: .*--update.*--force/);
    expect(readFileSync(planFile, "utf8")).toBe(before);
  });

  test("lays the grid cell upon cell with a raster, and not over the grid of a plan that is there", async () => {
    const grid = { crs: "EPSG:32631", westM: 480_050, northM: 5_830_100, cellM: 500, nx: 90, ny: 70 };
    const raster = path.join(scratch, "like.tif");
    const values = new Float32Array(grid.nx * grid.ny);
    const projString = "+proj=utm +zone=31 +datum=WGS84 +units=m";
    await writeGeoTiff(raster, { grid, projString, values, description: "height", unit: "m" });
    const like = path.join(scratch, "like.yaml");
    const args = ["plan", storm, "-o", like, "--quiet", "--grid-like", raster];
    expect((await inProcess(args)).status).toBe(0);
    expect((await loadPlan(like)).plan.grid).toEqual(grid);
    expect(readFileSync(like, "utf8")).toContain("westM: 480050 # found: that of like.tif");
    // EPSG:2263 counts in feet of the survey of the United States.
    const feet = path.join(scratch, "feet.tif");
    await writeGeoTiff(feet, {
      grid: { ...grid, crs: "EPSG:2263" },
      projString,
      values,
      description: "height",
      unit: "m",
    });
    const other = ["plan", storm, "-o", path.join(scratch, "feet.yaml"), "--grid-like", feet];
    const refused = await inProcess(other);
    expect([refused.status, refused.stderr]).toEqual([
      2,
      expect.stringContaining("does not count in metres"),
    ]);
    const again = await inProcess([...args, "--update"]);
    expect([again.status, again.stderr]).toEqual([2, expect.stringContaining("leaves the grid alone")]);
  });

  test("stays byte for byte the same when --update finds nothing new", async () => {
    const before = readFileSync(planFile, "utf8");
    const { status, stdout } = await inProcess(["plan", storm, "-o", planFile, "--update", "--json"]);
    expect(status).toBe(0);
    expect(planReportSchema.parse(JSON.parse(stdout))).toMatchObject({ action: "unchanged", changes: [] });
    expect(readFileSync(planFile, "utf8")).toBe(before);
  });

  test("keeps edits and comments when --update adds what is new", async () => {
    const edited = parseDocument(readFileSync(planFile, "utf8"));
    edited.setIn(["radars", 0, "id"], "another");
    edited.setIn(["radars", 0, "offsetDb"], 1.5);
    edited.deleteIn(["gauges", 1]);
    edited.delete("catchments");
    const text = edited
      .toString({ lineWidth: 0 })
      .replace("title: Rain total", "# Asked for on the telephone.\ntitle: My own title");
    writeFileSync(planFile, text);
    const { status, stdout, stderr } = await inProcess(["plan", storm, "-o", planFile, "--update", "--json"]);
    expect(status, stderr).toBe(0);
    expect(planReportSchema.parse(JSON.parse(stdout)).changes).toEqual([
      `radar ${radar!.node} added`,
      "gauge network saltwater added",
      "catchments added",
    ]);
    const after = readFileSync(planFile, "utf8");
    const kept = text.split("\n").filter((line) => !after.includes(line));
    expect(kept).toEqual([]);
    const { plan } = await loadPlan(planFile);
    expect(plan.radars.map(({ id, offsetDb }) => [id, offsetDb])).toEqual([
      ["another", 1.5],
      [radar!.node, 0],
    ]);
    expect(plan.title).toBe("My own title");
  });

  test("that has a fault is not updated but told of, and left as it is", async () => {
    const broken = path.join(scratch, "broken.yaml");
    writeFileSync(broken, "title: x\nwidnow: {}\n");
    const { status, stderr } = await inProcess(["plan", storm, "-o", broken, "--update", "--quiet"]);
    expect(status).toBe(2);
    expect(stderr).toContain(`where: ${broken}, line 2, widnow`);
    expect(stderr).toContain('did you mean "window"?');
    expect(readFileSync(broken, "utf8")).toBe("title: x\nwidnow: {}\n");
  });

  test("goes nowhere where nothing can be written", async () => {
    writeFileSync(path.join(scratch, "a-file"), "");
    const { status, stderr } = cli([
      "plan",
      storm,
      "-o",
      path.join(scratch, "a-file", "plan.yaml"),
      "--quiet",
    ]);
    expect(status).toBe(2);
    expect(stderr).toMatch(/^error: .+\n {2}where: .+\n {2}fix: .+\n$/);
  });
});

const REAL = process.env.RAINRECKON_REAL;
if (REAL === undefined) console.log("RAINRECKON_REAL is not set: survey and plan of real scans are skipped");

describe.skipIf(REAL === undefined)("real scans (skipped unless RAINRECKON_REAL is set)", () => {
  test("the ten one-sweep files yield the plan for 06:50 to 07:00", async () => {
    const ten = readdirSync(REAL!)
      .filter((name) => name.startsWith("T_PAZ"))
      .map((name) => path.join(REAL!, name));
    expect(ten).toHaveLength(10);
    const plan = path.join(scratch, "ten.yaml");
    const { status, stderr } = await inProcess(["plan", ...ten, "-o", plan]);
    expect(status, stderr).toBe(0);
    const loaded = await loadPlan(plan);
    expect(loaded.plan.window).toMatchObject({ from: "2023-04-20T06:50:00Z", to: "2023-04-20T07:00:00Z" });
    expect(loaded.scanFiles).toHaveLength(10);
    expect(loaded.plan.radars.map(({ id }) => id)).toEqual(["frave"]);
  });

  test("a survey counts the sweeps that expected.json lists, and says what it cannot read", async () => {
    const expected = JSON.parse(readFileSync(path.join(REAL!, "expected.json"), "utf8")) as {
      file: string;
      format: string;
      site?: string;
      dataset: string;
    }[];
    const sweepsOf = (site: string) =>
      new Set(expected.filter((one) => one.site?.includes(site)).map((one) => `${one.file} ${one.dataset}`))
        .size;
    const findings = await surveyed(REAL!);
    const counts = findings.radars.map(({ id, sweepCount }) => [id, sweepCount]);
    expect(counts).toContainEqual(["frave", sweepsOf("NOD:frave")]);
    expect(counts).toContainEqual(["norst", sweepsOf("NOD:norst")]);
    expect(toldOf(findings).join("\n")).toContain("radar norst: the files give no wavelength");
  });
});
