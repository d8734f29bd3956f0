import { expect, test } from "vitest";
import { cellsPath } from "./regions.ts";

/** The cells that a path of axis-parallel boxes covers, each with how often. */
function covered(path: string, nx: number): Map<number, number> {
  const cells = new Map<number, number>();
  for (const [, x, y, width, height] of path.matchAll(/M(\d+) (\d+)h(\d+)v(\d+)h-\3z/g)) {
    for (let row = Number(y); row < Number(y) + Number(height); row += 1) {
      for (let column = Number(x); column < Number(x) + Number(width); column += 1) {
        cells.set(row * nx + column, (cells.get(row * nx + column) ?? 0) + 1);
      }
    }
  }
  return cells;
}

test("every passing cell is covered once, and no other", () => {
  // A fixed scatter of cells, dense and thin by turns.
  for (const modulus of [2, 3, 5, 7]) {
    const passes = (i: number) => (i * i + 3 * i) % modulus === 0;
    const path = cellsPath(13, 9, passes);
    const expected = new Map(
      Array.from({ length: 117 }, (_, i) => i)
        .filter(passes)
        .map((i) => [i, 1]),
    );
    expect(new Map([...covered(path, 13)].sort(([a], [b]) => a - b))).toEqual(expected);
  }
});

test("a field that passes everywhere is one box, and one that passes nowhere is nothing", () => {
  expect(cellsPath(4, 3, () => true)).toBe("M0 0h4v3h-4z");
  expect(cellsPath(4, 3, () => false)).toBe("");
});
