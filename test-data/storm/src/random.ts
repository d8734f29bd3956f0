/**
 * The 128-bit xorshift generator. Source: Marsaglia (2003), "Xorshift RNGs", Journal of Statistical
 * Software 8(14), with the paper's shifts 11, 8 and 19.
 *
 * @param state - four words, not all 0; advanced in place
 * @returns the next word, 0 to 2^32 - 1
 */
export function xorshift128(state: Uint32Array): number {
  const t = state[0]! ^ (state[0]! << 11);
  state[0] = state[1]!;
  state[1] = state[2]!;
  state[2] = state[3]!;
  state[3] = state[3]! ^ (state[3]! >>> 19) ^ t ^ (t >>> 8);
  return state[3]!;
}

/** Spreads neighbouring seeds far apart: the 32-bit finaliser of MurmurHash3 (Appleby, public domain). */
export function mixBits(word: number): number {
  let h = word >>> 0;
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b);
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
  return (h ^ (h >>> 16)) >>> 0;
}

/** A seeded stream of random numbers: the same seed gives the same stream everywhere. */
export class RandomStream {
  readonly #state = new Uint32Array(4);

  /** @param seed - any integer; streams of different seeds are unrelated */
  constructor(seed: number) {
    for (let word = 0; word < 4; word++) this.#state[word] = mixBits(seed + Math.imul(word + 1, 0x9e3779b9));
    if (this.#state.every((word) => word === 0)) this.#state[0] = 1;
  }

  /** Uniform in [0, 1). */
  uniform(): number {
    return xorshift128(this.#state) / 4294967296;
  }

  /** Uniform in [low, high). */
  between(low: number, high: number): number {
    return low + (high - low) * this.uniform();
  }

  /** Normal, mean 0 and deviation 1. Box and Muller (1958), Annals of Mathematical Statistics 29, 610-611. */
  normal(): number {
    const radius = Math.sqrt(-2 * Math.log(1 - this.uniform()));
    return radius * Math.cos(2 * Math.PI * this.uniform());
  }
}

/** How many normal numbers a noise table holds: a power of two, so that an index wraps by a mask. */
export const NOISE_LENGTH = 65536;

/** Normal numbers drawn once: millions of gates take theirs from here, each ray from its own place. */
export function noiseTable(random: RandomStream): Float32Array {
  return Float32Array.from({ length: NOISE_LENGTH }, () => random.normal());
}
