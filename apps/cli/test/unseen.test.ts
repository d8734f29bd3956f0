import {
  copyFileSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  writeFileSync,
} from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import type { BlendedStep } from "@rainreckon/accumulation";
import { findRelation, type Grid, wavelengthM } from "@rainreckon/core";
import { generateStorm, TINY } from "@rainreckon/test-data/storm";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import type { JobRadar } from "../src/total/job.ts";
import { shortWaveReason } from "../src/total/short-wave.ts";
import { UnseenDepth } from "../src/total/unseen.ts";
import { inProcess } from "./run-cli.ts";

const HOUR = 3_600_000;
const relation = findRelation("marshall-1955-200/1.6");
/** Cells of 1 km in a row eastwards; the radar stands in the middle of the first. */
const grid: Grid = {
  crs: "+proj=laea +lat_0=52 +lon_0=5 +datum=WGS84 +units=m +no_defs",
  westM: -500,
  northM: 500,
  cellM: 1000,
  nx: 101,
  ny: 1,
};

function radar(sensitivity: JobRadar["sensitivity"], offsetDb = 0): JobRadar {
  return {
    site: { id: "zzone", lonDeg: 5, latDeg: 52, antennaHeightM: 50 },
    moment: "DBZH",
    beamWidthDeg: 1,
    offsetDb,
    sensitivity,
    cap: { dbz: 53 },
    minRateMmPerHour: 0.1,
    relations: [],
    time: { medianRoundMs: 300_000, maxGapMs: 750_000 },
    lookup: { effectiveRadiusFactor: 4 / 3, maxBeamHeightM: 3000, taperM: 0, blockedSectors: [] },
    rounds: [],
    echo: undefined,
    wavelengthM: undefined,
  };
}

/** An hour that is dry and wholly observed, by radars with equal shares. */
function dryHour(
  radars: number,
  change: (step: { depthMm: Float64Array }) => void = () => undefined,
): BlendedStep {
  const cells = grid.nx * grid.ny;
  const zeros = () => new Float64Array(cells);
  const step = {
    depthMm: zeros(),
    observedMs: zeros().fill(HOUR),
    bridgedMs: zeros(),
    edgeMs: zeros(),
    cappedMm: zeros(),
    heightMMs: zeros(),
    shareMs: Array.from({ length: radars }, () => zeros().fill(HOUR / radars)),
    variantMm: [],
    companions: [],
  };
  change(step);
  return step;
}

function unseen(radars: readonly JobRadar[], step: BlendedStep): Float32Array {
  const depth = new UnseenDepth(grid, radars);
  depth.add({ startEpochMs: 0, endEpochMs: HOUR }, step, () => relation);
  return depth.take();
}

const KEEN = { at1KmDbz: -33, floorDbz: -60, basis: "scans" } as const;

describe("rain the radars could not have seen", () => {
  test("a dry hour at 100 km holds an hour of the rain just below detection there", () => {
    // -33 + 20 log10(100) = 7 dBZ, which the reference book gives as 0.1 mm/h with 200/1.6 (7.01 dBZ).
    const depth = unseen([radar(KEEN)], dryHour(1));
    expect(Math.abs(depth[100] - 0.1)).toBeLessThan(0.001);
    // A tenth of the range is 20 dB less echo: 10^(-2/1.6) of the rain.
    expect(depth[10] / depth[100]).toBeCloseTo(10 ** (-2 / 1.6), 4);
  });

  test("a step with rain adds nothing, and what was not observed neither", () => {
    const depth = unseen(
      [radar(KEEN)],
      dryHour(1, ({ depthMm }) => {
        depthMm[50] = 0.4;
        depthMm[51] = Number.NaN;
      }),
    );
    expect([depth[50], depth[51]]).toEqual([0, 0]);
    expect(depth[52]).toBeGreaterThan(0);
  });

  test("the calibration offset counts as it does for rain; the floor ends sight everywhere", () => {
    const plain = unseen([radar(KEEN)], dryHour(1));
    const raised = unseen([radar(KEEN, 3)], dryHour(1));
    expect(raised[80] / plain[80]).toBeCloseTo(10 ** (0.3 / 1.6), 4);
    const floor = unseen([radar({ ...KEEN, floorDbz: 7 })], dryHour(1));
    expect(floor[5]).toBeCloseTo(floor[60], 6);
  });

  test("two radars speak by their shares; one that is not known makes the depth not known", () => {
    const deaf = { ...KEEN, at1KmDbz: -23 };
    const [one, other, both] = [[radar(KEEN)], [radar(deaf)], [radar(KEEN), radar(deaf)]].map((radars) =>
      unseen(radars, dryHour(radars.length)),
    ) as [Float32Array, Float32Array, Float32Array];
    expect(both[70]).toBeCloseTo((one[70] + other[70]) / 2, 6);
    expect(unseen([radar(KEEN), radar(undefined)], dryHour(2))[70]).toBeNaN();
  });

  test("intervals are taken one by one", () => {
    const depth = new UnseenDepth(grid, [radar(KEEN)]);
    depth.add({ startEpochMs: 0, endEpochMs: HOUR }, dryHour(1), () => relation);
    expect(depth.take()[90]).toBeGreaterThan(0);
    expect(depth.take()[90]).toBe(0);
  });
});

