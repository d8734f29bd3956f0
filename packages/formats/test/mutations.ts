/** For tests: numbers from mulberry32, a small generator in the public domain (T. Ettinger), seeded. */
export function random(seed: number): () => number {
  let state = seed;
  return () => {
    state = (state + 0x6d2b79f5) | 0;
    let mixed = Math.imul(state ^ (state >>> 15), state | 1);
    mixed ^= mixed + Math.imul(mixed ^ (mixed >>> 7), mixed | 61);
    return ((mixed ^ (mixed >>> 14)) >>> 0) / 2 ** 32;
  };
}

const EXTREMES = [0, 1, 0x7f, 0x80, 0xff];

/**
 * For tests: a damaged copy of a file: bytes changed, runs overwritten, a piece cut out or doubled, or the end cut off.
 *
 * @param keep - bytes at the head that stay as they are
 */
export function mutant(whole: Buffer, next: () => number, keep: number): Buffer {
  const bytes = Buffer.from(whole);
  const place = () => keep + Math.floor(next() * (bytes.length - keep));
  const kind = Math.floor(next() * 6);
  if (kind === 0) return bytes.subarray(0, Math.max(keep, place()));
  if (kind === 1) return Buffer.concat([bytes.subarray(0, place()), bytes.subarray(place())]);
  if (kind === 2) {
    const extreme = EXTREMES[Math.floor(next() * EXTREMES.length)] as number;
    const at = place();
    return bytes.fill(extreme, at, Math.min(bytes.length, at + 1 + Math.floor(next() * 8)));
  }
  const changes = 1 + Math.floor(next() * 3);
  for (let change = 0; change < changes; change++) {
    const at = place();
    bytes[at] = kind === 3 ? (bytes[at] as number) ^ (1 << Math.floor(next() * 8)) : Math.floor(next() * 256);
  }
  return bytes;
}
