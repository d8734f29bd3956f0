import { existsSync, readdirSync, readFileSync, writeFileSync } from "node:fs";
import path from "node:path";
import { inflateSync } from "node:zlib";
import { SCREENS } from "@rainreckon/core";
import { readLearned } from "@rainreckon/formats";
import { generateStorm, SMALL } from "@rainreckon/test-data/storm";
import h5wasm, { type Dataset, type Group } from "h5wasm/node";
import { beforeAll, describe, expect, test } from "vitest";
import type { Document } from "yaml";
import {
  arrayOf,
  editPlan,
  manifestOf,
  NO_ECHO_WORK,
  planFor,
  readNetCdf,
  scratchFolder,
  total,
} from "./total-kit.ts";

const folder = scratchFolder("echo-steps");
const base = path.join(folder, "plan.yaml");
/** A plan like the first one, but for one thing. */
const planWith = (file: string, change: (plan: Document) => void) =>
  editPlan(base, path.join(folder, file), change);

interface EchoOfManifest {
  readonly screens: readonly { screen: string; gates: number; districtMm: number; worstCellMm: number }[];
  readonly corrections: readonly { correction: string; meanDb: number; largestDb: number }[];
  readonly gates: Readonly<Record<string, number>>;
  readonly learned: Readonly<Record<string, readonly string[]>>;
  readonly calibration: readonly { radar: string; proposedOffsetDb: number | null; reason: string }[];
}

const echoOf = (run: string) =>
  (JSON.parse(readFileSync(path.join(run, "manifest.json"), "utf8")) as { echo: EchoOfManifest | null }).echo;

beforeAll(async () => {
  // Half an hour of the small storm: what is held here is bookkeeping, not skill.
  await generateStorm({ ...SMALL, minutes: 40, folder });
  planFor(folder);
});

describe("a run whose echo is worked on", () => {
  const run = path.join(folder, "run");

  beforeAll(() => {
    expect(readFileSync(base, "utf8")).toMatch(/blockage: \{[^}]*terrain: terrain\.tif/);
    const { status, stderr } = total(base, "run");
    expect(status, stderr).toBe(0);
  });

  test("tells of every screen, and the worst cell it names is that of its map", async () => {
    const echo = echoOf(run);
    expect(echo?.screens.map(({ screen }) => screen)).toEqual(SCREENS);
    expect(echo?.screens.some(({ gates }) => gates > 0)).toBe(true);
    const arrays = await readNetCdf(path.join(run, "totals.nc"));
    for (const { screen, worstCellMm } of echo?.screens ?? []) {
      const name = `screened_depth_${screen.replaceAll("-", "_")}`;
      if (!arrays.has(name)) {
        expect(worstCellMm).toBe(0);
        continue;
      }
      const { values } = arrayOf(arrays, name);
      expect(Math.max(...values)).toBe(worstCellMm);
      expect(values.every((mm) => mm >= 0)).toBe(true);
    }
  });

  test("gives back what rain took at C band, and shows it as a plane in dB", async () => {
    const attenuation = echoOf(run)?.corrections.find(({ correction }) => correction === "attenuation");
    expect(attenuation?.meanDb).toBeGreaterThan(0.1);
    const { values } = arrayOf(await readNetCdf(path.join(run, "totals.nc")), "attenuation_correction");
    const known = [...values].filter((db) => !Number.isNaN(db));
    expect(Math.max(...known)).toBe(attenuation?.largestDb);
    expect(Math.min(...known)).toBeGreaterThanOrEqual(0);
  });

  test("keeps what it learned in a file, the system's phase among it", async () => {
    const learned = await readLearned(path.join(run, "learned.nc"));
    expect(Object.keys(learned).sort()).toEqual(["zzmoo", "zzsal"]);
    // Planted: 65 and 40 degrees.
    const phaseOf = (id: string) =>
      (learned[id] as { attenuation: { systemPhaseDeg: number } }).attenuation.systemPhaseDeg;
    expect(Math.abs(phaseOf("zzmoo") - 65)).toBeLessThan(2);
    expect(Math.abs(phaseOf("zzsal") - 40)).toBeLessThan(2);
    expect(manifestOf(run).outputs.map(({ file }) => file)).toContain("learned.nc");
  });

  test("proposes no more than it can tell, and applies nothing", () => {
    const echo = echoOf(run);
    expect(echo?.calibration.map(({ radar }) => radar).sort()).toEqual(["zzmoo", "zzsal"]);
    const plan = (
      JSON.parse(readFileSync(path.join(run, "manifest.json"), "utf8")) as {
        plan: { radars: { offsetDb: number }[] };
      }
    ).plan;
    expect(plan.radars.map(({ offsetDb }) => offsetDb)).toEqual([0, 0]);
  });

  test("its readme names every plane, and its report has a section of it", () => {
    const readme = readFileSync(path.join(run, "README.txt"), "utf8");
    expect(readme).toContain("attenuation_correction");
    expect(readme).toMatch(/radar zzmoo: learned from \d+ rounds/);
    expect(readFileSync(path.join(run, "report.html"), "utf8")).toContain('id="echo"');
  });
});

