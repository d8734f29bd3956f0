import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { checkValue } from "@rainreckon/test-data/published";
import { generateStorm, TINY } from "@rainreckon/test-data/storm";
import { afterAll, afterEach, beforeAll, describe, expect, test } from "vitest";
import { type Budget, type BudgetRadar, budgetSchema } from "../src/budget/schema.ts";
import { inProcess } from "./run-cli.ts";

const scratch = mkdtempSync(path.join(tmpdir(), "rainreckon-budget-"));
afterAll(() => rmSync(scratch, { recursive: true }));
// --strict sets it, and all cases share one process.
afterEach(() => {
  process.exitCode = undefined;
});

async function budget(...args: readonly string[]): Promise<Budget> {
  const result = await inProcess(["budget", ...args, "--json"]);
  expect(result.status, result.stderr).toBe(0);
  return budgetSchema.parse(JSON.parse(result.stdout));
}

function only(result: Budget): BudgetRadar {
  expect(result.radars).toHaveLength(1);
  return result.radars[0] as BudgetRadar;
}

function expected(id: string): number {
  return Number(checkValue(id).expected);
}

describe("published values come out of the command", () => {
  test("the radar constant of the worked S-band radar, and its noise", async () => {
    const radar = only(
      await budget(
        ...["--peak-power", "700000", "--gain", "45", "--beam-width", "1", "--pulse", "1.6"],
        ...["--frequency", "2.8", "--losses", "2", "--noise-figure", "3", "--bandwidth", "0.6"],
      ),
    );
    expect(Math.abs((radar.radarConstantDb as number) - expected("radar-const-s"))).toBeLessThan(1e-3);
    expect(Math.abs((radar.noiseDbm as number) - expected("noise-1us"))).toBeLessThan(1e-3);
    const height = radar.ranges.find(({ rangeKm }) => rangeKm === 100)?.beamCentreAboveAntennaM as number;
    expect(Math.abs(height - expected("beam-h-0.5deg-100km"))).toBeLessThan(0.1);
  });

  test("what C and X band lose in the same rain", async () => {
    // The path is level in the printed values, so the beam is too.
    const c = only(await budget("--band", "C", "--rain-km", "10", "--elevation", "0"));
    const at50 = c.rain.find(({ rainRateMmPerHour }) => rainRateMmPerHour === 50);
    expect(at50?.lossTwoWayDb).toBeCloseTo(expected("twoway-5.6GHz-R50-10km"), 4);
    const s = only(await budget("--band", "S", "--rain-km", "20", "--elevation", "0"));
    const at100 = s.rain.find(({ rainRateMmPerHour }) => rainRateMmPerHour === 100);
    expect(at100?.lossTwoWayDb).toBeCloseTo(expected("twoway-2.8GHz-R100-20km"), 4);
  });

  test("a dB in the relation in use", async () => {
    // Reference book: +1 dB is a factor 1.179 for b = 1.4.
    const { oneDbRateFactor } = await budget("--band", "C", "--relation", "300,1.4");
    expect(Math.abs(oneDbRateFactor - 1.179)).toBeLessThan(5e-4);
  });
});

test("bands stand side by side in the same rain, and short waves lose more", async () => {
  const { radars } = await budget("--band", "S,C,X");
  expect(radars.map(({ band }) => band)).toEqual(["S", "C", "X"]);
  for (let row = 0; row < 4; row++) {
    const losses = radars.map(({ rain }) => rain[row]?.lossTwoWayDb as number);
    expect([...losses].sort((a, b) => a - b)).toEqual(losses);
  }
});

test("the radome is met on both ways: it raises the weakest echo by just its loss", async () => {
  const dry = only(await budget("--band", "X", "--ranges", "60"));
  const wet = only(await budget("--band", "X", "--ranges", "60", "--radome", "3"));
  expect((wet.ranges[0]?.weakestEchoDbz as number) - (dry.ranges[0]?.weakestEchoDbz as number)).toBeCloseTo(
    3,
    9,
  );
});

