import type { Interval } from "@rainreckon/core";
import type { RateLayer } from "@rainreckon/mosaic";
import { describe, expect, test } from "vitest";
import { blendStep } from "./blend.ts";
import { RadarIntegrator, type TimeRules } from "./integrate.ts";
import type { RadarStep } from "./radar-step.ts";
import { cutWindow } from "./steps.ts";

const MINUTE = 60_000;
const rules: TimeRules = { medianRoundMs: 5 * MINUTE, maxGapMs: 12.5 * MINUTE };
const none = new Int32Array();

/** A layer of a few cells at one instant, or with a second sweep speaking for some cells at another. */
function layer(
  minutes: number | readonly [number, number],
  rates: readonly number[],
  more: { slot?: readonly number[]; capped?: readonly number[]; weight?: number; heightM?: number } = {},
): RateLayer {
  return {
    sweepMidEpochMs: (typeof minutes === "number" ? [minutes] : minutes).map((m) => m * MINUTE),
    slot: more.slot === undefined ? undefined : Uint8Array.from(more.slot),
    rateMmPerHour: Float32Array.from(rates),
    cappedRateMmPerHour: more.capped === undefined ? undefined : Float32Array.from(more.capped),
    beamHeightAslM: new Float32Array(rates.length).fill(more.heightM ?? 500),
    weight: new Float32Array(rates.length).fill(more.weight ?? 1),
    variants: [],
  };
}

function integrate(
  layers: readonly RateLayer[],
  steps: readonly Interval[],
  ends: { first?: boolean; last?: boolean } = {},
): RadarStep[] {
  const cellCount = layers[0].rateMmPerHour.length;
  const integrator = new RadarIntegrator(steps, rules, { cellCount, headlineCells: none, variantCount: 0 });
  layers.forEach((one, k) => {
    integrator.add(one, {
      isFirst: ends.first === true && k === 0,
      isLast: ends.last === true && k === layers.length - 1,
    });
  });
  return steps.map((_, step) => integrator.take(step));
}

const span = (from: number, to: number): Interval => ({
  startEpochMs: from * MINUTE,
  endEpochMs: to * MINUTE,
});
const minutesOf = (ms: number | undefined) => (ms ?? 0) / MINUTE;

