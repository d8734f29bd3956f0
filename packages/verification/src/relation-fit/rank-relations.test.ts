import { expect, test } from "vitest";
import { normalQuantile } from "../normal.ts";
import { uniformStream } from "../random.ts";
import { type RankInput, rankRelations } from "./rank-relations.ts";

const BOOTSTRAP = { seed: 1, samples: 400, level: 0.9 };

function input(parts: Partial<RankInput> & Pick<RankInput, "gaugeMm" | "gaugeOf" | "candidates">): RankInput {
  return {
    gaugeCount: Math.max(...parts.gaugeOf) + 1,
    preferred: [],
    thresholdMm: 0.2,
    bootstrap: BOOTSTRAP,
    ...parts,
  };
}

/** Gauges with log-normal depths, and what a relation of another exponent and factor would make of each. */
function storm(gaugeCount: number, perGauge: number, noiseDb: number, seed = 3) {
  const uniform = uniformStream(seed);
  const normal = () => normalQuantile(Math.min(0.9999, Math.max(0.0001, uniform())));
  const count = gaugeCount * perGauge;
  const gaugeMm = Float64Array.from({ length: count }, () => 10 ** (0.4 + 0.45 * normal()));
  const gaugeOf = Uint32Array.from({ length: count }, (_, i) => i % gaugeCount);
  const error = Float64Array.from({ length: count }, () => 10 ** ((noiseDb * normal()) / 10));
  const of = (power: number, factor: number) => gaugeMm.map((mm, i) => factor * mm ** power * error[i]);
  return { gaugeMm, gaugeOf, of };
}

// Two gauges with two pairs each; the radar doubles one gauge's depths and halves the other's. Alone: errors 1, 2, -2,
// -4, squares 25, root of 25 / 4 = 2.5. After bias gauge 0 is met by gauge 1's factor 12 / 6 = 2: 4 and 8 for 1 and 2;
// gauge 1 by gauge 0's factor 3 / 6 = 0.5: 1 and 2 for 4 and 8; squares 9 + 36 + 9 + 36 = 90.
test("by hand: each gauge is met by the factor of the other", () => {
  const ranks = rankRelations(
    input({
      gaugeMm: Float64Array.of(1, 2, 4, 8),
      gaugeOf: Uint32Array.of(0, 0, 1, 1),
      candidates: [{ name: "one", radarMm: Float64Array.of(2, 4, 2, 4) }],
    }),
  );
  expect(ranks.meanGaugeMm).toBe(3.75);
  const [alone] = ranks.alone.relations;
  expect(alone).toMatchObject({ biasRatio: 12 / 15, errorMm: 2.5, moreThanBestMm: 0 });
  expect(alone!.errorPercent).toBeCloseTo(250 / 3.75, 10);
  // Window sums: 6 for 3 and 6 for 12.
  expect(alone!.sumErrorMm).toBeCloseTo(Math.sqrt((9 + 36) / 2), 10);
  const [after] = ranks.afterBias.relations;
  expect(after!.errorMm).toBeCloseTo(Math.sqrt(90 / 4), 10);
  expect(after!.biasRatio).toBeCloseTo(15 / 15, 10);
  expect(after!.interval.reason).toMatch(/fewer than 8 gauges/);
});

test("pairs that nobody finds wet take no part; one that a single candidate finds wet does, for all", () => {
  const ranks = rankRelations(
    input({
      gaugeMm: Float64Array.of(1, 0, 0),
      gaugeOf: Uint32Array.of(0, 0, 0),
      candidates: [
        { name: "dry", radarMm: Float64Array.of(1, 0, 0) },
        { name: "wet", radarMm: Float64Array.of(1, 0.3, 0.1) },
      ],
    }),
  );
  expect(ranks.pairCount).toBe(2);
  expect(ranks.alone.best).toBe("dry");
});

