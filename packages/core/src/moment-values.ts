import { InputError } from "./model/errors.ts";
import type { Moment } from "./model/radar.ts";

/** How stored numbers stand for physical ones: all of a moment but its values. */
export type MomentCoding = Omit<Moment, "stored">;

/**
 * The physical value of one stored number, in dBZ where the moment is a reflectivity.
 *
 * @returns NaN for nodata, -Infinity for undetect. Where a file gives both the same code it is nodata, as
 *   "not observed" claims less; a stored Infinity is no measurement and NaN too
 */
export function momentValue(stored: number, coding: MomentCoding): number {
  if (stored === coding.nodata) return Number.NaN;
  if (stored === coding.undetect) return Number.NEGATIVE_INFINITY;
  const value = stored * coding.gain + coding.offset;
  return value === Number.POSITIVE_INFINITY ? Number.NaN : value;
}

/**
 * Refuses a coding that maps all numbers to one, or to none.
 *
 * @param where - file and dataset, for the message
 * @throws InputError if gain or offset is not finite, or gain is 0
 */
export function checkCoding(coding: MomentCoding, where: string): void {
  const { quantity, gain, offset } = coding;
  if (Number.isFinite(gain) && gain !== 0 && Number.isFinite(offset)) return;
  throw new InputError(
    `${quantity} is stored with gain ${gain} and offset ${offset}, so its values cannot be known`,
    where,
    "ask the sender for a file with a gain other than 0 and a finite offset",
  );
}

/**
 * All values of a moment as physical numbers; for a reflectivity dBZ.
 *
 * @param where - file and dataset, for the message
 * @param belowDetection - what stands for undetect: NaN where the moment means nothing there
 * @returns shape as stored; NaN for nodata
 * @throws InputError as {@link checkCoding}
 */
export function momentValues(
  moment: Moment,
  where: string,
  belowDetection: number = Number.NEGATIVE_INFINITY,
): Float32Array {
  checkCoding(moment, where);
  const { stored } = moment;
  const coding = codingAsStored(moment);
  const physical = (number: number): number => {
    const value = momentValue(number, coding);
    return value === Number.NEGATIVE_INFINITY ? belowDetection : value;
  };
  if (stored instanceof Uint8Array) return lookUp(stored, tabulate(stored, physical));
  if (stored instanceof Uint16Array) return scaled(stored, coding, belowDetection);
  return Float32Array.from(stored as Float64Array, physical);
}

/** As `momentValue`, in a loop of nothing but numbers: a table of 65,536 entries would cost more than most sweeps. */
function scaled(
  stored: Uint16Array,
  { gain, offset, nodata, undetect }: MomentCoding,
  belowDetection: number,
): Float32Array {
  // NaN is equal to no code.
  const [missing, below] = [nodata ?? Number.NaN, undetect ?? Number.NaN];
  const values = new Float32Array(stored.length);
  for (let i = 0; i < values.length; i++) {
    const code = stored[i] as number;
    const value = code * gain + offset;
    if (code === missing || value === Number.POSITIVE_INFINITY) values[i] = Number.NaN;
    else values[i] = code === below || value === Number.NEGATIVE_INFINITY ? belowDetection : value;
  }
  return values;
}

/** The coding with its special codes as the array can hold them: a 32-bit -9999.9 is not the 64-bit one. */
export function codingAsStored({ stored, ...coding }: Moment): MomentCoding {
  if (!(stored instanceof Float32Array)) return coding;
  const { nodata, undetect } = coding;
  return {
    ...coding,
    ...(nodata === undefined ? {} : { nodata: Math.fround(nodata) }),
    ...(undetect === undefined ? {} : { undetect: Math.fround(undetect) }),
  };
}

/** Stored integers that a table of all their codes can convert. */
export type Codes = Uint8Array | Uint16Array;

/** A table over all codes of a type: 256 or 65,536 entries. */
export function tabulate(codes: Codes, value: (code: number) => number): Float32Array {
  const table = new Float32Array(2 ** (8 * codes.BYTES_PER_ELEMENT));
  for (let code = 0; code < table.length; code++) table[code] = value(code);
  return table;
}

/**
 * Replaces every code by its entry in a table; the fast way from stored integers to numbers.
 *
 * @param codes - any length
 * @param table - 256 entries for uint8, 65,536 for uint16
 * @param out - written from its start, at least as long as `codes`; made where left out
 * @throws RangeError if the table does not hold all codes, or `out` is too short
 */
export function lookUp(
  codes: Codes,
  table: Float32Array,
  out: Float32Array = new Float32Array(codes.length),
): Float32Array {
  if (table.length < 2 ** (8 * codes.BYTES_PER_ELEMENT)) throw new RangeError("the table lacks codes");
  if (out.length < codes.length) throw new RangeError("the output is shorter than the codes");
  const whole = codes.length - (codes.length % 4);
  // Four at a time: about twice as fast here as one at a time.
  for (let i = 0; i < whole; i += 4) {
    out[i] = table[codes[i] as number] as number;
    out[i + 1] = table[codes[i + 1] as number] as number;
    out[i + 2] = table[codes[i + 2] as number] as number;
    out[i + 3] = table[codes[i + 3] as number] as number;
  }
  for (let i = whole; i < codes.length; i++) out[i] = table[codes[i] as number] as number;
  return out;
}
