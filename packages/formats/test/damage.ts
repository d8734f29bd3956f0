import { basename } from "node:path";
import { InputError } from "@rainreckon/core";

/** Numbers from 0 to 1 that a seed rules: mulberry32, a published generator of 32 bits, from memory. */
export function seededNumbers(seed: number): () => number {
  let state = seed >>> 0;
  return () => {
    state = (state + 0x6d2b79f5) >>> 0;
    let mixed = Math.imul(state ^ (state >>> 15), state | 1);
    mixed ^= mixed + Math.imul(mixed ^ (mixed >>> 7), mixed | 61);
    return ((mixed ^ (mixed >>> 14)) >>> 0) / 2 ** 32;
  };
}

const EXTREMES = [0, 1, 0x7f, 0x80, 0xff];

/**
 * A damaged copy of some bytes: flipped, overwritten, cut off, taken out, doubled.
 *
 * @param keep - so many bytes at the head stay as they are, so that what recognises a file still does
 */
export function damaged(bytes: Uint8Array, next: () => number, keep: number): Buffer {
  let result = Buffer.from(bytes);
  const place = () => keep + Math.floor(next() * Math.max(1, result.length - keep));
  const times = 1 + Math.floor(next() * 6);
  for (let k = 0; k < times && result.length > keep; k++) {
    const at = place();
    switch (Math.floor(next() * 6)) {
      case 0:
        result[at] ^= 1 << Math.floor(next() * 8);
        break;
      case 1:
        result[at] = Math.floor(next() * 256);
        break;
      case 2: {
        const value = EXTREMES[Math.floor(next() * EXTREMES.length)];
        result.fill(value, at, Math.min(result.length, at + 1 + Math.floor(next() * 8)));
        break;
      }
      case 3:
        if (next() < 0.3) result = result.subarray(0, at);
        break;
      case 4: {
        const end = at + 1 + Math.floor(next() * 20);
        result = Buffer.concat([result.subarray(0, at), result.subarray(end)]);
        break;
      }
      default: {
        const copied = result.subarray(at, at + 1 + Math.floor(next() * 30));
        result = Buffer.concat([result.subarray(0, at), copied, result.subarray(at)]);
      }
    }
  }
  return result;
}

/** What became of a damaged file: read, or refused by an error that names it. */
export async function outcomeOf<T>(
  read: () => Promise<T>,
  names: readonly string[],
): Promise<{ readonly value: T } | "refused"> {
  try {
    return { value: await read() };
  } catch (fault) {
    if (!(fault instanceof InputError)) throw fault;
    const named = names.some((name) => fault.where.includes(basename(name)));
    if (!named || fault.what === "" || fault.fix === "")
      throw new Error(`an error that helps nobody: ${fault.line}`);
    return "refused";
  }
}
