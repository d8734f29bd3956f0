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
const PASSED_OVER_AT_LEAST = 2;

/**
 * Many bands hold no echo as weak as the radar could see there, only rain: the weakest tenth of them speaks for
 * all. House rule.
 */
const SPEAKING_SHARE = 0.1;

/**
 * A noise figure is not believed where the scans hold echo weaker than it by more than this, dB. House rule.
 */
const DISBELIEF_DB = 3;

/** The weakest echo seen by range, as a stand-in where nobody says how sensitive a radar is. */
export interface MeasuredSensitivity {
  /** Shape [bands]: lowest valid reflectivity in bands of {@link RANGE_BAND_M}, dBZ; NaN where too little was seen. */
  readonly lowestDbz: Float64Array;
  /** The same brought to 1 km by the square of the range: what the weakest tenth of the bands comes to. */
  readonly at1KmDbz: number;
  /** Lowest of all bands: below it nothing is written, at any range. */
  readonly floorDbz: number;
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
    return {
      lowestDbz,
      at1KmDbz: at1Km[Math.floor(SPEAKING_SHARE * at1Km.length)] as number,
      floorDbz: lowestDbz.reduce(
        (low, dbz) => (Number.isNaN(dbz) ? low : Math.min(low, dbz)),
        Number.POSITIVE_INFINITY,
      ),
      gateCount,
    };
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
  let left = Math.max(PASSED_OVER_AT_LEAST, gates * PASSED_OVER);
  for (let place = 0; place < counts.length; place++) {
    left -= counts[place] as number;
    if (left < 0) return LOWEST_DBZ + place * CLASS_DB;
  }
  return Number.NaN;
}

/**
 * Smallest reflectivity seen at a range: the square law through what was measured, and never below the floor.
 *
 * So it holds for a radar that its noise limits and for files from which weak echo was taken out.
 */
export function measuredDetectableDbz(
  rangeM: number,
  { at1KmDbz, floorDbz }: Pick<MeasuredSensitivity, "at1KmDbz" | "floorDbz">,
): number {
  return Math.max(floorDbz, detectableDbz(rangeM, at1KmDbz));
}

/**
 * True where scans hold echo too weak for the noise-equivalent reflectivity that their file states, so that
 * the number cannot be one: some writers put 0 for "not known".
 *
 * @param noiseEquivalentDbz - at 1 km, as the file states it
 */
export function scansDisprove(
  noiseEquivalentDbz: number,
  measured: MeasuredSensitivity | undefined,
): boolean {
  return measured !== undefined && measured.at1KmDbz < noiseEquivalentDbz - DISBELIEF_DB;
}