test("with every step off nothing is learned, and stored numbers go straight to rain", () => {
  const plan = planWith("off.yaml", (document) => document.set("echo", document.createNode(NO_ECHO_WORK)));
  const { status, stderr } = total(plan, "off");
  expect(status, stderr).toBe(0);
  const run = path.join(folder, "off");
  expect(echoOf(run)).toBeNull();
  expect(existsSync(path.join(run, "learned.nc"))).toBe(false);
  expect(readFileSync(path.join(run, "report.html"), "utf8")).not.toContain('id="echo"');
});

describe("bad input", () => {
  test("a terrain model that is none is left out in one line, and the run goes on", () => {
    writeFileSync(path.join(folder, "hills.tif"), "no picture");
    const plan = planWith("hills.yaml", (document) => {
      document.setIn(["echo", "blockage"], { use: true, limit: 0.7, terrain: "hills.tif" });
      document.setIn(["window", "to"], "2031-05-20T12:20:00Z");
    });
    const { status, stderr } = total(plan, "hills");
    expect(status, stderr).toBe(0);
    expect(stderr).toMatch(/hills\.tif: the file is damaged/);
    expect(manifestOf(path.join(folder, "hills")).notices.map(({ kind }) => kind)).toContain(
      "terrain left out",
    );
  });

  test.each([
    [["echo", "gas"], { use: "always", humidityPercent: 130 }, "humidityPercent"],
    [["echo", "blockage"], { limit: 1.5 }, "limit"],
    [["echo", "screening"], { without: ["cluter"] }, "without"],
    [["echo", "attenuation"], { method: "guess" }, "method"],
  ])("%j: %j is refused with its place", (at, value, key) => {
    const plan = planFor(folder, (document) => document.setIn(at, document.createNode(value)), "wrong.yaml");
    const { status, stderr } = total(plan, "wrong");
    expect(status).toBe(2);
    expect(stderr).toContain(key);
    expect(existsSync(path.join(folder, "wrong"))).toBe(false);
  });

  test("a moment that does not decode costs no rain: it is told of and left out", async () => {
    const spoilt = scratchFolder("echo-spoilt");
    await generateStorm({ ...SMALL, minutes: 20, radars: SMALL.radars.slice(0, 1), folder: spoilt });
    const scans = path.join(spoilt, "radar", "zzsal");
    const [first] = readdirSync(scans).sort();
    const cut = await spoilMoment(path.join(scans, first!), "ZDR");
    const plan = planFor(spoilt);
    const { status, stderr } = total(plan, "run");
    expect(status, stderr).toBe(0);
    expect(stderr).toContain(cut);
    expect(
      manifestOf(path.join(spoilt, "run")).inputs.find(({ path: name }) => name.endsWith(first!))?.use,
    ).toBe("used");
  });
});

/** Turns bits within the packed values of one moment of the first sweep. @returns the name of its place in the file */
async function spoilMoment(file: string, quantity: string): Promise<string> {
  await h5wasm.ready;
  const opened = new h5wasm.File(file, "r");
  let place = "";
  let stored: Uint8Array = new Uint8Array();
  for (let k = 1; place === ""; k++) {
    const what = opened.get(`dataset1/data${k}/what`) as Group | null;
    if (what === null) throw new Error(`no ${quantity} in ${file}`);
    if (String(what.attrs.quantity?.value) !== quantity) continue;
    place = `dataset1/data${k}`;
    stored = (opened.get(`${place}/data`) as Dataset).value as Uint8Array;
  }
  opened.close();
  const bytes = readFileSync(file);
  const wanted = Buffer.from(stored.buffer, stored.byteOffset, stored.byteLength);
  for (let at = bytes.indexOf(0x78); at >= 0; at = bytes.indexOf(0x78, at + 1)) {
    let unpacked: Buffer;
    try {
      unpacked = inflateSync(bytes.subarray(at));
    } catch {
      continue;
    }
    // A long array is packed in several chunks: any part of it will do.
    if (unpacked.length < 1000 || !wanted.includes(unpacked.subarray(0, 500))) continue;
    for (let k = at + 40; k < at + 60; k++) bytes[k]! ^= 0xff;
    writeFileSync(file, bytes);
    return place;
  }
  throw new Error(`${quantity} lies in no packed chunk`);
}