// IEEE Std 521-2002: Ku from 12 GHz, K from 18, Ka from 27, V from 40, W from 75.
test.each([
  [2.8, false],
  [9.4, false],
  [13.6, true],
  [24, true],
  [35, true],
  [60, true],
  [94, true],
])("%d GHz unfit for totals: %s", (frequencyGHz, unfit) => {
  expect(shortWaveReason(wavelengthM(frequencyGHz * 1e9)) !== undefined).toBe(unfit);
});

test("the reason has the loss: 10 km of 10 mm/h at 35 GHz", () => {
  // Reference book, section e: 2.709 dB/km one way, so 54.2 dB both ways over 10 km.
  expect(shortWaveReason(wavelengthM(35e9))).toContain("take 54 dB");
});

describe("in a run", () => {
  const scratch = mkdtempSync(path.join(tmpdir(), "rainreckon-unseen-"));
  afterAll(() => rmSync(scratch, { recursive: true }));
  let plan = "";
  beforeAll(async () => {
    const storm = path.join(scratch, "storm");
    await generateStorm({ ...TINY, folder: storm });
    const scans = path.join(scratch, "scans");
    mkdirSync(scans);
    const node = TINY.radars[0]?.node as string;
    for (const file of readdirSync(path.join(storm, "radar", node)))
      copyFileSync(path.join(storm, "radar", node, file), path.join(scans, file));
    plan = path.join(scratch, "plan.yaml");
    const made = await inProcess(["plan", scans, "-o", plan, "--quiet"]);
    expect(made.status, made.stderr).toBe(0);
  });

  test("the report has its line, and the folder's README says what the plane is", async () => {
    const out = path.join(scratch, "run");
    const result = await inProcess(["total", plan, "--out", out, "--quiet"]);
    expect(result.status, result.stderr).toBe(0);
    expect(readFileSync(path.join(out, "report.html"), "utf8")).toMatch(
      /rain the radars could not have seen: up to .+ mm over the district/,
    );
    expect(readFileSync(path.join(out, "README.txt"), "utf8")).toContain("unseen_depth");
  });

  test("a Ka-band radar is refused with the reason, and taken where the plan says so", async () => {
    const text = readFileSync(plan, "utf8");
    const shortWaves = text
      .replace(/^( +)wavelengthCm:.*\n/m, "")
      .replace(/^( +)maxGapMinutes:/m, "$1wavelengthCm: 0.86\n$1maxGapMinutes:");
    expect(shortWaves).toContain("wavelengthCm: 0.86");
    const refusedPlan = path.join(scratch, "ka.yaml");
    writeFileSync(refusedPlan, shortWaves);
    const refused = await inProcess(["total", refusedPlan, "--out", path.join(scratch, "ka")]);
    expect(refused.status).toBe(3);
    expect(refused.stderr).toMatch(/Ka band.*no total can be made of that.*acceptShortWavelength: true/);
    const takenPlan = path.join(scratch, "ka-taken.yaml");
    writeFileSync(
      takenPlan,
      shortWaves.replace(/^( +)wavelengthCm/m, "$1acceptShortWavelength: true\n$1wavelengthCm"),
    );
    const taken = await inProcess(["total", takenPlan, "--out", path.join(scratch, "ka-taken")]);
    expect(taken.status, taken.stderr).toBe(0);
    expect(taken.stderr).toContain("the plan takes it all the same");
  });
});
