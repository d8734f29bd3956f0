import { type CheckValue, inputNumber, runReferenceSuite } from "@rainreckon/test-data/published";
import { describe, expect, test } from "vitest";
import {
  backgroundDbz,
  type ConvectiveRadiusRule,
  convectiveExcessDb,
  convectiveRadiusM,
  discHalfWidths,
  RAIN_TYPE,
  RAIN_TYPE_DEFAULTS,
  type RainTypeSettings,
  rainTypes,
  type TypeGrid,
} from "./steiner.ts";

const PAPER: RainTypeSettings = { ...RAIN_TYPE_DEFAULTS, intensityDbz: 40 };

/** A square field of one value with another in its middle. */
function squareField(points: number, cellM: number, around: number, centre: number) {
  const dbz = new Float64Array(points * points).fill(around);
  const middle = (dbz.length - 1) / 2;
  dbz[middle] = centre;
  return { dbz, middle, grid: { nx: points, ny: points, cellM } };
}

function fieldOf(entry: CheckValue) {
  return squareField(
    inputNumber(entry, "grid_points"),
    1000 * inputNumber(entry, "grid_km"),
    inputNumber(entry, "background_field_dBZ"),
    inputNumber(entry, "centre_dBZ"),
  );
}

function countConvective(types: Uint8Array): number {
  return types.filter((type) => type === RAIN_TYPE.convective).length;
}

runReferenceSuite({
  topics: ["i-convective-stratiform"],
  adapters: [
    ["steiner-peak-*", (entry) => convectiveExcessDb(inputNumber(entry, "background_dBZ"))],
    [
      "steiner-radius-*",
      (entry) =>
        convectiveRadiusM(
          inputNumber(entry, "background_dBZ"),
          entry.inputs.relation as ConvectiveRadiusRule,
        ) / 1000,
    ],
    [
      "steiner-npix",
      (entry) =>
        discHalfWidths(1000 * inputNumber(entry, "radius_km"), 1000 * inputNumber(entry, "grid_km")).reduce(
          (points, half, row) => points + (row === 0 ? 1 : 2) * (2 * half + 1),
          0,
        ),
    ],
    [
      /^steiner-isolated-/,
      (entry) => {
        const { dbz, middle, grid } = squareField(
          21,
          2000,
          Number.NEGATIVE_INFINITY,
          inputNumber(entry, "centre_dBZ"),
        );
        const noEchoInBackground = entry.inputs.no_echo_in_mean === true;
        return backgroundDbz(dbz, grid, { ...PAPER, noEchoInBackground })[middle];
      },
    ],
    [
      /^steiner-[a-z]+-zbg$/,
      (entry) => {
        const { dbz, middle, grid } = fieldOf(entry);
        return backgroundDbz(dbz, grid, PAPER)[middle];
      },
    ],
    [
      /^steiner-[a-z]+-convective$/,
      (entry) => {
        const { dbz, middle, grid } = fieldOf(entry);
        return rainTypes(dbz, grid, PAPER)[middle] === RAIN_TYPE.convective;
      },
    ],
    [
      /^steiner-[a-z]+-count$/,
      (entry) => {
        const { dbz, grid } = fieldOf(entry);
        return countConvective(rainTypes(dbz, grid, PAPER));
      },
    ],
  ],
});

/** The background as it is defined, point by point. */
function backgroundBySearch(dbz: Float64Array, { nx, cellM }: TypeGrid, cell: number, dry: boolean): number {
  let sum = 0;
  let count = 0;
  dbz.forEach((value, other) => {
    const dx = (other % nx) - (cell % nx);
    const dy = Math.floor(other / nx) - Math.floor(cell / nx);
    if ((dx ** 2 + dy ** 2) * cellM ** 2 > 11_000 ** 2 || Number.isNaN(value)) return;
    if (value === Number.NEGATIVE_INFINITY && !dry) return;
    sum += 10 ** (value / 10);
    count++;
  });
  return 10 * Math.log10(sum / count);
}

/** Echo of −10 to 55 dBZ, a fifth of the points dry and a tenth not observed; a plain congruential generator. */
function raggedField(nx: number, ny: number): Float64Array {
  let state = 12345;
  const random = () => {
    state = (1103515245 * state + 12345) % 2 ** 31;
    return state / 2 ** 31;
  };
  return Float64Array.from({ length: nx * ny }, () => {
    const kind = random();
    if (kind < 0.2) return Number.NEGATIVE_INFINITY;
    return kind < 0.3 ? Number.NaN : -10 + 65 * random();
  });
}

