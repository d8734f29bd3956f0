/** A power law drawn into a plot of characters. */
export interface PlotLine {
  readonly letter: string;
  readonly a: number;
  readonly b: number;
}

const COLUMNS = 66;
const ROWS = 20;
/** Few, several, many pairs in one character. */
const DENSITY = [".", ":", "#"];
const RATE_TICKS = [0.01, 0.1, 1, 10, 100, 1000];

/**
 * Reflectivity against the logarithm of rain rate in 80 columns: pairs as . : # by how many fall together, power laws
 * as the straight lines that they are, the last one on top.
 *
 * @param dbz - pairs without a place on the axes (below detection, or dry) are left out
 * @returns lines of text; empty where no pair has a place
 */
export function textPlot(
  dbz: ArrayLike<number>,
  rateMmPerHour: ArrayLike<number>,
  lines: readonly PlotLine[],
): string[] {
  const points = Array.from(rateMmPerHour, (rate, k) => ({
    x: Math.log10(rate),
    y: dbz[k] as number,
  })).filter(({ x, y }) => Number.isFinite(x) && Number.isFinite(y));
  if (points.length === 0) return [];
  const [left, right] = ends(points.map(({ x }) => x));
  const [low, high] = ends(points.map(({ y }) => y));
  const counts = Array.from({ length: ROWS }, () => new Uint32Array(COLUMNS));
  const column = (x: number) => Math.round(((x - left) / (right - left)) * (COLUMNS - 1));
  const row = (y: number) => Math.round(((high - y) / (high - low)) * (ROWS - 1));
  for (const { x, y } of points) (counts[row(y)] as Uint32Array)[column(x)]! += 1;
  const cells = counts.map((ofRow) => Array.from(ofRow, densityOf));
  for (const { letter, a, b } of lines) {
    for (let c = 0; c < COLUMNS; c++) {
      const x = left + (c / (COLUMNS - 1)) * (right - left);
      const r = row(10 * (Math.log10(a) + b * x));
      if (r >= 0 && r < ROWS) (cells[r] as string[])[c] = letter;
    }
  }
  const step = (high - low) / (ROWS - 1);
  const body = cells.map((ofRow, r) => {
    const label = r % 4 === 0 || r === ROWS - 1 ? (high - r * step).toFixed(1) : "";
    return `${label.padStart(6)} |${ofRow.join("").trimEnd()}`;
  });
  const axis = Array.from({ length: COLUMNS }, () => "-");
  const names = Array.from({ length: COLUMNS + 6 }, () => " ");
  for (const rate of RATE_TICKS) {
    const c = column(Math.log10(rate));
    if (c < 0 || c >= COLUMNS) continue;
    axis[c] = "+";
    const name = String(rate);
    for (const [k, letter] of [...name].entries()) names[c + k] = letter;
  }
  return [
    "   dBZ",
    ...body,
    `       +${axis.join("")}`,
    `        ${names.join("").trimEnd()}`,
    `${"rain rate, mm/h".padStart(74)}`,
  ];
}

/** Both ends of an axis, apart even where all values are one. */
function ends(values: readonly number[]): [number, number] {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const value of values) {
    low = Math.min(low, value);
    high = Math.max(high, value);
  }
  return high > low ? [low, high] : [low - 0.5, high + 0.5];
}

function densityOf(count: number): string {
  if (count === 0) return " ";
  return DENSITY[count < 3 ? 0 : count < 8 ? 1 : 2] as string;
}
