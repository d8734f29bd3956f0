// Verification topic i (events and design): published and independently computed values, held against the functions
// that the command `event` calls. Sources stand at each value.
import { readFileSync } from "node:fs";
import type { FrequencyTable, Grid, Ring } from "@rainreckon/core";
import {
  type CheckValue,
  checkValue,
  inputNumber,
  inputNumbers,
  runReferenceSuite,
} from "@rainreckon/test-data/published";
import { expect, test } from "vitest";
import { arealDepth, cellFractions } from "./areal.ts";
import { meanRateMmPerHour } from "./depth-area-duration.ts";
import { type DurationMaximum, durationMaxima, fixedToSlidingRatio } from "./depth-duration.ts";
import {
  annualFromPartial,
  frequencyDepthMm,
  periodOfVariate,
  reducedVariate,
  returnPeriod,
} from "./frequency.ts";
import { rainEvents } from "./rain-events.ts";
import { type RainSeries, volumeM3 } from "./rain-series.ts";

const MINUTE_MS = 60_000;

function series(depthMm: readonly number[], stepMs: number): RainSeries {
  return {
    startEpochMs: 0,
    stepMs,
    depthMm: Float64Array.from(depthMm),
    observedFraction: new Float64Array(depthMm.length).fill(1),
    atCap: new Uint8Array(depthMm.length),
  };
}

function events(entry: CheckValue) {
  const steps = series(inputNumbers(entry, "series_mm"), 10 * MINUTE_MS);
  const { events: found } = rainEvents(steps, {
    dryTimeMs: inputNumber(entry, "min_dry_steps") * steps.stepMs,
    minDepthMm: entry.inputs.min_total_mm === undefined ? 0 : inputNumber(entry, "min_total_mm"),
    wetMm: 0,
    minObserved: 0.9,
  });
  return found.map((event) => ({
    first: event.steps.from,
    last: event.steps.to - 1,
    steps: event.steps.to - event.steps.from,
    total: event.depthMm,
    max: Math.max(...steps.depthMm.slice(event.steps.from, event.steps.to)),
  }));
}

function rollingAndClock(entry: CheckValue) {
  const stepMs = inputNumber(entry, "step_min") * MINUTE_MS;
  const steps = series(inputNumbers(entry, "series_mm"), stepMs);
  const durations = [5, 10, 15, 30, 60].map((minutes) => minutes * MINUTE_MS);
  const rolling = durationMaxima(steps, durations) as DurationMaximum[];
  const clock = durationMaxima(steps, durations, { clockAnchorEpochMs: 0 }) as DurationMaximum[];
  return Object.fromEntries(
    rolling.map((found, k) => [
      String(found.durationMs / MINUTE_MS),
      {
        rolling_max: found.depthMm,
        rolling_start_index: found.startEpochMs / stepMs,
        clock_max: clock[k].depthMm,
        ratio: found.depthMm / clock[k].depthMm,
      },
    ]),
  );
}

const table = (() => {
  const { duration_min, T_years, depth_mm } = checkValue("i-ddf-table").expected as {
    duration_min: number[];
    T_years: number[];
    depth_mm: number[][];
  };
  const made: FrequencyTable = {
    series: "AMS",
    kind: "point",
    source: "",
    edition: "",
    durationsMin: duration_min,
    periodsYears: T_years,
    depthMm: depth_mm,
  };
  return made;
})();

const cases = (entry: CheckValue) => entry.inputs.cases as readonly (readonly [number, number])[];

/** A daily series as the file has it. */
function dailyMm(): { year: number; mm: number }[] {
  const text = readFileSync(
    new URL("../../../test-data/published/data/hveravellir_daily.csv", import.meta.url),
    "utf8",
  );
  const [head, ...lines] = text.trim().split("\n");
  const names = head.split(",");
  const mmAt = names.findIndex((name) => name.includes("prec") || name.includes("mm"));
  const dateAt = names.findIndex((name) => name.includes("date"));
  return lines.map((line) => {
    const cells = line.split(",");
    return { year: Number(cells[dateAt].slice(0, 4)), mm: Number(cells[mmAt]) };
  });
}

