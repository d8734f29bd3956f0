import { rainRateMmPerHour, reflectivityDbz } from "./relations.ts";
import type { ZrRelation } from "./zr-relation.ts";

/** A hail cap as it is set: on reflectivity or on rain rate. */
export type CapSetting = { readonly dbz: number } | { readonly mmPerHour: number };

/** A hail cap as both numbers for the relation in use. */
export interface ResolvedCap {
  readonly dbz: number;
  readonly mmPerHour: number;
  /** Which of the two was set; the other follows from the relation. */
  readonly given: "dbz" | "mmPerHour";
  /** One sentence where the rate lies outside the customary caps. */
  readonly warning?: string;
}

/** Customary range of capped rates; common practice, no published limit. */
export const CUSTOMARY_CAP_MM_PER_HOUR = { low: 75, high: 150 } as const;

/**
 * A cap as reflectivity and as rate.
 *
 * The same dBZ means very different rates for different exponents, so both are always shown. The custom
 * is to the whole mm/h, and the rate is held against it so: 53 dBZ with 200/1.6, 74.9 mm/h, passes as 75.
 *
 * @throws RangeError if the number is not finite, or the rate not above 0
 * @example
 * resolveCap({ dbz: 53 }, findRelation("fulton-1998-300/1.4")).mmPerHour; // 103.83
 */
export function resolveCap(setting: CapSetting, relation: ZrRelation): ResolvedCap {
  const both =
    "dbz" in setting
      ? ({ dbz: setting.dbz, mmPerHour: rainRateMmPerHour(setting.dbz, relation), given: "dbz" } as const)
      : ({
          dbz: reflectivityDbz(setting.mmPerHour, relation),
          mmPerHour: setting.mmPerHour,
          given: "mmPerHour",
        } as const);
  if (!(Number.isFinite(both.dbz) && both.mmPerHour > 0 && Number.isFinite(both.mmPerHour))) {
    throw new RangeError(`a cap needs a finite number, and a rate above 0, got ${JSON.stringify(setting)}`);
  }
  const warning = capWarning(both.dbz, both.mmPerHour, relation);
  return warning === undefined ? both : { ...both, warning };
}

function capWarning(dbz: number, mmPerHour: number, relation: ZrRelation): string | undefined {
  const { low, high } = CUSTOMARY_CAP_MM_PER_HOUR;
  const whole = Math.round(mmPerHour);
  if (whole >= low && whole <= high) return undefined;
  const consequence = whole < low ? "heavy rain is cut off with the hail" : "hail is counted as rain";
  return (
    `the cap of ${dbz.toFixed(1)} dBZ is ${mmPerHour.toFixed(1)} mm/h with Z = ${relation.a} R^${relation.b}, ` +
    `outside the customary ${low} to ${high} mm/h: ${consequence}`
  );
}
