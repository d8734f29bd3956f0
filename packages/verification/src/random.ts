/**
 * A stream of uniform numbers in [0, 1), the same for the same seed on every machine.
 *
 * Generator xoshiro128**: Blackman and Vigna (2021), Scrambled linear pseudorandom number generators,
 * ACM Transactions on Mathematical Software 47(4), 36. Its state is filled from the seed by a Weyl
 * sequence through the 32-bit finaliser of MurmurHash3, as its authors advise a generator of another kind.
 *
 * @param seed - a whole number, 0 to 2^53 - 1
 * @throws RangeError for any other seed
 */
export function uniformStream(seed: number): () => number {
  if (!Number.isSafeInteger(seed) || seed < 0) {
    throw new RangeError(`a seed is a whole number from 0 to 2^53 - 1, got ${seed}`);
  }
  let weyl = (seed ^ Math.floor(seed / 2 ** 32)) >>> 0;
  const nextSeed = () => {
    weyl = (weyl + 0x9e3779b9) >>> 0;
    return finalised(weyl);
  };
  const next = xoshiro128([nextSeed(), nextSeed(), nextSeed(), nextSeed()]);
  return () => next() / 2 ** 32;
}

/** The generator itself: whole numbers 0 to 2^32 - 1 from a state of four, not all 0. */
export function xoshiro128(state: readonly [number, number, number, number]): () => number {
  let [a, b, c, d] = state;
  return () => {
    const result = Math.imul(rotated(Math.imul(b, 5), 7), 9) >>> 0;
    const shifted = b << 9;
    c ^= a;
    d ^= b;
    b ^= c;
    a ^= d;
    c ^= shifted;
    d = rotated(d, 11);
    return result;
  };
}

function rotated(value: number, by: number): number {
  return (value << by) | (value >>> (32 - by));
}

function finalised(value: number): number {
  let h = value;
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b);
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
  return (h ^ (h >>> 16)) >>> 0;
}
