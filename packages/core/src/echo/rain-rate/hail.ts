import { ramp } from "./ramp.ts";

/** Of rain whose drops look round. */
const LEAST_LIMIT_DBZ = 27;

/**
 * Reflectivity that rain of a differential reflectivity does not exceed, dBZ: 27, 19 ZDR + 27, or 60.
 *
 * Source: Aydin, Seliga and Balaji (1986), J. Clim. Appl. Meteorol. 25, 1475-1484; from memory. What echo stands
 * above it, their HDR in dB, speaks for hail: tumbling stones look round, big raindrops do not.
 */
export function rainLimitDbz(zdrDb: number): number {
  return Math.min(60, LEAST_LIMIT_DBZ + 19 * Math.max(0, zdrDb));
}

/**
 * HDR over which hail becomes certain. Above 0 it is hail in the paper; the range up to 8 dB takes the noise of
 * ZDR, 0.2 dB being 4 dB of HDR. Without RHOHV as a second witness much more is asked for. House rule.
 */
const HDR_DB = { from: 0, to: 8 } as const;
const HDR_ALONE_DB = { from: 12, to: 20 } as const;
/** Weaker echo is no hail to speak of, whatever its ZDR: common practice, where 45 dBZ is a usual threshold. */
const HAIL_DBZ = { none: 37, full: 43 } as const;
/** Rain has 0.98 and more, melting hail 0.95 and less: common practice at S and C band. */
const CORRELATION = { rain: 0.98, hail: 0.95 } as const;

/** False where no ZDR could make the echo look like hail, so that none need be asked for. */
export function mayBeHail(reflectivityDbz: number, rhohv: number): boolean {
  return reflectivityDbz > HAIL_DBZ.none && !(rhohv >= CORRELATION.rain);
}

/**
 * How far an echo looks like hail, 0 to 1; half is called hail. No steps, so that no rate made with it has any.
 *
 * @param zdrDb - averaged over neighbours; NaN gives 0, since Z alone cannot tell
 * @param rhohv - NaN where it is not measured
 */
export function hailShare(reflectivityDbz: number, zdrDb: number, rhohv: number): number {
  const hdr = reflectivityDbz - rainLimitDbz(zdrDb);
  if (!(hdr > 0)) return 0;
  const strength = ramp(reflectivityDbz, HAIL_DBZ.none, HAIL_DBZ.full);
  if (Number.isNaN(rhohv)) return strength * ramp(hdr, HDR_ALONE_DB.from, HDR_ALONE_DB.to);
  return strength * ramp(hdr, HDR_DB.from, HDR_DB.to) * (1 - ramp(rhohv, CORRELATION.hail, CORRELATION.rain));
}
