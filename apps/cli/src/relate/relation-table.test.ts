import { InputError } from "@rainreckon/core";
import { expect, test } from "vitest";
import { relationsByName, relationTable, relationTableSchema, relationTableText } from "./relation-table.ts";

test("the whole catalogue stands by ascending b, then A, with everything that its schema asks for", () => {
  const table = relationTableSchema.parse(relationTable(relationsByName(undefined), [20, 40], { dbz: 53 }));
  const order = table.relations.map(({ a, b }) => [b, a]);
  expect(order).toEqual([...order].sort(([b1, a1], [b2, a2]) => b1! - b2! || a1! - a2!));
  expect(table.relations.length).toBeGreaterThan(10);
});

// Closed forms: Z = 200 R^1.6 gives Z = 200 = 23.0103 dBZ at 1 mm/h; Z = 300 R^1.4 gives
// 10 log10(300 * 100^1.4) = 24.7712 + 28 = 52.7712 dBZ at 100 mm/h.
test("rates and caps are those of the power law", () => {
  const [own, marshall] = relationTable(
    relationsByName(["marshall-1955-200/1.6", "300,1.4"]),
    [23.0103, 52.7712],
    {
      mmPerHour: 100,
    },
  ).relations;
  expect(marshall!.name).toBe("marshall-1955-200/1.6");
  expect(marshall!.rates[0]!.rainRateMmPerHour).toBeCloseTo(1, 4);
  expect(own!.name).toBe("own-300/1.4");
  expect(own!.rates[1]!.rainRateMmPerHour).toBeCloseTo(100, 2);
  expect(own!.cap).toMatchObject({ mmPerHour: 100, given: "mmPerHour" });
  expect(own!.cap.dbz).toBeCloseTo(52.7712, 3);
});

test("a rate at or above the cap is marked, one below it is not", () => {
  const table = relationTable(relationsByName(["marshall-1955-200/1.6"]), [52, 53, 54], { dbz: 53 });
  expect(table.relations[0]!.rates.map(({ atCap }) => atCap)).toEqual([false, true, true]);
  expect(relationTableText(table)).toMatch(/\d \s*\S+\* +\S+\* +53\.0 /);
});

test("a cap outside the customary rates and a snow relation are warned of", () => {
  const text = relationTableText(relationTable(relationsByName(undefined), [30], { dbz: 53 }));
  expect(text).toMatch(/rosenfeld-1993-250\/1\.2: the cap of 53\.0 dBZ is 262\.0 mm\/h/);
  expect(text).toMatch(/snow relation/);
});

test.each(["nobody-1900-1/1", "0,1.6", "200,x"])("%s is refused as wrong usage", (name) => {
  expect(() => relationsByName([name])).toThrow(InputError);
});
