const DECIMAL = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d{1,3})?$/;
const DECIMAL_COMMA = /^[+-]?\d+,\d+$/;

/** The number a cell holds, in plain decimal or with an exponent; NaN for anything else, an empty cell too. */
export function decimalOf(cell: string): number {
  return DECIMAL.test(cell) ? Number(cell) : Number.NaN;
}

/** Why a cell is no number, in words. */
export function whyNoNumber(cell: string): string {
  return DECIMAL_COMMA.test(cell) ? "has a decimal comma" : "is no number";
}

/** How many decimals a plain number is written with. */
export function decimalsOf(cell: string): number {
  const point = cell.indexOf(".");
  return point < 0 ? 0 : cell.length - point - 1;
}
