/**
 * Terminal speed of drops in still air at sea level and 20 C: diameter in mm, speed in m/s.
 *
 * Source: Gunn and Kinzer (1949), J. Meteorol. 6, 243-248, Table 2.
 */
const GUNN_KINZER_1949: readonly (readonly [number, number])[] = [
  [0.1, 0.27],
  [0.2, 0.72],
  [0.3, 1.17],
  [0.4, 1.62],
  [0.5, 2.06],
  [0.6, 2.47],
  [0.7, 2.87],
  [0.8, 3.27],
  [0.9, 3.67],
  [1.0, 4.03],
  [1.2, 4.64],
  [1.4, 5.17],
  [1.6, 5.65],
  [1.8, 6.09],
  [2.0, 6.49],
  [2.2, 6.9],
  [2.4, 7.27],
  [2.6, 7.57],
  [2.8, 7.82],
  [3.0, 8.06],
  [3.2, 8.26],
  [3.4, 8.44],
  [3.6, 8.6],
  [3.8, 8.72],
  [4.0, 8.83],
  [4.2, 8.92],
  [4.4, 8.98],
  [4.6, 9.03],
  [4.8, 9.07],
  [5.0, 9.09],
  [5.2, 9.12],
  [5.4, 9.14],
  [5.6, 9.16],
  [5.8, 9.17],
];

/**
 * Terminal speed of a drop by the table of Gunn and Kinzer (1949), straight lines between its entries; below
 * the first towards 0 at no size, above the last (5.8 mm) held, as larger drops hardly fall faster.
 *
 * @param diameterMm - 0 or more
 * @returns m/s at sea level; aloft times {@link fallSpeedFactor}
 */
export function measuredFallSpeedMPerS(diameterMm: number): number {
  let [lowMm, lowSpeed] = [0, 0];
  for (const [highMm, highSpeed] of GUNN_KINZER_1949) {
    if (diameterMm <= highMm) {
      return lowSpeed + ((diameterMm - lowMm) / (highMm - lowMm)) * (highSpeed - lowSpeed);
    }
    [lowMm, lowSpeed] = [highMm, highSpeed];
  }
  return lowSpeed;
}

/** A fall law that integrates in closed form: a D^b, or a - b exp(-c D), D in mm and speeds in m/s. */
export type FallLaw =
  | { readonly kind: "power"; readonly a: number; readonly b: number; readonly source: string }
  | {
      readonly kind: "exponential";
      readonly a: number;
      readonly b: number;
      readonly c: number;
      readonly source: string;
    };

/** v = 3.78 D^0.67; for drops of 0.5 to 5 mm. */
export const ATLAS_ULBRICH_1977: FallLaw = {
  kind: "power",
  a: 3.78,
  b: 0.67,
  source: "Atlas and Ulbrich (1977), J. Appl. Meteorol. 16, 1322-1331",
};

/** v = 9.65 - 10.3 exp(-0.6 D); within 2 % of the measured speeds for 0.5 to 5.8 mm. */
export const ATLAS_SRIVASTAVA_SEKHON_1973: FallLaw = {
  kind: "exponential",
  a: 9.65,
  b: 10.3,
  c: 0.6,
  source: "Atlas, Srivastava and Sekhon (1973), Rev. Geophys. Space Phys. 11, 1-35",
};

/** Terminal speed by a law, m/s; never below 0, where the exponential form would have small drops rise. */
export function fallSpeedMPerS(diameterMm: number, law: FallLaw): number {
  if (law.kind === "power") return law.a * diameterMm ** law.b;
  return Math.max(0, law.a - law.b * Math.exp(-law.c * diameterMm));
}

/** Drops fall faster in thin air: (rho0 / rho)^0.4. Source: Foote and du Toit (1969), J. Appl. Meteorol. 8, 249-253. */
export function fallSpeedFactor(airDensityKgPerM3: number, seaLevelDensityKgPerM3 = 1.2): number {
  return (seaLevelDensityKgPerM3 / airDensityKgPerM3) ** 0.4;
}
