import { deflateSync } from "node:zlib";
import type { Quantised } from "./contract.ts";

/** Codes go up to here. */
const LAST_CODE = 65_535;

/** The step that values are stored by, and where counting begins. */
export interface QuantumOf {
  readonly step: number;
  readonly offset: number;
}

/**
 * Stores fields as whole numbers of a step: code 0 where nothing was observed, else 1 + (value - offset) / step.
 *
 * Each code is written as its difference from the code to its left (modulo 2^16; from 0 at the start of a row), all
 * low bytes before all high bytes, packed by zlib (RFC 1950) and written in base64: smooth fields pack well so.
 *
 * @param fields - each of shape [ny, nx], row-major; NaN not observed
 * @throws RangeError where a field does not fill the shape, or a value has no code
 */
export function quantise(
  fields: readonly ArrayLike<number>[],
  shape: { readonly nx: number; readonly ny: number; readonly block: number },
  { step, offset }: QuantumOf,
): Quantised {
  const { nx, ny, block } = shape;
  const cells = nx * ny;
  const all = fields.length * cells;
  const bytes = new Uint8Array(2 * all);
  let at = 0;
  for (const field of fields) {
    if (field.length !== cells)
      throw new RangeError(`${field.length} values do not fill ${nx} x ${ny} cells`);
    let left = 0;
    for (let cell = 0; cell < cells; cell += 1) {
      if (cell % nx === 0) left = 0;
      const code = codeOf(field[cell], step, offset);
      const difference = (code - left) & 0xffff;
      bytes[at] = difference & 0xff;
      bytes[all + at] = difference >> 8;
      left = code;
      at += 1;
    }
  }
  const data = Buffer.from(deflateSync(bytes)).toString("base64");
  return { nx, ny, block, step, offset, count: fields.length, data };
}

function codeOf(value: number, step: number, offset: number): number {
  if (Number.isNaN(value)) return 0;
  const code = 1 + Math.round((value - offset) / step);
  if (!(code >= 1 && code <= LAST_CODE)) throw new RangeError(`${value} has no code by steps of ${step}`);
  return code;
}

/** The least of 1, 10, 100 … times a step whose codes reach from the offset up to a value. */
export function stepThatReaches(step: number, offset: number, most: number): number {
  let wide = step;
  while ((most - offset) / wide > LAST_CODE - 2) wide *= 10;
  return wide;
}
