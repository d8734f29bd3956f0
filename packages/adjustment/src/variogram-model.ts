/** Shapes of a variogram that reach a sill. */
export const VARIOGRAM_SHAPES = ["spherical", "exponential", "gaussian"] as const;
export type VariogramShape = (typeof VARIOGRAM_SHAPES)[number];

/** Longer correlation along one direction than across it. */
export interface Anisotropy {
  /** Direction of the longer axis, clockwise from north. */
  readonly azimuthDeg: number;
  /** Range across it over range along it, above 0 and at most 1. */
  readonly ratio: number;
}

/**
 * A variogram model; variances in the square of the variable's unit.
 *
 * The range is the parameter a of the formulas, not the distance at which 95 % of the sill is reached: that
 * is a for the spherical, 3.00 a for the exponential and 1.73 a for the Gaussian shape.
 */
export interface VariogramModel {
  readonly shape: VariogramShape;
  readonly nugget: number;
  /** Without the nugget. */
  readonly partialSill: number;
  /** Along the longer axis where there is one. */
  readonly rangeKm: number;
  readonly anisotropy?: Anisotropy;
}

/**
 * Correlation of a shape at a distance in units of its range: 1 - gamma / partial sill. Journel & Huijbregts
 * (1978), Mining Geostatistics.
 */
export function correlation(shape: VariogramShape, ratio: number): number {
  switch (shape) {
    case "spherical":
      return ratio >= 1 ? 0 : 1 - ratio * (1.5 - 0.5 * ratio * ratio);
    case "exponential":
      return Math.exp(-ratio);
    case "gaussian":
      return Math.exp(-ratio * ratio);
  }
}

/** Semivariance at a distance; 0 at distance 0 even with a nugget. */
export function semivariance(model: VariogramModel, distanceKm: number): number {
  if (distanceKm === 0) return 0;
  return model.nugget + model.partialSill * (1 - correlation(model.shape, distanceKm / model.rangeKm));
}

/** Distance in the model's own measure between points dx east and dy north of each other, km. */
export function modelDistanceKm({ anisotropy }: VariogramModel, dxKm: number, dyKm: number): number {
  if (anisotropy === undefined) return Math.sqrt(dxKm * dxKm + dyKm * dyKm);
  const azimuth = (anisotropy.azimuthDeg * Math.PI) / 180;
  const along = dxKm * Math.sin(azimuth) + dyKm * Math.cos(azimuth);
  const across = dxKm * Math.cos(azimuth) - dyKm * Math.sin(azimuth);
  return Math.hypot(along, across / anisotropy.ratio);
}
