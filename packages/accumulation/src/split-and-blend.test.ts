import type { Interval } from "@rainreckon/core";
import type { RateLayer } from "@rainreckon/mosaic";
import { expect, test } from "vitest";
import { type BlendedStep, blendStep } from "./blend.ts";
import { RadarIntegrator, type TimeRules } from "./integrate.ts";

// Radars with holes, missing scans and several sweeps, seeded; the answer is worked out the plain way from the rules
// of the design: cut each step wherever any radar's view or rate bends, and add up the pieces.
const MINUTE = 60_000;
const HOUR = 60 * MINUTE;
const CELLS = 3;
const CAP_FROM_MM_PER_HOUR = 20;
const shape = {
  cellCount: CELLS,
  headlineCells: Int32Array.of(0, 1, 2),
  variantCount: 1,
  companions: [{ kind: "depth" }, { kind: "time" }, { kind: "toll" }],
} as const;

interface Radar {
  readonly layers: readonly RateLayer[];
  readonly rules: TimeRules;
}

/** Park and Miller (1988), Communications of the ACM 31, 1192-1201. */
function randomNumbers(seed: number): () => number {
  let state = seed;
  return () => {
    state = (state * 16807) % 2147483647;
    return state / 2147483647;
  };
}

function inventedRadar(random: () => number, roundMinutes: number, weights: readonly number[]): Radar {
  const layers: RateLayer[] = [];
  for (let minute = -20; minute < 90; ) {
    const lost = random() < 0.15 ? 1 : random() < 0.1 ? 2 : 0;
    minute += roundMinutes * (0.8 + 0.4 * random()) * (1 + lost);
    const mid = Math.round(minute * MINUTE);
    const rate = Float32Array.from({ length: CELLS }, () =>
      random() < 0.2 ? Number.NaN : random() < 0.2 ? 0 : 30 * random(),
    );
    layers.push({
      sweepMidEpochMs: [mid, mid + 40_000],
      slot: Uint8Array.from({ length: CELLS }, () => (random() < 0.3 ? 1 : 0)),
      rateMmPerHour: rate,
      cappedRateMmPerHour: rate.map((mm) => (mm > CAP_FROM_MM_PER_HOUR ? mm / 2 : 0)),
      beamHeightAslM: new Float32Array(CELLS).fill(700),
      weight: Float32Array.from(weights),
      variants: [rate.map((mm) => 2 * mm)],
      // 3 dB at every gate; blocked by as much as the time of the round says; a toll whether observed or not.
      companions: [
        rate.map((mm) => (mm > 0 ? 3 * mm : 0)),
        rate.map(() => (minute + 30) / 120),
        new Float32Array(CELLS).fill(minute + 30),
      ],
    });
  }
  return { layers, rules: { medianRoundMs: roundMinutes * MINUTE, maxGapMs: 2.5 * roundMinutes * MINUTE } };
}

/** As a unit of work does it: only layers that can reach into its steps. */
function blendedSteps(radars: readonly Radar[], steps: readonly Interval[]): BlendedStep[] {
  const from = steps[0]!.startEpochMs;
  const to = steps.at(-1)!.endEpochMs;
  const feeds = radars.map(({ layers, rules }) => ({
    integrator: new RadarIntegrator(steps, rules, shape),
    rounds: layers
      .map((layer, k) => ({ layer, isFirst: k === 0, isLast: k === layers.length - 1 }))
      .filter(
        ({ layer }) =>
          layer.sweepMidEpochMs[1]! >= from - rules.maxGapMs &&
          layer.sweepMidEpochMs[0]! <= to + rules.maxGapMs,
      ),
    next: 0,
  }));
  return steps.map((step, index) => {
    for (const feed of feeds) {
      const { integrator, rounds } = feed;
      while (!integrator.isSettled(index, rounds[feed.next]?.layer.sweepMidEpochMs[0] ?? Infinity)) {
        const round = rounds[feed.next++]!;
        integrator.add(round.layer, round);
      }
    }
    const taken = feeds.map(({ integrator }) => ({ step: integrator.take(index), integrator }));
    const blended = blendStep(step, index, taken, shape);
    for (const { integrator } of feeds) integrator.release();
    return blended;
  });
}

