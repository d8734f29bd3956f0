import { describe, expect, test } from "vitest";
import type { Screen } from "../polar-echo.ts";
import { screenSweep } from "./screen-sweep.ts";
import { DEFAULT_SCREENING } from "./settings.ts";
import { DRY, rainMoments, type SweepSketch, screensAt, sketchSweep } from "./sketch.ts";

/** Rain of 25 dBZ everywhere with one gate, ray 90 and gate 40, as told. */
function oddGate(odd: { readonly [moment in keyof SweepSketch]?: number }): {
  at: (ray?: number, gate?: number) => Screen[];
} {
  const rain: SweepSketch = { dbz: () => 25, unfilteredDbz: () => 25, ...rainMoments(1) };
  const sketch = { ...rain } as Record<string, unknown>;
  for (const [moment, value] of Object.entries(odd)) {
    const usual = rain[moment as "dbz"] ?? (() => 0);
    sketch[moment] = (ray: number, gate: number) => (ray === 90 && gate === 40 ? value : usual(ray, gate));
  }
  const echo = sketchSweep(sketch as unknown as SweepSketch);
  screenSweep(echo, undefined, undefined, DEFAULT_SCREENING);
  return { at: (ray = 90, gate = 40) => screensAt(echo, ray, gate) };
}

describe("low correlation", () => {
  test("RHOHV of 0.6 in strong echo takes the gate alone", () => {
    expect(oddGate({ rhohv: 0.6 }).at()).toEqual(["low-correlation"]);
  });
  test("0.8, which melting snow shows, does not; with a wild phase it does", () => {
    expect(oddGate({ rhohv: 0.8 }).at()).toEqual([]);
    expect(oddGate({ rhohv: 0.8, phidpDeg: 70 }).at()).toEqual(["low-correlation", "noisy-phase"]);
  });
  test("a gate without RHOHV is not judged", () => {
    expect(oddGate({ rhohv: Number.NaN }).at()).toEqual([]);
  });
  test("echo close to the noise is not judged by it", () => {
    // Echo falls below 6 dB over what the sweep's own weakest echo tells of the noise.
    const noisy = sketchSweep({
      dbz: (_, gate) => -30 + 20 * Math.log10(0.5 * gate + 0.25) + (gate % 4),
      rhohv: () => 0.5,
    });
    expect(screenSweep(noisy, undefined, undefined, DEFAULT_SCREENING).screenedGates).toBe(0);
  });
});

describe("noisy phase", () => {
  test("a gate 60 degrees off takes itself alone, and not its neighbours", () => {
    const { at } = oddGate({ phidpDeg: 104, rhohv: 0.85 });
    expect(at()).toEqual(["noisy-phase"]);
    expect(at(90, 39)).toEqual([]);
    expect(at(90, 41)).toEqual([]);
  });
  test("a good correlation clears it", () => {
    expect(oddGate({ phidpDeg: 104 }).at()).toEqual([]);
  });
  test("phase that runs through 360 degrees is not noisy", () => {
    const echo = sketchSweep({ dbz: () => 25, phidpDeg: (_, gate) => (340 + gate) % 360 });
    expect(screenSweep(echo, undefined, undefined, DEFAULT_SCREENING).screenedGates).toBe(0);
  });
});

describe("filtered power", () => {
  test("what is left of 30 dB more is taken alone; of 10 dB it is not", () => {
    expect(oddGate({ unfilteredDbz: 55, rhohv: 0.88 }).at()).toEqual(["filtered-power"]);
    expect(oddGate({ unfilteredDbz: 35, rhohv: 0.88 }).at()).toEqual([]);
  });
  test("of 10 dB with a poor correlation it is", () => {
    expect(oddGate({ unfilteredDbz: 35, rhohv: 0.82 }).at()).toEqual(["filtered-power", "low-correlation"]);
  });
  test("rain that the filter cut, with a good correlation, stays", () => {
    expect(oddGate({ unfilteredDbz: 55, rhohv: 0.98 }).at()).toEqual([]);
  });
});

describe("still and rough echo", () => {
  const rough = (width: number): SweepSketch => ({
    dbz: (_, gate) => 20 + 12 * (gate % 2),
    unfilteredDbz: (_, gate) => 30 + 12 * (gate % 2),
    velocityMPerS: () => 0.3,
    spectrumWidthMPerS: () => width,
  });
  test("supports what the filter found; the two are texture's and stillness' of one window", () => {
    // Steps of 12 dB: texture 144 dB2, spin 100 %, by hand.
    const echo = sketchSweep(rough(0.4));
    screenSweep(echo, undefined, undefined, DEFAULT_SCREENING);
    expect(screensAt(echo, 10, 50)).toEqual(["still-echo", "filtered-power", "texture"]);
  });
  test("a wide spectrum is not that of the ground", () => {
    const echo = sketchSweep(rough(3));
    screenSweep(echo, undefined, undefined, DEFAULT_SCREENING);
    expect(screensAt(echo, 10, 50)).toEqual(["filtered-power", "texture"]);
  });
  test("rough still echo alone is taken by neither, since a shower's edge may be both", () => {
    const { unfilteredDbz: _, ...alone } = rough(0.4);
    expect(screenSweep(sketchSweep(alone), undefined, undefined, DEFAULT_SCREENING).screenedGates).toBe(0);
  });
  test("a steep but steady slope is rough and does not spin", () => {
    const echo = sketchSweep({
      gateCount: 10,
      dbz: (_, gate) => 8 * gate,
      unfilteredDbz: (_, gate) => 8 * gate + 10,
    });
    expect(screenSweep(echo, undefined, undefined, DEFAULT_SCREENING).screenedGates).toBe(0);
  });
});

