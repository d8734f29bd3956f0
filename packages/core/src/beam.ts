/** Mean radius of the earth, for the spherical models here. */
export const EARTH_RADIUS_M = 6_371_000;
/** Effective-earth-radius factor of standard refraction, by convention. */
export const STANDARD_RADIUS_FACTOR = 4 / 3;

const RAD_PER_DEG = Math.PI / 180;

/**
 * Radius of the earth on which a refracted ray runs straight: the factor times the true radius.
 *
 * @param factor - effective-earth-radius factor, above 0; 4/3 is standard refraction, 1 is none
 * @throws RangeError if the factor is not finite and above 0
 */
export function effectiveRadiusM(factor = STANDARD_RADIUS_FACTOR, earthRadiusM = EARTH_RADIUS_M): number {
  if (!(factor > 0 && Number.isFinite(factor))) {
    throw new RangeError(`the effective-earth-radius factor must be finite and above 0, got ${factor}`);
  }
  return factor * earthRadiusM;
}

/**
 * Effective-earth-radius factor of a gradient of refractivity: 1 / (1 + a dn/dh).
 *
 * Source: Doviak and Zrnic (1993), Doppler Radar and Weather Observations, section 2.2.3.
 *
 * @param gradientPerKm - change of refractivity N with height, N-units per km; about -39 is standard
 * @throws RangeError at -157 per km and below, where rays are trapped and the model ends
 */
export function effectiveRadiusFactor(gradientPerKm: number, earthRadiusM = EARTH_RADIUS_M): number {
  const curvature = 1 + earthRadiusM * gradientPerKm * 1e-9;
  if (!(curvature > 0)) {
    throw new RangeError(`rays are trapped at a refractivity gradient of ${gradientPerKm} per km`);
  }
  return 1 / curvature;
}

/** Gradient of refractivity, N-units per km, that an effective-earth-radius factor above 0 stands for. */
export function refractivityGradientPerKm(factor: number, earthRadiusM = EARTH_RADIUS_M): number {
  return ((1 / factor - 1) / earthRadiusM) * 1e9;
}

/**
 * Height of the beam's centre above the antenna.
 *
 * Source: Doviak and Zrnic (1993), eq. 2.28b, rearranged so that short ranges lose no digits.
 *
 * @param slantRangeM - along the beam, 0 or more
 * @param elevationDeg - above the horizon at the antenna, -2 to 90
 * @param radiusM - from {@link effectiveRadiusM}
 */
export function beamHeightM(slantRangeM: number, elevationDeg: number, radiusM: number): number {
  const rise = 2 * radiusM * Math.sin(elevationDeg * RAD_PER_DEG);
  const square = slantRangeM * (slantRangeM + rise);
  return square / (Math.sqrt(radiusM * radiusM + square) + radiusM);
}

/**
 * Distance along the ground, at the antenna's level, below the beam's centre.
 *
 * Source: Doviak and Zrnic (1993), eq. 2.28c, written with the arctangent. Parameters as in {@link beamHeightM}.
 */
export function arcDistanceM(slantRangeM: number, elevationDeg: number, radiusM: number): number {
  const elevationRad = elevationDeg * RAD_PER_DEG;
  const along = slantRangeM * Math.cos(elevationRad);
  const up = radiusM + slantRangeM * Math.sin(elevationRad);
  return radiusM * Math.atan2(along, up);
}

/**
 * Where the beam is above a place on the ground: the inverse of {@link arcDistanceM}.
 *
 * Source: law of sines on the effective earth.
 *
 * @param arcM - distance along the ground, 0 or more
 * @returns slant range, and height above the antenna; NaN where the beam never gets there
 */
export function beamAboveArc(
  arcM: number,
  elevationDeg: number,
  radiusM: number,
): { readonly slantRangeM: number; readonly heightM: number } {
  const angleRad = arcM / radiusM;
  const fromZenith = Math.cos(elevationDeg * RAD_PER_DEG + angleRad);
  const slantRangeM = fromZenith > 0 ? (radiusM * Math.sin(angleRad)) / fromZenith : Number.NaN;
  return { slantRangeM, heightM: beamHeightM(slantRangeM, elevationDeg, radiusM) };
}

/** Diameter of the beam between its half-power points (one way), for widths of a few degrees. */
export function beamDiameterM(slantRangeM: number, beamWidthDeg: number): number {
  return slantRangeM * beamWidthDeg * RAD_PER_DEG;
}

/** Where the gates of a ray lie. Shape [gateCount] each, gate centres, nearest first. */
export interface GateGeometry {
  readonly slantRangeM: Float64Array;
  /** Above the antenna. */
  readonly heightM: Float64Array;
  readonly arcM: Float64Array;
}

/**
 * The geometry of all gates of a ray: {@link beamHeightM} and {@link arcDistanceM} at every gate's centre.
 *
 * @param gates - a sweep's header, or its three numbers
 * @param elevationDeg - of the ray, or the sweep's nominal one
 */
export function gateGeometry(
  gates: { readonly firstGateCentreM: number; readonly gateLengthM: number; readonly gateCount: number },
  elevationDeg: number,
  radiusM: number,
): GateGeometry {
  const slantRangeM = new Float64Array(gates.gateCount);
  const heightM = new Float64Array(gates.gateCount);
  const arcM = new Float64Array(gates.gateCount);
  for (let gate = 0; gate < gates.gateCount; gate++) {
    const rangeM = gates.firstGateCentreM + gate * gates.gateLengthM;
    slantRangeM[gate] = rangeM;
    heightM[gate] = beamHeightM(rangeM, elevationDeg, radiusM);
    arcM[gate] = arcDistanceM(rangeM, elevationDeg, radiusM);
  }
  return { slantRangeM, heightM, arcM };
}
