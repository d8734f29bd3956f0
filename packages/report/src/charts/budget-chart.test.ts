import { expect, test } from "vitest";
import { HOSTILE_NAMES } from "../../test/hostile.ts";
import { type BudgetChart, budgetPage, svgBudget } from "./budget-chart.ts";

const NO = Number.NaN;
const CHART: BudgetChart = {
  title: "What these radars can see",
  heightsAbove: "the antenna",
  rainKm: 20,
  rainRatesMmPerHour: [5, 50],
  rateTicks: [
    { mmPerHour: 0.01, dbz: -9 },
    { mmPerHour: 0.1, dbz: 7 },
  ],
  relation: "Z = 200 R^1.6",
  radars: [
    {
      name: "A",
      label: "A: C band",
      rangeKm: [50, 100],
      weakestEchoDbz: [-14, -8],
      beamLowM: [100, 600],
      beamCentreM: [550, 1460],
      beamHighM: [1000, 2300],
      rainLossDb: [1, 10],
    },
    {
      name: "B",
      label: "B",
      rangeKm: [50, 100],
      weakestEchoDbz: [NO, NO],
      beamLowM: [NO, NO],
      beamCentreM: [550, 1460],
      beamHighM: [NO, NO],
      rainLossDb: [NO, NO],
    },
  ],
};

function pathsOf(svg: string, kind: string): string[] {
  return [...svg.matchAll(new RegExp(`class="${kind}" d="([^"]*)"`, "g"))].map(([, d]) => d as string);
}

test("what is not known is no line and no mark, and is said", () => {
  const svg = svgBudget("b", CHART).text;
  const [known, unknown] = pathsOf(svg, "weakest");
  expect(known).toMatch(/^M[\d.]+,[\d.]+L[\d.]+,[\d.]+$/);
  expect(unknown).toBe("");
  expect(pathsOf(svg, "beam-band").filter((d) => d !== "")).toHaveLength(1);
  expect(pathsOf(svg, "beam-centre").filter((d) => d !== "")).toHaveLength(2);
  expect(svg.match(/class="loss"/g)).toHaveLength(2);
  expect(svg).toContain("Not known: B.");
  expect(svg).not.toContain("NaN");
});

test("the nearer half of the range axis holds the nearer range; higher beams stand higher", () => {
  const [[x0, y0], [x1, y1]] = (pathsOf(svgBudget("b", CHART).text, "beam-centre")[0] as string)
    .slice(1)
    .split("L")
    .map((place) => place.split(",").map(Number)) as [[number, number], [number, number]];
  // Axes start at 78 units; 50 km of 100 stand half way along.
  expect(x0 - 78).toBeCloseTo((x1 - 78) / 2, 1);
  expect(y1).toBeLessThan(y0);
});

test("nothing known at all is said in words, twice", () => {
  const svg = svgBudget("b", { ...CHART, radars: [CHART.radars[1] as (typeof CHART.radars)[number]] }).text;
  expect(svg).toContain("How sensitive these radars are is not known.");
  expect(svg).toContain("Without a wavelength no loss can be told.");
});

test("names from files stay text, on the page too", () => {
  const curve = CHART.radars[0] as (typeof CHART.radars)[number];
  for (const name of HOSTILE_NAMES) {
    const page = budgetPage({ ...CHART, title: name, radars: [{ ...curve, name, label: name }] });
    expect(page).not.toMatch(/<(script|img|svg onload|!--|style>\*)|[\u202e\u0000\u001b]/i);
    expect(page.match(/<\/style>/g)).toHaveLength(1);
  }
  const page = budgetPage(CHART);
  expect(page).toContain("default-src 'none'");
});

test("no radar, or one without ranges, is a caller's mistake", () => {
  expect(() => svgBudget("b", { ...CHART, radars: [] })).toThrow(RangeError);
  const empty = { ...(CHART.radars[0] as (typeof CHART.radars)[number]), rangeKm: [] };
  expect(() => svgBudget("b", { ...CHART, radars: [empty] })).toThrow(RangeError);
});
