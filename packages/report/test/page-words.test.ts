import { expect, test } from "vitest";
import { jsonForScript, pageData } from "../src/data/page-data.ts";
import { classLayers } from "../src/map/layer.ts";
import { depthText, inInches, printedInches } from "../src/page/depths.ts";
import { positionWords, valueWords } from "../src/page/readout.ts";
import { Clock } from "../src/page/times.ts";
import { hostile } from "./hostile.ts";
import { inventedInput } from "./invented-input.ts";

// The inch is 25.4 mm by definition; expected values by hand from that.
test.each([
  ["31.4", "1.24"],
  ["25.4", "1.00"],
  ["1.84", "0.072"],
  ["104", "4.1"],
  ["0.1", "0.0039"],
  ["0.0", "0.00"],
  ["\u22120.3", "\u22120.012"],
  ["1\u202f204", "47.4"],
])("%s mm as printed are %s inches", (mm, inch) => {
  expect(printedInches(mm)).toBe(inch);
});

test("depths of the page's own data go to hundredths of an inch, and little is never none", () => {
  expect(depthText(25.4, "in")).toBe("1.00");
  expect(depthText(0.1, "in")).toBe("<\u202f0.01");
  expect(depthText(0, "in")).toBe("0.00");
  expect(depthText(31.44, "mm")).toBe("31.4");
});

test("words turn with their numbers, and what is no depth stays", () => {
  expect(inInches("between 17.2 and 24.9 mm; see below")).toBe("between 0.68 and 0.98 in; see below");
  expect(inInches("≥\u00a031.4\u00a0mm (at cap)")).toBe("≥\u00a01.24\u00a0in (at cap)");
  expect(inInches("+1.20 mm, radar minus gauge")).toBe("+0.047 in, radar minus gauge");
  expect(inInches("mm per 5 minutes")).toBe("in per 5 minutes");
  expect(inInches("104 mm/h of 412 gates")).toBe("4.1 in/h of 412 gates");
  expect(inInches("R05 and 3 minutes, 12 km, 5.2 dB")).toBe("R05 and 3 minutes, 12 km, 5.2 dB");
});

test("the local clock is the one that came with the data, over a change of it too", () => {
  // Amsterdam goes from UTC+1 to UTC+2 at 01:00 UTC on 30 March 2031 (European rule: last Sunday of March).
  const change = Date.UTC(2031, 2, 30, 1);
  const data = pageData(
    {
      ...inventedInput(),
      window: { startEpochMs: change - 7_200_000, endEpochMs: change + 7_200_000 },
    },
    [],
    1e6,
  );
  expect(data.clock).toEqual([
    [change - 7_200_000, 60],
    [change, 120],
  ]);
  const clock = new Clock(data);
  expect(clock.span([change - 3_600_000, change + 3_600_000])).toBe(
    "30 Mar 01:00 to 04:00 (00:00 to 02:00 UTC)",
  );
  expect(new Clock({ clock: [[0, 0]], zone: "" }).instant(change)).toBe("30 Mar 01:00 UTC");
});

const input = inventedInput();
const data = pageData(input, classLayers(input.layers, input.grid.nx, input.grid.ny), 1e7);

test("a value comes with its unit, not observed in words, and too little for a step is not none", () => {
  const depth = data.layers[0];
  expect(valueWords(depth, Number.NaN, 0.1, "mm")).toBe("not observed");
  expect(valueWords(depth, 12.3, 0.1, "mm")).toBe("12.3 mm");
  expect(valueWords(depth, 12.7, 0.1, "in")).toBe("0.50 in");
  expect(valueWords(depth, 0, 0.1, "mm")).toMatch(/^less than .*0\.1 mm$/);
  expect(valueWords(data.layers[4], 1, 1, "mm")).toBe("inv-quay · Quay Head");
  expect(valueWords(data.layers[7], -2.5, 0.1, "mm")).toBe("\u22122.5 dB");
});

test("a position is said on the grid and, between the corners of the lattice, on Earth", () => {
  // By hand: longitude 4.13 + 1.75 x 30.5 / 120, latitude 52.4 - 0.81 x 45.5 / 90.
  const words = positionWords(data.map, { column: 30, row: 45 });
  expect(words).toBe("51.990° N, 4.575° E · \u221229.5 km east, \u22120.5 km north");
});

test("the data hold nothing that could end their element or turn the reading direction", () => {
  const bad = hostile(input);
  const json = jsonForScript(pageData(bad, classLayers(bad.layers, bad.grid.nx, bad.grid.ny), 1e7));
  expect(json).not.toMatch(/<|\u2028|\u2029|\u202e|\\u202e|\\u0000/);
  expect(JSON.parse(json).places.length).toBe(data.places.length);
});

test("with less room the fields are thinned, those with a button of their own last, and the legend's block says it", () => {
  const classed = classLayers(input.layers, input.grid.nx, input.grid.ny);
  const places = Buffer.byteLength(jsonForScript(data.places));
  const tight = pageData(input, classed, places + 30_000);
  const bytes = tight.layers.reduce((sum, { field }) => sum + field.data.length, 0);
  expect(bytes).toBeLessThan(data.layers.reduce((sum, { field }) => sum + field.data.length, 0));
  const blocks = (group: boolean) =>
    Math.max(
      ...tight.layers.filter((layer) => (layer.group !== "") === group).map(({ field }) => field.block),
    );
  expect(blocks(true)).toBeGreaterThanOrEqual(blocks(false));
  expect(tight.layers[0].frames?.fields.block).toBeGreaterThan(1);
  expect(tight.layers[0].frames?.note).toContain("Drawn thinned");
});
