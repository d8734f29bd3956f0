import { execFileSync } from "node:child_process";
import { existsSync, mkdirSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import path from "node:path";
import { beforeAll, describe, expect, test } from "vitest";
import { type EventReport, eventSchema, type PlaceReport } from "../src/event/schema.ts";
import {
  planText,
  RATE_MM_PER_HOUR,
  SOUND_AREA,
  SOUND_GAUGES,
  writeAreas,
  writeGauges,
  writeScans,
} from "./even-rain.ts";
import { writeShowers } from "./explain-world.ts";
import { inProcess } from "./run-cli.ts";
import { csvRows, fingerprints, manifestOf, scratchFolder, writeIn } from "./total-kit.ts";

const scratch = scratchFolder("event");
const world = path.join(scratch, "even");
const run = path.join(world, "run");
const ASSETS = "{ file: assets.csv, columns: { id: id, name: name, x: lon, y: lat } }";
/** What the gauges say of an hour of even rain: a fifth more than the radar. */
const HOUR_MM = 1.2 * RATE_MM_PER_HOUR;

beforeAll(async () => {
  await writeScans(world);
  writeGauges(world, SOUND_GAUGES);
  writeAreas(world, [SOUND_AREA]);
  writeIn(
    world,
    "assets.csv",
    'id,name,lon,lat\nPS-07,"Pump, seven",3.1,52.55\nFAR,Far away,9,52.5\nPS-08,,3.05,52.6\n',
  );
  const plan = writeIn(world, "plan.yaml", planText({ assets: ASSETS }));
  const { status, stderr } = await inProcess(["total", plan, "--out", run]);
  expect([status, stderr]).toEqual([
    0,
    expect.stringContaining("assets.csv, line 3: asset FAR lies outside the grid"),
  ]);
}, 60_000);

async function event(folder: string, ...flags: readonly string[]): Promise<EventReport> {
  const { status, stdout, stderr } = await inProcess(["event", folder, ...flags, "--json", "--quiet"]);
  expect([status, stderr]).toEqual([0, ""]);
  return eventSchema.parse(JSON.parse(stdout));
}

function placeOf({ places }: EventReport, id: string): PlaceReport {
  const found = places.find((place) => place.id === id);
  if (found === undefined)
    throw new Error(`no place ${id} among ${places.map((place) => place.id).join(", ")}`);
  return found;
}

const peak = ({ maxima }: Pick<PlaceReport, "maxima">, minutes: number) => {
  const found = maxima.find(({ durationMinutes }) => durationMinutes === minutes);
  if (found === undefined) throw new Error(`no duration of ${minutes} min`);
  return found;
};

/** The echo is 40 dBZ, and half a decibel more in 6 of 13 gates: by Z = 200 R^1.6 the mean rate is 3.4 % more. */
const RADAR_MM = RATE_MM_PER_HOUR * (1 + (6 / 13) * (10 ** (0.5 / 16) - 1));
const within = (mm: number | null, wanted: number) =>
  expect(Math.abs((mm ?? 0) / wanted - 1)).toBeLessThan(0.01);

describe("what total writes of assets", () => {
  test("depths of the cell by step, those of a factor of 1.2, and the range of the nine cells", () => {
    const rows = csvRows(path.join(run, "assets.csv"));
    const own = rows.filter(({ asset_id }) => asset_id === "PS-07");
    expect(own).toHaveLength(13);
    expect(Object.keys(own[0]!).join(",")).toBe(
      "asset_id,name,start,end,depth_mm,depth_observed_mm,reason,radar_mm,adjusted_mm,gauges_only_mm,p10_mm,p90_mm,observed_fraction,min_3x3_mm,max_3x3_mm,lon_deg,lat_deg,snow_fraction,melting_fraction",
    );
    const [window, ...steps] = own as [Record<string, string>, ...Record<string, string>[]];
    within(Number(window.depth_mm), HOUR_MM);
    within(Number(window.radar_mm), RADAR_MM);
    expect(Number(window.min_3x3_mm)).toBeLessThanOrEqual(Number(window.depth_mm));
    expect(Number(window.max_3x3_mm)).toBeGreaterThanOrEqual(Number(window.depth_mm));
    const sum = steps.reduce((total, row) => total + Number(row.depth_mm), 0);
    expect(Math.abs(sum - Number(window.depth_mm))).toBeLessThan(0.01);
    // No step from echo to rain was taken, so nobody told snow from rain.
    expect([window.snow_fraction, window.melting_fraction]).toEqual(["", ""]);
  });

  test("the manifest knows the table, and how many of it have figures", () => {
    const { inputs, counts, outputs } = manifestOf(run);
    expect(inputs).toContainEqual(expect.objectContaining({ path: "assets.csv", use: "used" }));
    expect(counts.assets).toBe(2);
    expect(outputs.map(({ file }) => file)).toContain("assets.csv");
  });

  test("a catchment has its volume: a millimetre on a square kilometre is 1000 m3", () => {
    const [row] = csvRows(path.join(run, "catchments.csv"));
    const wanted = Number(row?.depth_mm) * Number(row?.area_km2) * 1000;
    expect(Math.abs(Number(row?.volume_m3) / wanted - 1)).toBeLessThan(1e-4);
  });
});

describe("event", () => {
  test("an hour of even rain: an event that fills the window, and depths in proportion to their durations", async () => {
    const report = await event(run);
    expect(report.places.map(({ kind, id }) => `${kind} ${id}`)).toEqual([
      "catchment A",
      "asset PS-07",
      "asset PS-08",
    ]);
    const place = placeOf(report, "PS-07");
    expect(place).toMatchObject({ figure: "adjusted", from: "tables", areaKm2: 1, stepMinutes: 5 });
    expect(place.events).toHaveLength(1);
    expect(place.events[0]).toMatchObject({
      start: "2031-06-01T12:00:00Z",
      end: "2031-06-01T13:00:00Z",
      mayBeginEarlier: true,
      mayEndLater: true,
      unseenSteps: 0,
    });
    for (const minutes of [5, 10, 15, 30, 60]) {
      within(peak(place, minutes).depthMm, (HOUR_MM * minutes) / 60);
      within(peak(place, minutes).meanMmPerHour, HOUR_MM);
      within(peak(place, minutes).radarMm, (RADAR_MM * minutes) / 60);
      expect(peak(place, minutes)).toMatchObject({ lowerBound: false, period: null, areaKm2: 1 });
    }
    expect(peak(place, 120)).toMatchObject({ depthMm: null, reason: "longer than what is known" });
    // n / (n - 1/8) for one step of five minutes, and for two (Weiss 1964).
    expect(peak(place, 5).fixedToSlidingRatio).toBeCloseTo(8 / 7, 12);
    expect(peak(place, 10).fixedToSlidingRatio).toBeCloseTo(16 / 15, 12);
    // Nothing is known of the day before.
    expect(place.events[0]?.antecedent[0]).toMatchObject({ hours: 24, depthMm: null, observedFraction: 0 });
  });

  test("the rule is the command line's, the plan's, or nobody's, and says so", async () => {
    expect((await event(run, "--asset", "PS-07")).rule).toMatchObject({
      dryMinutes: 360,
      minDepthMm: 5,
      whose: expect.stringContaining("house rule"),
    });
    const { rule, places } = await event(
      run,
      "--asset",
      "PS-07",
      "--dry-time",
      "PT30M",
      "--threshold-mm",
      "500",
    );
    expect(rule).toMatchObject({ dryMinutes: 30, minDepthMm: 500, whose: "the command line" });
    expect(places[0]?.events).toEqual([]);
    expect(places[0]?.dropped.count).toBe(1);
  });

  test("depth by area and duration, with the storm's centre; even rain is as deep over any area", async () => {
    const { areaDuration } = await event(run, "--asset", "PS-07");
    expect(areaDuration?.figure).toBe("adjusted");
    expect(areaDuration?.rows.map(({ durationMinutes }) => durationMinutes)).toEqual(
      expect.arrayContaining([60]),
    );
    for (const { depthMm } of areaDuration?.rows ?? [])
      expect(Math.abs(depthMm / HOUR_MM - 1)).toBeLessThan(0.06);
    expect(areaDuration?.centre?.cellKm2).toBe(1);
  });

  test("every line fits 80 columns, and every peak stands beside its duration and area", async () => {
    const { status, stdout } = await inProcess(["event", run, "--frequency", tableAround(HOUR_MM)]);
    expect(status).toBe(0);
    for (const line of stdout.split("\n")) expect(line.length, line).toBeLessThanOrEqual(80);
    expect(stdout).toContain("mean over 1 km2");
    expect(stdout.replaceAll(/\s+/g, " ")).toContain("may have begun before the window");
  });

  test("--csv has a row for each duration of the window and of each event", async () => {
    const { stdout } = await inProcess(["event", run, "--asset", "PS-07", "--durations", "5,60", "--csv"]);
    const lines = stdout.trim().split("\n");
    expect(lines[0]).toMatch(
      /^place_kind,place_id,name,event,source,duration_min,area_km2,start,end,depth_mm/,
    );
    expect(lines.slice(1).map((line) => line.split(",").slice(-18, -15).join(","))).toHaveLength(4);
    expect(lines[1]).toContain('asset,PS-07,"Pump, seven",0,adjusted,5,');
  });
});

/** A table about a depth of an hour: 2 mm below it every 2 years, 2 mm above it every 100. */
function tableAround(mm: number, head: readonly string[] = ["# series: AMS", "# kind: point"]): string {
  const rows = [30, 120].flatMap((minutes) => [`${minutes},2,${mm - 2}`, `${minutes},100,${mm + 2}`]);
  return writeIn(
    scratch,
    "ddf.csv",
    `${[...head, "duration_min,return_period_years,depth_mm", ...rows].join("\n")}\n`,
  );
}

describe("return periods", () => {
  // By hand: half way between y(2) = 0.36651 and y(100) = 4.60015 is 2.48333; 1 / (1 - exp(-exp(-2.48333))) = 12.5.
  // In the logarithm of the period, for a partial-duration series, it is the root of 200: 14.
  test("half way in depth is half way in the variate of the series; two figures, and the table's ends", async () => {
    const plain = await event(run, "--asset", "PS-07", "--durations", "60");
    const mm = peak(placeOf(plain, "PS-07"), 60).depthMm as number;
    const told = async (...flags: string[]) =>
      peak(placeOf(await event(run, "--asset", "PS-07", "--durations", "5,30,60", ...flags), "PS-07"), 60)
        .period;
    const annual = await told("--frequency", tableAround(mm));
    expect(annual?.years).toBeCloseTo(12.49, 1);
    expect(annual?.text).toBe("12");
    expect(await told("--frequency", tableAround(mm, ["# series: PDS"]))).toMatchObject({ text: "14" });
    // Langbein 1949: 1 / (1 - exp(-1/14.142)) = 14.65.
    const converted = await told("--frequency", tableAround(mm, ["# series: PDS"]), "--as-series", "AMS");
    expect(converted?.years).toBeCloseTo(14.65, 1);
    expect(await told("--frequency", tableAround(mm + 3))).toMatchObject({ text: "<2", is: "below" });
    expect(await told("--frequency", tableAround(mm - 3))).toMatchObject({ text: ">100", is: "above" });
    const outside = await event(run, "--asset", "PS-07", "--durations", "5", "--frequency", tableAround(mm));
    expect(peak(placeOf(outside, "PS-07"), 5).period).toMatchObject({
      text: "–",
      years: null,
      reason: "the table reaches from 30 to 120 min",
    });
  });

  test("a catchment meets the point's depth times its areal reduction, or is cautioned about", async () => {
    const bare = await event(
      run,
      "--catchment",
      "A",
      "--durations",
      "60",
      "--frequency",
      tableAround(HOUR_MM),
    );
    expect(placeOf(bare, "A").notes.join(" ")).toMatch(/compared with depths at a point/);
    const mm = peak(placeOf(bare, "A"), 60).depthMm as number;
    const reductions = writeIn(
      scratch,
      "arf.csv",
      "# source: Invented\nduration_min,area_km2,factor\n60,1,0.8\n60,1000,0.8\n",
    );
    const report = await event(
      run,
      ...["--catchment", "A", "--durations", "60", "--areal-reduction", reductions],
      ...["--frequency", tableAround(mm / 0.8)],
    );
    const reduced = peak(placeOf(report, "A"), 60).period;
    expect(reduced).toMatchObject({ arealReduction: 0.8, is: "at" });
    // 0.8 times a table of 2 mm about mm / 0.8: still half way.
    expect(reduced?.years).toBeCloseTo(12.49, 1);
    expect(placeOf(report, "A").notes).toEqual([]);
  });

  test("among several places the expected number of exceedances is told", async () => {
    const { exceedances, cautions } = await event(run, "--frequency", tableAround(HOUR_MM - 10));
    expect(exceedances?.rows).toEqual([
      { periodYears: 2, expectedPerYear: 1.5, seen: 3 },
      { periodYears: 100, expectedPerYear: 0.03, seen: 3 },
    ]);
    expect(cautions.join(" ")).toMatch(/picks the largest makes the rain look rarer/);
    expect(
      (await event(run, "--asset", "PS-07", "--frequency", tableAround(HOUR_MM))).exceedances,
    ).toBeNull();
  });

  test("without an interval of the depths it is said that the periods have none", async () => {
    const { cautions, places } = await event(run, "--asset", "PS-07", "--frequency", tableAround(HOUR_MM));
    if (places[0]?.window.p10Mm === null) expect(cautions[0]).toMatch(/gives no interval of these depths/);
    else expect(cautions.join(" ")).not.toMatch(/gives no interval/);
  });
});

describe("what is refused", () => {
  const table = (text: string) => writeIn(scratch, "bad.csv", text);
  test.each([
    [
      "a gap",
      () => ["--frequency", table("duration_min,return_period_years,depth_mm\n10,2,8\n10,5,9\n30,2,10\n")],
      /line 4/,
      /gap/,
    ],
    [
      "two units",
      () => ["--frequency", table("duration_min,return_period_years,depth_mm,low_in\n10,2,8,7\n")],
      /line 1/,
      /two units/,
    ],
    [
      "depths that fall",
      () => ["--frequency", table("duration_min,return_period_years,depth_mm\n10,2,8\n10,5,7\n")],
      /line 3/,
      /no larger/,
    ],
    [
      "a reduction without a table",
      () => ["--areal-reduction", "arf.csv"],
      /areal-reduction/,
      /no table of return periods/,
    ],
    [
      "a conversion of an unknown series",
      () => ["--frequency", tableAround(9, []), "--as-series", "PDS"],
      /ddf\.csv/,
      /which series/,
    ],
    ["an asset that is not there", () => ["--asset", "PS-09"], /--asset PS-09/, /no such asset/],
    ["a catchment that is not there", () => ["--catchment", "B"], /--catchment B/, /no such catchment/],
    ["a gauge from the grid", () => ["--gauge", "g1", "--from-grid"], /--from-grid/, /where a gauge stands/],
    ["pages without a folder", () => ["--html"], /command line/, /go together/],
    ["licences without a bundle", () => ["--licence", "x"], /--licence/, /belong to a bundle/],
    [
      "a bundle of several places",
      () => ["--bundle", path.join(scratch, "all.tar.gz")],
      /--bundle/,
      /3 were asked for/,
    ],
  ] as const)("%s", async (_what, flags, where, what) => {
    const { status, stderr, stdout } = await inProcess(["event", run, ...flags(), "--quiet"]);
    expect([status, stdout.trim().split("\n").length > 1]).toEqual([2, false]);
    expect(stderr).toMatch(where);
    expect(stderr).toMatch(what);
  });

  test("assets that all lie outside leave nothing to be told, each with its line", async () => {
    const file = writeIn(scratch, "outside.csv", "id,name,lon,lat\nX,,20,40\nY,,21,400\n");
    const { status, stderr } = await inProcess(["event", run, "--assets", file, "--from-grid"]);
    expect(status).toBe(2);
    expect(stderr).toMatch(/outside\.csv, line 2: asset X lies outside the grid/);
    expect(stderr).toMatch(/outside\.csv, line 3: asset Y is at no place on Earth/);
    expect(stderr).toMatch(/no place is left/);
  });

  test("a table of the run that was changed since", async () => {
    const copy = path.join(scratch, "changed");
    mkdirSync(copy);
    for (const file of readdirSync(run))
      writeFileSync(path.join(copy, file), readFileSync(path.join(run, file)));
    writeFileSync(path.join(copy, "assets.csv"), "asset_id\n");
    const { status, stderr } = await inProcess(["event", copy]);
    expect([status, stderr]).toEqual([2, expect.stringContaining("assets.csv was changed since")]);
  });
});

test("--html writes a page for each place and an index, into an empty folder only", async () => {
  const folder = path.join(scratch, "pages");
  const { status, stderr } = await inProcess([
    "event",
    run,
    "--html",
    "--out",
    folder,
    "--frequency",
    tableAround(HOUR_MM),
  ]);
  expect([status, stderr]).toEqual([0, expect.stringContaining("4 pages in")]);
  expect(readdirSync(folder).sort()).toEqual([
    "asset-PS-07.html",
    "asset-PS-08.html",
    "catchment-A.html",
    "index.html",
  ]);
  const page = readFileSync(path.join(folder, "asset-PS-07.html"), "utf8");
  expect(page).toContain("Pump, seven");
  expect(page).toContain('class="bars adjusted"');
  expect(page).toContain("Prepared by");
  expect(page).not.toMatch(/https?:\/\//);
  const again = await inProcess(["event", run, "--html", "--out", folder]);
  expect([again.status, again.stderr]).toEqual([2, expect.stringContaining("holds other files")]);
});

describe("rain seen in part", () => {
  const partial = path.join(world, "partial");

  // Of scans 20 minutes apart nobody bridges the gap: from 12:15 to 12:35 nothing was observed.
  beforeAll(async () => {
    for (const minute of ["25", "30", "35"]) rmSync(path.join(world, "scans", `round-${minute}.h5`));
    const { status } = await inProcess(["total", path.join(world, "plan.yaml"), "--out", partial, "--quiet"]);
    expect(status).toBe(0);
  }, 60_000);

  test("peaks that reach into the gap are lower bounds, and say so", async () => {
    const place = placeOf(await event(partial, "--asset", "PS-07"), "PS-07");
    expect(peak(place, 10)).toMatchObject({ lowerBound: false, observedFraction: 1 });
    expect(peak(place, 60)).toMatchObject({ lowerBound: true });
    // The tables leave a depth out that was seen to two thirds; the lower bound is still the adjusted one.
    const adjusted = manifestOf(partial).headline.adjustmentMethod !== null;
    expect(place.figure).toBe(adjusted ? "adjusted" : "radar");
    expect(place.window).toMatchObject({ lowerBound: true, adjustedMm: null });
    expect(peak(place, 60).observedFraction).toBeCloseTo(40 / 60, 1);
    expect(place.events[0]).toMatchObject({ unseenSteps: 4, lowerBound: true });
    const { stdout } = await inProcess(["event", partial, "--asset", "PS-07"]);
    expect(stdout).toMatch(/1 h\s+≥ /);
    expect(stdout).toContain("4 steps within it not seen");
  });
});

describe("places that the run holds no steps of", () => {
  const showers = path.join(scratch, "showers");
  const out = path.join(showers, "run");

  beforeAll(async () => {
    const plan = await writeShowers(showers);
    writeIn(showers, "assets.csv", "id,name,lon,lat\nP7,Pump 7,3.1,52.55\n");
    writeFileSync(plan, `${readFileSync(plan, "utf8")}assets: ${ASSETS}\n`);
    const { status } = await inProcess(["total", plan, "--out", out, "--quiet"]);
    expect(status).toBe(0);
  }, 120_000);

  test("made again they have what the tables have, and end on totals.nc to the last bit", async () => {
    const stored = placeOf(await event(out, "--asset", "P7"), "P7");
    const report = await event(out, "--at", "52.55N 3.1E", "--gauge", "net/G3");
    const [point, gauge] = report.places as [PlaceReport, PlaceReport];
    expect(point).toMatchObject({ kind: "point", from: "made again", exact: true });
    for (const minutes of [5, 10, 15, 30, 60, 120]) {
      // Tables hold thousandths of a millimetre.
      expect(
        Math.abs((peak(point, minutes).depthMm ?? 0) - (peak(stored, minutes).depthMm ?? 9)),
      ).toBeLessThan(0.015);
      expect(peak(point, minutes).start).toBe(peak(stored, minutes).start);
    }
    expect(point.window.range3x3?.cellCount).toBe(9);
    expect(gauge).toMatchObject({ kind: "gauge", id: "net/G3", exact: true });
    expect(gauge.gauge?.depthMm).toBeGreaterThan(0);
    expect(gauge.gauge?.maxima).toHaveLength(gauge.maxima.length);
  });

  test("from the grid only whole intervals can be told, and those agree", async () => {
    const grid = (await event(out, "--at", "52.55N 3.1E", "--from-grid")).places[0] as PlaceReport;
    const stored = placeOf(await event(out, "--asset", "P7", "--clock-aligned"), "P7");
    expect(peak(grid, 30)).toMatchObject({ depthMm: null, reason: "no whole number of steps of 60 min" });
    expect(Math.abs((peak(grid, 60).depthMm ?? 0) - (peak(stored, 60).depthMm ?? 9))).toBeLessThan(0.01);
    expect(grid.notes.join(" ")).toMatch(/shorter durations cannot be told/);
  });

  test("a bundle makes its figure again in an empty folder, from nothing else", async () => {
    const bundle = path.join(scratch, "p7.tar.gz");
    const flags = ["--asset", "P7", "--durations", "15,60", "--frequency", tableAround(12)];
    const { status, stderr } = await inProcess([
      ...["event", out, ...flags, "--bundle", bundle],
      ...["--licence", "radar: invented, free", "--prepared-by", "A. Nobody"],
    ]);
    expect([status, stderr]).toEqual([0, expect.stringContaining("p7.tar.gz: ")]);
    // The world it came from is gone.
    const empty = path.join(scratch, "empty");
    mkdirSync(empty);
    execFileSync("tar", ["xzf", bundle, "-C", empty], { stdio: ["ignore", "ignore", "ignore"] });
    rmSync(showers, { recursive: true, force: true });
    const top = path.join(empty, "p7");
    execFileSync("sha256sum", ["--check", "--quiet", "checksums.sha256"], { cwd: top });
    const figure = JSON.parse(readFileSync(path.join(top, "figure.json"), "utf8")) as {
      commands: string[];
      headline: Record<string, number | null>;
      changedSettings: { path: string }[];
      filesBehind: string[];
      licences: string[];
    };
    const [, total, eventAgain] = figure.commands as [string, string, string];
    expect(total).toBe("rainreckon total inputs/plan.yaml --out again");
    const wasIn = process.cwd();
    process.chdir(top);
    try {
      const made = await inProcess([...total.split(" ").slice(1), "--quiet"]);
      expect(made.status).toBe(0);
      const again = await inProcess(eventAgain.split(" ").slice(1));
      expect(again.status).toBe(0);
      expect(JSON.parse(again.stdout)).toEqual(JSON.parse(readFileSync("event.json", "utf8")));
      expect(fingerprints("again")).toEqual(fingerprints("run"));
    } finally {
      process.chdir(wasIn);
    }
    // The figure, and what it would be: without adjustment, by the default settings (no offset of 1 dB).
    expect(figure.headline.depthMm).toBeGreaterThan(0);
    expect(figure.headline.noAdjustmentMm).toBeGreaterThan(0);
    expect(figure.headline.defaultSettingsNoAdjustmentMm).not.toBe(figure.headline.noAdjustmentMm);
    expect(figure.changedSettings.map((one) => one.path)).toContain("radars[1].offsetDb");
    expect(figure.filesBehind.length).toBeGreaterThan(5);
    for (const file of figure.filesBehind) expect(existsSync(path.join(top, file)), file).toBe(true);
    expect(figure.licences).toEqual(["radar: invented, free"]);
    const readme = readFileSync(path.join(top, "README.txt"), "utf8");
    expect(readme).toContain("Prepared by: A. Nobody");
    expect(readme).toMatch(/Checked by: {2}_+/);
    expect(readFileSync(path.join(top, "gauge-rows.csv"), "utf8")).toMatch(
      /^network,gauge_id,moves_figure,distance_km,start,end,depth_mm\n/,
    );
  }, 120_000);
});
