/** Room for the rays of a sweep, made once: nothing is allocated ray by ray. */
export class MonotoneFit {
  readonly #level: Float64Array;
  readonly #weight: Int32Array;

  constructor(most: number) {
    this.#level = new Float64Array(most);
    this.#weight = new Int32Array(most);
  }

  /**
   * The series that never falls and lies nearest to the given one by least squares, in place.
   *
   * Source: pool adjacent violators; Ayer et al. (1955), Ann. Math. Stat. 26, 641-647.
   *
   * @param count - how many of `values` are taken
   */
  fit(values: Float64Array, count: number): void {
    const level = this.#level;
    const weight = this.#weight;
    let blocks = 0;
    for (let i = 0; i < count; i++) {
      let mean = values[i] as number;
      let many = 1;
      while (blocks > 0 && (level[blocks - 1] as number) >= mean) {
        blocks--;
        const before = weight[blocks] as number;
        mean = (mean * many + (level[blocks] as number) * before) / (many + before);
        many += before;
      }
      level[blocks] = mean;
      weight[blocks] = many;
      blocks++;
    }
    let i = 0;
    for (let block = 0; block < blocks; block++) {
      for (let k = weight[block] as number; k > 0; k--) values[i++] = level[block] as number;
    }
  }
}

/** Replaces each value by the median of five about it; the two at either end by the median of three or stays. */
export function medianOfFive(values: Float64Array, count: number, out: Float64Array): void {
  for (let i = 0; i < count; i++) {
    if (i === 0 || i === count - 1) out[i] = values[i] as number;
    else if (i === 1 || i === count - 2) {
      out[i] = medianOf3(values[i - 1] as number, values[i] as number, values[i + 1] as number);
    } else {
      out[i] = medianOf5(
        values[i - 2] as number,
        values[i - 1] as number,
        values[i] as number,
        values[i + 1] as number,
        values[i + 2] as number,
      );
    }
  }
}

function medianOf3(a: number, b: number, c: number): number {
  return Math.max(Math.min(a, b), Math.min(Math.max(a, b), c));
}

/** The lower of the two lower pairs' tops and the upper of their bottoms bound the median beside the fifth. */
function medianOf5(a: number, b: number, c: number, d: number, e: number): number {
  const low = Math.max(Math.min(a, b), Math.min(c, d));
  const high = Math.min(Math.max(a, b), Math.max(c, d));
  return medianOf3(low, high, e);
}
