/** Longest side of a picture in cells: finer ones would not be seen, but would weigh on the file. */
export const MAX_PICTURE_SIDE = 300;

/** A grid drawn smaller: each picture cell stands for `block` × `block` grid cells. */
export interface Picture {
  readonly nx: number;
  readonly ny: number;
  readonly block: number;
  /** Shape [ny, nx], row-major, row 0 in the north. */
  readonly values: Float32Array;
}

/** How many grid cells a picture cell must span so that neither side exceeds the limit. */
export function pictureBlock(nx: number, ny: number, maxSide = MAX_PICTURE_SIDE): number {
  return Math.max(1, Math.ceil(Math.max(nx, ny) / maxSide));
}

/**
 * Thins a grid to a picture; a picture cell is not observed (NaN) only where none of its cells was.
 *
 * @param values - shape [ny, nx]
 * @param how - "mean" of the observed cells for amounts; "most" frequent for names, the lower on a tie
 */
export function thin(
  values: Float32Array,
  nx: number,
  ny: number,
  how: "mean" | "most",
  maxSide = MAX_PICTURE_SIDE,
): Picture {
  if (values.length !== nx * ny)
    throw new RangeError(`${values.length} values do not fill ${nx} x ${ny} cells`);
  const block = pictureBlock(nx, ny, maxSide);
  if (block === 1) return { nx, ny, block, values };
  const width = Math.ceil(nx / block);
  const height = Math.ceil(ny / block);
  const out = new Float32Array(width * height);
  const observed: number[] = [];
  for (let row = 0; row < height; row += 1) {
    for (let column = 0; column < width; column += 1) {
      observed.length = 0;
      for (let y = row * block; y < Math.min(ny, (row + 1) * block); y += 1) {
        for (let x = column * block; x < Math.min(nx, (column + 1) * block); x += 1) {
          const value = values[y * nx + x];
          if (!Number.isNaN(value)) observed.push(value);
        }
      }
      out[row * width + column] = how === "mean" ? mean(observed) : mostFrequent(observed);
    }
  }
  return { nx: width, ny: height, block, values: out };
}

function mean(values: readonly number[]): number {
  let sum = 0;
  for (const value of values) sum += value;
  return values.length === 0 ? Number.NaN : sum / values.length;
}

function mostFrequent(values: readonly number[]): number {
  const counts = new Map<number, number>();
  for (const value of values) counts.set(value, (counts.get(value) ?? 0) + 1);
  let best = Number.NaN;
  let most = 0;
  for (const [value, count] of counts) {
    if (count > most || (count === most && value < best)) {
      best = value;
      most = count;
    }
  }
  return best;
}
