import { readFileSync } from "node:fs";
import path from "node:path";
import { METHOD_NAMES, METHOD_TITLES } from "@rainreckon/adjustment";
import { scoresSchema } from "@rainreckon/verification";
import { beforeAll, describe, expect, test } from "vitest";
import { planText, SOUND_AREA, writeAreas, writeGauges, writeScans } from "./even-rain.ts";
import { inProcess } from "./run-cli.ts";
import { arrayOf, csvRows, manifestOf, readNetCdf, scratchFolder, writeIn } from "./total-kit.ts";

// An hour of even rain over fourteen gauges that catch the more of it the farther east they stand, and a dead one.
const scratch = scratchFolder("choice");
const RUN = path.join(scratch, "run");
const PLAN = path.join(scratch, "plan.yaml");

/** Kilometres east of the radar of the k-th gauge that `writeGauges` places. */
const eastKm = (k: number) => (12 + k) * Math.sin(((20 + 17 * k) * Math.PI) / 180);
const GAUGES = Array.from({ length: 14 }, (_, k) => ({ id: `g${k}`, times: 1.2 + 0.012 * eastKm(k) }));

const scoresOf = (run: string) =>
  scoresSchema.parse(JSON.parse(readFileSync(path.join(run, "scores.json"), "utf8")));

beforeAll(async () => {
  await writeScans(scratch);
  writeGauges(scratch, [...GAUGES, { id: "dead", times: 0 }]);
  writeAreas(scratch, [SOUND_AREA]);
  // No word of an adjustment: a fresh plan lets cross-validation pick.
  writeIn(scratch, "plan.yaml", planText());
  const { status, stderr } = await inProcess(["total", PLAN, "--out", RUN]);
  if (status !== 0) throw new Error(stderr);
});

describe("a method picked by cross-validation", () => {
  test("stands in scores.json with every candidate, one by one and by clusters", () => {
    const { methodChoice } = scoresOf(RUN);
    expect(methodChoice?.candidates.map(({ name }) => name)).toEqual([...METHOD_NAMES]);
    for (const { name, errorMm, clusterErrorMm, gaugeCount } of methodChoice?.candidates ?? []) {
      expect([name, errorMm === null, clusterErrorMm === null]).toEqual([name, false, false]);
      // The dead gauge is judged by nobody.
      expect(gaugeCount).toBe(14);
    }
    // A plane of factors is no one factor: what interpolates does better by far.
    const errorOf = (name: string) => methodChoice?.candidates.find((one) => one.name === name)?.errorMm ?? 0;
    expect(errorOf("combined")).toBeLessThan(0.6 * errorOf("mean-field-bias"));
    expect(METHOD_NAMES.indexOf(methodChoice?.chosen as never)).toBeGreaterThan(
      METHOD_NAMES.indexOf("range-dependent"),
    );
    const folds = methodChoice?.candidates.reduce((sum, { chosenInFolds }) => sum + chosenInFolds, 0);
    expect(folds).toBe(14);
  });

  test("publishes the error of the outer folds: that of the column of pairs.csv", () => {
    const used = csvRows(path.join(RUN, "pairs.csv")).filter((row) => row.used === "yes");
    // The window is an hour, and so its pair and that of its hour are the same.
    const rows = [...new Map(used.map((row) => [row.gauge_id, row])).values()];
    expect(rows).toHaveLength(14);
    const squares = rows.reduce(
      (sum, row) => sum + (Number(row.cross_validated_mm) - Number(row.gauge_mm)) ** 2,
      0,
    );
    const { methodChoice } = scoresOf(RUN);
    expect(methodChoice?.outer.errorMm).toBeCloseTo(Math.sqrt(squares / 14), 2);
    expect(methodChoice?.outer.clusterErrorMm).toBeGreaterThan(0);
    expect(manifestOf(RUN).headline.crossValidatedErrorMm).toBeCloseTo(methodChoice?.outer.errorMm ?? 0, 9);
  });

  test("is named in the manifest, in README.txt and in the report, which shows the table", () => {
    const chosen = scoresOf(RUN).methodChoice?.chosen as (typeof METHOD_NAMES)[number];
    expect(manifestOf(RUN).headline.adjustmentMethod).toBe(METHOD_TITLES[chosen]);
    expect(readFileSync(path.join(RUN, "README.txt"), "utf8")).toContain(
      "The method was picked by cross-validation",
    );
    const report = readFileSync(path.join(RUN, "report.html"), "utf8");
    expect(report).toContain("Ways to adjust, compared");
    expect(report).toContain("one by one");
  });

  test("the deepest cell of a catchment is one of the adjusted field", async () => {
    const window = csvRows(path.join(RUN, "catchments.csv")).find(
      ({ start, end }) => start?.includes("12:00") && end?.includes("13:00"),
    );
    const adjusted = arrayOf(await readNetCdf(path.join(RUN, "totals.nc")), "adjusted_total").values;
    const mostMm = Array.from(adjusted)
      .filter(Number.isFinite)
      .reduce((most, mm) => Math.max(most, mm), 0);
    expect(Number(window?.max_cell_mm)).toBeGreaterThan(Number(window?.adjusted_mm));
    expect(Number(window?.max_cell_mm)).toBeLessThanOrEqual(mostMm + 1e-3);
  });
});

describe("gauges that nothing can be adjusted by", () => {
  test("a network that stands off the grid: one line says so", async () => {
    const away = GAUGES.map((gauge) => ({ ...gauge, station: `${gauge.id},Away,9.5,48.1` }));
    writeGauges(scratch, away);
    const run = path.join(scratch, "away");
    const { status } = await inProcess(["total", PLAN, "--out", run]);
    expect(status).toBe(0);
    expect(scoresOf(run).afterReason).toBe("no adjustment: no gauge with readings stands on the grid");
    expect(manifestOf(run).headline.adjustmentReason).toBe("no gauge with readings stands on the grid");
  });

  test("a network without a drop: one line says so", async () => {
    writeGauges(
      scratch,
      GAUGES.map(({ id }) => ({ id, times: 0 })),
    );
    const run = path.join(scratch, "dry");
    expect((await inProcess(["total", PLAN, "--out", run])).status).toBe(0);
    expect(String(manifestOf(run).headline.adjustmentReason)).toMatch(
      /^(none of 14 gauges is trusted|0\.0 mm summed over the gauges, 10 mm needed)$/,
    );
  });
});
