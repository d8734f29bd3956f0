/** What falls: the reflectivity of snow is converted before its relation is applied. */
export type Phase = "rain" | "snow";

/** A power law Z = a R^b, with Z in mm6 m-3 and R in mm/h of liquid water, and where it comes from. */
export interface ZrRelation {
  readonly a: number;
  readonly b: number;
  readonly source: string;
  /** For "snow", Z is the reflectivity of the melted drops. */
  readonly phase: Phase;
}

/** A checked relation. @throws RangeError if `a` or `b` is not finite and above 0 */
export function zrRelation(a: number, b: number, source: string, phase: Phase = "rain"): ZrRelation {
  if (!(a > 0 && b > 0 && Number.isFinite(a) && Number.isFinite(b))) {
    throw new RangeError(`a relation Z = a R^b needs finite a and b above 0, got a = ${a}, b = ${b}`);
  }
  return { a, b, source, phase };
}
