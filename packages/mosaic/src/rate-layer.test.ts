import { describe, expect, test } from "vitest";
import { blendWeight, trustIn } from "./blend-weight.ts";
import type { PolarLookup } from "./polar-lookup.ts";
import { type GateRates, RateLayerBuilder } from "./rate-layer.ts";

/** A lookup of three cells: two gates, one gate, no gate. */
function lookupOf(gatesOfCell: readonly (readonly number[])[], heightM: number): PolarLookup {
  const cells: number[] = [];
  const start = [0];
  const gates: number[] = [];
  const position = new Int32Array(gatesOfCell.length).fill(-1);
  gatesOfCell.forEach((own, cell) => {
    if (own.length === 0) return;
    position[cell] = cells.length;
    cells.push(cell);
    gates.push(...own);
    start.push(gates.length);
  });
  return {
    cells: Int32Array.from(cells),
    start: Int32Array.from(start),
    gates: Int32Array.from(gates),
    position,
    beamHeightAslM: new Float32Array(gatesOfCell.length).fill(heightM),
    weight: new Float32Array(gatesOfCell.length).fill(0.5),
    coverageM: 100_000,
  };
}

const perGate = (rates: readonly number[], capped: readonly number[] = []): GateRates => ({
  codes: undefined,
  rateMmPerHour: Float32Array.from(rates),
  capped: Uint8Array.from(rates, (_, gate) => capped[gate] ?? 0),
});

describe("RateLayerBuilder", () => {
  test("a cell is the mean rain rate of its gates, nodata left out, undetect counted as 0", () => {
    const builder = new RateLayerBuilder(4, new Int32Array(), 0);
    builder.add(
      lookupOf([[0, 1], [2, 3], [4], []], 300),
      perGate([2, 4, Number.NaN, 6, Number.NaN]),
      [],
      1000,
    );
    const { rateMmPerHour, slot, cappedRateMmPerHour } = builder.finish();
    expect([...rateMmPerHour]).toEqual([3, 6, Number.NaN, Number.NaN]);
    expect(slot).toBeUndefined();
    expect(cappedRateMmPerHour).toBeUndefined();
  });

  // Reference book, section j (closed form): mean of R(Z) of 30 and 50 dBZ with 200/1.6 is 25.68 mm/h;
  // of the mean Z 31.73, of the mean dBZ 11.53. The table in codes holds those two rates (section c).
  test("averages rates, not Z and not dBZ", () => {
    const builder = new RateLayerBuilder(1, new Int32Array(), 0);
    const table = {
      codes: Uint8Array.of(0, 1),
      rateMmPerHour: Float32Array.of(2.734, 48.62),
      capped: new Uint8Array(2),
    };
    builder.add(lookupOf([[0, 1]], 300), table, [], 0);
    expect(builder.finish().rateMmPerHour[0]).toBeCloseTo(25.68, 2);
  });

  test("gates asked for under other relations are those of headline cells that nobody has spoken for", () => {
    const low = lookupOf([[0, 1], [2], [3], []], 300);
    const high = lookupOf([[0], [1, 2], [2], [4]], 900);
    const headline = new RateLayerBuilder(4, Int32Array.of(1, 3), 1);
    expect([...headline.headlineGates(low)]).toEqual([2]);
    const all = new RateLayerBuilder(4, Int32Array.of(0, 1, 2, 3), 1);
    expect([...all.headlineGates(low)]).toEqual([0, 1, 2, 3]);
    for (const builder of [headline, all]) {
      builder.add(low, perGate([1, 2, Number.NaN, 4]), [perGate([1, 2, Number.NaN, 4])], 0);
    }
    expect([...headline.headlineGates(high)]).toEqual([1, 2, 4]);
    expect([...all.headlineGates(high)]).toEqual([1, 2, 4]);
  });

  test("the lowest sweep that observed speaks; the next fills only what is still not observed", () => {
    const builder = new RateLayerBuilder(3, new Int32Array(), 0);
    const low = lookupOf([[0], [1], []], 300);
    const high = lookupOf([[0], [1], [2]], 900);
    builder.add(low, perGate([0, Number.NaN]), [], 1000);
    expect(builder.canFill(high)).toBe(true);
    expect(builder.add(high, perGate([9, 5, 7]), [], 61_000)).toBe(2);
    expect(builder.canFill(high)).toBe(false);
    const layer = builder.finish();
    expect([...layer.rateMmPerHour]).toEqual([0, 5, 7]);
    expect([...(layer.slot ?? [])]).toEqual([0, 1, 1]);
    expect(layer.sweepMidEpochMs).toEqual([1000, 61_000]);
    expect([...layer.beamHeightAslM]).toEqual([300, 900, 900]);
  });

  test("keeps apart what met the cap, in the cell it fell in", () => {
    const builder = new RateLayerBuilder(2, new Int32Array(), 0);
    builder.add(lookupOf([[0, 1], [2]], 300), perGate([100, 20, 4], [1, 0, 0]), [], 0);
    const { rateMmPerHour, cappedRateMmPerHour } = builder.finish();
    expect([...rateMmPerHour]).toEqual([60, 4]);
    expect([...(cappedRateMmPerHour ?? [])]).toEqual([50, 0]);
  });

  test("rates under another relation come from the same sweep, at the headline's cells only", () => {
    const builder = new RateLayerBuilder(3, Int32Array.of(1, 2), 1);
    builder.add(lookupOf([[0], [1], []], 300), perGate([1, 2]), [perGate([10, 20])], 0);
    builder.add(lookupOf([[0], [1], [2]], 900), perGate([3, 4, 5]), [perGate([30, 40, 50])], 60_000);
    expect([...builder.finish().variants[0]]).toEqual([20, 50]);
  });
});

