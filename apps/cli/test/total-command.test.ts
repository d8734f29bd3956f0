import { existsSync, readdirSync, readFileSync } from "node:fs";
import path from "node:path";
import { beforeAll, describe, expect, test } from "vitest";
import { z } from "zod";
import {
  area,
  box,
  planText,
  SOUND_AREA,
  SOUND_GAUGES,
  writeAreas,
  writeGauges,
  writeScans,
} from "./even-rain.ts";
import { type CliResult, cli, ensureBuilt } from "./run-cli.ts";
import { csvRows, manifestOf, scratchFolder, total, writeIn } from "./total-kit.ts";

const folder = scratchFolder("command");
const SCANS_LEFT_OUT = [10, 25, 40, 55];

beforeAll(async () => {
  ensureBuilt();
  await writeScans(folder, SCANS_LEFT_OUT);
});

/** What `total --schema` prints, made into something that checks. */
function published(): z.ZodType {
  const { status, stdout, stderr } = cli(["total", "--schema"]);
  expect(status, stderr).toBe(0);
  return z.fromJSONSchema(JSON.parse(stdout) as Parameters<typeof z.fromJSONSchema>[0]);
}

describe("radar alone, without gauges or catchments", () => {
  const run = path.join(folder, "alone");
  let plan: string;
  let result: CliResult;

  beforeAll(() => {
    plan = writeIn(folder, "alone.yaml", planText({ gauges: "", catchments: "", title: "Alone" }));
    result = total(plan, "alone", ["--json", "--quiet"]);
  });

  test("works, and --json says on stdout what --schema publishes", () => {
    expect(result.status, result.stderr).toBe(0);
    const told = JSON.parse(result.stdout) as Record<string, unknown>;
    expect(published().parse(told)).toEqual(told);
    expect(told).toMatchObject({ outcome: "done", runDigest: manifestOf(run).runDigest });
    expect(told.headline).toEqual(manifestOf(run).headline);
    // The schema is no rubber stamp.
    expect(published().safeParse({ ...told, outcome: "perhaps" }).success).toBe(false);
    expect(published().safeParse({ ...told, more: 1 }).success).toBe(false);
  });

  test("--quiet leaves stderr empty", () => {
    expect(result.stderr).toBe("");
  });

  test("says what is missing, and gives no adjusted figure, not even a copy", () => {
    const files = readdirSync(run);
    expect(files).not.toContain("adjusted_total.tif");
    expect(files).toEqual(
      expect.arrayContaining([
        "totals.nc",
        "radar_total.tif",
        "isohyets.geojson",
        "report.html",
        "manifest.json",
      ]),
    );
    const { headline } = manifestOf(run);
    expect(headline).toMatchObject({ districtAdjustedMm: null, crossValidatedErrorMm: null, catchments: [] });
    expect(headline.adjustmentReason).toBe("no gauge with readings stands on the grid");
    expect(headline.cautions).toEqual(
      expect.arrayContaining(["There are no gauges beside this total: nothing checks it."]),
    );
    expect(readFileSync(path.join(run, "README.txt"), "utf8")).toMatch(
      /There are no adjusted depths: no gauge with readings stands on the grid/,
    );
    for (const table of ["catchments.csv", "pairs.csv", "gauges.csv"]) {
      expect(csvRows(path.join(run, table))).toEqual([]);
      expect(readFileSync(path.join(run, table), "utf8")).toMatch(/^\w+(,\w+)+\r?\n$/);
    }
    const scores = JSON.parse(readFileSync(path.join(run, "scores.json"), "utf8")) as object;
    expect(scores).toMatchObject({ after: null, before: { pairCount: 0, usedCount: 0 } });
  });

  test("again: already there, on the terminal and as JSON", () => {
    const again = total(plan, "alone", ["--json"]);
    expect(again.status).toBe(0);
    const told = JSON.parse(again.stdout) as Record<string, unknown>;
    expect(published().parse(told)).toEqual(told);
    expect(told).toMatchObject({ outcome: "already there", folder: "alone" });
  });
});

describe("--dry-run", () => {
  test("tells hours, scans, gauges, memory, disk and minutes, and writes nothing", () => {
    writeGauges(folder, SOUND_GAUGES);
    writeAreas(folder, [SOUND_AREA]);
    const plan = writeIn(folder, "dry.yaml", planText());
    const before = readdirSync(folder, { recursive: true });
    const { status, stdout, stderr } = total(plan, "dry", ["--dry-run"]);
    expect(status, stderr).toBe(0);
    expect(stdout).toMatch(/about \d+ minutes? on one core, [\d,]+ MB of memory and [\d,]+ MB of disk/);
    // Fifteen rounds from -5 to 65 minutes, four of them left out; all lie within the longest gap of the window.
    expect(stdout).toMatch(/1 h, 11 scan files, 11 rounds in 1 unit of work/);
    expect(stdout).toMatch(/6 gauges, 1 catchment, 80 × 80 cells of 1000 m/);
    expect(stdout).toMatch(/Nothing was written\.\n$/);
    expect(readdirSync(folder, { recursive: true })).toEqual(before);

    const asJson = JSON.parse(total(plan, "dry", ["--dry-run", "--json"]).stdout) as Record<string, unknown>;
    expect(published().parse(asJson)).toEqual(asJson);
    expect(asJson).toMatchObject({ outcome: "dry run", estimate: { hours: 1, scanFiles: 11, gauges: 6 } });
    expect(existsSync(path.join(folder, "dry"))).toBe(false);
  });
});

