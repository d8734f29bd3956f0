/**
 * The cells that pass a test, as an SVG path in cell units (x east, y south, from the north-western corner).
 *
 * Runs of a row are joined with equal runs of the rows below, so that a quiet field stays short.
 *
 * @param passes - told the flat index row * nx + column
 */
export function cellsPath(nx: number, ny: number, passes: (index: number) => boolean): string {
  const pieces: string[] = [];
  /** Runs that may go on in the next row: key is start and end, value is the row they began in. */
  let open = new Map<number, number>();
  for (let row = 0; row <= ny; row += 1) {
    const next = new Map<number, number>();
    for (const run of row < ny ? runsOfRow(nx, row, passes) : []) next.set(run, open.get(run) ?? row);
    for (const [run, since] of open) {
      if (next.has(run)) continue;
      const start = Math.floor(run / (nx + 1));
      const length = (run % (nx + 1)) - start;
      pieces.push(`M${start} ${since}h${length}v${row - since}h-${length}z`);
    }
    open = next;
  }
  return pieces.join("");
}

/** Runs of passing cells of one row, each as start * (nx + 1) + end. */
function runsOfRow(nx: number, row: number, passes: (index: number) => boolean): number[] {
  const runs: number[] = [];
  let start = -1;
  for (let column = 0; column <= nx; column += 1) {
    const inside = column < nx && passes(row * nx + column);
    if (inside && start < 0) start = column;
    if (!inside && start >= 0) {
      runs.push(start * (nx + 1) + column);
      start = -1;
    }
  }
  return runs;
}
