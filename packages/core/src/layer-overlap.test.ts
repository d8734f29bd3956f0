import { checkValues, inputNumber } from "@rainreckon/test-data/published";
import { expect, test } from "vitest";
import { layerShare } from "./layer-overlap.ts";

// A layer that reaches from far below up to a height hides what a level edge hides of the two-way pattern:
// check values `pbb-gauss2-*`, computed for heights over half the beam's diameter.
test.each(
  checkValues("g-beam-geometry")
    .filter(({ id }) => id.startsWith("pbb-gauss2-"))
    .map((entry) => [entry.id, entry] as const),
)("a deep layer below the height of %s", (_id, entry) => {
  const topM = 1500 + 400 * inputNumber(entry, "terrain_minus_beam_centre_over_half_beam");
  const share = layerShare(1500, 800, { bottomM: -1e6, topM });
  expect(share).toBeCloseTo(Number(entry.expected), 6);
});

test("layers side by side share the whole beam; an upside-down layer has none of it", () => {
  const layers = [
    [-1e6, 2000],
    [2000, 2600],
    [2600, 1e6],
  ].map(([bottomM, topM]) => layerShare(2400, 900, { bottomM, topM }));
  expect(layers[0] + layers[1] + layers[2]).toBeCloseTo(1, 12);
  expect(layerShare(2400, 900, { bottomM: 2600, topM: 2000 })).toBe(0);
});

// Beam averages of the book's section h weigh a level slice of profile likewise: sigma = 0.3003 r theta.
test("half of the echo comes from within 0.6745 sigma of the centre", () => {
  const sigma = 900 / (4 * Math.sqrt(Math.LN2));
  const half = 0.674489750196 * sigma; // quartile of the normal distribution, any table of it
  expect(layerShare(2400, 900, { bottomM: 2400 - half, topM: 2400 + half })).toBeCloseTo(0.5, 9);
});
