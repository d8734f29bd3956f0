import type { Grid, Ring } from "@rainreckon/core";

type Point = readonly [number, number];

/** The cells an area covers and the share of each cell that lies inside it. */
export interface CellFractions {
  /** Shape [m]: flat cell indices, ascending. */
  readonly cells: Int32Array;
  /** Shape [m]: share of the cell's area inside, 0 exclusive to 1. */
  readonly fraction: Float64Array;
  /** Area of the polygons in square metres, the part outside the grid included. */
  readonly areaM2: number;
  /** Share of that area which the grid covers. */
  readonly insideGrid: number;
}

/**
 * Exact shares of the grid cells that polygons cover, by clipping each ring to each cell.
 *
 * Holes and concave parts count as they are: a clipped concave ring may run along the cell's edge, which
 * adds no area (Sutherland and Hodgman 1974, Communications of the ACM 17, 32-42).
 *
 * @param polygons - in the grid's own coordinates, metres; outer ring first, then holes, any winding
 */
export function cellFractions(grid: Grid, polygons: readonly (readonly Ring[])[]): CellFractions {
  const { nx, ny, westM, northM, cellM } = grid;
  const inside = new Map<number, number>();
  let areaM2 = 0;
  for (const polygon of polygons) {
    for (const [ringIndex, ring] of polygon.entries()) {
      const sign = ringIndex === 0 ? 1 : -1;
      areaM2 += sign * Math.abs(signedArea(ring));
      const [minX, maxX, minY, maxY] = bounds(ring);
      const firstRow = Math.max(0, Math.floor((northM - maxY) / cellM));
      const lastRow = Math.min(ny - 1, Math.floor((northM - minY) / cellM));
      const firstColumn = Math.max(0, Math.floor((minX - westM) / cellM));
      const lastColumn = Math.min(nx - 1, Math.floor((maxX - westM) / cellM));
      for (let row = firstRow; row <= lastRow; row++) {
        const top = northM - row * cellM;
        const strip = clip(clip(ring, 1, top, -1), 1, top - cellM, 1);
        if (strip.length < 3) continue;
        for (let column = firstColumn; column <= lastColumn; column++) {
          const left = westM + column * cellM;
          const piece = clip(clip(strip, 0, left, 1), 0, left + cellM, -1);
          if (piece.length < 3) continue;
          const share = (sign * Math.abs(signedArea(piece))) / (cellM * cellM);
          if (share === 0) continue;
          const index = row * nx + column;
          inside.set(index, (inside.get(index) ?? 0) + share);
        }
      }
    }
  }
  const sorted = [...inside].filter(([, share]) => share > 1e-12).sort((a, b) => a[0] - b[0]);
  const fraction = Float64Array.from(sorted, ([, share]) => Math.min(1, share));
  const coveredM2 = fraction.reduce((sum, share) => sum + share, 0) * cellM * cellM;
  return {
    cells: Int32Array.from(sorted, ([index]) => index),
    fraction,
    areaM2,
    insideGrid: areaM2 > 0 ? Math.min(1, coveredM2 / areaM2) : 0,
  };
}

/** Area by the shoelace formula, positive counter-clockwise. Taken from the first point, to keep digits. */
function signedArea(ring: readonly Point[]): number {
  const [x0, y0] = ring[0];
  let twice = 0;
  for (let i = 1; i + 1 < ring.length; i++) {
    twice += (ring[i][0] - x0) * (ring[i + 1][1] - y0) - (ring[i + 1][0] - x0) * (ring[i][1] - y0);
  }
  return twice / 2;
}

function bounds(ring: readonly Point[]): [minX: number, maxX: number, minY: number, maxY: number] {
  let [minX, maxX, minY, maxY] = [Infinity, -Infinity, Infinity, -Infinity];
  for (const [x, y] of ring) {
    minX = Math.min(minX, x);
    maxX = Math.max(maxX, x);
    minY = Math.min(minY, y);
    maxY = Math.max(maxY, y);
  }
  return [minX, maxX, minY, maxY];
}

/** The part of a ring on one side of a line along an axis: coordinate ≥ border for `side` 1, ≤ for -1. */
function clip(ring: readonly Point[], axis: 0 | 1, border: number, side: 1 | -1): Point[] {
  const kept: Point[] = [];
  for (let i = 0; i < ring.length; i++) {
    const a = ring[i];
    const b = ring[(i + 1) % ring.length];
    const aIn = side * (a[axis] - border) >= 0;
    const bIn = side * (b[axis] - border) >= 0;
    if (aIn) kept.push(a);
    if (aIn !== bIn) {
      const u = (border - a[axis]) / (b[axis] - a[axis]);
      const other = a[1 - axis] + u * (b[1 - axis] - a[1 - axis]);
      kept.push(axis === 0 ? [border, other] : [other, border]);
    }
  }
  return kept;
}

/** What an area got in an interval. */
export interface ArealDepth {
  /**
   * Depth over the whole area from the part that was observed: what was not seen adds nothing, so this is a
   * lower bound where observedFraction is below 1. NaN where nothing was observed.
   */
  readonly depthMm: number;
  /** Share of area and time that was observed, 0 to 1. */
  readonly observedFraction: number;
  /** Deepest cell that the area touches; NaN where nothing was observed. */
  readonly maxCellMm: number;
  /** Part of depthMm that came from gates at the cap. */
  readonly cappedMm: number;
}

/** The arrays that an areal depth is made from, whatever holds them. */
export interface ArealSource {
  readonly depthMm: ArrayLike<number>;
  readonly observedMs: ArrayLike<number>;
  readonly cappedMm: ArrayLike<number>;
}

/**
 * Area-weighted depth of one step or interval.
 *
 * The part of an area outside the grid was not observed, and counts so.
 *
 * @param lengthMs - length of the step
 */
export function arealDepth(area: CellFractions, part: ArealSource, lengthMs: number): ArealDepth {
  let depth = 0;
  let observed = 0;
  let capped = 0;
  let whole = 0;
  let maxCellMm = Number.NaN;
  for (let k = 0; k < area.cells.length; k++) {
    const cell = area.cells[k];
    const share = area.fraction[k];
    whole += share;
    const depthMm = part.depthMm[cell];
    if (Number.isNaN(depthMm)) continue;
    depth += share * depthMm;
    observed += share * part.observedMs[cell];
    capped += share * part.cappedMm[cell];
    if (!(depthMm <= maxCellMm)) maxCellMm = depthMm;
  }
  if (!(observed > 0)) {
    return { depthMm: Number.NaN, observedFraction: 0, maxCellMm: Number.NaN, cappedMm: 0 };
  }
  const scale = area.insideGrid / whole;
  return {
    depthMm: depth * scale,
    observedFraction: Math.min(1, (observed * scale) / lengthMs),
    maxCellMm,
    cappedMm: capped * scale,
  };
}