describe("what travels with the rates", () => {
  const kinds = [{ kind: "depth" }, { kind: "time" }, { kind: "toll" }, { kind: "toll" }] as const;
  const values = (...gates: readonly number[]) => Float32Array.from(gates);
  const build = (sweeps: readonly { cells: readonly (readonly number[])[]; gates: GateRates }[]) => {
    const builder = new RateLayerBuilder(sweeps[0]!.cells.length, new Int32Array(), 0, kinds);
    sweeps.forEach(({ cells, gates }, k) => {
      builder.add(lookupOf(cells, 300 * (k + 1)), gates, [], 1000 * k);
    });
    return builder;
  };
  const companionsOf = (builder: RateLayerBuilder) =>
    builder.finish().companions!.map((plane) => plane && [...plane]);

  // By hand: rates 2 and 4 with 1 and 4 dB make 2·1 + 4·4 = 18 over two gates, and 2.5 dB by time.
  test("a value is averaged by rate where it goes by depth, by gates where it goes by time", () => {
    const gates = { ...perGate([2, 4, Number.NaN, 0]), companions: [values(1, 4, 7, 5), values(1, 4, 7, 5)] };
    const planes = companionsOf(build([{ cells: [[0, 1], [2], [3]], gates }]));
    expect(planes).toEqual([[9, 0, 0], [2.5, 0, 5], undefined, undefined]);
  });

  test("by codes as by gate; a value that is not known counts as 0", () => {
    const gates = {
      codes: Uint8Array.of(1, 2),
      rateMmPerHour: values(0, 2, 4),
      capped: new Uint8Array(3),
      companions: [values(Number.NaN, 3), undefined],
    };
    expect(companionsOf(build([{ cells: [[0, 1]], gates }]))[0]).toEqual([6]);
  });

  test("each cell has the value of the sweep that speaks for it, and none from one that does not", () => {
    const low = { ...perGate([2, Number.NaN]), companions: [values(1, 1)] };
    const high = { ...perGate([8, 8]), companions: [values(3, 3)] };
    const cells = [[0], [1]];
    expect(
      companionsOf(
        build([
          { cells, gates: low },
          { cells, gates: high },
        ]),
      )[0],
    ).toEqual([2, 24]);
  });

  // By hand. Cell 0: 6 mm/h screened beside a gate that speaks. Cell 1: two screened by two screens, nothing left.
  // Cell 2: 4 mm/h screened and filled beside one that speaks: two gates, not three. Cell 3: screened beside nodata.
  test("a toll is shared by the gates that speak or were screened, also where nothing is left to observe", () => {
    const gates = {
      ...perGate([2, Number.NaN, Number.NaN, Number.NaN, 1, 1, Number.NaN, Number.NaN]),
      companions: [
        undefined,
        undefined,
        values(0, 6, 6, Number.NaN, 4, 0, 5, 0),
        values(0, 0, 0, 2, 0, 0, 0, 0),
      ],
    };
    const cells = [
      [0, 1],
      [2, 3],
      [4, 5],
      [6, 7],
    ];
    const builder = build([{ cells, gates }]);
    expect(companionsOf(builder)).toEqual([undefined, undefined, [3, 3, 2, 5], [0, 1, 0, 0]]);
    expect([...builder.finish().rateMmPerHour]).toEqual([2, Number.NaN, 1, Number.NaN]);
  });

  test("only the lowest sweep that would have spoken has a toll", () => {
    const low = {
      ...perGate([2, Number.NaN, Number.NaN]),
      companions: [undefined, undefined, values(0, 6, 0)],
    };
    const high = {
      ...perGate([Number.NaN, 1, Number.NaN]),
      companions: [undefined, undefined, values(9, 9, 9)],
    };
    const cells = [[0], [1], [2]];
    const builder = build([
      { cells, gates: low },
      { cells, gates: high },
    ]);
    expect(companionsOf(builder)[2]).toEqual([0, 6, 9]);
    expect([...builder.finish().rateMmPerHour]).toEqual([2, 1, Number.NaN]);
  });

  test("a round of which everything was screened is not empty, one of nodata is", () => {
    const cells = [[0]];
    const nodata = perGate([Number.NaN]);
    expect(build([{ cells, gates: nodata }]).isEmpty).toBe(true);
    const screened = { ...nodata, companions: [undefined, undefined, values(3)] };
    expect(build([{ cells, gates: screened }]).isEmpty).toBe(false);
  });

  test("trust in the gates that speak lowers the weight of their cell, never to nothing", () => {
    const gates = { ...perGate([2, 4, Number.NaN, 3, 1]), trust: values(0.5, 1, 0.1, 0, 1) };
    const { weight } = build([{ cells: [[0, 1, 2], [3], [4]], gates }]).finish();
    expect([...weight]).toEqual([0.375, Math.fround(1e-6), 0.5]);
  });

  test("without trust and companions the same bytes come out, and no memory is taken", () => {
    const gates = perGate([2, 4, Number.NaN, 0]);
    const cells = [[0, 1], [2], [3]];
    const plain = build([{ cells, gates }]).finish();
    const travelled = build([
      { cells, gates: { ...gates, trust: values(1, 1, 1, 1), companions: [values(1, 4, 7, 5)] } },
    ]).finish();
    expect(plain.companions).toEqual([undefined, undefined, undefined, undefined]);
    expect({ ...travelled, companions: plain.companions }).toEqual(plain);
  });
});

