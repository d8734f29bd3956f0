import { krigingSystem } from "../src/kriging.ts";
import { localKriging } from "../src/local-kriging.ts";
import type { VariogramModel } from "../src/variogram-model.ts";

/** A square of cells of 1 km with gauges scattered over it. */
export interface KrigingCase {
  readonly gaugeCount: number;
  readonly sideCells: number;
  readonly neighbours: number;
  /** Cells at which one system of all gauges is asked too. */
  readonly checkedCells: number;
}

/** Local kriging beside one system of all gauges. */
export interface KrigingAccuracy {
  /** To fill value and variance of all cells, the factors included. */
  readonly seconds: number;
  /** Shares of the whole system's value and standard error by which they differ, at the checked cells. */
  readonly valueApart: Spread;
  readonly standardErrorApart: Spread;
  readonly seamsOfValue: Seams;
  readonly seamsOfVariance: Seams;
}

export interface Spread {
  readonly median: number;
  readonly largest: number;
}

/**
 * Bends of a map along its rows and columns: what a step to the next cell differs from the mean of the step before
 * and the one after. A seam that the eye could find would make steps across it bend more than those elsewhere.
 */
export interface Seams {
  readonly largestStepAcross: number;
  readonly largestStepInside: number;
  readonly largestBendAcross: number;
  readonly largestBendInside: number;
}

/** Numbers from 0 to 1 from a 32-bit xorshift generator (Marsaglia 2003, J. Stat. Softw. 8(14)), seeded. */
export function seeded(seed: number): () => number {
  let state = seed;
  return () => {
    state ^= state << 13;
    state ^= state >>> 17;
    state ^= state << 5;
    return (state >>> 0) / 2 ** 32;
  };
}

/** Fills a square by local kriging and holds it against one system of all gauges, over the whole square, edges included. */
export function krigingAccuracy({
  gaugeCount,
  sideCells,
  neighbours,
  checkedCells,
}: KrigingCase): KrigingAccuracy {
  const next = seeded(20_310_520);
  const places = {
    xKm: Float64Array.from({ length: gaugeCount }, () => sideCells * next()),
    yKm: Float64Array.from({ length: gaugeCount }, () => sideCells * next()),
  };
  const values = places.xKm.map((x, i) => 30 + 12 * Math.sin(x / 60) * Math.cos(places.yKm[i] / 80));
  const model: VariogramModel = { shape: "exponential", nugget: 0, partialSill: 80, rangeKm: 60 };
  const input = { places, values, model, errorVariance: new Float64Array(gaugeCount).fill(1) };
  const cells = sideCells * sideCells;
  const value = new Float64Array(cells);
  const variance = new Float64Array(cells);
  const xKm = Float64Array.from({ length: cells }, (_, cell) => (cell % sideCells) + 0.5);
  const yKm = Float64Array.from({ length: cells }, (_, cell) => Math.floor(cell / sideCells) + 0.5);
  const start = process.hrtime.bigint();
  const local = localKriging(input, neighbours);
  if (local === "singular") throw new Error(local);
  local.estimateAll(xKm, yKm, value, variance);
  const seconds = Number(process.hrtime.bigint() - start) / 1e9;
  const whole = krigingSystem(input);
  if (typeof whole === "string") throw new Error(whole);
  const valueApart: number[] = [];
  const errorApart: number[] = [];
  for (let k = 0; k < checkedCells; k++) {
    const cell = Math.floor(cells * next());
    const all = whole.estimate(xKm[cell], yKm[cell]);
    valueApart.push(Math.abs(value[cell] / all.value - 1));
    errorApart.push(Math.abs(Math.sqrt(variance[cell] / all.variance) - 1));
  }
  return {
    seconds,
    valueApart: spread(valueApart),
    standardErrorApart: spread(errorApart),
    seamsOfValue: seamsOf(value, sideCells, local.tileKm),
    seamsOfVariance: seamsOf(variance, sideCells, local.tileKm),
  };
}

/** @param map - shape [sideCells, sideCells], cell centres at half kilometres */
function seamsOf(map: Float64Array, sideCells: number, tileKm: number): Seams {
  const seams = { largestStepAcross: 0, largestStepInside: 0, largestBendAcross: 0, largestBendInside: 0 };
  const tileOf = (index: number) => Math.floor((index + 0.5) / tileKm);
  for (const [along, other] of [
    [1, sideCells],
    [sideCells, 1],
  ]) {
    for (let line = 0; line < sideCells; line++) {
      for (let k = 1; k + 2 < sideCells; k++) {
        const at = line * other + k * along;
        const step = map[at + along] - map[at];
        const around = (map[at] - map[at - along] + map[at + 2 * along] - map[at + along]) / 2;
        const crosses = tileOf(k) !== tileOf(k + 1);
        // A bend that has a seam in one of its outer steps says nothing of either kind.
        const isClear = tileOf(k - 1) === tileOf(k + 2);
        const bend = Math.abs(step - around);
        if (crosses) {
          seams.largestStepAcross = Math.max(seams.largestStepAcross, Math.abs(step));
          seams.largestBendAcross = Math.max(seams.largestBendAcross, bend);
        } else if (isClear) {
          seams.largestStepInside = Math.max(seams.largestStepInside, Math.abs(step));
          seams.largestBendInside = Math.max(seams.largestBendInside, bend);
        }
      }
    }
  }
  return seams;
}

function spread(values: number[]): Spread {
  const ascending = values.toSorted((a, b) => a - b);
  return { median: ascending[ascending.length >> 1], largest: ascending[ascending.length - 1] };
}
