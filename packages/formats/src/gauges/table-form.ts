import { guessDelimiter, parseLines } from "./delimited.ts";
import { SEEMS_A_STAMP } from "./stamp.ts";

/** As many lines at the head of a file as a header is looked for in. */
const MOST_LINES = 60;
/** Share of the lines below that must have as many cells as a line for a table to begin there. */
const REGULAR = 0.9;

/** Where the table of a file begins, and what parts its cells. */
export interface TablePlace {
  readonly delimiter: string;
  /** Line of the header, from 1. */
  readonly headerLine: number;
  /** Whether other text stands above the header. */
  readonly textAbove: boolean;
}

/**
 * Finds the table below any lines of introduction: the first line that most of the lines below are alike
 * to; where stamps begin further down, the last line above them that could head their column.
 *
 * @returns undefined where no delimiter parts the lines into columns
 */
export function findTable(headLines: string): TablePlace | undefined {
  const lines = headLines.split("\n", MOST_LINES + 60);
  const filled = lines.map((_, index) => index).filter((index) => lines[index].trim() !== "");
  for (const start of filled.slice(0, MOST_LINES)) {
    const below = filled.filter((index) => index >= start).map((index) => lines[index]);
    const delimiter = guessDelimiter(below.join("\n"));
    if (delimiter === undefined) continue;
    const counts = below.map((line) => cellCount(line, delimiter));
    const alike = counts.filter((count) => count === counts[0]).length;
    if (alike < 2 || alike < REGULAR * counts.length) continue;
    const headerAt = lastHeaderAbove(lines, filled, start, delimiter);
    return { delimiter, headerLine: headerAt + 1, textAbove: headerAt !== filled[0] };
  }
  const delimiter = guessDelimiter(headLines);
  if (delimiter === undefined) return undefined;
  return { delimiter, headerLine: (filled[0] ?? 0) + 1, textAbove: false };
}

function cellCount(line: string, delimiter: string): number {
  return line.replace(/"[^"]*"/g, "").split(delimiter).length;
}

/** The header of a table whose lines of introduction have as many cells as its rows. */
function lastHeaderAbove(
  lines: readonly string[],
  filled: readonly number[],
  start: number,
  delimiter: string,
): number {
  const rows = filled.filter((index) => index >= start);
  const cellsOf = (index: number) => parseLines(lines[index], delimiter)[0] ?? [];
  for (let k = 0; k < Math.min(rows.length, MOST_LINES); k++) {
    const stampAt = cellsOf(rows[k]).findIndex((cell) => SEEMS_A_STAMP.test(cell));
    if (stampAt < 0) continue;
    for (let above = k - 1; above > 0; above--) {
      // A row of units below the names leaves the cell above the stamps empty.
      const cell = cellsOf(rows[above])[stampAt] ?? "";
      if (cell !== "" && !/^[([]/.test(cell)) return rows[above];
    }
    return start;
  }
  return start;
}
