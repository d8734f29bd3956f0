import { expect, test } from "vitest";
import { screenSweep } from "./screen-sweep.ts";
import { DRY, screensAt, sketchSweep } from "./sketch.ts";

const ONLY_SPIKE = {
  off: ["static-echo", "texture", "speckle", "fixed-point", "vertical-gradient"],
  fill: "none",
} as const;
/** Power that is even along the ray: reflectivity grows by 20 log r. Gates of 500 m. */
const even = (gate: number, at1KmDbz: number) => at1KmDbz + 20 * Math.log10(0.5 * gate + 0.25);

test.each([
  ["one ray", [200]],
  ["three rays", [200, 201, 202]],
  ["three rays across north", [359, 0, 1]],
] as const)("%s of even power over dry ground are taken, and nothing beside them", (_, rays) => {
  const isSpike = (ray: number) => (rays as readonly number[]).includes(ray);
  const echo = sketchSweep({ dbz: (ray, gate) => (isSpike(ray) ? even(gate, -12) : DRY) });
  const report = screenSweep(echo, undefined, undefined, ONLY_SPIKE);
  expect(report.screenedGates).toBe(rays.length * 60);
  for (const ray of rays) expect(screensAt(echo, ray, 50)).toEqual(["spike"]);
});

test("rain that is stronger than the spike stays", () => {
  const echo = sketchSweep({
    dbz: (ray, gate) => {
      const rain = gate >= 20 && gate < 40 ? 38 : DRY;
      return Math.max(rain, ray === 77 ? even(gate, -12) : DRY);
    },
  });
  screenSweep(echo, undefined, undefined, ONLY_SPIKE);
  expect(screensAt(echo, 77, 10)).toEqual(["spike"]);
  expect(screensAt(echo, 77, 30)).toEqual([]);
});

test("a line of rain along a ray is no spike: its power falls with range", () => {
  const echo = sketchSweep({ dbz: (ray) => (ray === 77 || ray === 78 ? 30 : DRY) });
  expect(screenSweep(echo, undefined, undefined, ONLY_SPIKE).screenedGates).toBe(0);
});

test("a shower on few gates of one ray is no spike", () => {
  const echo = sketchSweep({
    dbz: (ray, gate) => (ray === 77 && gate > 40 && gate < 50 ? even(gate, -5) : DRY),
  });
  expect(screenSweep(echo, undefined, undefined, ONLY_SPIKE).screenedGates).toBe(0);
});

test("where rays beside a ray were not observed nothing is said of it", () => {
  const echo = sketchSweep({
    dbz: (ray, gate) => (ray === 200 ? even(gate, -12) : ray === 203 ? Number.NaN : DRY),
  });
  expect(screenSweep(echo, undefined, undefined, ONLY_SPIKE).screenedGates).toBe(0);
});

test("a sector of a few rays has no rays beside its edges", () => {
  const echo = sketchSweep({ rayCount: 360, dbz: (_, gate) => even(gate, -12) });
  const sector = {
    ...echo,
    azimuthDeg: echo.azimuthDeg.slice(0, 5),
    header: { ...echo.header, rayCount: 5 },
  };
  const cut = 5 * 60;
  const short = {
    ...sector,
    measuredDbz: echo.measuredDbz.slice(0, cut),
    dbz: echo.dbz.slice(0, cut),
    screenedBy: new Uint16Array(cut),
    marks: new Uint16Array(cut),
  };
  expect(screenSweep(short, undefined, undefined, ONLY_SPIKE).screenedGates).toBe(0);
});