describe("RadarIntegrator", () => {
  // Reference book, unit facts (closed form): 12 mm/h held 5 min is 1 mm.
  test("12 mm/h held 5 min is 1 mm", () => {
    const [step] = integrate([layer(0, [12]), layer(5, [12])], [span(0, 5)]);
    expect(step.depthMm[0]).toBeCloseTo(1, 12);
    expect(minutesOf(step.observedMs[0])).toBe(5);
  });

  test("a layer that starts anew is not joined to the one before, not for the headline's variants either", () => {
    // Two depths of 1 mm, from 0 to 5 and from 6 to 11 minutes: 2 mm in ten minutes, and nothing known of the sixth.
    const steps = [span(0, 12)];
    const headlineCells = Int32Array.of(0);
    const integrator = new RadarIntegrator(steps, rules, { cellCount: 1, headlineCells, variantCount: 1 });
    for (const [k, minute] of [0, 5, 6, 11].entries()) {
      const one = { ...layer(minute, [12]), variants: [Float32Array.of(24)] };
      integrator.add(one, { isFirst: false, isLast: false, startsAnew: k % 2 === 0 });
    }
    const stretches = integrator.stretches(0, 0, ({ rateMmPerHour }) => rateMmPerHour[0]);
    expect(
      stretches.map(({ fromEpochMs, toEpochMs }) => [minutesOf(fromEpochMs), minutesOf(toEpochMs)]),
    ).toEqual([
      [0, 5],
      [6, 11],
    ]);
    const step = integrator.take(0);
    expect(step.depthMm[0]).toBeCloseTo(2, 12);
    expect(step.variantMm[0][0]).toBeCloseTo(4, 12);
    expect(minutesOf(step.observedMs[0])).toBe(10);
  });

  test("a linear rate is integrated exactly over any borders", () => {
    // R(t) = 6 t mm/h with t in hours: the depth from a to b is 3 (b² - a²).
    const layers = [0, 4, 11, 17, 23].map((m) => layer(m, [(6 * m) / 60]));
    const steps = [span(0, 5), span(5, 10), span(10, 20), span(20, 23)];
    integrate(layers, steps).forEach((step, k) => {
      const [a, b] = [steps[k].startEpochMs / 3.6e6, steps[k].endEpochMs / 3.6e6];
      expect(step.depthMm[0]).toBeCloseTo(3 * (b * b - a * a), 7);
    });
  });

  test("a gap of exactly the longest is bridged and said so; a longer one is not observed", () => {
    const [bridged] = integrate([layer(0, [6]), layer(12.5, [6])], [span(0, 15)]);
    expect(bridged.depthMm[0]).toBeCloseTo(1.25, 12);
    expect(minutesOf(bridged.bridgedMs?.[0])).toBe(12.5);
    const [open] = integrate([layer(0, [6]), layer(12.6, [6])], [span(0, 15)]);
    expect(open.observedMs[0]).toBe(0);
  });

  test("the usual step between scans is not called bridged, one missing scan is", () => {
    const [step] = integrate([layer(0, [6]), layer(5, [6]), layer(15, [6])], [span(0, 15)]);
    expect(minutesOf(step.bridgedMs?.[0])).toBe(10);
  });

  test("the very first and last scan speak for half a median round outwards, and nothing else does", () => {
    const steps = [span(0, 20)];
    const [whole] = integrate([layer(5, [12]), layer(10, [12])], steps, { first: true, last: true });
    expect(minutesOf(whole.observedMs[0])).toBe(10);
    expect(minutesOf(whole.edgeMs?.[0])).toBe(5);
    expect(whole.depthMm[0]).toBeCloseTo(2, 12);
    const [inner] = integrate([layer(5, [12]), layer(10, [12])], steps);
    expect(minutesOf(inner.observedMs[0])).toBe(5);
    expect(inner.edgeMs).toBeUndefined();
  });

  test("a cell that a scan did not observe is bridged from its neighbours in time, other cells are not touched", () => {
    const layers = [layer(0, [6, 6]), layer(5, [Number.NaN, 0]), layer(10, [6, 6])];
    const [step] = integrate(layers, [span(0, 10)]);
    expect([...step.depthMm].map((mm) => Number(mm.toFixed(9)))).toEqual([1, 0.5]);
    expect([...(step.bridgedMs ?? [])].map(minutesOf)).toEqual([10, 0]);
  });

  test("each cell keeps the time of the sweep that spoke for it", () => {
    const layers = [layer([0, 2], [12, 12], { slot: [0, 1] }), layer([5, 7], [12, 12], { slot: [0, 1] })];
    const steps = integrate(layers, [span(0, 2), span(2, 7)]);
    expect([...steps[0].observedMs].map(minutesOf)).toEqual([2, 0]);
    expect([...steps[1].observedMs].map(minutesOf)).toEqual([3, 5]);
  });

  test("undetect is 0 mm over observed time, not observed is no time at all", () => {
    const [step] = integrate([layer(0, [0, Number.NaN]), layer(5, [0, Number.NaN])], [span(0, 5)]);
    expect(step.depthMm[0]).toBe(0);
    expect([...step.observedMs].map(minutesOf)).toEqual([5, 0]);
  });

  test("what met the cap is integrated like the rest", () => {
    const [step] = integrate(
      [layer(0, [60], { capped: [60] }), layer(5, [60], { capped: [30] })],
      [span(0, 5)],
    );
    expect(step.depthMm[0]).toBeCloseTo(5, 6);
    expect(step.cappedMm?.[0]).toBeCloseTo(3.75, 6);
  });

  test("a run cut in two at any step gives the same bytes as in one piece", () => {
    const layers = Array.from({ length: 40 }, (_, k) =>
      layer([k * 5 + 1.3, k * 5 + 2.1], [(k * 7.3) % 11, k % 9 === 4 ? Number.NaN : (k * 3.1) % 5], {
        slot: [0, k % 2],
      }),
    );
    const steps = cutWindow(span(0, 200), 5 * MINUTE);
    const whole = integrate(layers, steps);
    for (const cut of [7, 20, 33]) {
      const reachMs = rules.maxGapMs;
      const border = steps[cut].startEpochMs;
      const late = layers.filter((one) => Math.max(...one.sweepMidEpochMs) >= border - reachMs);
      const pieces = integrate(late, steps.slice(cut));
      pieces.forEach((piece, k) => {
        expect(piece.depthMm).toEqual(whole[cut + k].depthMm);
        expect(piece.observedMs).toEqual(whole[cut + k].observedMs);
      });
    }
  });
});

