import type { RateLayer } from "@rainreckon/mosaic";
import { describe, expect, test } from "vitest";
import { type RadarInStep, StepBlender } from "./blend.ts";
import { type Contribution, contributionsAt } from "./contributions.ts";
import { RadarIntegrator } from "./integrate.ts";

const MINUTE = 60_000;
const STEPS = [0, 10, 20].map((minute) => ({
  startEpochMs: minute * MINUTE,
  endEpochMs: (minute + 10) * MINUTE,
}));
const shape = { cellCount: 1, headlineCells: new Int32Array(), variantCount: 0 };

function layer(minute: number, rate: number, weight: number): RateLayer {
  return {
    sweepMidEpochMs: [minute * MINUTE],
    slot: undefined,
    rateMmPerHour: Float32Array.of(rate),
    cappedRateMmPerHour: undefined,
    beamHeightAslM: Float32Array.of(500),
    weight: Float32Array.of(weight),
    variants: [],
  };
}

/** Blended depth and parts of each step; a radar is its weight and its rates by minute. */
function told(radars: readonly (readonly [weight: number, rates: Readonly<Record<number, number>>])[]) {
  const integrators = radars.map(([weight, rates]) => {
    const integrator = new RadarIntegrator(
      STEPS,
      { medianRoundMs: 10 * MINUTE, maxGapMs: 25 * MINUTE },
      shape,
    );
    const minutes = Object.keys(rates).map(Number);
    for (const [k, minute] of minutes.entries())
      integrator.add(layer(minute, rates[minute]!, weight), {
        isFirst: false,
        isLast: k === minutes.length - 1,
      });
    return integrator;
  });
  const blender = new StepBlender(shape, radars.length);
  return STEPS.map((step, index) => {
    const taken = integrators.map(
      (integrator): RadarInStep => ({ step: integrator.take(index), integrator }),
    );
    const parts = contributionsAt(step, index, 0, taken);
    const [blendedMm] = blender.blend(step, index, taken).depthMm;
    for (const integrator of integrators) integrator.release();
    return { blendedMm: blendedMm!, parts };
  });
}

const sum = (parts: readonly Contribution[]) => parts.reduce((total, { depthMm }) => total + depthMm, 0);
const brief = (parts: readonly Contribution[]) =>
  parts.map(({ radar, kind, share, startEpochMs, endEpochMs, depthMm }) => [
    radar,
    kind,
    share,
    startEpochMs / MINUTE,
    endEpochMs / MINUTE,
    depthMm,
  ]);

describe("what each stretch adds to a step", () => {
  // By hand: 6 mm/h at minute 0 and 12 at minute 10 are 9 mm/h over ten minutes, 1.5 mm; and so on.
  test("one radar: trapezoids between its scans, half a round after its last", () => {
    const [first, second, third] = told([[0.5, { 0: 6, 10: 12, 22: 6 }]]);
    expect(brief(first!.parts)).toEqual([[0, "usual", 1, 0, 10, expect.closeTo(1.5, 12)]]);
    // Twelve minutes from 12 to 6 mm/h: at minute 20 it is 7, so 9.5 over ten minutes and 6.5 over two.
    expect(brief(second!.parts)).toEqual([[0, "usual", 1, 10, 20, expect.closeTo(9.5 / 6, 12)]]);
    expect(brief(third!.parts)).toEqual([
      [0, "usual", 1, 20, 22, expect.closeTo(6.5 / 30, 12)],
      [0, "edge", 1, 22, 27, expect.closeTo(0.5, 12)],
    ]);
  });

  test("two radars that saw the whole step share it by weight", () => {
    const [first] = told([
      [0.75, { 0: 6, 10: 6, 20: 6, 30: 6 }],
      [0.25, { 0: 12, 10: 12, 20: 12, 30: 12 }],
    ]);
    expect(brief(first!.parts)).toEqual([
      [0, "usual", 0.75, 0, 10, expect.closeTo(0.75, 12)],
      [1, "usual", 0.25, 0, 10, expect.closeTo(0.5, 12)],
    ]);
  });

  test("where one saw only part of the step it is cut there, and each part is shared out on its own", () => {
    const [first] = told([
      [0.5, { 0: 6, 10: 6, 20: 6, 30: 6 }],
      [0.5, { 4: 18, 14: 18, 24: 18, 34: 18 }],
    ]);
    // Four minutes of the first alone at 6 mm/h, six of both: half of 6 and half of 18 mm/h.
    expect(brief(first!.parts)).toEqual([
      [0, "usual", 1, 0, 4, expect.closeTo(0.4, 12)],
      [0, "usual", 0.5, 4, 10, expect.closeTo(0.3, 12)],
      [1, "usual", 0.5, 4, 10, expect.closeTo(0.9, 12)],
    ]);
  });

  test("the parts add up to the blended depth, and there are none where nobody looked", () => {
    const steps = told([
      [0.3, { 1: 4, 8: 20, 29: 3 }],
      [0.7, { 3: 7, 13: 1 }],
    ]);
    for (const { blendedMm, parts } of steps) expect(sum(parts)).toBeCloseTo(blendedMm, 12);
    expect(told([[1, { 0: 5 }]])[2]!.parts).toEqual([]);
  });
});
