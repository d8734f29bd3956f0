import type { CellLookup, GateRates, VariantRates } from "./rate-layer.ts";

// From gates to cells. Each loop is a function of its own over plain arrays: it runs for every sweep, and is compiled
// early and once.

/** The cells that a sweep speaks for: as many of `own` as `count`, which are places in the lookup's list of cells. */
export interface OwnCells {
  readonly own: Int32Array;
  readonly count: number;
}

/**
 * Fills what is still not observed with the mean rates of a sweep.
 *
 * @param rate - shape [cells of the grid], NaN where not observed; written
 * @param own - room for every cell of the lookup; written
 */
export function gatherRates(
  { cells, start, gates }: CellLookup,
  { codes, rateMmPerHour, capped }: GateRates,
  rate: Float32Array,
  own: Int32Array,
): OwnCells & { readonly anyCapped: boolean } {
  let count = 0;
  let cap = 0;
  for (let at = 0; at < cells.length; at++) {
    const cell = cells[at];
    if (!Number.isNaN(rate[cell])) continue;
    let sum = 0;
    let speaking = 0;
    for (let k = start[at]; k < start[at + 1]; k++) {
      const key = codes === undefined ? gates[k] : codes[gates[k]];
      const value = rateMmPerHour[key];
      // False for NaN: nodata stays out of the mean.
      if (value >= 0) {
        sum += value;
        speaking++;
        cap |= capped[key];
      }
    }
    if (speaking === 0) continue;
    rate[cell] = sum / speaking;
    own[count++] = at;
  }
  return { own, count, anyCapped: cap !== 0 };
}

/** The part of each mean that comes from capped gates, into `cappedRate`. */
export function gatherCapped(
  { cells, start, gates }: CellLookup,
  { codes, rateMmPerHour, capped }: GateRates,
  { own, count }: OwnCells,
  cappedRate: Float32Array,
): void {
  for (let o = 0; o < count; o++) {
    const at = own[o];
    let sum = 0;
    let speaking = 0;
    for (let k = start[at]; k < start[at + 1]; k++) {
      const key = codes === undefined ? gates[k] : codes[gates[k]];
      const value = rateMmPerHour[key];
      if (!(value >= 0)) continue;
      speaking++;
      if (capped[key] !== 0) sum += value;
    }
    cappedRate[cells[at]] = sum / speaking;
  }
}

/**
 * Mean rates under another relation, into `out` at the headline's cells.
 *
 * @param rate - of the cells under the relation in use
 * @param dryTogether - whether the other relation is dry wherever that one is
 * @param headlineAt - position of a cell in `out`, -1 for none; undefined where it has all cells
 */
export function gatherVariant(
  { cells, start, gates }: CellLookup,
  { codes, rateMmPerHour }: VariantRates,
  { own, count }: OwnCells,
  rate: Float32Array,
  dryTogether: boolean,
  headlineAt: Int32Array | undefined,
  out: Float32Array,
): void {
  for (let o = 0; o < count; o++) {
    const at = own[o];
    const h = headlineAt === undefined ? cells[at] : headlineAt[cells[at]];
    if (h < 0) continue;
    if (dryTogether && rate[cells[at]] === 0) {
      out[h] = 0;
      continue;
    }
    let sum = 0;
    let speaking = 0;
    for (let k = start[at]; k < start[at + 1]; k++) {
      const value = rateMmPerHour[codes === undefined ? gates[k] : codes[gates[k]]];
      if (!(value >= 0)) continue;
      sum += value;
      speaking++;
    }
    if (speaking > 0) out[h] = sum / speaking;
  }
}

/** Whether nothing rains under one relation that does not under another: then a dry cell is dry under both. */
export function isDryWhere(dry: Float32Array, other: Float32Array): boolean {
  if (dry.length !== other.length) return false;
  for (let key = 0; key < dry.length; key++) if (dry[key] === 0 && other[key] !== 0) return false;
  return true;
}

/**
 * Mean of a value over the gates that speak for a cell, or of rate times value.
 *
 * @param mean - shape [cells of the grid]; undefined where it still is `usual` everywhere
 * @param usual - a mean that need not be written
 * @returns `mean`, made where there is something to write
 */
export function gatherMean(
  { cells, start, gates }: CellLookup,
  { codes, rateMmPerHour }: GateRates,
  { own, count }: OwnCells,
  values: Float32Array,
  rate: Float32Array,
  timesRate: boolean,
  usual: 0 | 1,
  mean: Float32Array | undefined,
): Float32Array | undefined {
  let out = mean;
  for (let o = 0; o < count; o++) {
    const at = own[o];
    const cell = cells[at];
    if (timesRate && rate[cell] === 0) continue;
    let sum = 0;
    let speaking = 0;
    for (let k = start[at]; k < start[at + 1]; k++) {
      const gate = gates[k];
      const ofGate = rateMmPerHour[codes === undefined ? gate : codes[gate]];
      if (!(ofGate >= 0)) continue;
      speaking++;
      const value = values[gate];
      if (!Number.isNaN(value)) sum += timesRate ? ofGate * value : value;
    }
    if (sum === usual * speaking) continue;
    out ??= new Float32Array(rate.length).fill(usual);
    out[cell] = sum / speaking;
  }
  return out;
}
