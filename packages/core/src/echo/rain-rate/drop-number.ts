import type { PolarEcho } from "../polar-echo.ts";
import { bandLaws, type KdpLaw, rateOfKdp } from "./estimators.ts";
import { hailShare, mayBeHail } from "./hail.ts";
import { isLiquid, MomentReader } from "./moment-reader.ts";
import { ramp } from "./ramp.ts";
import { type RateTables, type ReadyRelation, rateOfZ } from "./ready-relation.ts";

/**
 * Echo in which the two rates are compared: strong enough for KDP to be more than noise, too weak for hail.
 * House rule about the customary 38 dBZ of R(KDP) and the 49 dBZ of the lowest hail cap in use.
 */
const COMPARED_DBZ = { from: 34, full: 37, fading: 47, to: 50 } as const;
const RAIN_CORRELATION = { from: 0.96, full: 0.98 } as const;

/**
 * Rain that the relation, or what the run has learned, is believed for before the sweep has said anything: 10 mm/h
 * over 25 km2, and over 100 km2. House rule.
 */
const PRIOR_KM2_MM_PER_HOUR = { relation: 250, learned: 1000 } as const;

/**
 * The ratio that is put down to the shape of drops, and the one that is taken for their number.
 *
 * The assumed shape alone moves R(KDP) by 5 to 40 % against Rayleigh-Gans scattering, and one relation is uncertain
 * by a factor of 1.5 to 2 on one scan: below 1.4 nothing is changed, above 1.8 all is. Ten times as many drops make
 * a factor of 2.15, thirty times 3.1; a KDP that says more is broken. One that says less is never followed: hail and
 * ice that nobody marked, or too long a window, are likelier than few drops. House rule.
 */
const RATIO = { ignored: 1.4, believed: 1.8, doubted: 3, refused: 4 } as const;

/** Where the heavier rain of a run stands between its Z and its KDP; for any relation. */
export interface LearnedDropNumber {
  /** Sum of R(KDP) over area, mm/h km2. */
  readonly rainByKdp: number;
  /** Area by reflectivity, km2: classes of {@link CLASS_DB} from {@link COMPARED_DBZ}.from up. */
  readonly areaKm2: Float64Array;
}

const CLASS_DB = 0.5;
const CLASSES = (COMPARED_DBZ.to - COMPARED_DBZ.from) / CLASS_DB;

/**
 * Calls back for each gate in which Z and KDP may be compared.
 *
 * @param take - given the area that the gate counts with, its index and its KDP
 */
function forEachCompared(
  { kdpDegPerKm, dbz, marks, header }: PolarEcho,
  reader: MomentReader,
  take: (areaKm2: number, gate: number, kdp: number) => void,
): void {
  if (kdpDegPerKm === undefined) return;
  const { gateCount, rayCount, firstGateCentreM, gateLengthM } = header;
  const km2PerMetre = ((2 * Math.PI) / rayCount) * gateLengthM * 1e-6;
  for (let gate = 0; gate < dbz.length; gate++) {
    const value = dbz[gate];
    if (!(value > COMPARED_DBZ.from && value < COMPARED_DBZ.to)) continue;
    const kdp = kdpDegPerKm[gate];
    if (Number.isNaN(kdp) || !isLiquid(marks[gate])) continue;
    const rhohv = reader.rhohv(gate);
    let weight =
      ramp(value, COMPARED_DBZ.from, COMPARED_DBZ.full) *
      (1 - ramp(value, COMPARED_DBZ.fading, COMPARED_DBZ.to)) *
      (Number.isNaN(rhohv) ? 1 : ramp(rhohv, RAIN_CORRELATION.from, RAIN_CORRELATION.full));
    if (mayBeHail(value, rhohv)) weight *= 1 - hailShare(value, reader.zdrDb(gate), rhohv);
    if (weight > 0) {
      take(weight * km2PerMetre * (firstGateCentreM + (gate % gateCount) * gateLengthM), gate, kdp);
    }
  }
}

/** Gates in which Z and KDP are compared, whatever the relation; shapes [compared gates]. */
export interface ComparedGates {
  readonly gates: readonly number[];
  readonly areaKm2: readonly number[];
  /** R(KDP) times the area, mm/h km2. */
  readonly rainByKdp: readonly number[];
}