interface Piece {
  readonly from: number;
  readonly to: number;
  readonly rates: readonly [number, number];
  readonly capped: readonly [number, number];
  readonly blocked: readonly [number, number];
  readonly kind: "usual" | "bridged" | "edge";
  readonly weight: number;
}

function piecesOf({ layers, rules }: Radar, cell: number): Piece[] {
  const seen = layers
    .map((layer, k) => ({
      at: layer.sweepMidEpochMs[layer.slot![cell]!]!,
      rate: layer.rateMmPerHour[cell]!,
      cap: layer.cappedRateMmPerHour![cell]!,
      blocked: layer.companions![1]![cell]!,
      weight: layer.weight[cell]!,
      k,
    }))
    .filter(({ rate }) => !Number.isNaN(rate));
  const half = rules.medianRoundMs / 2;
  return seen.flatMap(({ at, rate, cap, blocked, weight, k }, n): Piece[] => {
    const still = {
      rates: [rate, rate],
      capped: [cap, cap],
      blocked: [blocked, blocked],
      kind: "edge",
      weight,
    } as const;
    const before = seen[n - 1];
    const gap = before === undefined ? Infinity : at - before.at;
    const kind = gap > 1.5 * rules.medianRoundMs ? "bridged" : "usual";
    return [
      ...(k === 0 ? [{ ...still, from: at - half, to: at }] : []),
      ...(before !== undefined && gap <= rules.maxGapMs
        ? [
            {
              from: before.at,
              to: at,
              rates: [before.rate, rate],
              capped: [before.cap, cap],
              blocked: [before.blocked, blocked],
              kind,
              weight,
            } as const,
          ]
        : []),
      ...(k === layers.length - 1 ? [{ ...still, from: at, to: at + half }] : []),
    ];
  });
}

/** Each round's toll over the part of its half rounds, before and after its first sweep, that lies in the step. */
function tollMm(radars: readonly Radar[], step: Interval, cell: number): number {
  let mm = 0;
  for (const { layers, rules } of radars) {
    for (const { sweepMidEpochMs, companions } of layers) {
      const [from, to] = [-0.5, 0.5].map((rounds) => sweepMidEpochMs[0]! + rounds * rules.medianRoundMs);
      const ms = Math.min(to!, step.endEpochMs) - Math.max(from!, step.startEpochMs);
      if (ms > 0) mm += (ms / HOUR) * companions![2]![cell]!;
    }
  }
  return mm;
}

/** @param pieces - of each radar at that cell */
function plainSum(
  radars: readonly Radar[],
  pieces: readonly (readonly Piece[])[],
  step: Interval,
  cell: number,
) {
  const bends = pieces.flat().flatMap(({ from, to }) => [from, to]);
  const cuts = [...new Set([step.startEpochMs, ...bends, step.endEpochMs])]
    .filter((at) => at >= step.startEpochMs && at <= step.endEpochMs)
    .sort((a, b) => a - b);
  const sum = {
    depthMm: 0,
    cappedMm: 0,
    blockedHours: 0,
    tollMm: tollMm(radars, step, cell),
    observedMs: 0,
    bridgedMs: 0,
    edgeMs: 0,
    shareMs: radars.map(() => 0),
  };
  for (let k = 0; k + 1 < cuts.length; k++) {
    const [from, to] = [cuts[k]!, cuts[k + 1]!];
    const speaking = pieces.map((ofRadar) => ofRadar.find((piece) => piece.from <= from && piece.to >= to));
    const weights = speaking.reduce((all, piece) => all + (piece?.weight ?? 0), 0);
    if (weights === 0) continue;
    sum.observedMs += to - from;
    for (const [r, piece] of speaking.entries()) {
      if (piece === undefined) continue;
      const along = ((from + to) / 2 - piece.from) / (piece.to - piece.from);
      const middle = ([a, b]: readonly [number, number]) => a + along * (b - a);
      const ms = (piece.weight / weights) * (to - from);
      sum.depthMm += (ms / HOUR) * middle(piece.rates);
      sum.cappedMm += (ms / HOUR) * middle(piece.capped);
      sum.blockedHours += (ms / HOUR) * middle(piece.blocked);
      sum.shareMs[r]! += ms;
      if (piece.kind === "bridged") sum.bridgedMs += ms;
      if (piece.kind === "edge") sum.edgeMs += ms;
    }
  }
  return sum;
}

