/** What parts the whole from its decimals. */
export type DecimalMark = "point" | "comma";

const DECIMAL = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d{1,3})?$/;
const DECIMAL_COMMA = /^[+-]?(?:\d+,?\d*|,\d+)(?:[eE][+-]?\d{1,3})?$/;

/** The number a cell holds, in plain decimal or with an exponent; NaN for anything else, an empty cell too. */
export function decimalOf(cell: string, mark: DecimalMark = "point"): number {
  if (mark === "point") return DECIMAL.test(cell) ? Number(cell) : Number.NaN;
  return DECIMAL_COMMA.test(cell) ? Number(cell.replace(",", ".")) : Number.NaN;
}

/** Whether a cell is a number only if its comma is a decimal mark. */
export function hasDecimalComma(cell: string): boolean {
  return cell.includes(",") && DECIMAL_COMMA.test(cell);
}

/** Why a cell is no number, in words. */
export function whyNoNumber(cell: string, mark: DecimalMark = "point"): string {
  if (mark === "point") return hasDecimalComma(cell) ? "has a decimal comma" : "is no number";
  return DECIMAL.test(cell) ? "has a decimal point" : "is no number";
}

/** How many decimals a plain number is written with. */
export function decimalsOf(cell: string, mark: DecimalMark = "point"): number {
  const point = cell.indexOf(mark === "point" ? "." : ",");
  return point < 0 ? 0 : cell.length - point - 1;
}

/** What a cell like "<0.2" says that it is below; NaN where it is no such cell. */
export function belowOf(cell: string, mark: DecimalMark = "point"): number {
  return cell.startsWith("<") ? decimalOf(cell.slice(1).trim(), mark) : Number.NaN;
}