/** @param law - of the radar's band */
export function comparedGates(echo: PolarEcho, reader: MomentReader, law: KdpLaw): ComparedGates {
  const gates: number[] = [];
  const areas: number[] = [];
  const rainByKdp: number[] = [];
  forEachCompared(echo, reader, (areaKm2, gate, kdp) => {
    gates.push(gate);
    areas.push(areaKm2);
    rainByKdp.push(areaKm2 * rateOfKdp(kdp, law));
  });
  return { gates, areaKm2: areas, rainByKdp };
}

/**
 * Factor on every rate from Z that makes the sweep's rain agree with its KDP, where KDP tells more rain by more than
 * the shape of drops explains: many small drops, as in warm rain, echo less for the same rain.
 *
 * With a fixed exponent, Z = a R^b follows the number of drops through a. Source: Bringi, Tang and Chandrasekar
 * (2004), J. Atmos. Oceanic Technol. 21, 612-623, who tune a by polarimetric moments; the sums over an area, in
 * which the noise of KDP has no mean, are those of Ryzhkov and Zrnic (1998), J. Appl. Meteorol. 37, 1080-1090.
 * The papers are from memory, and the thresholds are ours.
 *
 * @param rainType - numbers of `RAIN_TYPE`, or undefined for one relation everywhere
 * @param compared - of the same sweep; undefined where the band has no law
 * @returns 1 or more: what the run has learned where the sweep has no KDP; 1 where nothing is known, or the band has no law
 */
export function dropNumberFactor(
  { dbz }: PolarEcho,
  rainType: Uint8Array | undefined,
  { byType, dropNumberRatio }: RateTables,
  compared: ComparedGates | undefined,
): number {
  if (compared === undefined) return 1;
  const prior =
    dropNumberRatio === undefined ? PRIOR_KM2_MM_PER_HOUR.relation : PRIOR_KM2_MM_PER_HOUR.learned;
  let byZ = prior;
  let byKdp = prior * (dropNumberRatio ?? 1);
  const { gates, areaKm2, rainByKdp } = compared;
  for (let k = 0; k < gates.length; k++) {
    const gate = gates[k];
    byZ += areaKm2[k] * rateOfZ(dbz[gate], byType[rainType?.[gate] ?? 0]);
    byKdp += rainByKdp[k];
  }
  return factorOfRatio(Math.max(0, byKdp) / byZ);
}

function factorOfRatio(ratio: number): number {
  const belief = ramp(ratio, RATIO.ignored, RATIO.believed) * (1 - ramp(ratio, RATIO.doubted, RATIO.refused));
  return ratio ** belief;
}

/** Learns over a run what {@link dropNumberFactor} starts from, so that a sweep with little heavy rain follows. */
export class DropNumberLearner {
  readonly #areaKm2 = new Float64Array(CLASSES);
  #rainByKdp = 0;

  /** Adds a corrected sweep; one without KDP, or of a band without a law, adds nothing. */
  add(echo: PolarEcho, zdrOffsetDb = 0): void {
    const { wavelengthM } = echo.header;
    const laws = wavelengthM === undefined ? undefined : bandLaws(wavelengthM);
    if (laws === undefined) return;
    forEachCompared(echo, new MomentReader(echo, zdrOffsetDb), (areaKm2, gate, kdp) => {
      this.#areaKm2[Math.floor((echo.dbz[gate] - COMPARED_DBZ.from) / CLASS_DB)] += areaKm2;
      this.#rainByKdp += areaKm2 * rateOfKdp(kdp, laws.kdp);
    });
  }

  finish(): LearnedDropNumber {
    return { rainByKdp: this.#rainByKdp, areaKm2: this.#areaKm2.slice() };
  }
}

/** Rain by KDP over rain by Z under a relation; near 1 where little was learned. */
export function learnedDropNumberRatio(
  { rainByKdp, areaKm2 }: LearnedDropNumber,
  relation: ReadyRelation,
): number {
  const prior = PRIOR_KM2_MM_PER_HOUR.relation;
  const rainByZ = areaKm2.reduce(
    (sum, area, k) => sum + area * rateOfZ(COMPARED_DBZ.from + (k + 0.5) * CLASS_DB, relation),
    0,
  );
  return (prior + Math.max(0, rainByKdp)) / (prior + rainByZ);
}