const STEPS = Array.from({ length: 24 }, (_, k) => ({
  startEpochMs: (5 * k - 30) * MINUTE,
  endEpochMs: (5 * k - 25) * MINUTE,
}));

test.each([1, 2, 3])(
  "%d radars: depths and the shares beside them are those of a plain sum over pieces",
  (count) => {
    const random = randomNumbers(count);
    let partly = 0;
    // Largest difference of each field, over what it may be.
    const off = new Map<string, number>();
    const differ = (field: string, by: number, atMost: number) => {
      off.set(field, Math.max(off.get(field) ?? 0, Number.isNaN(by) ? Infinity : Math.abs(by) / atMost));
    };
    for (let run = 0; run < 25; run++) {
      const radars = [
        inventedRadar(random, 5, [0.5, 0.2, 1e-6]),
        inventedRadar(random, 6, [0.5, 0.7, 0.9]),
        inventedRadar(random, 10, [0.1, 0.3, 0.2]),
      ].slice(0, count);
      const pieces = Array.from({ length: CELLS }, (_, cell) => radars.map((radar) => piecesOf(radar, cell)));
      for (const [k, blended] of blendedSteps(radars, STEPS).entries()) {
        const [addedDbMm, blockedHours, tolls] = blended.companions;
        for (let cell = 0; cell < CELLS; cell++) {
          const plain = plainSum(radars, pieces[cell]!, STEPS[k]!, cell);
          differ("toll", (tolls?.[cell] ?? 0) - plain.tollMm, 1e-5);
          if (plain.observedMs === 0) {
            expect(blended.depthMm[cell]).toBeNaN();
            continue;
          }
          if (plain.observedMs < 5 * MINUTE) partly++;
          // Weights and times by radar are float32: a few parts in ten million.
          differ("depth", blended.depthMm[cell]! - plain.depthMm, 1e-6);
          differ("variant", blended.variantMm[0]![cell]! - 2 * plain.depthMm, 2e-6);
          differ("capped", blended.cappedMm[cell]! - plain.cappedMm, 1e-6);
          differ("by depth", (addedDbMm?.[cell] ?? 0) - 3 * plain.depthMm, 3e-6);
          differ("by time", (blockedHours?.[cell] ?? 0) - plain.blockedHours, 1e-6);
          for (const key of ["observedMs", "bridgedMs", "edgeMs"] as const)
            differ(key, blended[key][cell]! - plain[key], 0.1);
          for (const [r, share] of plain.shareMs.entries())
            differ(`share ${r}`, blended.shareMs[r]![cell]! - share, 0.1);
        }
      }
    }
    expect(off.size).toBe(9 + count);
    expect([...off].filter(([, ratio]) => ratio >= 1)).toEqual([]);
    expect(partly).toBeGreaterThan(100);
  },
);

test("steps done in three units come out the same to the last bit as in one", () => {
  const random = randomNumbers(4);
  for (let run = 0; run < 10; run++) {
    const radars = [inventedRadar(random, 5, [0.5, 0.2, 1]), inventedRadar(random, 6, [0.5, 0.7, 0.9])];
    const parts = [STEPS.slice(0, 7), STEPS.slice(7, 8), STEPS.slice(8)];
    expect(parts.flatMap((steps) => blendedSteps(radars, steps))).toEqual(blendedSteps(radars, STEPS));
  }
});

test("what travels with the rain changes no bit of the rain", () => {
  const random = randomNumbers(5);
  for (let run = 0; run < 10; run++) {
    const radars = [inventedRadar(random, 5, [0.5, 0.2, 1]), inventedRadar(random, 6, [0.5, 0.7, 0.9])];
    const bare = radars.map(({ layers, rules }) => ({
      layers: layers.map(({ companions: _, ...layer }) => layer),
      rules,
    }));
    const without = blendedSteps(bare, STEPS);
    expect(without.flatMap(({ companions }) => companions)).toEqual(Array(3 * STEPS.length).fill(undefined));
    expect(without.map(({ companions: _, ...step }) => step)).toEqual(
      blendedSteps(radars, STEPS).map(({ companions: _, ...step }) => step),
    );
  }
});
