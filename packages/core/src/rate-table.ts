import type { ResolvedCap } from "./cap.ts";
import type { Moment } from "./model/radar.ts";
import {
  type Codes,
  checkCoding,
  codingAsStored,
  lookUp,
  type MomentCoding,
  momentValue,
  tabulate,
} from "./moment-values.ts";
import { rainRateMmPerHour } from "./relations.ts";
import type { ZrRelation } from "./zr-relation.ts";

/** What turns the reflectivity of one radar into rain rates. */
export interface RateSettings {
  readonly relation: ZrRelation;
  /** Resolved for the same relation. */
  readonly cap: ResolvedCap;
  /** Rates below it count as dry, mm/h; 0 or more. */
  readonly minRateMmPerHour: number;
  /** Calibration: added to every dBZ before cap and relation. */
  readonly offsetDb: number;
}

/** Rain rates, and where the cap was met. Shapes are equal: one entry per code, or per gate. */
export interface Rates {
  /** mm/h; NaN for nodata, 0 for undetect and below the lower cut-off. */
  readonly rate: Float32Array;
  /** 1 where the reflectivity was at or above the cap, so that the rate is the cap; else 0. */
  readonly capped: Uint8Array;
}

/**
 * Rain rate and cap flag of one reflectivity.
 *
 * The cap is applied here, gate by gate, never to a mean: one hailstone must not pass in the crowd.
 *
 * @param reflectivityDbz - as stored, before the calibration offset; -Infinity undetect, NaN nodata
 */
export function gateRate(
  reflectivityDbz: number,
  settings: RateSettings,
): { readonly rate: number; readonly capped: 0 | 1 } {
  const dbz = reflectivityDbz + settings.offsetDb;
  if (dbz >= settings.cap.dbz) return { rate: settings.cap.mmPerHour, capped: 1 };
  const rate = rainRateMmPerHour(dbz, settings.relation);
  return { rate: rate < settings.minRateMmPerHour ? 0 : rate, capped: 0 };
}

/**
 * The rate of every code that a stored integer can take.
 *
 * @param codes - the stored array, or an empty one of its type
 * @param where - file and dataset, for the message
 * @returns 256 entries for uint8, 65,536 for uint16
 * @throws InputError as `checkCoding`; RangeError if the cut-off or the offset is not finite, or the cut-off below 0
 */
export function rateTable(coding: MomentCoding, codes: Codes, settings: RateSettings, where: string): Rates {
  checkCoding(coding, where);
  checkSettings(settings);
  const capped = new Uint8Array(2 ** (8 * codes.BYTES_PER_ELEMENT));
  const rate = tabulate(codes, (code) => {
    const gate = gateRate(momentValue(code, coding), settings);
    capped[code] = gate.capped;
    return gate.rate;
  });
  return { rate, capped };
}

/**
 * Rain rate of every gate of a moment: through a table for uint8 and uint16, value by value otherwise,
 * by the same {@link gateRate}.
 *
 * @returns shape [rayCount, gateCount] as stored
 * @throws as {@link rateTable}
 */
export function momentRates(moment: Moment, settings: RateSettings, where: string): Rates {
  const { stored } = moment;
  if (stored instanceof Uint8Array || stored instanceof Uint16Array) {
    const table = rateTable(moment, stored, settings, where);
    return { rate: lookUp(stored, table.rate), capped: cappedGates(stored, table.capped) };
  }
  checkCoding(moment, where);
  checkSettings(settings);
  const coding = codingAsStored(moment);
  const rate = new Float32Array(stored.length);
  const capped = new Uint8Array(stored.length);
  for (let i = 0; i < stored.length; i++) {
    const gate = gateRate(momentValue(stored[i] as number, coding), settings);
    rate[i] = gate.rate;
    capped[i] = gate.capped;
  }
  return { rate, capped };
}

/**
 * A `momentRates` that remembers its tables: radars repeat the same coding scan after scan, and a table
 * of 65,536 powers costs as much as a sweep.
 *
 * @returns a function of moment and place, for one radar and one period of settings
 */
export function rateConverter(settings: RateSettings): (moment: Moment, where: string) => Rates {
  const tables = new Map<string, Rates>();
  return (moment, where) => {
    const { stored, gain, offset, nodata, undetect } = moment;
    if (!(stored instanceof Uint8Array || stored instanceof Uint16Array)) {
      return momentRates(moment, settings, where);
    }
    const key = [stored.BYTES_PER_ELEMENT, gain, offset, nodata, undetect].join(" ");
    const table = tables.get(key) ?? rateTable(moment, stored, settings, where);
    tables.set(key, table);
    return { rate: lookUp(stored, table.rate), capped: cappedGates(stored, table.capped) };
  };
}

function cappedGates(codes: Codes, table: Uint8Array): Uint8Array {
  const out = new Uint8Array(codes.length);
  for (let i = 0; i < codes.length; i++) out[i] = table[codes[i] as number] as number;
  return out;
}

function checkSettings({ minRateMmPerHour, offsetDb }: RateSettings): void {
  if (!(minRateMmPerHour >= 0 && Number.isFinite(minRateMmPerHour) && Number.isFinite(offsetDb))) {
    throw new RangeError(
      `a rate needs a finite cut-off of 0 or more and a finite offset, got ${minRateMmPerHour} mm/h and ${offsetDb} dB`,
    );
  }
}
