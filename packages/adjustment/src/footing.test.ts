import { describe, expect, test } from "vitest";
import { dominanceNote, whyNoGauge } from "./footing.ts";
import { gaugeAt, network, SETTINGS } from "./invented-gauges.ts";
import { learnMethod, METHOD_NAMES } from "./methods.ts";

describe("why there is no gauge to adjust by", () => {
  test.each([
    [{ placed: 0, paired: 0, trusted: 0 }, "no gauge with readings stands on the grid"],
    [{ placed: 7, paired: 0, trusted: 0 }, "none of 7 gauges has readings while the radar looked"],
    [{ placed: 7, paired: 6, trusted: 0 }, "none of 6 gauges is trusted"],
    [{ placed: 7, paired: 6, trusted: 1 }, undefined],
  ])("%o", (counts, reason) => {
    expect(whyNoGauge(counts)).toBe(reason);
  });
});

describe("one gauge that decides every sum", () => {
  const gauges = network(9, () => 10);

  // By hand: 9 gauges of 10 mm and one of 110 mm: 110 of 200 mm.
  test("is named with its share", () => {
    const tenth = gaugeAt("wild", [50, 50], 110, 10);
    expect(dominanceNote([...gauges, tenth])).toBe(
      "gauge wild of moor alone holds 55 % of the rain of 10 gauges",
    );
  });

  test("is not named where rain is shared, where there is none, and where it is the only gauge", () => {
    expect(dominanceNote(gauges)).toBeUndefined();
    expect(dominanceNote(network(4, () => 0))).toBeUndefined();
    expect(dominanceNote(gauges.slice(0, 1))).toBeUndefined();
    expect(dominanceNote([])).toBeUndefined();
  });
});

// A reading beyond all measure that nobody refuted: what it does is bounded by the limits of factors, or by its own
// depth, and there is a figure everywhere.
test.each(METHOD_NAMES)("%s: an enormous reading leaves a figure everywhere", (name) => {
  const gauges = [...network(12, (mm) => mm), gaugeAt("wild", [50, 50], 1e7, 12)];
  const learned = learnMethod(name, gauges, SETTINGS);
  for (const [x, y] of [
    [50, 50],
    [5, 90],
    [400, -300],
  ]) {
    const mm = learned.kind === "field" ? learned.depthMm(x, y, 8, 40) : 8 * learned.factorAt(0);
    expect(mm).toBeGreaterThanOrEqual(0);
    expect(mm).toBeLessThan(1e9);
  }
});