test("what is not given is null, and said", async () => {
  const radar = only(await budget("--frequency", "5.6"));
  expect(radar.sensitivity.basis).toBe("not known");
  expect(
    radar.ranges.every(({ weakestEchoDbz, beamWidthM }) => weakestEchoDbz === null && beamWidthM === null),
  ).toBe(true);
  expect(radar.ranges[3]?.gasLossTwoWayDb).toBeGreaterThan(0);
  expect(radar.rain[2]?.lossTwoWayDb).toBeGreaterThan(0);
  expect(radar.remarks.join("\n")).toMatch(/sensitivity is not known[\s\S]*no beam width/);
});

test("a melting layer and terrain need the antenna's height, which is said", async () => {
  const terrain = path.join(scratch, "ridge.csv");
  const rows = Array.from({ length: 60 }, (_, k) => `${k + 1},${k === 39 ? 3000 : 0}`);
  writeFileSync(terrain, `distance_km,height_asl_m\n${rows.join("\n")}\n`);
  const layer = ["--melting-layer", "1900..2400", "--terrain", terrain];
  const blind = only(await budget("--band", "C", ...layer));
  expect(blind.remarks.join()).toContain("no antenna height");
  expect(blind.groundHitKm).toBeNull();
  const sited = only(await budget("--band", "C", "--antenna-height", "50", ...layer));
  // The ridge's flank is a straight line from 39 km to its top at 40 km.
  expect(sited.groundHitKm).toBeGreaterThan(39);
  expect(sited.groundHitKm).toBeLessThan(40.1);
  const shares = sited.ranges.map(({ meltingLayerShare }) => meltingLayerShare as number);
  expect(Math.max(...shares)).toBeGreaterThan(0.15);
  expect(shares[0]).toBeLessThan(1e-6);
});

describe("scan files", () => {
  const storm = path.join(scratch, "storm");
  const [made] = TINY.radars;
  let files: string[] = [];
  beforeAll(async () => {
    await generateStorm({ ...TINY, folder: storm });
    const folder = path.join(storm, "radar", (made as NonNullable<typeof made>).node);
    files = readdirSync(folder)
      .sort()
      .map((file) => path.join(folder, file));
  });

  test("the measured sensitivity is the one that the storm was made with", async () => {
    const { sensitivity } = only(await budget(...files));
    // Half an hour of a small storm: few bands hold echo as weak as could be seen, so it comes out a little high.
    expect(Math.abs((sensitivity.measuredAt1KmDbz as number) - (made?.noiseDbzAt1Km as number))).toBeLessThan(
      2.5,
    );
  });

  test("a site and a band stand side by side; what cannot be read is named, and the rest goes on", async () => {
    const broken = path.join(scratch, "broken.h5");
    writeFileSync(broken, "not a scan\n");
    const args = ["budget", files[0] as string, broken, "--band", "X", "--json"];
    const result = await inProcess(args);
    expect(result.status).toBe(0);
    expect(result.stderr).toContain("broken.h5");
    expect(budgetSchema.parse(JSON.parse(result.stdout)).radars).toHaveLength(2);
    expect((await inProcess([...args, "--strict"])).status).toBe(1);
  });

  test("no file that can be read is exit 3", async () => {
    const result = await inProcess(["budget", path.join(scratch, "none.h5")]);
    expect(result.status).toBe(3);
    expect(result.stderr).toContain("error: no scan that can be read");
  });
});

