import { mmText } from "../text/numbers.ts";
import type { Choice } from "./store.ts";

export type Unit = Choice["unit"];

/** By definition of the inch. */
export const MM_PER_INCH = 25.4;

/** A depth in the unit that the reader chose, without its name; as many digits as tenths of a millimetre are worth. */
export function depthText(mm: number, unit: Unit): string {
  return unit === "mm" ? mmText(mm) : inchText(mm / MM_PER_INCH);
}

/** Hundredths of an inch; a depth too small for that is never taken for none. */
function inchText(inch: number): string {
  if (inch > 0 && inch < 0.005) return "<\u202f0.01";
  return inch.toFixed(2).replace("-", "\u2212");
}

/**
 * A printed number of millimetres as inches, to one decimal more than was printed, since an inch is that much longer;
 * below one inch at least two digits are kept, so that a small threshold stays what it is.
 *
 * @param printed - as the page prints numbers: "31.4", "1 204" with narrow spaces, "−0.3"
 */
export function printedInches(printed: string): string {
  const plain = printed.replace(/[\u202f\u00a0\s]/g, "").replace("\u2212", "-");
  const inch = Number(plain) / MM_PER_INCH;
  const printedDecimals = plain.split(".")[1]?.length ?? 0;
  const size = Math.abs(inch);
  const small = size > 0 && size < 1 ? Math.min(4, 1 - Math.floor(Math.log10(size))) : 0;
  return inch.toFixed(Math.max(printedDecimals + 1, small)).replace("-", "\u2212");
}

const NUMBER = "(?<![\\w.-])[\u2212+]?\\d+(?:[\u202f]\\d{3})*(?:\\.\\d+)?";
/** "31.4 mm", "17.2 and 24.9 mm", "1.3 to 2.4 mm". */
const DEPTHS = new RegExp(`((?:${NUMBER}(?:\\s?(?:to|and|–)\\s))*)(${NUMBER})([\\s\u00a0\u202f]?)mm\\b`, "g");
const EACH = new RegExp(NUMBER, "g");

/** A text with its depths in inches: what stands before a "mm" is turned, and the unit's name with it. */
export function inInches(text: string): string {
  return text
    .replace(DEPTHS, (_, before: string, number: string, space: string) => {
      const list = before.replace(EACH, (each) => signed(each));
      return `${list}${signed(number)}${space}in`;
    })
    .replace(/\bmm\b/g, "in");
}

function signed(printed: string): string {
  return printed.startsWith("+") ? `+${printedInches(printed.slice(1))}` : printedInches(printed);
}