describe("names that mean harm come out harmless", () => {
  const ESCAPE = "\u001b";
  const TITLE = `${ESCAPE}[2J<script>alert("title")</script>`;
  const GAUGE_IDS = [
    '=HYPERLINK("http://invalid.example","x")',
    "+1+1",
    "@SUM(A1)",
    "<img src=x onerror=alert(1)>",
    `${ESCAPE}]0;owned`,
    "-2+3",
  ];
  const AREA_NAME = `<svg onload=alert(1)>${ESCAPE}[31m`;
  const harm = path.join(folder, "harm");
  const run = path.join(harm, "run");
  let result: CliResult;
  let raw: Readonly<Record<string, string>>;

  beforeAll(async () => {
    await writeScans(harm, SCANS_LEFT_OUT);
    writeGauges(harm, [
      ...GAUGE_IDS.map((id) => ({ id, times: 1.2 })),
      { id: `${ESCAPE}[31mno station`, times: 1, station: "" },
    ]);
    writeAreas(harm, [
      area("=1+1", AREA_NAME, [box(3.1, 52.6)]),
      area("</title><script>", "Plain", [box(2.9, 52.4)]),
      area(`${ESCAPE}[1mfar`, "Far", [box(12, 48)]),
    ]);
    const plan = writeIn(
      harm,
      "plan.yaml",
      planText({ title: JSON.stringify(TITLE), pairs: "{ interval: PT15M }", author: '"<b>A</b>"' }),
    );
    result = total(plan, "run");
    expect(result.status, result.stderr).toBe(0);
    raw = Object.fromEntries(
      readdirSync(run)
        .filter((file) => !/\.(nc|tif)$/.test(file))
        .map((file) => [file, readFileSync(path.join(run, file), "utf8")]),
    );
  });

  test("on the terminal: no control character but line ends", () => {
    const control = /[\u0000-\u0009\u000b-\u001f\u007f-\u009f]/;
    expect(result.stdout).not.toMatch(control);
    expect(result.stderr).not.toMatch(control);
    expect(result.stderr).toContain("no station");
    expect(result.stdout).toContain('[2J<script>alert("title")</script>');
  });

  test("in text and tables: no control character, no cell that a spreadsheet would work out", () => {
    for (const file of ["README.txt", "catchments.csv", "gauges.csv", "pairs.csv"])
      expect(raw[file], file).not.toContain(ESCAPE);
    for (const file of ["catchments.csv", "gauges.csv", "pairs.csv"]) {
      const rows = csvRows(path.join(run, file));
      expect(rows.length).toBeGreaterThan(0);
      for (const row of rows) {
        for (const cell of Object.values(row)) {
          // A negative number is a number; everything else that begins like a formula is guarded.
          if (/^-?\d+(\.\d+)?$/.test(cell)) continue;
          expect(cell, file).not.toMatch(/^[=+\-@\t\r]/);
        }
      }
    }
    const gauges = csvRows(path.join(run, "gauges.csv")).map((row) => row.gauge_id!);
    expect(gauges).toHaveLength(GAUGE_IDS.length);
    expect(gauges.some((id) => id.includes('=HYPERLINK("http://invalid.example","x")'))).toBe(true);
  });

  test("in the report: text, not markup", () => {
    const report = raw["report.html"]!;
    expect(report).not.toContain(ESCAPE);
    expect(report).not.toMatch(/<script>alert|<img src=x|<svg onload|<\/title><script>|<b>A<\/b>/i);
    expect(report).toContain("&lt;img src=x onerror=alert(1)&gt;");
    expect(report).toContain("&lt;svg onload=alert(1)&gt;");
  });

  test("in JSON: as given, so that ids still match, and with control characters escaped", () => {
    const { headline } = manifestOf(run) as unknown as {
      headline: { catchments: { id: string; name: string }[] };
    };
    expect(headline.catchments[0]).toMatchObject({ id: "=1+1" });
    for (const file of ["manifest.json", "scores.json", "isohyets.geojson"]) {
      expect(raw[file], file).not.toContain(ESCAPE);
      expect(() => JSON.parse(raw[file]!)).not.toThrow();
    }
  });
});
