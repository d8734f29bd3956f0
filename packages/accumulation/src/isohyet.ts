import type { Field } from "@rainreckon/core";
import { contours } from "d3-contour";

/** Lines of equal depth, in the grid's own coordinates. */
export interface Isohyet {
  readonly depthMm: number;
  /** Open or closed lines of [x, y] positions, metres. */
  readonly lines: readonly (readonly (readonly [number, number])[])[];
}

/**
 * Levels that a reader expects for a largest depth: 1, 2, 5 times powers of ten, five to ten of them.
 */
export function isohyetLevels(maxMm: number): number[] {
  if (!(maxMm > 0)) return [];
  const rough = maxMm / 8;
  const power = 10 ** Math.floor(Math.log10(rough));
  const step = [1, 2, 5, 10].map((m) => m * power).find((candidate) => maxMm / candidate <= 8) ?? 10 * power;
  const levels: number[] = [];
  for (let k = 1; k * step < maxMm; k++) levels.push(Number((k * step).toPrecision(12)));
  return levels;
}

/**
 * Isohyets of a depth field, by linear interpolation between cell centres.
 *
 * A line is drawn only between cells that were observed: where a line would run along the edge of what
 * was not observed, or of the grid, it is cut, because nobody measured a depth falling there.
 *
 * @param depth - a field of depths; NaN is not observed
 */
export function isohyets(depth: Field<"depthMm">, levels: readonly number[]): Isohyet[] {
  const { grid, values } = depth;
  const { nx, ny } = grid;
  const known = Float64Array.from(values, (value) => (Number.isNaN(value) ? -1 : value));
  const trace = contours().size([nx, ny]).smooth(true);
  // Positions of the tracer count cells from the outer corner, so that cell centres lie at halves.
  const observedAt = (x: number, y: number): boolean => {
    const columns = [Math.floor(x - 0.5 + 1e-9), Math.ceil(x - 0.5 - 1e-9)];
    const rows = [Math.floor(y - 0.5 + 1e-9), Math.ceil(y - 0.5 - 1e-9)];
    return columns.every((c) => c >= 0 && c < nx) && rows.every((r) => r >= 0 && r < ny)
      ? columns.every((c) => rows.every((r) => !Number.isNaN(values[r * nx + c])))
      : false;
  };
  return levels.map((depthMm) => {
    const lines: [number, number][][] = [];
    for (const polygon of trace.contour(known as unknown as number[], depthMm).coordinates) {
      for (const ring of polygon) {
        let line: [number, number][] = [];
        for (const [x, y] of ring) {
          if (observedAt(x, y)) {
            line.push([grid.westM + x * grid.cellM, grid.northM - y * grid.cellM]);
          } else {
            if (line.length > 1) lines.push(line);
            line = [];
          }
        }
        if (line.length > 1) lines.push(line);
      }
    }
    return { depthMm, lines };
  });
}
