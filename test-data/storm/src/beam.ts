/** Radius of a 4/3 earth, km (mean radius 6371 km). Doviak and Zrnic (1993), Doppler Radar, section 2.2. */
const EFFECTIVE_RADIUS_KM = (4 / 3) * 6371;
const DEG = Math.PI / 180;

/** Height of the beam's centre above the antenna, and its distance along the ground, both km. */
export function beamPosition(rangeKm: number, elevationDeg: number): { heightKm: number; arcKm: number } {
  const across = rangeKm * Math.cos(elevationDeg * DEG);
  const up = EFFECTIVE_RADIUS_KM + rangeKm * Math.sin(elevationDeg * DEG);
  return {
    heightKm: Math.hypot(across, up) - EFFECTIVE_RADIUS_KM,
    arcKm: EFFECTIVE_RADIUS_KM * Math.atan2(across, up),
  };
}

/**
 * Share of a uniform round beam behind an edge.
 * Source: Bech et al. (2003), J. Atmos. Oceanic Technol. 20, 845-855.
 *
 * @param edgeOverRadius - height of the edge above the beam's centre, over the half-power radius
 * @returns 0 to 1
 */
export function blockedShare(edgeOverRadius: number): number {
  if (edgeOverRadius <= -1) return 0;
  if (edgeOverRadius >= 1) return 1;
  const y = edgeOverRadius;
  return (y * Math.sqrt(1 - y * y) + Math.asin(y) + Math.PI / 2) / Math.PI;
}

/**
 * How the echo of rain changes with height: dB relative to the rain below, straight between knees.
 * Above the last knee it falls by `slopeAboveDbPerKm`.
 */
export interface EchoProfile {
  readonly kneesKm: readonly number[];
  readonly kneesDb: readonly number[];
  readonly slopeAboveDbPerKm: number;
}

/** dB relative to the rain below, at a height above sea level. */
export function profileDb(profile: EchoProfile, heightKm: number): number {
  const { kneesKm, kneesDb, slopeAboveDbPerKm } = profile;
  const last = kneesKm.length - 1;
  if (heightKm >= kneesKm[last]!) return kneesDb[last]! + slopeAboveDbPerKm * (heightKm - kneesKm[last]!);
  let knee = 0;
  while (knee <= last && heightKm >= kneesKm[knee]!) knee++;
  if (knee === 0) return kneesDb[0]!;
  const share = (heightKm - kneesKm[knee - 1]!) / (kneesKm[knee]! - kneesKm[knee - 1]!);
  return kneesDb[knee - 1]! + share * (kneesDb[knee]! - kneesDb[knee - 1]!);
}

/**
 * Mean over a beam of any quantity of height, with the two-way Gaussian weight exp(-8 ln2 (dh/(r theta))^2).
 *
 * @param beamSizeKm - range times half-power beam width in radians
 * @param lowestKm - what lies below is ground and gets no weight; -Infinity for none
 */
export function beamMean(
  quantity: (heightKm: number) => number,
  centreKm: number,
  beamSizeKm: number,
  lowestKm: number,
): number {
  const steps = 200;
  let sum = 0;
  let weights = 0;
  for (let step = -steps; step <= steps; step++) {
    const offset = (step / steps) * 1.5;
    const heightKm = centreKm + offset * beamSizeKm;
    if (heightKm < lowestKm) continue;
    const weight = Math.exp(-8 * Math.LN2 * offset * offset);
    sum += weight * quantity(heightKm);
    weights += weight;
  }
  return weights === 0 ? 0 : sum / weights;
}
