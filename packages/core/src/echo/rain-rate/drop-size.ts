import { midEpochMs } from "../../model/radar.ts";
import { LEAST_BLOCKS, TIME_BLOCKS, timeBlocks } from "../calibration/robust-line.ts";
import type { PolarEcho } from "../polar-echo.ts";
import { type BandLaws, bandLaws, rateOfZZdr } from "./estimators.ts";
import { isLiquid, MomentReader } from "./moment-reader.ts";
import { ramp } from "./ramp.ts";
import { type ReadyRelation, rateOfZ } from "./ready-relation.ts";

/** Echo in which R(Z) and R(Z, ZDR) are compared: ZDR is more than noise, and there is no hail. House rule. */
const COMPARED_DBZ = { from: 28, full: 34, fading: 42, to: 48 } as const;
/** ZDR from which R(Z, ZDR) is used: 0.5 dB in Cifelli et al. (2011), J. Atmos. Oceanic Technol. 28, 352-364; from memory. */
export const Z_ZDR_FROM_ZDR_DB = { from: 0.35, full: 0.65 } as const;
/** RHOHV of rain without a trace of hail, which lowers ZDR. House rule. */
export const Z_ZDR_CORRELATION = { from: 0.97, full: 0.985 } as const;

const CLASS_DB = 0.5;
const CLASSES = (COMPARED_DBZ.to - COMPARED_DBZ.from) / CLASS_DB;
const ZDR_CLASS_DB = 0.1;
const LOWEST_ZDR_DB = -2;
const ZDR_CLASSES = 80;

/**
 * Standard deviation of ln R from storm to storm at the same Z, for want of one spectrum of drops. For single days 0.3 to
 * 0.4 is published (Lee and Zawadzki 2005, J. Appl. Meteorol. 44, 241-255; from memory).
 */
const STORM_SPREAD = 0.35;
/** What R(Z, ZDR) itself may be wrong by in the mean of a storm: published laws differ by as much. House rule. */
const LAW_ERROR = 0.15;
/** Ratios, either way, that no rain has: ZDR must be broken. As for the number of drops; house rule. */
const RATIO = { doubted: 3, refused: 4 } as const;
/** Rain that must have been compared, mm/h km2 summed over the sweeps: ten rounds of a shower of 10 mm/h over 20 km2. */
const LEAST_RAIN = 2000;

/** How much rain a run's ZDR tells beside its Z, for any relation. */
export interface LearnedDropSize {
  /** Sum of R(Z, ZDR) over area, mm/h km2; shape [blocks of time]. */
  readonly rainByZZdr: Float64Array;
  /** Area by reflectivity, km2; shape [blocks of time][classes of 0.5 dB from 28 dBZ]. */
  readonly areaKm2: Float64Array;
}

/**
 * Learns over a run what its drops make of R(Z): R(Z, ZDR) of moderate rain beside R(Z), both summed over area.
 *
 * Storms differ in the size of their drops by more than parts of one storm do. ZDR tells it where rain is moderate; what
 * is learned there holds for light rain, where ZDR is noise, and for radars without a law for ZDR that see the same rain.
 * Source of the thought: Bringi, Tang and Chandrasekar (2004), J. Atmos. Oceanic Technol. 21, 612-623, who tune the
 * coefficient of Z = a R^b by polarimetric moments; from memory.
 */
export class DropSizeLearner {
  /** Shape [classes of dBZ][classes of ZDR], km2, by mid-time of the sweep. */
  readonly #areas = new Map<number, Float64Array>();
  #laws: BandLaws | undefined;

  /** Adds a corrected sweep; one without ZDR or RHOHV, or of a band whose ZDR has no say, adds nothing. */
  add(echo: PolarEcho): void {
    const { header, dbz, marks, zdrDb, rhohv } = echo;
    const laws = header.wavelengthM === undefined ? undefined : bandLaws(header.wavelengthM);
    if (laws === undefined || laws.usualZdrShare === 0 || zdrDb === undefined || rhohv === undefined) return;
    this.#laws = laws;
    const reader = new MomentReader(echo, 0);
    const { gateCount, rayCount, firstGateCentreM, gateLengthM } = header;
    const km2PerMetre = ((2 * Math.PI) / rayCount) * gateLengthM * 1e-6;
    const instant = midEpochMs(header);
    const area = this.#areas.get(instant) ?? new Float64Array(CLASSES * ZDR_CLASSES);
    for (let gate = 0; gate < dbz.length; gate++) {
      const value = dbz[gate];
      if (!(value > COMPARED_DBZ.from && value < COMPARED_DBZ.to) || !isLiquid(marks[gate])) continue;
      const weight =
        ramp(value, COMPARED_DBZ.from, COMPARED_DBZ.full) *
        (1 - ramp(value, COMPARED_DBZ.fading, COMPARED_DBZ.to)) *
        ramp(rhohv[gate], Z_ZDR_CORRELATION.from, Z_ZDR_CORRELATION.full);
      if (weight === 0) continue;
      const zdrClass = Math.floor((reader.zdrDb(gate) - LOWEST_ZDR_DB) / ZDR_CLASS_DB);
      if (!(zdrClass >= 0 && zdrClass < ZDR_CLASSES)) continue;
      const at = Math.floor((value - COMPARED_DBZ.from) / CLASS_DB) * ZDR_CLASSES + zdrClass;
      area[at] += weight * km2PerMetre * (firstGateCentreM + (gate % gateCount) * gateLengthM);
    }
    this.#areas.set(instant, area);
  }

