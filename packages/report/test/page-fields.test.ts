import { expect, test } from "vitest";
import { MOST_FRAMES } from "../src/data/frame-stack.ts";
import { quantise, stepThatReaches } from "../src/data/quantise.ts";
import { FrameStack } from "../src/index.ts";
import { classTable, codesOf, unpack, valueAt } from "../src/page/fields.ts";

const NO = Number.NaN;
const shape = { nx: 3, ny: 2, block: 1 };

test("what is packed by steps comes back to the nearest step, row by row, and holes stay holes", async () => {
  const first = [0, 0.04, 12.34, NO, 3.06, 655.2];
  const second = [NO, NO, NO, 0.1, 0.2, 0.3];
  const fields = await unpack(quantise([first, second], shape, { step: 0.1, offset: 0 }));
  const read = (index: number) =>
    [0, 1].flatMap((row) => [0, 1, 2].map((column) => valueAt(fields, index, column, row)));
  // By hand: 0.04 is nearer to 0 than to 0.1, 12.34 to 12.3, 3.06 to 3.1.
  const expected = [0, 0, 12.3, NO, 3.1, 655.2];
  for (const [cell, value] of read(0).entries()) {
    if (Number.isNaN(expected[cell])) expect(value).toBeNaN();
    else expect(value).toBeCloseTo(expected[cell], 9);
  }
  expect(read(1).slice(0, 3)).toEqual([NO, NO, NO]);
  expect(read(1)[5]).toBeCloseTo(0.3, 9);
});

test("differences are written low bytes first, each row from 0: worked by hand", () => {
  // Codes 1, 301, 0 and 256, 256, 257: differences 1, 300, -301 and 256, 0, 1 (modulo 65536).
  const low = [1, 44, 211, 0, 0, 1];
  const high = [0, 1, 254, 1, 0, 0];
  expect([...codesOf(Uint8Array.from([...low, ...high]), { nx: 3, ny: 2, count: 1 })]).toEqual([
    1, 301, 0, 256, 256, 257,
  ]);
});

test("broken data and values without a code are refused", async () => {
  expect(() => codesOf(new Uint8Array(3), { nx: 3, ny: 2, count: 1 })).toThrow("do not fill");
  expect(() => quantise([[1, 2]], shape, { step: 1, offset: 0 })).toThrow("2 values do not fill 3 x 2 cells");
  expect(() => quantise([[-1, 0, 0, 0, 0, 0]], shape, { step: 1, offset: 0 })).toThrow("has no code");
  const packed = quantise([[1, 2, 3, 4, 5, 6]], shape, { step: 1, offset: 0 });
  await expect(unpack({ ...packed, data: `${packed.data.slice(0, 8)}AAAA` })).rejects.toThrow();
});

test("a step is widened tenfold until its codes reach the largest value", () => {
  expect(stepThatReaches(0.1, 0, 6553)).toBe(0.1);
  expect(stepThatReaches(0.1, 0, 6554)).toBe(1);
  expect(stepThatReaches(10, -1000, 9000)).toBe(10);
});

test("a stored value lies in the class that its edge begins, steps that are no exact numbers included", async () => {
  const edges = [0, 0.1, 0.3, 0.7, 1];
  const classes = { edges, colours: ["", "a", "b", "c", "d"], labels: [] };
  const fields = await unpack(quantise([[0, 0.1, 0.3, 0.7, 1, NO]], shape, { step: 0.1, offset: 0 }));
  const table = classTable(classes, fields, 11);
  expect([...fields.codes].map((code) => table[code])).toEqual([0, 1, 2, 3, 4, -1]);
});

const hour = 3_600_000;

test("intervals beyond the most frames are joined: what was observed is added up, a hole stays where both are holes", () => {
  const stack = new FrameStack("radar", { nx: 2, ny: 1 }, 2 * MOST_FRAMES);
  for (let k = 0; k < 2 * MOST_FRAMES; k += 1) {
    const depthMm = Float32Array.of(k % 2 === 0 ? 1.5 : 2, k % 2 === 0 ? NO : k === 1 ? 4 : NO);
    stack.add({ startEpochMs: k * hour, endEpochMs: (k + 1) * hour }, depthMm);
  }
  const { frames, joined } = stack.finish();
  expect([frames.length, joined]).toEqual([MOST_FRAMES, 2]);
  expect(frames[0]).toMatchObject({ startEpochMs: 0, endEpochMs: 2 * hour });
  expect([...frames[0].depthMm]).toEqual([3.5, 4]);
  expect([...frames[1].depthMm]).toEqual([3.5, NO]);
});

test("a stack keeps its own copy of what it is handed", () => {
  const stack = new FrameStack("radar", { nx: 2, ny: 1 }, 1);
  const depthMm = Float32Array.of(1, 2);
  stack.add({ startEpochMs: 0, endEpochMs: hour }, depthMm);
  depthMm.fill(9);
  expect([...stack.finish().frames[0].depthMm]).toEqual([1, 2]);
});

test("a grid finer than the page shows is thinned to the mean of what was observed", () => {
  const stack = new FrameStack("radar", { nx: 600, ny: 2 }, 1);
  const depthMm = new Float32Array(1200).fill(4);
  depthMm[0] = NO;
  depthMm[1] = 1;
  stack.add({ startEpochMs: 0, endEpochMs: hour }, depthMm);
  const { nx, ny, block, frames } = stack.finish();
  expect([nx, ny, block]).toEqual([300, 1, 2]);
  // 1, 4 and 4 of the first block of four.
  expect([...frames[0].depthMm.slice(0, 2)]).toEqual([3, 4]);
});
