import { expect, test } from "vitest";
import { InputError } from "./model/errors.ts";
import { RELATIONS } from "./relation-catalogue.ts";
import {
  findRelation,
  meltedReflectivityDbz,
  rainRateMmPerHour,
  reflectivityDbz,
  relationCaution,
} from "./relations.ts";
import { zrRelation } from "./zr-relation.ts";

test("the names the plan uses are in the catalogue", () => {
  const names = ["marshall-1955-200/1.6", "fulton-1998-300/1.4", "rosenfeld-1993-250/1.2"];
  expect(names.map((name) => findRelation(name).name)).toEqual(names);
});

test("the catalogue is sorted by b, then A, and each name is there once", () => {
  const sorted = [...RELATIONS].sort((one, other) => one.b - other.b || one.a - other.a);
  expect(RELATIONS).toEqual(sorted);
  expect(new Set(RELATIONS.map(({ name }) => name)).size).toBe(RELATIONS.length);
});

test.each(RELATIONS)("$name is named by its coefficients and says where it fits", (relation) => {
  expect(relation.name).toMatch(/^[a-z]+(-[a-z]+)*(-\d{4})?-\d+\/\d+\.\d+$/);
  const [a, b] = (relation.name.split("-").at(-1) ?? "").split("/").map(Number);
  expect([a, b]).toEqual([relation.a, relation.b]);
  expect(relation.regime.length).toBeGreaterThan(5);
  expect(relation.source.length).toBeGreaterThan(10);
  expect(relation.validRateMmPerHour.low).toBeLessThan(relation.validRateMmPerHour.high);
  // Years in a name are the years of the source.
  const year = /-(\d{4})-/.exec(relation.name)?.[1];
  if (year !== undefined) expect(relation.source).toContain(`(${year})`);
});

test("undetect is dry, nodata stays unknown, in both directions", () => {
  for (const relation of RELATIONS) {
    expect(rainRateMmPerHour(Number.NEGATIVE_INFINITY, relation)).toBe(0);
    expect(rainRateMmPerHour(Number.NaN, relation)).toBeNaN();
    expect(reflectivityDbz(0, relation)).toBe(Number.NEGATIVE_INFINITY);
    expect(reflectivityDbz(Number.NaN, relation)).toBeNaN();
  }
});

test.each(RELATIONS)("$name: rate of reflectivity and back, and more echo is more rain", (relation) => {
  let lower = 0;
  for (let dbz = -10; dbz <= 70; dbz += 0.5) {
    const rate = rainRateMmPerHour(dbz, relation);
    expect(rate).toBeGreaterThan(lower);
    expect(reflectivityDbz(rate, relation)).toBeCloseTo(dbz, 9);
    lower = rate;
  }
});

test("snow, step one: dry snow shows 6.5 dB less than its melted drops", () => {
  // Smith (1984), J. Clim. Appl. Meteorol. 23, 1258-1260: |K|2 is 0.93 for water, 0.208 for ice of melted
  // diameters; 10 log10 of their ratio is 6.50 dB as printed.
  expect(Math.abs(meltedReflectivityDbz(20) - 20 - 10 * Math.log10(0.93 / 0.208))).toBeLessThan(0.005);
});

test("snow, step two: the relation is applied to the melted drops, rain as it is", () => {
  // By hand: 2000 R^2 with R = 1 mm/h is Z = 2000 mm6 m-3, 33.0103 dBZ, of which the radar shows 26.5103.
  const snow = findRelation("gunn-1958-2000/2.0");
  expect(rainRateMmPerHour(26.5103, snow)).toBeCloseTo(1, 5);
  expect(reflectivityDbz(1, snow)).toBeCloseTo(26.5103, 4);
  const sameNumbersForRain = zrRelation(2000, 2, "the same numbers, for rain");
  expect(rainRateMmPerHour(33.0103, sameNumbersForRain)).toBeCloseTo(1, 5);
});

test("only snow relations carry a caution, and it names the step", () => {
  for (const relation of RELATIONS) {
    const caution = relationCaution(relation);
    if (relation.phase === "rain") expect(caution).toBeUndefined();
    else expect(caution).toContain("raised by 6.5 dB");
  }
  expect(RELATIONS.filter(({ phase }) => phase === "snow")).toHaveLength(2);
});

test("a misspelt relation names the nearest ones", () => {
  expect(() => findRelation("marshal-1955-200/1.6", "plan.yaml, line 12")).toThrow(InputError);
  try {
    findRelation("marshal-1955-200/1.6", "plan.yaml, line 12");
  } catch (error) {
    const fault = error as InputError;
    expect(fault.kind).toBe("usage");
    expect(fault.what).toBe('no relation is called "marshal-1955-200/1.6"');
    expect(fault.where).toBe("plan.yaml, line 12");
    expect(fault.fix).toMatch(/^write "marshall-1955-200\/1\.6", /);
  }
});

test.each([
  [0, 1.6],
  [-200, 1.6],
  [200, 0],
  [Number.NaN, 1.6],
  [200, Number.POSITIVE_INFINITY],
])("a = %d, b = %d is no relation", (a, b) => {
  expect(() => zrRelation(a, b, "a slip")).toThrow(RangeError);
});