// Real scans: set and missing is a failure, unset is a skip that says so.
const REAL = process.env.RAINRECKON_REAL;
describe.skipIf(REAL === undefined)("real scans (skipped where RAINRECKON_REAL is not set)", () => {
  test("each ODIM site has a budget, and a stated noise of 0 dBZ at 1 km is not believed", async () => {
    const files = readdirSync(REAL as string)
      .filter((name) => /\.(h5|hdf)$/.test(name))
      .sort()
      .map((name) => path.join(REAL as string, name));
    expect(files.length).toBeGreaterThan(0);
    const { radars } = await budget(...files);
    expect(radars.map(({ sensitivity }) => sensitivity.basis)).toEqual(
      radars.map(() => "measured in the scans"),
    );
    const stated = radars.filter(({ sensitivity }) => sensitivity.inFileAt1KmDbz === 0);
    expect(stated).toHaveLength(1);
    expect(stated[0]?.remarks.join()).toContain("measured sensitivity is used");
    for (const { sensitivity, ranges } of radars) {
      // What operational radars of some hundred kW see; common practice.
      expect(sensitivity.at1KmDbz).toBeGreaterThan(-60);
      expect(sensitivity.at1KmDbz).toBeLessThan(-25);
      expect(ranges.every(({ weakestEchoDbz }) => weakestEchoDbz !== null)).toBe(true);
    }
  });
});

describe("bad parameters: one fault of three lines, exit 2", () => {
  const uneven = path.join(scratch, "uneven.csv");
  writeFileSync(uneven, "distance_km,height_asl_m\n1,0\n2,0\n4,0\n");
  test.each([
    [["--peak-power", "-5"], /'-5' does not fit/, /above 0 in W/],
    [["--band", "C", "--beam-width", "0"], /'0' does not fit/, /0\.05 to 20 degrees/],
    [["--frequency", "200"], /'200' does not fit/, /1 to 110 GHz/],
    [["--band", "C", "--humidity", "101"], /'101' does not fit/, /beyond saturation/],
    [["--band", "C", "--rain-km", "0"], /'0' does not fit/, /0\.1 to 300 km/],
    [["--band", "C", "--ranges", "20,x"], /does not fit/, /20,60,120/],
    [["--band", "Q"], /'Q' does not fit/, /S,C,X/],
    [["--band", "C", "--pulse", "1us"], /'1us' does not fit/, /microseconds/],
    [["--band", "C", "--melting-layer", "2400..1900"], /does not fit/, /above the bottom/],
    [["--band", "C", "--chart", "budget.png"], /does not fit/, /\.svg or \.html/],
    [[], /no radar to reckon with/, /--band S,C,X/],
    [["--frequency", "5.6", "--wavelength", "5.3"], /same thing twice/, /one of them/],
    [["--band", "S", "--frequency", "9.4"], /lies in X band, not in S/, /leave out --band/],
    [["--band", "C", "--relation", "marshal"], /no relation is called/, /marshall-1955/],
    [["--band", "C", "--terrain", uneven], /even steps/, /1, 2, 3/],
    [["--band", "C", "--terrain", path.join(scratch, "none.csv")], /no such file/, /CSV file of distances/],
  ] as const)("%j", async (args, what, fix) => {
    const result = await inProcess(["budget", ...args]);
    expect(result.stderr).toMatch(/^error: .+\n {2}where: .+\n {2}fix: {3}.+\n$/);
    const [first, , third] = result.stderr.split("\n");
    expect(first).toMatch(what);
    expect(third).toMatch(fix);
    expect(result.stdout).toBe("");
    expect(result.status).toBe(2);
  });
});

test("the help tells each column in the trade's words", async () => {
  const { stdout, status } = await inProcess(["budget", "--help"]);
  expect(status).toBe(0);
  for (const words of ["half-power", "BOTH ways", "point target", "ITU-R P.838-3", "share of Z lost"])
    expect(stdout).toContain(words);
});

test("the chart is SVG or HTML by its ending", async () => {
  const [svg, page] = [path.join(scratch, "b.svg"), path.join(scratch, "b.html")];
  await budget("--band", "S,X", "--chart", svg);
  await budget("--band", "S,X", "--chart", page);
  expect(readFileSync(svg, "utf8")).toMatch(/^<svg xmlns/);
  expect(readFileSync(page, "utf8")).toMatch(/^<!doctype html>/);
});
