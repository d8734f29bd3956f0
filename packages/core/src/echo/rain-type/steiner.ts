import { decibels } from "../../units.ts";

/** What a point of a grid, or a gate, is; the numbers that {@link rainTypes} gives. */
export const RAIN_TYPE = { none: 0, convective: 1, stratiform: 2 } as const;

/** How far around a convective centre echo is convective too, by the background there. */
export const CONVECTIVE_RADIUS_RULES = ["small", "medium", "large"] as const;
export type ConvectiveRadiusRule = (typeof CONVECTIVE_RADIUS_RULES)[number];

export interface RainTypeSettings {
  /** Echo of this or more is convective whatever surrounds it: 40 dBZ in the paper, for the tropics. */
  readonly intensityDbz: number;
  readonly backgroundRadiusM: number;
  readonly convectiveRadius: ConvectiveRadiusRule;
  /**
   * True where points that were observed and hold no echo count with Z = 0 in the background. A lone shower is
   * then convective for standing alone; otherwise for its strength only. Points not observed never count.
   */
  readonly noEchoInBackground: boolean;
}

/**
 * Settings of the paper but for the intensity: 40 dBZ is for the tropics, 42 to 45 dBZ is common practice
 * elsewhere. That the background is a mean over echo alone is from memory.
 */
export const RAIN_TYPE_DEFAULTS: RainTypeSettings = {
  intensityDbz: 42,
  backgroundRadiusM: 11_000,
  convectiveRadius: "medium",
  noEchoInBackground: false,
};

/** Where the grid's points lie: cell (row, column) has the flat index row * nx + column. */
export interface TypeGrid {
  readonly nx: number;
  readonly ny: number;
  readonly cellM: number;
}

/** Lowest background of each radius from 2 km up, dBZ, by rule; from memory. */
const RADIUS_EDGES_DBZ: Readonly<Record<ConvectiveRadiusRule, readonly number[]>> = {
  small: [30, 35, 40, 45],
  medium: [25, 30, 35, 40],
  large: [20, 25, 30, 35],
};

/** A mean of equal numbers differs from them in the last places: equal to what is asked for is enough. */
const ROUNDING_DB = 1e-6;

/** dB by which a convective centre must stand out from its background: the paper's peakedness, never below 0. */
export function convectiveExcessDb(backgroundDbz: number): number {
  if (backgroundDbz < 0) return 10;
  return Math.max(0, 10 - backgroundDbz ** 2 / 180);
}

/** Distance from a convective centre within which all echo is convective: 1 to 5 km. */
export function convectiveRadiusM(backgroundDbz: number, rule: ConvectiveRadiusRule): number {
  return 1000 * (1 + RADIUS_EDGES_DBZ[rule].filter((edge) => backgroundDbz >= edge).length);
}

/** Half widths in cells of the rows of a disc, from its middle row outward: points at the very radius belong to it. */
export function discHalfWidths(radiusM: number, cellM: number): Int32Array {
  // A point on the edge must not be lost to the last place of a root or a quotient.
  const cells = radiusM / cellM + 1e-9;
  const half = new Int32Array(Math.floor(cells) + 1);
  for (let row = 0; row < half.length; row++) half[row] = Math.floor(Math.sqrt(cells * cells - row * row));
  return half;
}

/**
 * Mean of linear Z within a radius of each echo, in dBZ; beyond the edge of the grid there are no points.
 *
 * @param dbz - shape [ny * nx]; -Infinity is no echo, NaN not observed
 * @returns shape [ny * nx]; NaN at points without echo
 */