function daily() {
  const days = dailyMm();
  const dayMs = 24 * 60 * MINUTE_MS;
  const steps = series(
    days.map(({ mm }) => mm),
    dayMs,
  );
  const most = (n: number) => (durationMaxima(steps, [n * dayMs])[0] as DurationMaximum).depthMm;
  const runs = rainEvents(steps, { dryTimeMs: dayMs, minDepthMm: 0, wetMm: 0.1, minObserved: 0.9 }).events;
  const wetRuns = runs.map((run) => run.steps.to - run.steps.from);
  const dryRuns = runs.map((run, k) => run.steps.from - (runs[k - 1]?.steps.to ?? 0));
  const yearly = (of: (depths: readonly number[]) => number) =>
    Object.fromEntries(
      [1972, 1973, 1974].map((year) => [
        String(year),
        of(days.filter((day) => day.year === year).map(({ mm }) => mm)),
      ]),
    );
  const sum = (depths: readonly number[]) => depths.reduce((total, mm) => total + mm, 0);
  return {
    n: days.length,
    total: sum(days.map(({ mm }) => mm)),
    "wet_days_ge_0.1": wetRuns.reduce((total, length) => total + length, 0),
    wet_days_ge_1: days.filter(({ mm }) => mm >= 1).length,
    max_1day: most(1),
    max_2day: most(2),
    max_3day: most(3),
    max_7day: most(7),
    annual_total: yearly(sum),
    annual_max: yearly((depths) => Math.max(...depths)),
    "longest_dry_run_lt_0.1": Math.max(...dryRuns),
    "longest_wet_run_ge_0.1": Math.max(...wetRuns),
  };
}

const grid: Grid = { crs: "plane", westM: 0, northM: 4, cellM: 1, nx: 4, ny: 4 };
/** The book counts rows from the south. */
const fromSouth = (rows: readonly (readonly number[])[]) => [...rows].reverse().flat();

function areal(entry: CheckValue, ringNames: readonly string[]) {
  const inputs = entry.inputs as Record<string, [number, number][] & number[][]>;
  const rings = ringNames.map((name) => [...inputs[name], inputs[name][0]] as Ring);
  const cells = cellFractions(grid, [rings]);
  const dense = new Float64Array(16);
  for (let k = 0; k < cells.cells.length; k++) dense[cells.cells[k]] = cells.fraction[k];
  const depthMm = fromSouth(inputs.rain_mm);
  const { depthMm: meanMm } = arealDepth(
    cells,
    { depthMm, observedMs: depthMm.map(() => 1), cappedMm: depthMm.map(() => 0) },
    1,
  );
  const rain = [...depthMm.keys()].map((cell) => ({ fraction: dense[cell], mm: depthMm[cell] }));
  const centred = rain.filter(({ fraction }, cell) => fraction > 0 && inRing(rings, cell));
  return {
    fractions: [3, 2, 1, 0].map((row) => [...dense.slice(4 * row, 4 * row + 4)]),
    area: cells.areaM2,
    areal_mean: meanMm,
    volume_m3_if_cells_are_1km2: volumeM3(meanMm, cells.areaM2),
    cells_with_centre_inside: centred.length,
    centre_in_polygon_mean: centred.reduce((sum, { mm }) => sum + mm, 0) / centred.length,
  };
}

/** Whether a cell's centre lies in the outer ring: a tiny square about it is wholly covered. */
function inRing(rings: readonly Ring[], cell: number): boolean {
  const [x, y] = [(cell % 4) + 0.5, 3.5 - Math.floor(cell / 4)];
  const dot: Grid = { ...grid, westM: x - 0.0005, northM: y + 0.0005, cellM: 0.001, nx: 1, ny: 1 };
  return cellFractions(dot, [rings]).fraction[0] > 0.5;
}

const perUnit = (value: number) => volumeM3(value, 1);
const NO_FIT = "no command fits a distribution: return periods are read from the user's own table";

