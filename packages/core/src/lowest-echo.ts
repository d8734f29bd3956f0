import type { Moment, SweepHeader } from "./model/radar.ts";
import { checkCoding, codingAsStored, momentValue, tabulate } from "./moment-values.ts";
import { detectableDbz } from "./sensitivity.ts";

/** Width of the range bands in which echo is counted. */
export const RANGE_BAND_M = 2000;
/** Echo is counted in classes of half a dB from -60 to 100 dBZ; what lies outside is put into the end classes. */
const CLASS_DB = 0.5;
const LOWEST_DBZ = -60;
const CLASSES = 320;
/** A band with fewer gates that hold echo says nothing by itself. House rule. */
const ENOUGH_GATES = 200;
/**
 * The weakest of so many gates are passed over: what a clutter filter leaves of a strong echo lies below what
 * any real echo at that range could show. House rule.
 */
const PASSED_OVER = 0.002;

/** The weakest echo seen by range, as a stand-in where nobody says how sensitive a radar is. */
export interface MeasuredSensitivity {
  /** Shape [bands]: lowest valid reflectivity in bands of {@link RANGE_BAND_M}, dBZ; NaN where too little was seen. */
  readonly lowestDbz: Float64Array;
  /** The same brought to 1 km by the square of the range: median over the bands. */
  readonly at1KmDbz: number;
  /** How many gates with echo it was measured from. */
  readonly gateCount: number;
}

/**
 * Counts the echo of scans by range and strength, and says what the weakest was.
 *
 * It measures what the files still hold, so a threshold that was set before they were written counts as the
 * end of sight, and so it does for the total.
 */
export class LowestEcho {
  readonly #bands: Uint32Array[] = [];

  /**
   * @param moment - a reflectivity of the sweep
   * @param where - file and dataset, for the message
   * @throws InputError as `checkCoding`
   */
  add(
    sweep: Pick<SweepHeader, "rayCount" | "gateCount" | "firstGateCentreM" | "gateLengthM">,
    moment: Moment,
    where: string,
  ): void {
    checkCoding(moment, where);
    const { stored } = moment;
    const coding = codingAsStored(moment);
    const table =
      stored instanceof Uint8Array || stored instanceof Uint16Array
        ? tabulate(stored, (code) => momentValue(code, coding))
        : undefined;
    for (let gate = 0; gate < sweep.gateCount; gate++) {
      const counts = this.#bandAt(sweep.firstGateCentreM + gate * sweep.gateLengthM);
      for (let at = gate; at < stored.length; at += sweep.gateCount) {
        const code = stored[at] as number;
        const dbz = table === undefined ? momentValue(code, coding) : (table[code] as number);
        // Neither nodata nor undetect is an echo.
        if (!Number.isFinite(dbz)) continue;
        const place = Math.floor((dbz - LOWEST_DBZ) / CLASS_DB);
        const held = Math.min(CLASSES - 1, Math.max(0, place));
        counts[held] = (counts[held] as number) + 1;
      }
    }
  }

  /** @returns undefined where no band holds enough echo to say anything */
  measure(): MeasuredSensitivity | undefined {
    const lowestDbz = Float64Array.from(this.#bands, lowestOf);
    const at1Km: number[] = [];
    lowestDbz.forEach((dbz, band) => {
      if (!Number.isNaN(dbz)) at1Km.push(dbz - detectableDbz((band + 0.5) * RANGE_BAND_M, 0));
    });
    if (at1Km.length === 0) return undefined;
    at1Km.sort((a, b) => a - b);
    const gateCount = this.#bands.reduce(
      (sum, counts) => sum + counts.reduce((inBand, count) => inBand + count, 0),
      0,
    );
    return { lowestDbz, at1KmDbz: at1Km[Math.floor(at1Km.length / 2)] as number, gateCount };
  }

  #bandAt(rangeM: number): Uint32Array {
    const band = Math.max(0, Math.floor(rangeM / RANGE_BAND_M));
    while (this.#bands.length <= band) this.#bands.push(new Uint32Array(CLASSES));
    return this.#bands[band] as Uint32Array;
  }
}

/** Lower edge of the class with the weakest gates that are not passed over; NaN below {@link ENOUGH_GATES}. */
function lowestOf(counts: Uint32Array): number {
  const gates = counts.reduce((sum, count) => sum + count, 0);
  if (gates < ENOUGH_GATES) return Number.NaN;
  let left = gates * PASSED_OVER;
  for (let place = 0; place < counts.length; place++) {
    left -= counts[place] as number;
    if (left < 0) return LOWEST_DBZ + place * CLASS_DB;
  }
  return Number.NaN;
}

/**
 * Smallest reflectivity seen at a range: the band's own where enough echo was seen there, else the square law
 * through the other bands.
 */
export function measuredDetectableDbz(rangeM: number, measured: MeasuredSensitivity): number {
  const own = measured.lowestDbz[Math.floor(rangeM / RANGE_BAND_M)];
  return own === undefined || Number.isNaN(own) ? detectableDbz(rangeM, measured.at1KmDbz) : own;
}
