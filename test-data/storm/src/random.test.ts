import { expect, test } from "vitest";
import { NOISE_LENGTH, noiseTable, RandomStream, xorshift128 } from "./random.ts";

// Marsaglia (2003), J. Stat. Softw. 8(14): start values of the paper; first words as reprinted in many
// places (from memory).
test("xorshift128 gives the well-known first words of its paper's start values", () => {
  const state = Uint32Array.of(123456789, 362436069, 521288629, 88675123);
  const words = Array.from({ length: 5 }, () => xorshift128(state) >>> 0);
  expect(words).toEqual([3701687786, 458299110, 2500872618, 3633119408, 516391518]);
});

test("one seed gives one stream, its neighbour another", () => {
  const draw = (seed: number): number[] => {
    const random = new RandomStream(seed);
    return Array.from({ length: 5 }, () => random.uniform());
  };
  expect(draw(7)).toEqual(draw(7));
  expect(draw(7).some((value, i) => Math.abs(value - draw(8)[i]!) < 1e-3)).toBe(false);
});

test("the noise table is normal: moments within four standard errors", () => {
  const table = noiseTable(new RandomStream(1));
  const mean = table.reduce((sum, value) => sum + value, 0) / NOISE_LENGTH;
  const variance = table.reduce((sum, value) => sum + value * value, 0) / NOISE_LENGTH;
  const beyond2 = table.filter((value) => Math.abs(value) > 2).length / NOISE_LENGTH;
  expect(Math.abs(mean)).toBeLessThan(4 / Math.sqrt(NOISE_LENGTH));
  expect(Math.abs(variance - 1)).toBeLessThan(4 * Math.sqrt(2 / NOISE_LENGTH));
  // Normal distribution: 4.55 % lie beyond two deviations (any table of it).
  expect(Math.abs(beyond2 - 0.0455)).toBeLessThan(4 * Math.sqrt((0.0455 * 0.9545) / NOISE_LENGTH));
});