export function backgroundDbz(
  dbz: Float32Array | Float64Array,
  { nx, ny, cellM }: TypeGrid,
  {
    backgroundRadiusM,
    noEchoInBackground,
  }: Pick<RainTypeSettings, "backgroundRadiusM" | "noEchoInBackground">,
): Float64Array {
  // Sums along each row up to a column make every row of a disc one difference.
  const width = nx + 1;
  const sums = new Float64Array(ny * width);
  const counts = new Int32Array(ny * width);
  const perDb = Math.LN10 / 10;
  for (let row = 0; row < ny; row++) {
    for (let column = 0; column < nx; column++) {
      const value = dbz[row * nx + column];
      const counted = noEchoInBackground
        ? value >= Number.NEGATIVE_INFINITY
        : value > Number.NEGATIVE_INFINITY;
      const at = row * width + column;
      sums[at + 1] = sums[at] + (counted ? Math.exp(value * perDb) : 0);
      counts[at + 1] = counts[at] + (counted ? 1 : 0);
    }
  }
  const half = discHalfWidths(backgroundRadiusM, cellM);
  const reach = half.length - 1;
  const mean = new Float64Array(ny * nx).fill(Number.NaN);
  for (let row = 0; row < ny; row++) {
    const firstRow = Math.max(0, row - reach);
    const lastRow = Math.min(ny - 1, row + reach);
    for (let column = 0; column < nx; column++) {
      if (!(dbz[row * nx + column] > Number.NEGATIVE_INFINITY)) continue;
      let sum = 0;
      let count = 0;
      for (let other = firstRow; other <= lastRow; other++) {
        const extent = half[Math.abs(other - row)];
        const from = other * width + Math.max(0, column - extent);
        const to = other * width + Math.min(nx, column + extent + 1);
        sum += sums[to] - sums[from];
        count += counts[to] - counts[from];
      }
      mean[row * nx + column] = decibels(sum / count);
    }
  }
  return mean;
}

/**
 * Convective and stratiform echo on a horizontal grid.
 *
 * An echo is a convective centre where it is intense, or stands out from its background by
 * {@link convectiveExcessDb}; all echo within {@link convectiveRadiusM} of a centre is convective, the rest
 * stratiform. Source: Steiner, Houze and Yuter (1995), J. Appl. Meteorol. 34, 1978-2007: points of 2 km.
 *
 * @param dbz - shape [ny * nx]; -Infinity is no echo, NaN not observed
 * @returns shape [ny * nx], numbers of {@link RAIN_TYPE}; 0 where there is no echo
 * @remarks Holds for grids of 1 to 4 km below the melting layer: in it stratiform echo looks convective.
 */
export function rainTypes(
  dbz: Float32Array | Float64Array,
  grid: TypeGrid,
  settings: RainTypeSettings = RAIN_TYPE_DEFAULTS,
): Uint8Array {
  const { nx, ny, cellM } = grid;
  const background = backgroundDbz(dbz, grid, settings);
  const discs = [1, 2, 3, 4, 5].map((km) => discHalfWidths(1000 * km, cellM));
  const types = new Uint8Array(ny * nx);
  for (let cell = 0; cell < types.length; cell++) {
    if (dbz[cell] > Number.NEGATIVE_INFINITY) types[cell] = RAIN_TYPE.stratiform;
  }
  for (let row = 0; row < ny; row++) {
    for (let column = 0; column < nx; column++) {
      const value = dbz[row * nx + column];
      if (!(value > Number.NEGATIVE_INFINITY)) continue;
      const around = background[row * nx + column];
      const intense = value >= settings.intensityDbz;
      if (!intense && value - around < convectiveExcessDb(around) - ROUNDING_DB) continue;
      const half = discs[convectiveRadiusM(around, settings.convectiveRadius) / 1000 - 1];
      const reach = half.length - 1;
      for (let other = Math.max(0, row - reach); other <= Math.min(ny - 1, row + reach); other++) {
        const extent = half[Math.abs(other - row)];
        const to = other * nx + Math.min(nx - 1, column + extent);
        for (let at = other * nx + Math.max(0, column - extent); at <= to; at++) {
          if (types[at] !== RAIN_TYPE.none) types[at] = RAIN_TYPE.convective;
        }
      }
    }
  }
  return types;
}