describe("background", () => {
  test.each([
    [1000, false],
    [2000, true],
    [3700, false],
  ])(
    "on points of %i m it is the mean over the disc, edges and holes too (dry points: %s)",
    (cellM, noEcho) => {
      const grid = { nx: 31, ny: 17, cellM };
      const dbz = raggedField(31, 17);
      const mean = backgroundDbz(dbz, grid, { ...PAPER, noEchoInBackground: noEcho });
      mean.forEach((value, cell) => {
        if (dbz[cell] > Number.NEGATIVE_INFINITY) {
          expect(Math.abs(value - backgroundBySearch(dbz, grid, cell, noEcho))).toBeLessThan(1e-9);
        } else expect(value).toBeNaN();
      });
    },
  );
});

describe("rain types", () => {
  // 38 dBZ alone: excess 0 < 1.98 over itself; 38 − 18.13 = 19.87 ≥ 8.17 over dry surroundings.
  test.each([
    [false, RAIN_TYPE.stratiform],
    [true, RAIN_TYPE.convective],
  ])("a lone 38 dBZ in no echo, dry points in the mean: %s", (noEchoInBackground, type) => {
    const { dbz, middle, grid } = squareField(21, 2000, Number.NEGATIVE_INFINITY, 38);
    const types = rainTypes(dbz, grid, { ...PAPER, noEchoInBackground });
    expect(types[middle]).toBe(type);
    expect(types.filter((other) => other !== RAIN_TYPE.none)).toHaveLength(1);
  });

  test("the intensity is met by equality, and is a setting", () => {
    const { dbz, middle, grid } = squareField(5, 2000, 39.5, 40);
    expect(rainTypes(dbz, grid, PAPER)[middle]).toBe(RAIN_TYPE.convective);
    expect(rainTypes(dbz, grid, { ...PAPER, intensityDbz: 45 })[middle]).toBe(RAIN_TYPE.stratiform);
  });

  test("no echo and what was not observed keep 0 within a convective radius", () => {
    const { dbz, middle, grid } = squareField(7, 1000, 30, 50);
    dbz[middle - 1] = Number.NEGATIVE_INFINITY;
    dbz[middle + 1] = Number.NaN;
    const types = rainTypes(dbz, grid, PAPER);
    expect([types[middle - 1], types[middle], types[middle + 1]]).toEqual([0, 1, 0]);
  });

  // Background of the centre by hand: all 49 points lie within 11 km, (48 · 10³ + 10⁵) / 49 = 3020 = 34.8 dBZ,
  // so 3 km: 1 + 4 + 4 + 4 + 8 + 4 points at 0, 1, √2, 2, √5, √8 km, and 4 at 3 km.
  test("a centre makes echo within its radius convective", () => {
    const { dbz, grid } = squareField(7, 1000, 30, 50);
    expect(countConvective(rainTypes(dbz, grid, PAPER))).toBe(29);
  });

  test("the radius rules order themselves", () => {
    const { dbz, grid } = squareField(21, 1000, 27, 50);
    const counts = (["small", "medium", "large"] as const).map((convectiveRadius) =>
      countConvective(rainTypes(dbz, grid, { ...PAPER, convectiveRadius })),
    );
    expect(counts[0]).toBeLessThan(counts[1]);
    expect(counts[1]).toBeLessThan(counts[2]);
  });

  test("no type hangs on where the field lies in the grid, save for its edges", () => {
    const dbz = raggedField(30, 30);
    const wide = new Float64Array(34 * 33).fill(Number.NaN);
    for (let row = 0; row < 30; row++) wide.set(dbz.subarray(30 * row, 30 * row + 30), (row + 2) * 34 + 3);
    const types = rainTypes(dbz, { nx: 30, ny: 30, cellM: 2000 }, PAPER);
    const shifted = rainTypes(wide, { nx: 34, ny: 33, cellM: 2000 }, PAPER);
    for (let row = 0; row < 30; row++) {
      expect(shifted.subarray((row + 2) * 34 + 3, (row + 2) * 34 + 33)).toEqual(
        types.subarray(30 * row, 30 * row + 30),
      );
    }
  });
});
