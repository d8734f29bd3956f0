/** U+2212: a minus that is as wide as a digit. */
const MINUS = "\u2212";
const NARROW_SPACE = "\u202f";
const NO_BREAK_SPACE = "\u00a0";

/**
 * A depth or difference in mm as a reader can defend it: tenths below 100 mm, whole mm from there on.
 *
 * A depth too small for a tenth is "< 0.1", so that it is never taken for none.
 *
 * @param mm - finite
 */
export function mmText(mm: number): string {
  const size = Math.abs(mm);
  if (size > 0 && size < 0.05) return mm > 0 ? `<${NARROW_SPACE}0.1` : `>${NARROW_SPACE}${MINUS}0.1`;
  const digits = size < 99.95 ? size.toFixed(1) : grouped(Math.round(size));
  return mm < 0 ? `${MINUS}${digits}` : digits;
}

/** A depth of a part, so that the whole was at least that: "≥ 31.4"; "> 0" where it is too small for a tenth. */
export function atLeastText(mm: number): string {
  return mm > 0 && mm < 0.05 ? `>${NO_BREAK_SPACE}0` : `≥${NO_BREAK_SPACE}${mmText(mm)}`;
}

/** An error in mm, dB or %: hundredths below 10, where a mean over many pairs can tell them apart. */
export function errorText(error: number): string {
  const size = Math.abs(error);
  const digits = size < 9.995 ? size.toFixed(2) : size.toFixed(1);
  return error < 0 && Number(digits) !== 0 ? `${MINUS}${digits}` : digits;
}

/** A difference in mm with its sign. */
export function signedErrorText(error: number): string {
  const text = errorText(error);
  return error > 0 && text !== "0.00" ? `+${text}` : text;
}

/** A share of 0 to 1 in per cent. "100 %" and "0 %" are said only where they are exact. */
export function percentText(fraction: number): string {
  const percent = Math.round(fraction * 100);
  if (fraction < 1 && percent === 100) return `>${NARROW_SPACE}99${NO_BREAK_SPACE}%`;
  if (fraction > 0 && percent === 0) return `<${NARROW_SPACE}1${NO_BREAK_SPACE}%`;
  return `${percent < 0 ? MINUS : ""}${Math.abs(percent)}${NO_BREAK_SPACE}%`;
}

/** A ratio, score or factor to two decimals; three significant digits below 0.1. */
export function ratioText(value: number): string {
  const size = Math.abs(value);
  const digits = size > 0 && size < 0.095 ? size.toPrecision(2) : size.toFixed(2);
  return value < 0 && Number(digits) !== 0 ? `${MINUS}${digits}` : digits;
}

/** A count with its thousands set apart. */
export function countText(count: number): string {
  return grouped(Math.round(count));
}

/** "1 gauge", "3 gauges". */
export function counted(count: number, one: string, many = `${one}s`): string {
  return `${countText(count)}${NO_BREAK_SPACE}${count === 1 ? one : many}`;
}

/** An area in km²: tenths below 100. */
export function areaText(km2: number): string {
  return km2 < 99.95 ? km2.toFixed(1) : grouped(Math.round(km2));
}

function grouped(whole: number): string {
  const digits = String(Math.abs(whole)).replace(/\B(?=(\d{3})+$)/g, NARROW_SPACE);
  return whole < 0 ? `${MINUS}${digits}` : digits;
}

/** A number for an SVG attribute: two decimals at most, no trailing zeros. */
export function svgNumber(value: number): number {
  return Math.round(value * 100) / 100;
}
