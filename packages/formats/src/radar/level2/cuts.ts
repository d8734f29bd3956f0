import type { Radial } from "./radial.ts";
import { ENDS_ELEVATION, STARTS_ELEVATION } from "./radial.ts";

/** One turn of the antenna, its rays in the order they were measured. */
export interface Cut {
  readonly elevationNumber: number;
  readonly radials: readonly Radial[];
  /** False where the first or the last rays of the turn are not there. */
  readonly isWhole: boolean;
}

/**
 * Divides rays into turns: a new one begins where the elevation number changes, or where a ray says that it starts one.
 *
 * @param radials - of one volume, in the order of measurement
 */
export function cutsOf(radials: readonly Radial[]): readonly Cut[] {
  const cuts: Radial[][] = [];
  for (const radial of radials) {
    const current = cuts.at(-1);
    const last = current?.at(-1);
    const goesOn = last?.elevationNumber === radial.elevationNumber && !STARTS_ELEVATION.has(radial.status);
    if (current !== undefined && goesOn) current.push(radial);
    else cuts.push([radial]);
  }
  return cuts.map((cut) => ({
    elevationNumber: (cut[0] as Radial).elevationNumber,
    radials: cut,
    isWhole:
      STARTS_ELEVATION.has((cut[0] as Radial).status) && ENDS_ELEVATION.has((cut.at(-1) as Radial).status),
  }));
}
