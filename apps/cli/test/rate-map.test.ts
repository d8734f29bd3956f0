import {
  copyFileSync,
  existsSync,
  mkdirSync,
  mkdtempSync,
  readFileSync,
  rmSync,
  writeFileSync,
} from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { formatsReady, openGridded } from "@rainreckon/formats";
import { afterAll, beforeAll, expect, test } from "vitest";
import { RAYS, type RadarToWrite, storedDbz, writeVolume } from "./odim-scans.ts";
import { cli, ensureBuilt } from "./run-cli.ts";
import { editPlan, NO_ECHO_WORK } from "./total-kit.ts";

const scratch = mkdtempSync(path.join(tmpdir(), "rainreckon-rate-"));
const RADAR: RadarToWrite = { node: "zzrat", lonDeg: 4, latDeg: 51, gateM: 500, gateCount: 60 };
const NOON = Date.UTC(2031, 4, 3, 12);

beforeAll(async () => {
  ensureBuilt();
  await formatsReady();
});
afterAll(() => rmSync(scratch, { recursive: true }));

/** 40 dBZ east of the radar, nothing west of it, not observed in the last 45 degrees. */
function eastWet(): Uint8Array {
  const stored = new Uint8Array(RAYS * RADAR.gateCount);
  stored.fill(storedDbz(40), 0, 180 * RADAR.gateCount);
  stored.fill(255, 315 * RADAR.gateCount);
  return stored;
}

async function oneScan(name: string): Promise<string> {
  const folder = path.join(scratch, name, "scans");
  await writeVolume(path.join(folder, "one.h5"), RADAR, [
    { elevationDeg: 0.5, startEpochMs: NOON, stored: eastWet() },
  ]);
  const plan = path.join(scratch, name, "plan.yaml");
  const { status, stdout } = cli(["plan", folder, "-o", plan, "--rate"]);
  expect(status).toBe(0);
  expect(stdout).toContain("--rate");
  // Rates are worked out by hand here, from echo as it was written.
  return editPlan(plan, plan, (document) => document.set("echo", document.createNode(NO_ECHO_WORK)));
}

test("a single scan gives a map of rain rate, in its place and in mm/h", async () => {
  const plan = await oneScan("single");
  const out = path.join(scratch, "single", "map");
  const { status, stdout } = cli(["total", plan, "--out", out, "--rate"]);
  expect(status).toBe(0);
  expect(stdout).toContain("Rain rate at one instant per radar; this is no total");
  const facts = JSON.parse(readFileSync(path.join(out, "rate.json"), "utf8"));
  expect(facts).toMatchObject({
    format: "rainreckon-rate-1",
    radars: [{ id: "zzrat", instants: ["2031-05-03T12:00:10Z"], gatesCapped: 0 }],
    inputs: [{ path: "scans/one.h5", use: "used" }],
  });
  // Z = 200 R^1.6 (Marshall and others, 1955), solved by hand: 40 dBZ is 10^4 mm6 m-3, (10^4 / 200)^(1/1.6) = 11.53 mm/h.
  expect(facts.maxRateMmPerHour).toBeCloseTo(11.53, 2);
  const grid = await openGridded(path.join(out, "rain_rate.tif"), {
    crs: "plan",
    time: { startEpochMs: NOON, endEpochMs: NOON },
  });
  const layer = await grid!.readLayer(0);
  expect(layer.quantity).toBe("rainRateMmPerHour");
  if (layer.place.kind !== "affine") throw new Error("no affine place");
  // The plan's grid is centred near the radar, x to the east: 10 km east is wet, 10 km west dry, north-north-west unseen.
  const at = (eastM: number, northM: number) => {
    if (layer.place.kind !== "affine") throw new Error("no affine place");
    const column = Math.floor((eastM - layer.place.west) / layer.place.cellWidth);
    const row = Math.floor((layer.place.north - northM) / layer.place.cellHeight);
    return layer.values[row * layer.nx + column];
  };
  expect(at(10_000, 500)).toBeCloseTo(11.53, 2);
  expect(at(-10_000, -500)).toBe(0);
  expect(at(-5000, 12_000)).toBeNaN();
});

test("files that do not say where their radar stands take its place from the plan", async () => {
  const plan = await oneScan("old");
  const scans = path.join(scratch, "old", "scans");
  rmSync(path.join(scans, "one.h5"));
  // Archive Level II, message 1: 40 dBZ out to 40 km at the same noon, byte by byte from its document.
  const fixture = new URL("../../../packages/formats/test/fixtures/level2-message1.gz", import.meta.url);
  copyFileSync(fixture, path.join(scans, "old.gz"));
  const without = readFileSync(plan, "utf8")
    .replace("id: zzrat", "id: ICAO-KZZZ")
    .replace(/one\.h5/g, "old.gz");
  writeFileSync(plan, without);
  const out = path.join(scratch, "old", "map");
  const refused = cli(["total", plan, "--out", out, "--rate"]);
  expect(refused.status).toBe(3);
  expect(refused.stderr).toContain("does not say where radar KZZZ stands");
  const site = "\n    site: { lonDeg: 4, latDeg: 51, antennaHeightM: 50 }";
  writeFileSync(plan, without.replace("id: ICAO-KZZZ", `id: ICAO-KZZZ${site}`));
  expect(cli(["total", plan, "--out", out, "--rate"]).status).toBe(0);
  const facts = JSON.parse(readFileSync(path.join(out, "rate.json"), "utf8"));
  expect(facts.radars).toMatchObject([{ id: "ICAO-KZZZ" }]);
  expect(facts.maxRateMmPerHour).toBeCloseTo(11.53, 2);
});

test("the same bytes again; a folder that holds something is refused", async () => {
  const plan = await oneScan("again");
  const [one, two] = ["one", "two"].map((name) => path.join(scratch, "again", name));
  for (const out of [one, two]) expect(cli(["total", plan, "--out", out!, "--rate"]).status).toBe(0);
  for (const file of ["rain_rate.tif", "rate.json"]) {
    expect(readFileSync(path.join(one!, file))).toEqual(readFileSync(path.join(two!, file)));
  }
  const { status, stderr } = cli(["total", plan, "--out", one!, "--rate"]);
  expect(status).toBe(2);
  expect(stderr).toContain("the folder holds something already");
});

test("without --rate a single scan is exit 3; with it, no usable scan is exit 3 and leaves no folder", async () => {
  const plan = await oneScan("refused");
  const out = path.join(scratch, "refused", "total");
  const refused = cli(["total", plan, "--out", out]);
  expect(refused.status).toBe(3);
  expect(refused.stderr).toContain("one instant per site is a rate, not a total");
  const scans = path.join(scratch, "refused", "scans");
  rmSync(path.join(scans, "one.h5"));
  mkdirSync(scans, { recursive: true });
  writeFileSync(path.join(scans, "one.h5"), "no scan");
  const empty = cli(["total", plan, "--out", out, "--rate"]);
  expect(empty.status).toBe(3);
  expect(existsSync(out)).toBe(false);
});
