import type { ZrRelation } from "./zr-relation.ts";

/**
 * What a calibration error does to the rain rate: the factor 10^(e / (10 b)).
 *
 * @param errorDb - reflectivity shown minus true: 1 dB makes 1.155 of the rate for b = 1.6
 */
export function rateFactorOfErrorDb(errorDb: number, relation: ZrRelation): number {
  return 10 ** (errorDb / (10 * relation.b));
}
