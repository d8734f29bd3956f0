import { expect, test } from "vitest";
import { svgDepthDuration } from "./depth-duration-chart.ts";
import { durationText } from "./duration-text.ts";
import type { EventPageInput, EventPeak, EventRunWords } from "./event-input.ts";
import { renderEventIndex, renderEventPage } from "./event-page.ts";

const NO = Number.NaN;
const START = Date.UTC(2031, 4, 20, 10);

function peak(durationMinutes: number, depthMm: number, change: Partial<EventPeak> = {}): EventPeak {
  return {
    durationMinutes,
    depthMm,
    p10Mm: NO,
    p90Mm: NO,
    meanMmPerHour: (depthMm * 60) / durationMinutes,
    startEpochMs: START,
    observedFraction: 1,
    lowerBound: false,
    atCap: false,
    years: "",
    yearsBetween: "",
    yearsOfTable: "",
    ...change,
  };
}

const run: EventRunWords = {
  title: "Invented <storm>",
  status: "provisional",
  runDigest: "0123456789abcdef0123",
  software: "program 1",
  zone: "Europe/Oslo",
  window: { startEpochMs: START, endEpochMs: START + 3_600_000 },
  rules: ["a rule"],
  frequency: [],
  cautions: ["a <caution>"],
};

const input: EventPageInput = {
  run,
  id: "P7",
  name: 'Pump "7" <b>',
  what: "asset, one cell of 1 km²",
  headline: "12.0 mm",
  headlineDetails: ["observed 100 %"],
  rain: {
    id: "P7",
    label: "P7",
    startEpochMs: START,
    stepMs: 1_800_000,
    sides: [{ role: "radar", depthMm: Float64Array.of(8, 4), observedFraction: Float64Array.of(1, 1) }],
  },
  peaks: [peak(30, 8), peak(60, 12)],
  gaugePeaks: [],
  curves: [],
  events: [],
  notes: [],
  untold: [],
};

// Between the axes of a chart by hand: equal steps for equal ratios, on both.
test("both axes are logarithmic: a depth of twice the ratio stands twice as high", () => {
  const svg = svgDepthDuration("d", "t", [peak(10, 2), peak(20, 4), peak(40, 8)], []).text;
  const places = [...svg.matchAll(/<circle class="peak" cx="(\S+)" cy="(\S+)"/g)].map(([, x, y]) => [+x, +y]);
  const [first, second, third] = places;
  expect(third[0] - second[0]).toBeCloseTo(second[0] - first[0], 1);
  expect(second[1] - third[1]).toBeCloseTo(first[1] - second[1], 1);
  expect(second[1]).toBeLessThan(first[1]);
});

test("a lower bound has its arrow, an interval its bar, and a curve lies where its depths are", () => {
  const svg = svgDepthDuration(
    "d",
    "t",
    [peak(10, 5, { lowerBound: true }), peak(60, 10, { p10Mm: 8, p90Mm: 13 })],
    [{ years: 10, durationMinutes: [10, 60, 9999], depthMm: [5, 10, 99] }],
  ).text;
  expect(svg.match(/class="bound"/g)).toHaveLength(1);
  expect(svg.match(/class="interval"/g)).toHaveLength(1);
  const [, x0, y0, x1, y1] = /class="period" d="M(\S+) (\S+)L(\S+) (\S+)"/.exec(svg) ?? [];
  const places = [...svg.matchAll(/<circle class="peak" cx="(\S+)" cy="(\S+)"/g)].map(([, x, y]) => [x, y]);
  expect(places).toEqual([
    [x0, y0],
    [x1, y1],
  ]);
  expect(svg).toContain("at least 5.0 mm");
});

test("names of curves keep apart however close the curves are", () => {
  const curves = [2, 5, 10].map((years) => ({
    years,
    durationMinutes: [10, 60],
    depthMm: [5, 10 + years / 100],
  }));
  const svg = svgDepthDuration("d", "t", [peak(10, 5), peak(60, 10)], curves).text;
  const heights = [...svg.matchAll(/class="period-name" x="\S+" y="(\S+)"/g)].map(([, y]) => Number(y));
  expect(heights).toHaveLength(3);
  for (let k = 1; k < heights.length; k++) expect(heights[k] - heights[k - 1]).toBeGreaterThan(11.99);
});

test("rain that was none is not drawn", () => {
  expect(svgDepthDuration("d", "t", [peak(10, 0)], []).text).toBe("<p>No rain to draw.</p>");
});

test("a page needs nothing else, and what comes from files is text", () => {
  const page = renderEventPage(input);
  expect(page).toContain("default-src &#39;none&#39;");
  expect(page).not.toMatch(/<script|https?:|src=|<link/);
  expect(page).toContain("Pump &quot;7&quot; &lt;b&gt;");
  expect(page).toContain("a &lt;caution&gt;");
  expect(page).not.toContain("<b>");
  expect(renderEventPage(input)).toBe(page);
});

test("a peak stands beside its duration, its bound and its remarks; columns that nobody can fill are not there", () => {
  const page = renderEventPage({
    ...input,
    peaks: [
      peak(60, 12, {
        lowerBound: true,
        atCap: true,
        observedFraction: 0.9,
        years: "≥12",
        yearsBetween: "8 to 21",
        p10Mm: 10,
        p90Mm: 15,
      }),
    ],
  });
  expect(page).toMatch(/<th scope="row" class="n">1 h<\/th><td class="n">≥ 12\.0<\/td>/);
  expect(page).toContain("at the hail cap, 90\u00a0% observed, at least this");
  expect(page).toContain("8 to 21");
  expect(renderEventPage(input)).not.toContain(">years<");
});

test("without an event the page says so, with peaks that stand all the same", () => {
  expect(renderEventPage(input)).toContain("<h2>No event</h2>");
  expect(renderEventPage({ ...input, peaks: [] })).toContain("None of the durations can be told");
});

test("the index links every page and shows a dash where a duration cannot be told", () => {
  const page = renderEventIndex({
    run,
    durationsMinutes: [30, 60],
    rows: [
      {
        id: "P7",
        name: "Pump",
        file: "asset-P7.html",
        depth: "12.0",
        events: 1,
        peaks: [peak(30, 8, { years: "<2" }), undefined],
      },
    ],
    exceedances: { words: "Many places.", rows: [{ years: "10", expected: "0.1", seen: 0 }] },
    areaDuration: {
      words: ["A centre."],
      areasKm2: [1, 5],
      rows: [{ durationMinutes: 60, depthMm: [9, NO] }],
    },
  });
  expect(page).toContain('<a href="asset-P7.html">P7</a>');
  expect(page).toContain('<td class="n">8.0 (&lt;2)</td><td class="n">–</td>');
  expect(page).toContain("How many were to be expected");
  expect(page).toMatch(/<th scope="row">1 h<\/th><td class="n">9\.0<\/td><td class="n">–<\/td>/);
});

test.each([
  [5, "5 min"],
  [90, "90 min"],
  [60, "1 h"],
  [1440, "24 h"],
  [10_080, "7 d"],
])("%d minutes are %s", (minutes, words) => {
  expect(durationText(minutes)).toBe(words);
});
