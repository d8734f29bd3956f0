import { FixedOffsetZone, IANAZone, type Zone } from "luxon";

/**
 * A time zone as plans name it: "UTC", a fixed offset like "UTC+01:00", or an IANA zone.
 *
 * @returns undefined where there is no such zone
 */
export function findZone(name: string): Zone | undefined {
  const fixed = FixedOffsetZone.parseSpecifier(name);
  if (fixed !== null) return Math.abs(fixed.offset(0)) <= 18 * 60 ? fixed : undefined;
  return IANAZone.isValidZone(name) ? IANAZone.create(name) : undefined;
}