describe("clear air", () => {
  const insects: SweepSketch = { dbz: () => 12, zdrDb: () => 4, rhohv: () => 0.8 };
  const quiet = (sketch: SweepSketch): SweepSketch => ({
    ...sketch,
    // One weak ray tells how sensitive the radar is.
    dbz: (ray, gate) => (ray === 0 ? -25 : sketch.dbz(ray, gate)),
  });
  test("weak echo of long shapes that correlate badly is taken", () => {
    const echo = sketchSweep(quiet(insects));
    screenSweep(echo, undefined, undefined, DEFAULT_SCREENING);
    expect(screensAt(echo, 90, 20)).toContain("clear-air");
  });
  test.each([
    ["drizzle, round and well correlated", { zdrDb: () => 0.2, rhohv: () => 0.985 }],
    ["large drops that correlate well", { zdrDb: () => 4, rhohv: () => 0.97 }],
    ["stronger echo", { dbz: () => 30 }],
  ])("%s is not", (_, change) => {
    const echo = sketchSweep(quiet({ ...insects, ...change }));
    screenSweep(echo, undefined, undefined, DEFAULT_SCREENING);
    expect(screensAt(echo, 90, 20)).not.toContain("clear-air");
  });
});

describe("vertical gradient", () => {
  const aloft = (dbz: SweepSketch["dbz"], more: Partial<SweepSketch> = {}) =>
    sketchSweep({ elevationDeg: 1.5, rayCount: 180, gateCount: 100, gateLengthM: 250, ...more, dbz });
  // Weak echo in one ray tells the noise.
  const low = () => sketchSweep({ dbz: (ray) => (ray === 0 ? -30 : 35) });

  test("echo of 35 dBZ with nothing above is taken, also from a sweep of other rays and gates", () => {
    const echo = low();
    screenSweep(
      echo,
      aloft(() => DRY),
      undefined,
      { off: [], fill: "none" },
    );
    expect(screensAt(echo, 100, 40)).toEqual(["vertical-gradient"]);
    // At 20 km the beam of 1.5 degrees is 0.5 km high, 0.35 km above that of 0.5; the sweep above ends at 25 km.
    expect(screensAt(echo, 100, 55)).toEqual([]);
  });
  test.each([
    ["rain 10 dB weaker above", () => 25],
    ["not observed above", () => Number.NaN],
    ["leaning rain: the ray beside holds it", (ray: number) => (ray % 2 === 0 ? 30 : DRY)],
  ] as const)("%s: nothing is taken", (_, above) => {
    const echo = low();
    screenSweep(echo, aloft(above), undefined, { off: ["speckle"], fill: "none" });
    expect(screensAt(echo, 100, 40)).toEqual([]);
  });
  test("15 dB is weak evidence: with TH 10 dB above DBZH it takes the gate", () => {
    const above = aloft(() => 18);
    const alone = low();
    screenSweep(alone, above, undefined, DEFAULT_SCREENING);
    expect(screensAt(alone, 100, 40)).toEqual([]);
    const filtered = sketchSweep({ dbz: (ray) => (ray === 0 ? -30 : 35), unfilteredDbz: () => 45 });
    screenSweep(filtered, above, undefined, DEFAULT_SCREENING);
    expect(screensAt(filtered, 100, 40)).toEqual(["filtered-power", "vertical-gradient"]);
  });
  test("a sweep at the same elevation, or one far above everywhere, is no judge, and the report says so", () => {
    // At 5 km a beam of 20 degrees is 1.7 km high, 1.6 km above the low one.
    const far = sketchSweep({ gateLengthM: 10_000, dbz: () => 35 });
    for (const [echo, elevationDeg] of [
      [low(), 0.5],
      [far, 20],
    ] as const) {
      const above = aloft(() => DRY, { elevationDeg });
      const { couldNotRun, screenedGates } = screenSweep(echo, above, undefined, DEFAULT_SCREENING);
      expect(couldNotRun).toContainEqual({ screen: "vertical-gradient", lacking: "a sweep close above" });
      expect(screenedGates).toBe(0);
    }
  });
});