runReferenceSuite({
  topics: ["i-events-design"],
  adapters: [
    ["i-unit-volume", (entry) => volumeM3(inputNumber(entry, "mm"), inputNumber(entry, "km2"))],
    [
      "i-unit-litre",
      (entry) => ({
        // A square metre is 1e-6 km² and a hectare 1e-2 km².
        l_per_m2: volumeM3(inputNumber(entry, "mm"), 1e-6) * 1000,
        m3_per_ha: volumeM3(inputNumber(entry, "mm"), 1e-2),
      }),
    ],
    ["i-unit-flow", (entry) => perUnit(inputNumber(entry, "mm_per_h")) / 3600],
    [/^i-events-(gap\d+|mintotal|boundary)$/, events],
    ["i-rolling-clock", rollingAndClock],
    ["i-weiss", (entry) => inputNumbers(entry, "n").map(fixedToSlidingRatio)],
    [
      "i-fixed-limits",
      () => {
        // A block of constant rain one interval long, its start drawn evenly: the better of the two fixed intervals.
        const shares = Array.from({ length: 1000 }, (_, k) =>
          Math.max((k + 0.5) / 1000, 1 - (k + 0.5) / 1000),
        );
        const mean = shares.reduce((sum, share) => sum + share, 0) / shares.length;
        const burst = durationMaxima(series([0, 7, 0], MINUTE_MS), [MINUTE_MS])[0] as DurationMaximum;
        return { burst: burst.depthMm / 7, block_mean_fraction: mean, block_ratio: 1 / mean };
      },
    ],
    [
      "i-ddf-depth",
      (entry) => cases(entry).map(([minutes, years]) => frequencyDepthMm(table, minutes, years)),
    ],
    [
      "i-ddf-depth-logT",
      () => ({
        gumbel_variate: frequencyDepthMm(table, 60, 20),
        lnT: frequencyDepthMm({ ...table, series: "PDS" }, 60, 20),
      }),
    ],
    [
      "i-ddf-return-period",
      (entry) =>
        cases(entry).map(([minutes, mm]) => {
          const period = returnPeriod(table, minutes, mm);
          if (period === undefined) return undefined;
          if (period.is === "at") return period.years;
          return `${period.is === "below" ? "<" : ">"}${period.years}`;
        }),
    ],
    ["i-ams-pds", (entry) => inputNumbers(entry, "T_p").map(annualFromPartial)],
    ["i-reduced-variate", (entry) => inputNumbers(entry, "T").map(reducedVariate)],
    ["i-area-triangle", (entry) => areal(entry, ["polygon"])],
    ["i-area-concave-hole", (entry) => areal(entry, ["outer", "hole"])],
    ["i-hveravellir", daily],
    [
      "i-linear-field-mean",
      (entry) => {
        const corners = entry.inputs.polygon as unknown as readonly (readonly [number, number])[];
        const cellM = 0.01;
        const fine: Grid = { crs: "plane", westM: 0, northM: 3, cellM, nx: 600, ny: 300 };
        const { cells, fraction, areaM2 } = cellFractions(fine, [[[...corners, corners[0]]]]);
        // Moments of each cell's own piece of the triangle: a rectangle, or what the slanting side leaves of one.
        let [x, y, whole] = [0, 0, 0];
        for (let k = 0; k < cells.length; k++) {
          const west = (cells[k] % 600) * cellM;
          const south = 3 - (Math.floor(cells[k] / 600) + 1) * cellM;
          const [cx, cy] = centroidBelow(west, south, cellM);
          whole += fraction[k];
          x += fraction[k] * cx;
          y += fraction[k] * cy;
        }
        const centroid = [x / whole, y / whole];
        return { centroid, mean: 2 + centroid[0] + 2 * centroid[1], area: areaM2 };
      },
    ],
  ],
  notApplicable: [
    { id: "i-unit-rational", reason: "no command works out a peak flow" },
    { id: "i-unit-inch", reason: "gauge files are converted where they are read, and tested there" },
    { id: "i-miet-cv", reason: "the dry time is the user's rule: no command fits it to a long record" },
    { id: "i-risk", reason: "no command speaks of a risk over years of use" },
    { id: /^i-(frequency-factor|chow-example|gumbel-vermont|gumbel-lratios)$/, reason: NO_FIT },
    { id: /^i-(uccle-.*|portpirie-gev|gev-quantiles|lmoment-unit)$/, reason: NO_FIT },
    { id: "i-plotting", reason: NO_FIT },
    { id: "i-thiessen", reason: "areas are means of the grid's cells, never of gauges alone" },
    { id: /^i-arf-/, reason: "an areal reduction comes from the user's own table" },
  ],
});

/** Centroid of what lies of a cell below the line from (6, 0) to (0, 3): by the trapezoids of 200 strips. */
function centroidBelow(west: number, south: number, size: number): [number, number] {
  const line = (at: number) => 3 - at / 2;
  if (line(west + size) >= south + size) return [west + size / 2, south + size / 2];
  let [area, x, y] = [0, 0, 0];
  for (let k = 0; k < 200; k++) {
    const at = west + ((k + 0.5) * size) / 200;
    const height = Math.min(size, Math.max(0, line(at) - south));
    area += height;
    x += height * at;
    y += height * (south + height / 2);
  }
  return [x / area, y / area];
}

// The variate and its inverse belong together; meanRateMmPerHour is checked by the definition of the unit.
test.each([2, 5, 10, 100])("the variate of %d years leads back to it", (years) => {
  expect(periodOfVariate(reducedVariate(years))).toBeCloseTo(years, 9);
});
test("12 mm in 30 minutes are 24 mm/h", () => {
  expect(meanRateMmPerHour(12, 30 * MINUTE_MS)).toBe(24);
});
