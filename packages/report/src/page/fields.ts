import type { PageClasses, Quantised } from "../data/contract.ts";

/** Fields as the page holds them, unpacked: see `data/quantise.ts` for how they were packed. */
export interface Fields extends Omit<Quantised, "data"> {
  /** Shape [count, ny, nx]; 0 is not observed. */
  readonly codes: Uint16Array;
}

/** Unpacks fields. @throws where the browser cannot inflate, or the data are broken */
export async function unpack({ data, ...shape }: Quantised): Promise<Fields> {
  const packed = Uint8Array.from(atob(data), (letter) => letter.charCodeAt(0));
  const stream = new Blob([packed]).stream().pipeThrough(new DecompressionStream("deflate"));
  const bytes = new Uint8Array(await new Response(stream).arrayBuffer());
  return { ...shape, codes: codesOf(bytes, shape) };
}

/** Adds the differences up again, row by row. */
export function codesOf(
  bytes: Uint8Array,
  { nx, ny, count }: Pick<Quantised, "nx" | "ny" | "count">,
): Uint16Array {
  const all = nx * ny * count;
  if (bytes.length !== 2 * all) throw new Error(`${bytes.length} bytes do not fill ${all} cells`);
  const codes = new Uint16Array(all);
  let left = 0;
  for (let at = 0; at < all; at += 1) {
    if (at % nx === 0) left = 0;
    left = (left + bytes[at] + 256 * bytes[all + at]) & 0xffff;
    codes[at] = left;
  }
  return codes;
}

/** Value of a grid cell in one of the fields; NaN where not observed. */
export function valueAt(fields: Fields, index: number, column: number, row: number): number {
  const { nx, ny, block, codes, step, offset } = fields;
  const cell = Math.floor(row / block) * nx + Math.floor(column / block);
  const code = codes[index * nx * ny + cell];
  return code === 0 ? Number.NaN : offset + (code - 1) * step;
}

/** Class of each code from 0 to the largest: -1 for not observed. */
export function classTable(classes: PageClasses, { step, offset }: Fields, largest: number): Int8Array {
  // Edges in codes: a hair of slack, since steps like 0.1 are no exact numbers.
  const edges = classes.edges.map((edge) => (edge - offset) / step + 1 - 1e-6);
  const table = new Int8Array(largest + 1).fill(-1);
  let at = 0;
  for (let code = 1; code <= largest; code += 1) {
    while (at + 1 < edges.length && code >= edges[at + 1]) at += 1;
    table[code] = at;
  }
  return table;
}
