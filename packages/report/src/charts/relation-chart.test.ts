import { expect, test } from "vitest";
import { type RelationChart, relationPage, svgRelations } from "./relation-chart.ts";

const CHART: RelationChart = {
  title: "Fitted <b>relations</b>",
  about: "3 pairs & a gauge.",
  dbz: [20, 30, 40],
  rateMmPerHour: [0.5, 3, 12],
  fitted: [{ name: "bias-free", a: 250, b: 1.5 }],
  published: [{ name: 'x" onload="x', a: 200, b: 1.6 }],
};

const paths = (text: string, kind: string) =>
  [...text.matchAll(new RegExp(`class="${kind}" d="M([\\d.-]+) ([\\d.-]+)L([\\d.-]+) ([\\d.-]+)"`, "g"))].map(
    (found) => found.slice(1).map(Number),
  );

test("a circle for each pair, a line for each relation, text harmless", () => {
  const { text } = svgRelations("one", CHART);
  expect(text.match(/<circle/g)).toHaveLength(3);
  expect(paths(text, "fitted")).toHaveLength(1);
  expect(paths(text, "published")).toHaveLength(1);
  expect(text).toContain("Fitted &lt;b&gt;relations&lt;/b&gt;");
  expect(text).not.toContain('onload="x');
  expect(text).toContain("Z = 250 R^1.50");
});

test("a pair on a relation lies on its line", () => {
  // Z = 250 R^1.5 gives 10 log10(250) + 15 log10(4) = 23.979 + 9.031 dBZ at 4 mm/h.
  const { text } = svgRelations("one", { ...CHART, dbz: [20, 33.01, 45], rateMmPerHour: [0.5, 4, 40] });
  const [, middle] = [...text.matchAll(/cx="([\d.]+)" cy="([\d.]+)"/g)].map((found) => [
    Number(found[1]),
    Number(found[2]),
  ]);
  const [x0, y0, x1, y1] = paths(text, "fitted")[0]!;
  const onLine = y0! + ((y1! - y0!) * (middle![0]! - x0!)) / (x1! - x0!);
  expect(onLine).toBeCloseTo(middle![1]!, 0);
});

test("no pairs leave empty axes; a pair without a place is refused", () => {
  expect(svgRelations("one", { ...CHART, dbz: [], rateMmPerHour: [] }).text).not.toContain("<circle");
  expect(() => svgRelations("one", { ...CHART, dbz: [20, 30] })).toThrow(RangeError);
  expect(() => svgRelations("one", { ...CHART, rateMmPerHour: [0, 3, 12] })).toThrow(RangeError);
  expect(() => svgRelations("one", { ...CHART, dbz: [Number.NEGATIVE_INFINITY, 3, 12] })).toThrow(RangeError);
});

test("the page holds one drawing and loads nothing", () => {
  const page = relationPage(CHART);
  expect(page.match(/<svg/g)).toHaveLength(1);
  expect(page).not.toMatch(/<script|<img|<link/);
  expect(page).toContain("default-src 'none'");
});
