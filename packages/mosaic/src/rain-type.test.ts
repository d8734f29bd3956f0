import { RAIN_TYPE, RAIN_TYPE_DEFAULTS, rainTypes } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { rainTypeOfGates } from "./rain-type.ts";
import type { CellLookup } from "./rate-layer.ts";

const NONE = Number.NEGATIVE_INFINITY;

/** A lookup in which cell k is made of the gates listed k-th; weight and height play no part here. */
function lookupOf(gatesByCell: readonly (readonly number[])[]): CellLookup {
  const cells = gatesByCell.flatMap((gates, cell) => (gates.length > 0 ? [cell] : []));
  const start = [0];
  for (const cell of cells) start.push((start.at(-1) ?? 0) + gatesByCell[cell].length);
  return {
    cells: Int32Array.from(cells),
    start: Int32Array.from(start),
    gates: Int32Array.from(gatesByCell.flat()),
    position: Int32Array.from(gatesByCell, (_, cell) => cells.indexOf(cell)),
    beamHeightAslM: new Float32Array(gatesByCell.length),
    weight: new Float32Array(gatesByCell.length).fill(1),
  };
}

describe("rain type of gates", () => {
  test("on 2 km cells with a gate each it is the type of the cell", () => {
    const dbz = new Float32Array(21 * 21).fill(30);
    dbz[220] = 45;
    dbz[3] = NONE;
    dbz[7] = Number.NaN;
    const lookup = lookupOf(Array.from({ length: 441 }, (_, cell) => [cell]));
    const grid = { nx: 21, ny: 21, cellM: 2000 };
    const types = rainTypeOfGates(lookup, grid, dbz);
    expect(types).toEqual(rainTypes(dbz, grid));
    expect([types[220], types[0], types[3], types[7]]).toEqual([1, 2, 0, 0]);
  });

  // Four 1 km cells make one square. Z: (10⁵ + 0 + 0) / 3 = 10^4.52, 45.2 dBZ, above 42: the gate not observed does
  // not count, those below detection do. 42 dBZ makes 37.2, which stands out from nothing.
  test.each([
    [50, RAIN_TYPE.convective],
    [42, RAIN_TYPE.stratiform],
  ])("a square of four cells with one gate of %i dBZ has type %i", (strong, type) => {
    const dbz = Float32Array.of(strong, NONE, NONE, Number.NaN);
    const types = rainTypeOfGates(lookupOf([[0], [1], [2], [3]]), { nx: 2, ny: 2, cellM: 1000 }, dbz);
    expect([...types]).toEqual([type, 0, 0, 0]);
  });

  test("a grid of odd size keeps its last row and column", () => {
    const dbz = new Float32Array(9).fill(50);
    const types = rainTypeOfGates(
      lookupOf(Array.from({ length: 9 }, (_, cell) => [cell])),
      { nx: 3, ny: 3, cellM: 1000 },
      dbz,
    );
    expect([...types]).toEqual(new Array(9).fill(RAIN_TYPE.convective));
  });

  test("a gate in two squares is convective where one of them is; a gate in none has no type", () => {
    // Squares 12 km apart in a row: the first holds 55 dBZ, the seventh only a gate it shares with the first.
    const cells: number[][] = Array.from({ length: 7 }, () => []);
    cells[0] = [0, 1];
    cells[6] = [1];
    const types = rainTypeOfGates(
      lookupOf(cells),
      { nx: 7, ny: 1, cellM: 2000 },
      Float32Array.of(55, 20, 30),
      { ...RAIN_TYPE_DEFAULTS, backgroundRadiusM: 5000 },
    );
    expect([...types]).toEqual([1, 1, 0]);
  });

  test("a lookup that covers nothing leaves every gate without a type", () => {
    const types = rainTypeOfGates(lookupOf([[], []]), { nx: 2, ny: 1, cellM: 2000 }, Float32Array.of(40, 50));
    expect([...types]).toEqual([0, 0]);
  });
});