describe("blendStep", () => {
  const shape = { cellCount: 1, headlineCells: none, variantCount: 0 };
  function blend(ofRadars: readonly (readonly RateLayer[])[], step: Interval) {
    const radars = ofRadars.map((layers) => {
      const integrator = new RadarIntegrator([step], rules, shape);
      for (const one of layers) integrator.add(one, { isFirst: false, isLast: false });
      return { step: integrator.take(0), integrator };
    });
    return blendStep(step, 0, radars, shape);
  }
  const steady = (from: number, to: number, rate: number, weight: number) => {
    const layers: RateLayer[] = [];
    for (let m = from; m <= to; m += 5) layers.push(layer(m, [rate], { weight, heightM: 1000 * weight }));
    return layers;
  };

  test("depths of radars that both saw the step are blended by weight, and shares kept", () => {
    const blended = blend([steady(0, 60, 6, 0.75), steady(0, 60, 12, 0.25)], span(0, 60));
    expect(blended.depthMm[0]).toBeCloseTo(7.5, 9);
    expect(blended.shareMs.map((share) => minutesOf(share[0]))).toEqual([45, 15]);
    expect(blended.heightMMs[0] / blended.observedMs[0]).toBeCloseTo(625, 3);
  });

  test("a radar that saw part of the step counts on that part only: no rate is stretched over the rest", () => {
    // Radar B sees minutes 40 to 60 only: (0, 40] is A alone, (40, 60] is half of each.
    const blended = blend([steady(0, 60, 6, 0.5), steady(40, 60, 18, 0.5)], span(0, 60));
    expect(blended.depthMm[0]).toBeCloseTo((6 * 40) / 60 + (12 * 20) / 60, 9);
    expect(blended.shareMs.map((share) => Number(minutesOf(share[0]).toFixed(6)))).toEqual([50, 10]);
  });

  test("two radars that saw different parts add up, and what neither saw is not observed", () => {
    const blended = blend([steady(0, 20, 6, 0.9), steady(30, 50, 6, 0.1)], span(0, 60));
    expect(minutesOf(blended.observedMs[0])).toBeCloseTo(40, 9);
    expect(blended.depthMm[0]).toBeCloseTo(4, 9);
  });

  test("where no radar observed the depth is NaN, never 0", () => {
    const blended = blend([steady(100, 120, 6, 0.5), steady(100, 120, 6, 0.5)], span(0, 60));
    expect(blended.depthMm[0]).toBeNaN();
    expect(blended.observedMs[0]).toBe(0);
  });

  test("agrees with a sum over seconds where rates change and views differ", () => {
    const a = [
      layer(-2, [3], { weight: 0.6 }),
      layer(4, [9], { weight: 0.6 }),
      layer(9, [1], { weight: 0.6 }),
    ];
    const b = [
      layer(2.5, [20], { weight: 0.2 }),
      layer(7, [5], { weight: 0.2 }),
      layer(12, [8], { weight: 0.2 }),
    ];
    const blended = blend([a, b], span(0, 10));
    const rateAt = (layers: readonly RateLayer[], minute: number): number => {
      for (let k = 0; k + 1 < layers.length; k++) {
        const [from, to] = [layers[k], layers[k + 1]].map((one) => one.sweepMidEpochMs[0] / MINUTE);
        if (minute < from || minute > to) continue;
        const u = (minute - from) / (to - from);
        return (1 - u) * layers[k].rateMmPerHour[0] + u * layers[k + 1].rateMmPerHour[0];
      }
      return Number.NaN;
    };
    let mm = 0;
    for (let s = 0; s < 600; s++) {
      const [ra, rb] = [rateAt(a, (s + 0.5) / 60), rateAt(b, (s + 0.5) / 60)];
      const both = (0.6 * ra + 0.2 * rb) / 0.8;
      const seen = Number.isNaN(ra) ? rb : Number.isNaN(rb) ? ra : both;
      mm += seen / 3600;
    }
    expect(blended.depthMm[0]).toBeCloseTo(mm, 4);
  });
});
