import type { PolarEcho } from "../polar-echo.ts";
import { rateOfKdp } from "./estimators.ts";
import { hailShare, mayBeHail } from "./hail.ts";
import { isLiquid, type MomentReader } from "./moment-reader.ts";
import { ramp } from "./ramp.ts";
import { type RateTables, rateOfZ } from "./rate-tables.ts";

/**
 * Echo in which the two rates are compared: strong enough for KDP to be more than noise, too weak for hail.
 * House rule about the customary 38 dBZ of R(KDP) and the 49 dBZ of the lowest hail cap in use.
 */
const COMPARED_DBZ = { from: 34, full: 37, fading: 47, to: 50 } as const;
const RAIN_CORRELATION = { from: 0.96, full: 0.98 } as const;

/** Rain that the relation is believed for before KDP has said anything: 10 mm/h over 25 km2. House rule. */
const PRIOR_RAIN_KM2_MM_PER_HOUR = 250;

/**
 * The ratio that is put down to the shape of drops, and the one that is taken for their number.
 *
 * The assumed shape alone moves R(KDP) by 5 to 40 % against Rayleigh-Gans scattering, and one relation is uncertain
 * by a factor of 1.5 to 2 on one scan: below 1.4 either way nothing is changed, above 1.8 all is. House rule.
 */
const RATIO = { ignored: 1.4, believed: 1.8 } as const;

/**
 * Factor on every rate from Z that makes the sweep's rain agree with its KDP, where both disagree by more than
 * the shape of drops explains: many small drops, as in warm rain, echo less for the same rain.
 *
 * With a fixed exponent, Z = a R^b follows the number of drops through a. Source: Bringi, Tang and Chandrasekar
 * (2004), J. Atmos. Oceanic Technol. 21, 612-623, who tune a by polarimetric moments; the sums over an area, in
 * which the noise of KDP has no mean, are those of Ryzhkov and Zrnic (1998), J. Appl. Meteorol. 37, 1080-1090.
 * The papers are from memory, and the thresholds are ours.
 *
 * @param rainType - numbers of `RAIN_TYPE`, or undefined for one relation everywhere
 * @returns 1 where there is no KDP, no law for the band, or not enough rain
 */
export function dropNumberFactor(
  echo: PolarEcho,
  rainType: Uint8Array | undefined,
  tables: RateTables,
  reader: MomentReader,
): number {
  const { kdpDegPerKm, dbz, header } = echo;
  const { laws, byType } = tables;
  if (kdpDegPerKm === undefined || laws === undefined) return 1;
  const { gateCount, rayCount, firstGateCentreM, gateLengthM } = header;
  let sumOfZ = PRIOR_RAIN_KM2_MM_PER_HOUR;
  let sumOfKdp = PRIOR_RAIN_KM2_MM_PER_HOUR;
  const km2PerMetre = ((2 * Math.PI) / rayCount) * gateLengthM * 1e-6;
  for (let gate = 0; gate < dbz.length; gate++) {
    const value = dbz[gate];
    if (!(value > COMPARED_DBZ.from && value < COMPARED_DBZ.to)) continue;
    const kdp = kdpDegPerKm[gate];
    if (Number.isNaN(kdp) || !isLiquid(echo.marks[gate])) continue;
    const rhohv = reader.rhohv(gate);
    let weight =
      ramp(value, COMPARED_DBZ.from, COMPARED_DBZ.full) *
      (1 - ramp(value, COMPARED_DBZ.fading, COMPARED_DBZ.to)) *
      (Number.isNaN(rhohv) ? 1 : ramp(rhohv, RAIN_CORRELATION.from, RAIN_CORRELATION.full));
    if (mayBeHail(value, rhohv)) weight *= 1 - hailShare(value, reader.zdrDb(gate), rhohv);
    if (weight === 0) continue;
    const areaKm2 = km2PerMetre * (firstGateCentreM + (gate % gateCount) * gateLengthM);
    sumOfZ += weight * areaKm2 * rateOfZ(value, byType[rainType?.[gate] ?? 0]);
    sumOfKdp += weight * areaKm2 * rateOfKdp(kdp, laws.kdp);
  }
  // Noise may outweigh what little rain there is.
  const logRatio = Math.log(Math.max(sumOfKdp, 1) / sumOfZ);
  return Math.exp(logRatio * ramp(Math.abs(logRatio), Math.log(RATIO.ignored), Math.log(RATIO.believed)));
}
