import type { CellLookup, GateRates } from "./rate-layer.ts";

/**
 * The rain that screened gates would have made, cell by cell of one round.
 *
 * The toll of a cell is that of the lowest sweep with a gate there that speaks or was screened, since that sweep
 * would have spoken had nothing been screened: the sum over its gates of what they would have made, by their number.
 */
export class CellTolls {
  readonly #cellCount: number;
  /** 1 where a sweep had a screened gate. */
  #tolled: Uint8Array | undefined;

  constructor(cellCount: number) {
    this.#cellCount = cellCount;
  }

  /** Whether any screened gate was met. */
  get any(): boolean {
    return this.#tolled !== undefined;
  }

  /**
   * Adds a sweep; sweeps come in ascending elevation.
   *
   * @param values - by companion, then by gate
   * @param tolls - the companions that are tolls, with values
   * @param isLowest - whether no lower sweep speaks for a cell
   * @param planes - by companion, shape [cells]: made and written where there is a toll
   */
  add(
    { cells, start, gates }: CellLookup,
    { codes, rateMmPerHour }: GateRates,
    values: readonly (Float32Array | undefined)[],
    tolls: readonly number[],
    isLowest: (cell: number) => boolean,
    planes: (Float32Array | undefined)[],
  ): void {
    const ofGates = tolls.map((c) => values[c] as Float32Array);
    const screened = new Uint8Array(ofGates[0].length);
    let none = true;
    for (const toll of ofGates) {
      for (let gate = 0; gate < toll.length; gate++) {
        if (!(toll[gate] > 0)) continue;
        screened[gate] = 1;
        none = false;
      }
    }
    if (none) return;
    const tolled = this.#tolled ?? new Uint8Array(this.#cellCount);
    for (let at = 0; at < cells.length; at++) {
      const from = start[at];
      const to = start[at + 1];
      let any = 0;
      for (let k = from; k < to; k++) any |= screened[gates[k]];
      if (any === 0 || tolled[cells[at]] !== 0 || !isLowest(cells[at])) continue;
      this.#tolled = tolled;
      tolled[cells[at]] = 1;
      let count = 0;
      for (let k = from; k < to; k++) {
        const gate = gates[k];
        if (screened[gate] !== 0 || rateMmPerHour[codes === undefined ? gate : codes[gate]] >= 0) count++;
      }
      for (let t = 0; t < tolls.length; t++) {
        let sum = 0;
        for (let k = from; k < to; k++) if (ofGates[t][gates[k]] > 0) sum += ofGates[t][gates[k]];
        if (sum === 0) continue;
        const plane = planes[tolls[t]] ?? new Float32Array(this.#cellCount);
        plane[cells[at]] = sum / count;
        planes[tolls[t]] = plane;
      }
    }
  }
}