test("a factor of 2 is told apart alone, and is nothing at all after bias", () => {
  const { gaugeMm, gaugeOf, of } = storm(20, 20, 1);
  const ranks = rankRelations(
    input({
      gaugeMm,
      gaugeOf,
      candidates: [
        { name: "double", radarMm: of(1, 2) },
        { name: "true", radarMm: of(1, 1) },
      ],
      preferred: ["double"],
    }),
  );
  expect(ranks.alone.relations.map(({ name, toldApart }) => [name, toldApart])).toEqual([
    ["true", false],
    ["double", true],
  ]);
  expect(ranks.alone.chosen).toBe("true");
  const [first, second] = ranks.afterBias.relations;
  expect(Math.abs(first!.errorMm - second!.errorMm)).toBeLessThan(1e-9);
  expect(ranks.afterBias.relations.every(({ toldApart }) => !toldApart)).toBe(true);
  // A tie goes to the one that stands there already.
  expect(ranks.afterBias.chosen).toBe("double");
});

test("a wrong exponent is told apart after bias where there is rain enough, and not where there is little", () => {
  const rank = (perGauge: number, noiseDb: number, power: number) => {
    const { gaugeMm, gaugeOf, of } = storm(12, perGauge, noiseDb);
    const candidates = [
      { name: "steep", radarMm: of(power, 1) },
      { name: "true", radarMm: of(1, 1) },
    ];
    return rankRelations(input({ gaugeMm, gaugeOf, candidates, preferred: ["steep"] })).afterBias;
  };
  const rich = rank(40, 1, 1.25);
  expect([rich.best, rich.chosen]).toEqual(["true", "true"]);
  expect(rich.relations[1]!.toldApart).toBe(true);
  const poor = rank(1, 3, 1.1);
  expect(poor.relations[1]!.toldApart).toBe(false);
  expect(poor.chosen).toBe("steep");
});

test("the error of the choice comes from gauges outside it: it is never that of the best alone by luck", () => {
  const { gaugeMm, gaugeOf } = storm(16, 3, 0);
  const uniform = uniformStream(9);
  // Thirty candidates of pure noise about the truth: the best of them is best by chance.
  const candidates = Array.from({ length: 30 }, (_, k) => ({
    name: `noise ${k}`,
    radarMm: gaugeMm.map((mm) => mm * (0.5 + uniform())),
  }));
  const { alone } = rankRelations(input({ gaugeMm, gaugeOf, candidates }));
  expect(alone.choiceErrorMm).toBeGreaterThan(alone.relations[0]!.errorMm);
  expect([...alone.chosenInFolds.values()].reduce((sum, times) => sum + times, 0)).toBe(16);
});

test("a candidate that is dry everywhere has no factor: it stands last, without a figure, and is not chosen", () => {
  const { gaugeMm, gaugeOf, of } = storm(10, 5, 1);
  const { afterBias } = rankRelations(
    input({
      gaugeMm,
      gaugeOf,
      candidates: [
        { name: "dry", radarMm: new Float64Array(gaugeMm.length) },
        { name: "true", radarMm: of(1, 1) },
      ],
      preferred: ["dry"],
    }),
  );
  expect(afterBias.relations.map(({ name }) => name)).toEqual(["true", "dry"]);
  expect(afterBias.relations[1]!.errorMm).toBeNaN();
  expect(afterBias.chosen).toBe("true");
});

test("without candidates, without a wet pair, and with one name twice there is nothing to rank", () => {
  const gaugeMm = Float64Array.of(0);
  const gaugeOf = Uint32Array.of(0);
  const dry = { name: "dry", radarMm: Float64Array.of(0) };
  expect(() => rankRelations(input({ gaugeMm, gaugeOf, candidates: [] }))).toThrow(RangeError);
  expect(() => rankRelations(input({ gaugeMm, gaugeOf, candidates: [dry] }))).toThrow(/no pair reaches/);
  expect(() => rankRelations(input({ gaugeMm, gaugeOf, candidates: [dry, dry] }))).toThrow(/one name/);
});
