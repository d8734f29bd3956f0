import type { StoredValues } from "@rainreckon/core";

/** Rows of an array of shape [rows, gateCount], in another order or fewer of them: a copy. */
export function takeRows(stored: StoredValues, rows: Int32Array, gateCount: number): StoredValues {
  const taken = stored.slice(0, rows.length * gateCount);
  rows.forEach((row, ray) => {
    taken.set(stored.subarray(row * gateCount, (row + 1) * gateCount), ray * gateCount);
  });
  return taken;
}
