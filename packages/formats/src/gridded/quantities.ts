import type { GriddedQuantity } from "./gridded-file.ts";

/** What values are, and what they must be multiplied by to be in the unit of their name. */
export interface Measure {
  readonly quantity: GriddedQuantity;
  readonly factor: number;
}

/** Units as they are written, without blanks, dots and carets, in lower case. A layer of water of 1 kg m-2 is 1 mm. */
const UNITS: Readonly<Record<string, Measure>> = {
  "mm/h": rate(1),
  "mm/hr": rate(1),
  "mm/hour": rate(1),
  "mmh-1": rate(1),
  "mmhr-1": rate(1),
  "kgm-2h-1": rate(1),
  "mm/s": rate(3600),
  "mms-1": rate(3600),
  "kgm-2s-1": rate(3600),
  "kg/m2/s": rate(3600),
  "m/s": rate(3_600_000),
  "ms-1": rate(3_600_000),
  mm: depth(1),
  millimeter: depth(1),
  millimetre: depth(1),
  "kgm-2": depth(1),
  "kg/m2": depth(1),
  cm: depth(10),
  m: depth(1000),
  in: depth(25.4),
  inch: depth(25.4),
  dbz: { quantity: "reflectivityDbz", factor: 1 },
  dbze: { quantity: "reflectivityDbz", factor: 1 },
};

/** Units that speeds, heights and ranges have too: they count only where a name says that it is rain. */
const AMBIGUOUS: ReadonlySet<string> = new Set(["m/s", "ms-1", "m", "cm", "in", "inch"]);

/**
 * Names that say that a variable is rain.
 *
 * @see CF Standard Name Table, version 85: rainfall_rate, lwe_precipitation_rate, precipitation_flux, rainfall_amount,
 *   lwe_thickness_of_precipitation_amount, equivalent_reflectivity_factor and their kin
 */
const RAIN_NAME = /rain|precip|reflectivity/i;

/** What a variable holds by its unit and names; undefined where it is no rain and no reflectivity. */
export function measureOf(units: string | undefined, names: readonly string[]): Measure | undefined {
  const unit = (units ?? "").toLowerCase().replace(/[\s.^*]|\*\*/g, "");
  if (!Object.hasOwn(UNITS, unit)) return undefined;
  if (AMBIGUOUS.has(unit) && !names.some((name) => RAIN_NAME.test(name))) return undefined;
  return UNITS[unit];
}

function rate(factor: number): Measure {
  return { quantity: "rainRateMmPerHour", factor };
}

function depth(factor: number): Measure {
  return { quantity: "depthMm", factor };
}
