import { uniformStream } from "@rainreckon/verification";
import { beforeAll, describe, expect, test } from "vitest";
import { drawMember } from "./error-member.ts";
import { fitSpread } from "./error-model.ts";
import { pointRange } from "./intervals.ts";

const GRID = { crs: "", westM: 0, northM: 12_000, cellM: 1000, nx: 12, ny: 12 };
const MODEL = {
  ...fitSpread([], { followsGauges: true, rangeKm: 6, gaugesSpread: 0.05 }),
  medianLogError: -0.03,
};
const TIME = { lastingShare: 0.3, hours: 1, windowHours: 4 };
const MEMBERS = 600;

/** Rain of 3 mm an hour for 4 h in the north, none in the last row, nothing observed in one cell. */
const hourMm = Float32Array.from({ length: 144 }, (_, cell) =>
  cell >= 132 ? 0 : cell === 50 ? Number.NaN : 3,
);
const totalMm = hourMm.map((mm) => 4 * mm);
/** Sure in the west, where gauges stand, unsure in the east. */
const logSpread = Float32Array.from({ length: 144 }, (_, cell) => (cell % 12 < 6 ? 0.1 : 0.4));

function drawn(seed: number): Float32Array[] {
  const member = drawMember({
    grid: GRID,
    model: MODEL,
    time: TIME,
    totalMm,
    logSpread,
    uniform: uniformStream(seed),
  });
  return [0, 1, 2, 3].map(() => member.next(hourMm, 1));
}

describe("many members", () => {
  const totals: Float64Array[] = [];
  const firstHours: Float32Array[] = [];

  beforeAll(() => {
    for (let seed = 0; seed < MEMBERS; seed++) {
      const hours = drawn(seed);
      firstHours.push(hours[0]);
      totals.push(Float64Array.from(hourMm, (_, cell) => hours.reduce((sum, hour) => sum + hour[cell], 0)));
    }
  });

  const statistics = (values: readonly number[]) => {
    const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
    const variance = values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / (values.length - 1);
    return { mean, spread: Math.sqrt(variance) };
  };

  test.each([
    ["near gauges", 26],
    ["far from them", 33],
  ])("have the model's mean, standard error and p10 to p90, %s", (_where, cell) => {
    const { mean, spread } = statistics(totals.map((total) => total[cell]));
    const range = pointRange(12, MODEL.medianLogError, logSpread[cell]);
    // Four standard errors of a mean, and of a spread, of 600.
    expect(Math.abs(mean - range.meanMm)).toBeLessThan((4 * range.standardErrorMm) / Math.sqrt(MEMBERS));
    expect(Math.abs(spread / range.standardErrorMm - 1)).toBeLessThan(0.15);
    const inside = totals.filter((total) => total[cell] >= range.p10Mm && total[cell] <= range.p90Mm);
    // Binomial about 0.8: four standard errors are 0.065.
    expect(Math.abs(inside.length / MEMBERS - 0.8)).toBeLessThan(0.065);
  });

  test("agree better near gauges than far from them", () => {
    const spread = (cell: number) => statistics(totals.map((total) => total[cell])).spread;
    expect(spread(33)).toBeGreaterThan(3 * spread(26));
  });

  test("are alike in cells side by side, less so farther away", () => {
    const correlation = (a: number, b: number) => {
      const [one, other] = [a, b].map((cell) => totals.map((total) => Math.log(total[cell])));
      const [ma, mb] = [statistics(one), statistics(other)];
      const covariance = one.reduce((sum, value, k) => sum + (value - ma.mean) * (other[k] - mb.mean), 0);
      return covariance / (MEMBERS - 1) / ma.spread / mb.spread;
    };
    // Variance 0.16, 0.0025 of it shared wholly; 0.05 and 0.95 exp(-d / 6) of the rest.
    const expected = (km: number) => (0.0025 + 0.1575 * (0.05 + 0.95 * Math.exp(-km / 6))) / 0.16;
    expect(Math.abs(correlation(30, 31) - expected(1))).toBeLessThan(0.1);
    expect(Math.abs(correlation(7, 7 + 9 * 12) - expected(9))).toBeLessThan(0.16);
  });

  test("spread more in one hour than over the window, about the same mean", () => {
    const hour = statistics(firstHours.map((first) => first[33]));
    const window = statistics(totals.map((total) => total[33]));
    expect(hour.spread / hour.mean).toBeGreaterThan(1.1 * (window.spread / window.mean));
    expect(Math.abs(hour.mean / (window.mean / 4) - 1)).toBeLessThan(0.08);
  });

  test("leave dry cells dry and missing ones missing, and never fall below 0", () => {
    for (const total of totals) {
      expect(total[140]).toBe(0);
      expect(total[50]).toBeNaN();
      expect(total[33]).toBeGreaterThanOrEqual(0);
    }
  });
});

test("a member hangs on its seed alone", () => {
  expect(drawn(7)).toEqual(drawn(7));
  expect(drawn(8)[0]).not.toEqual(drawn(7)[0]);
});