describe("blendWeight", () => {
  const near = {
    beamHeightM: 400,
    groundDistanceM: 30_000,
    coverageM: 150_000,
    taperM: 10_000,
  };
  test.each([
    ["height", { beamHeightM: 1500 }],
    ["distance", { groundDistanceM: 90_000 }],
  ])("falls with %s", (_what, worse) => {
    expect(blendWeight({ ...near, ...worse })).toBeLessThan(blendWeight(near));
  });

  test("falls linearly to 0 over the taper, so that no seam shows at the end of coverage", () => {
    const at = (leftM: number) =>
      blendWeight({ ...near, beamHeightM: 0, groundDistanceM: 150_000 - leftM, coverageM: 150_000 });
    expect(at(5000) / at(10_000)).toBeCloseTo(0.5, 1);
    expect(at(0)).toBeLessThan(2e-6);
  });
});

describe("trustIn", () => {
  test("what is left of the power, out and back", () => {
    expect(trustIn(0, 0)).toBe(1);
    // By hand: half of the beam twice is a quarter; 3 dB are 10^-0.3, one half to 0.25 %.
    expect(trustIn(0.5, 0)).toBeCloseTo(0.25, 12);
    expect(trustIn(0, 3)).toBeCloseTo(0.5012, 4);
    expect(trustIn(1, 0)).toBe(0);
  });
});
