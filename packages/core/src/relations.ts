import { InputError } from "./model/errors.ts";
import { nearestNames } from "./nearest-names.ts";
import { type PublishedRelation, RELATIONS } from "./relation-catalogue.ts";
import { decibels, zMm6PerM3 } from "./units.ts";
import type { ZrRelation } from "./zr-relation.ts";

/**
 * Added to the equivalent reflectivity of dry snow, which a radar set for water shows, to get the
 * reflectivity of the melted drops that snow relations are written for.
 *
 * It is 10 log10(0.93 / 0.208), the ratio of |K|2 of water to that of ice with melted diameters,
 * rounded to 0.1 dB. Source: Smith (1984), J. Clim. Appl. Meteorol. 23, 1258-1260.
 */
export const SNOW_EQUIVALENT_TO_MELTED_DB = 6.5;

/** Reflectivity of the melted drops from the equivalent reflectivity of dry snow, both dBZ. */
export function meltedReflectivityDbz(equivalentDbz: number): number {
  return equivalentDbz + SNOW_EQUIVALENT_TO_MELTED_DB;
}

/**
 * Rain rate from reflectivity, by inverting Z = a R^b; for a snow relation the melted rate.
 *
 * Undetect and nodata need no branch: 10^(-Infinity/10) is 0, and NaN stays NaN.
 *
 * @param reflectivityDbz - what the radar shows, dBZ; for snow that is equivalent reflectivity, which
 *   {@link meltedReflectivityDbz} converts first. -Infinity is undetect, NaN is nodata
 * @param relation - made by `zrRelation` or taken from the catalogue
 * @returns rate, mm/h of liquid water; 0 for undetect, NaN for nodata
 * @remarks
 * Valid for unattenuated echo of the relation's own phase, roughly 0.1 to 150 mm/h. Hail, melting snow
 * and clutter come out too high and are not capped here: see `resolveCap`. Throws nothing.
 * @example
 * rainRateMmPerHour(23.0103, findRelation("marshall-1955-200/1.6")); // 1.0000, since Z = 200 is 23.0103 dBZ
 */
export function rainRateMmPerHour(reflectivityDbz: number, relation: ZrRelation): number {
  const dbz = relation.phase === "snow" ? meltedReflectivityDbz(reflectivityDbz) : reflectivityDbz;
  return (zMm6PerM3(dbz) / relation.a) ** (1 / relation.b);
}

/**
 * Reflectivity that a radar shows for a rate: Z = a R^b in dBZ, for snow turned into equivalent reflectivity.
 *
 * @param rateMmPerHour - 0 or more; 0 gives -Infinity, NaN stays NaN
 */
export function reflectivityDbz(rateMmPerHour: number, relation: ZrRelation): number {
  const dbz = decibels(relation.a * rateMmPerHour ** relation.b);
  return relation.phase === "snow" ? dbz - SNOW_EQUIVALENT_TO_MELTED_DB : dbz;
}

/**
 * The catalogue relation of a name.
 *
 * @param where - the place that names it, for the message: a line of the plan, an option
 * @throws InputError of kind "usage" that names the nearest relations if there is none
 */
export function findRelation(name: string, where = "relation"): PublishedRelation {
  const found = RELATIONS.find((relation) => relation.name === name);
  if (found !== undefined) return found;
  const near = nearestNames(
    name,
    RELATIONS.map((relation) => relation.name),
  );
  throw new InputError(
    `no relation is called ${JSON.stringify(name.slice(0, 80))}`,
    where,
    `write ${near.map((candidate) => `"${candidate}"`).join(", ")} or another of the catalogue, or give a, b and source`,
    { kind: "usage" },
  );
}

/** What must be said beside every figure that a relation led to; undefined where there is nothing to say. */
export function relationCaution(relation: ZrRelation): string | undefined {
  if (relation.phase === "rain") return undefined;
  return (
    `snow relation Z = ${relation.a} R^${relation.b}: reflectivity was raised by ` +
    `${SNOW_EQUIVALENT_TO_MELTED_DB} dB first (dry snow, Smith 1984); depths are of melted snow, ` +
    "too high where snow melts or rain falls"
  );
}