  /**
   * @param zdrOffsetDb - taken off every ZDR
   * @returns undefined where fewer than four blocks of time have anything to say
   */
  finish(zdrOffsetDb: number): LearnedDropSize | undefined {
    const laws = this.#laws;
    if (laws === undefined) return undefined;
    const instants = [...this.#areas.keys()].sort((one, other) => one - other);
    const block = timeBlocks(Float64Array.from(instants), TIME_BLOCKS);
    const blockCount = new Set(block).size;
    if (blockCount < LEAST_BLOCKS) return undefined;
    const rainByZZdr = new Float64Array(blockCount);
    const areaKm2 = new Float64Array(blockCount * CLASSES);
    instants.forEach((instant, k) => {
      const areas = this.#areas.get(instant) as Float64Array;
      for (let at = 0; at < areas.length; at++) {
        if (areas[at] === 0) continue;
        const zdrClass = at % ZDR_CLASSES;
        const dbzClass = (at - zdrClass) / ZDR_CLASSES;
        const zdr = LOWEST_ZDR_DB + (zdrClass + 0.5) * ZDR_CLASS_DB - zdrOffsetDb;
        const area = areas[at] * ramp(zdr, Z_ZDR_FROM_ZDR_DB.from, Z_ZDR_FROM_ZDR_DB.full);
        rainByZZdr[block[k]] += area * rateOfZZdr(dbzOf(dbzClass), zdr, laws.zZdr);
        areaKm2[block[k] * CLASSES + dbzClass] += area;
      }
    });
    return { rainByZZdr, areaKm2 };
  }
}

function dbzOf(dbzClass: number): number {
  return COMPARED_DBZ.from + (dbzClass + 0.5) * CLASS_DB;
}

/** What several radars learned of the same rain, put together; undefined where none learned anything. */
export function joinDropSizes(
  learned: readonly (LearnedDropSize | undefined)[],
): LearnedDropSize | undefined {
  const known = learned.filter((one) => one !== undefined);
  if (known.length === 0) return undefined;
  return {
    rainByZZdr: Float64Array.from(known.flatMap(({ rainByZZdr }) => [...rainByZZdr])),
    areaKm2: Float64Array.from(known.flatMap(({ areaKm2 }) => [...areaKm2])),
  };
}

/** What the size of drops makes of a relation. */
export interface DropSizeRatio {
  /** R(Z, ZDR) over R(Z), sums over area. */
  readonly ratio: number;
  /** Standard error of its natural logarithm, by leaving out one block of time after the other. */
  readonly standardError: number;
  /** Blocks with rain. */
  readonly blockCount: number;
  /** Factor on R(Z): the ratio, drawn towards 1 by its own uncertainty. */
  readonly factor: number;
}

/**
 * How the rain of a run stands to a relation, and the factor on R(Z) that follows.
 *
 * The logarithm of the ratio is drawn towards 0 as the mean of a normal variable with a known prior is: by
 * s² / (s² + e² + l²), where s is the spread from storm to storm, e the standard error and l the error of the law. Beyond
 * a factor of 3 either way belief fades, and at 4 nothing is left of it.
 *
 * @returns undefined with too little rain, or fewer than four blocks with any
 */
export function dropSizeRatio(
  { rainByZZdr, areaKm2 }: LearnedDropSize,
  relation: ReadyRelation,
): DropSizeRatio | undefined {
  const rates = Float64Array.from({ length: CLASSES }, (_, at) => rateOfZ(dbzOf(at), relation));
  const byZ = Float64Array.from(rainByZZdr, (_, block) =>
    rates.reduce((sum, rate, at) => sum + rate * areaKm2[block * CLASSES + at], 0),
  );
  const sumOf = (values: Float64Array) => values.reduce((sum, value) => sum + value, 0);
  const [allByZ, allByZZdr] = [sumOf(byZ), sumOf(rainByZZdr)];
  const wet = [...byZ.keys()].filter((block) => byZ[block] > 0 && byZ[block] < allByZ);
  if (!(allByZ >= LEAST_RAIN) || wet.length < LEAST_BLOCKS) return undefined;
  const logs = wet.map((left) => Math.log((allByZZdr - rainByZZdr[left]) / (allByZ - byZ[left])));
  const mean = logs.reduce((sum, value) => sum + value, 0) / logs.length;
  const squares = logs.reduce((sum, value) => sum + (value - mean) ** 2, 0);
  const variance = (squares * (logs.length - 1)) / logs.length;
  const ratio = allByZZdr / allByZ;
  const share = STORM_SPREAD ** 2 / (STORM_SPREAD ** 2 + LAW_ERROR ** 2 + variance);
  const away = Math.exp(Math.abs(Math.log(ratio)));
  const belief = 1 - ramp(away, RATIO.doubted, RATIO.refused);
  return {
    ratio,
    standardError: Math.sqrt(variance),
    blockCount: wet.length,
    factor: ratio ** (share * belief),
  };
}

/**
 * Factor on R(KDP) that goes with a factor on R(Z).
 *
 * Spectra that differ in their number parameter alone scale all moments with it (Testud et al. 2001, J. Appl. Meteorol. 40,
 * 1118-1140), so that R = c X^e becomes R = c n^(1 - e) X^e for any moment X: with R(Z) of the exponent 1 / b, R(KDP) of
 * the exponent e goes by the factor to the power (1 - e) / (1 - 1 / b), and never by more than R(Z) does.
 *
 * @param exponentB - of Z = a R^b; at 1 and below R(Z) cannot tell, and R(KDP) is left alone
 */
export function kdpFactorOf(factor: number, exponentB: number, kdpExponent: number): number {
  if (!(exponentB > 1)) return 1;
  return factor ** Math.min(1, (1 - kdpExponent) / (1 - 1 / exponentB));
}
