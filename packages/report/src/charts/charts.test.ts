import { expect, test } from "vitest";
import type { Hyetograph } from "../input.ts";
import { svgHyetograph } from "./hyetograph.ts";
import { placeLabels } from "./labels.ts";
import { type ScatterPoint, svgScatter } from "./scatter.ts";
import { coarsen, observedSumMm } from "./steps.ts";

const NO = Number.NaN;

function point(label: string, gaugeMm: number, radarMm: number): ScatterPoint {
  return { label, role: "used", gaugeMm, radarMm, words: label };
}

function places(svg: string): { x: number; y: number }[] {
  return [...svg.matchAll(/class="gauge \S+" transform="translate\((\S+) (\S+)\)"/g)].map(([, x, y]) => ({
    x: Number(x),
    y: Number(y),
  }));
}

test("square-root axes: a quarter of the depth stands at half the way, zeros on the axes", () => {
  const svg = svgScatter("s", "t", "radar, mm", [
    point("zero", 0, 0),
    point("quarter", 10, 10),
    point("whole", 40, 40),
    point("dry radar", 40, 0),
  ]).text;
  const [zero, quarter, whole, dry] = places(svg);
  expect(Math.abs(quarter.x - zero.x - (whole.x - zero.x) / 2)).toBeLessThanOrEqual(0.01);
  expect(Math.abs(zero.y - quarter.y - (zero.y - whole.y) / 2)).toBeLessThanOrEqual(0.01);
  expect(dry.y).toBe(zero.y);
  expect(dry.x).toBe(whole.x);
});

test("the lines go through equal depths, twice and half the gauge", () => {
  const svg = svgScatter("s", "t", "radar, mm", [
    point("a", 10, 10),
    point("b", 10, 20),
    point("c", 20, 10),
  ]).text;
  const lines = [...svg.matchAll(/M(\S+) (\S+)L(\S+) (\S+?)(?=["M])/g)].map((match) =>
    match.slice(1).map(Number),
  );
  const marks = places(svg);
  for (const [i, [x0, y0, x1, y1]] of lines.entries()) {
    const along = (marks[i].x - x0) / (x1 - x0);
    expect(Math.abs(y0 + along * (y1 - y0) - marks[i].y)).toBeLessThan(0.05);
  }
  expect(lines.length).toBe(3);
});

function graph(first: number[], second: number[], stepMs = 3_600_000): Hyetograph {
  const seen = (depthMm: number[]) => depthMm.map((mm) => (Number.isNaN(mm) ? 0 : 1));
  return {
    id: "g",
    label: "Invented",
    startEpochMs: Date.UTC(2031, 4, 3, 12),
    stepMs,
    sides: [
      { role: "gauge", depthMm: first, observedFraction: seen(first) },
      { role: "radar", depthMm: second, observedFraction: seen(second) },
    ],
  };
}

test("a step that was not observed is a hatched column, never a bar of nothing; its line breaks", () => {
  const svg = svgHyetograph("h", graph([4, NO, NO, 0], [2, 2, NO, 2]), "UTC", 4).text;
  const gaps = [...svg.matchAll(/class="gap" d="([^"]*)"/g)].map(([, d]) => d);
  const bars = /class="bars gauge" d="([^"]*)"/.exec(svg)![1];
  const line = /class="step-line radar" d="([^"]*)"/.exec(svg)![1];
  // Four steps over 318 units from 34: each 79.5. The gauge's gap is steps 1 and 2, the radar's step 2.
  expect(gaps).toEqual(["M113.5 10H272.5V138H113.5Z", "M193 10H272.5V138H193Z"]);
  expect(bars.match(/M/g)?.length).toBe(1);
  expect(line.match(/M/g)?.length).toBe(2);
});

test("the deepest bar reaches the top and half of it half way", () => {
  const svg = svgHyetograph("h", graph([4, 2], [0, 0]), "UTC", 4).text;
  const tops = [.../class="bars gauge" d="([^"]*)"/.exec(svg)![1].matchAll(/V(\S+?)H/g)].map(([, y]) =>
    Number(y),
  );
  expect(tops).toEqual([10, 74]);
});

test("a bar beyond the axis is cut at its end and bears its depth; the others keep their heights", () => {
  const svg = svgHyetograph("h", graph([87, 2], [0, 1]), "UTC", 4).text;
  const tops = [.../class="bars gauge" d="([^"]*)"/.exec(svg)![1].matchAll(/V(\S+?)H/g)].map(([, y]) =>
    Number(y),
  );
  expect(tops).toEqual([10, 74]);
  expect([...svg.matchAll(/class="cut"[^>]*>([^<]*)</g)].map(([, words]) => words)).toEqual(["↑ 87.0 mm"]);
});

test("longer steps sum what was observed, and are not observed only where all were not", () => {
  const joined = coarsen(graph([1, NO, NO, NO, 2, 3], [1, 1, 1, 1, 1, 1]), 3);
  expect(joined.stepMs).toBe(7_200_000);
  expect([...(joined.sides[0].depthMm as Float64Array)]).toEqual([1, NO, 5]);
  expect([...(joined.sides[0].observedFraction as Float64Array)]).toEqual([0.5, 0, 1]);
  expect(observedSumMm(joined.sides[1])).toBe(6);
});

test("a last step of fewer members is whole where those were seen", () => {
  const joined = coarsen(graph([1, 1, 1], [1, 1, 1]), 2);
  expect([...(joined.sides[0].observedFraction as Float64Array)]).toEqual([1, 1]);
});

test("nothing observed sums to nothing known, not to zero", () => {
  expect(observedSumMm(graph([NO, NO], [0, 0]).sides[0])).toBeNaN();
  expect(observedSumMm(graph([NO, NO], [0, 0]).sides[1])).toBe(0);
});

test("labels meet neither marks nor each other, and give way where there is no room", () => {
  const marks = Array.from({ length: 30 }, (_, i) => ({
    x: 50 + (i % 6) * 12,
    y: 50 + Math.floor(i / 6) * 12,
    text: `R${i}`,
  }));
  const labels = placeLabels(marks, { x: 0, y: 0, width: 200, height: 200 }, 10);
  expect(labels.length).toBeGreaterThan(5);
  expect(labels.length).toBeLessThan(30);
  for (const label of labels) expect(label.text).toBe(marks[label.mark].text);
});
