import { copyFileSync, mkdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import path from "node:path";
import { fileURLToPath } from "node:url";
import { describe, expect, test } from "vitest";
// Bytes as the interface control documents have them; no reader or writer of ours is in them.
import {
  type MomentBytes,
  REFLECTIVITY,
  ray31,
  turn,
  volumeHeader,
} from "../../../packages/formats/test/level2-bytes.ts";
import { inProcess } from "./run-cli.ts";
import {
  arrayOf,
  editPlan,
  manifestOf,
  NO_ECHO_WORK,
  type ReadArray,
  readNetCdf,
  scratchFolder,
} from "./total-kit.ts";

const FIXTURES = fileURLToPath(new URL("../../../packages/formats/test/fixtures", import.meta.url));
const scratch = scratchFolder("other-scans");
const NOON_MS = 43_200_000;
const ROUND_MS = 300_000;

async function totalOf(
  folder: string,
  place: { lat: number; lon: number },
  window: { from: string; to: string },
  offsetDb = 0,
) {
  const plan = path.join(folder, "plan.yaml");
  const planned = await inProcess(["plan", folder, "-o", plan, "--quiet"]);
  expect([planned.status, planned.stderr]).toEqual([0, expect.not.stringContaining("error")]);
  editPlan(plan, plan, (document) => {
    const crs = `+proj=laea +lat_0=${place.lat} +lon_0=${place.lon} +ellps=GRS80 +units=m +no_defs`;
    const grid = { crs, westM: -20_000, northM: 20_000, cellM: 1000, nx: 40, ny: 40 };
    document.setIn(["grid"], document.createNode(grid));
    document.setIn(["radars", 0, "offsetDb"], offsetDb);
    document.setIn(["window"], document.createNode(window));
    // Figures are worked out by hand here, from echo as it was written.
    document.setIn(["echo"], document.createNode(NO_ECHO_WORK));
    document.setIn(["intervals"], document.createNode({ grids: "PT4M", series: "PT1M" }));
  });
  const out = path.join(folder, "run");
  const { status, stderr } = await inProcess(["total", plan, "--out", out, "--workers", "1", "--quiet"]);
  expect([status, stderr]).toEqual([0, expect.not.stringContaining("error")]);
  return { arrays: await readNetCdf(path.join(out, "totals.nc")), manifest: manifestOf(out) };
}

const totals = (arrays: ReadonlyMap<string, ReadArray>) => [...arrayOf(arrays, "radar_total").values];

function rays(count: number, startMs: number, moment: MomentBytes): Buffer[] {
  return turn(1, 0.5, count, startMs).map((ray) => ray31(ray, [moment]));
}

describe("Archive Level II", () => {
  const HERE = { lat: 40.5, lon: -100.25 };

  test("two volumes make a total", async () => {
    const folder = path.join(scratch, "level2");
    mkdirSync(folder);
    // 2620002: (146 - 66) / 2 is 40 dBZ.
    const even = { ...REFLECTIVITY, codes: new Array<number>(60).fill(146) };
    for (const round of [0, 1]) {
      const bytes = [volumeHeader(), ...rays(360, NOON_MS + round * ROUND_MS, even)];
      writeFileSync(path.join(folder, `KZZZ20310503_120${round * 5}00`), Buffer.concat(bytes));
    }
    const { arrays, manifest } = await totalOf(folder, HERE, {
      from: "2031-05-03T12:01:00Z",
      to: "2031-05-03T12:05:00Z",
    });
    // Z = 200 R^1.6 (Marshall and others, 1955), solved by hand: 40 dBZ is 11.53 mm/h; four minutes of it.
    const total = totals(arrays);
    for (const [column, row] of [
      [28, 20],
      [12, 19],
      [20, 10],
    ])
      expect(total[row! * 40 + column!]).toBeCloseTo((11.53 * 4) / 60, 3);
    expect(total[0]! > 0).toBe(false);
    expect(manifest.counts).toMatchObject({ radars: 1, rounds: 2 });
  });

  test("a volume that came in chunks is one, beside one that came whole; a missing chunk is said", async () => {
    const folder = path.join(scratch, "chunks");
    mkdirSync(folder);
    // Records that bzip2 made, as they were sent: the first behind the volume header.
    const packed = readFileSync(path.join(FIXTURES, "level2-records.ar2v"));
    const chunks: string[] = [];
    for (let at = 24; at < packed.length; ) {
      const end = at + 4 + Math.abs(packed.readInt32BE(at));
      const name = path.join(folder, `20310503-120000-00${chunks.length + 1}`);
      writeFileSync(name, packed.subarray(at === 24 ? 0 : at, end));
      chunks.push(name);
      at = end;
    }
    expect(chunks).toHaveLength(4);
    const whole = Buffer.concat([volumeHeader(), ...rays(8, NOON_MS + ROUND_MS, REFLECTIVITY)]);
    writeFileSync(path.join(folder, "20310503-120500-001"), whole);

    const survey = await inProcess(["survey", folder, "--json", "--quiet"]);
    const { radars, wrong } = JSON.parse(survey.stdout) as {
      radars: { sweepCount: number; roundCount: number }[];
      wrong: { what: string }[];
    };
    expect(radars).toMatchObject([{ sweepCount: 4, roundCount: 2 }]);
    expect(wrong.filter(({ what }) => what.includes("part of this turn"))).toEqual([]);

    const { arrays, manifest } = await totalOf(folder, HERE, {
      from: "2031-05-03T12:01:00Z",
      to: "2031-05-03T12:05:00Z",
    });
    expect(manifest.inputs.map(({ use }) => use)).toEqual(["used", "used", "used", "used", "used"]);
    expect(manifest.counts).toMatchObject({ radars: 1, rounds: 2 });
    expect(Math.max(...totals(arrays).filter((mm) => mm >= 0))).toBeGreaterThan(1);

    rmSync(chunks[1]!);
    const holed = await inProcess(["survey", folder, "--json", "--quiet"]);
    const told = (JSON.parse(holed.stdout) as { wrong: { what: string }[] }).wrong;
    expect(told.map(({ what }) => what)).toContain(
      "1 chunk of this volume missing before it, by the numbers in the names: what is there is read",
    );
  });
});

describe("CfRadial 1", () => {
  test("two files make a total", async () => {
    const folder = path.join(scratch, "cfradial");
    mkdirSync(folder);
    copyFileSync(path.join(FIXTURES, "cfradial1-classic.nc"), path.join(folder, "a.nc"));
    // The same five minutes later: the text that times count from, changed in place.
    const later = readFileSync(path.join(folder, "a.nc"));
    const at = later.indexOf("2031-05-03T12:00:00Z");
    later.write("2031-05-03T12:05:00Z", at, "latin1");
    writeFileSync(path.join(folder, "b.nc"), later);
    const { arrays, manifest } = await totalOf(
      folder,
      { lat: 52.5, lon: 3.25 },
      { from: "2031-05-03T12:01:00Z", to: "2031-05-03T12:05:00Z" },
      20,
    );
    expect(manifest.counts).toMatchObject({ radars: 1, rounds: 2 });
    expect(manifest.inputs.map(({ use }) => use)).toEqual(["used", "used"]);
    // cfradial1.cdl: the last gate of the ray to the east, 2250 m off, is 34 × 0.5 - 10 = 7 dBZ, and 27 with the plan's
    // offset: by Z = 200 R^1.6, solved by hand, 1.776 mm/h; four minutes of it.
    expect(totals(arrays)[20 * 40 + 22]).toBeCloseTo((1.776 * 4) / 60, 4);
  });
});
