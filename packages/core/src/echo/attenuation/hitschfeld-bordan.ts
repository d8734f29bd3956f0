import { type AttenuationLaw, attenuationOfZOneWayDbPerKm } from "../../rain-attenuation.ts";

/** 0.2 ln 10: from dB one way to the exponent of a power that was lost both ways. */
export const TWO_WAY_EXPONENT = 0.2 * Math.LN10;

/**
 * The bracket of Hitschfeld and Bordan, 1 - 0.2 ln10 b Int a Zm^b ds: what is left of Z^b behind the path.
 *
 * Source: Hitschfeld and Bordan (1954), J. Meteorol. 11, 58-67.
 *
 * @param pathIntegral - integral of a Zm^b over the path, one-way dB, from the MEASURED reflectivity
 * @returns 1 for no rain; 0 and below where the measured path would take more than all there is
 */
export function hitschfeldBordanBracket(pathIntegral: number, exponent: number): number {
  return 1 - TWO_WAY_EXPONENT * exponent * pathIntegral;
}

/** Loss both ways that a bracket stands for, dB; Infinity at a bracket of 0 and below. */
export function lossOfBracketTwoWayDb(bracket: number, exponent: number): number {
  return bracket > 0 ? (-10 / exponent) * Math.log10(bracket) : Number.POSITIVE_INFINITY;
}

/**
 * Error of the corrected reflectivity where the measured one is off by a calibration error, dB.
 *
 * Source: Hitschfeld and Bordan (1954): the bracket becomes 1 - c^b (1 - 10^(-0.1 b L)), c = 10^(error/10).
 *
 * @param trueLossDb - both ways
 * @returns Infinity where the correction has run away
 */
export function hitschfeldBordanErrorDb(
  calibrationErrorDb: number,
  trueLossDb: number,
  exponent: number,
): number {
  const gain = 10 ** (0.1 * exponent * calibrationErrorDb);
  const bracket = 1 + gain * Math.expm1(-0.1 * Math.LN10 * exponent * trueLossDb);
  return calibrationErrorDb - trueLossDb + lossOfBracketTwoWayDb(bracket, exponent);
}

/** True loss both ways at which the correction runs away, dB; Infinity unless the echo reads too high. */
export function runawayLossTwoWayDb(calibrationErrorDb: number, exponent: number): number {
  return calibrationErrorDb > 0
    ? (-10 / exponent) * Math.log10(-Math.expm1(-0.1 * Math.LN10 * exponent * calibrationErrorDb))
    : Number.POSITIVE_INFINITY;
}

/** How much of a gate's own loss its correction holds. */
export type GateShare = "before-gate" | "to-gate-centre";

/**
 * Loss both ways before each gate, gate by gate outward, each corrected by what the nearer ones take.
 *
 * Runs away as the closed form does; stops at nothing by itself.
 *
 * @param measuredDbz - nearest gate first; -Infinity takes nothing, NaN makes all behind it NaN
 * @param share - "before-gate" is explicit; "to-gate-centre" adds half of the gate's own loss, by fixed point
 * @returns shape [gates + 1]: loss at each gate, and last behind all of them
 */
export function gateByGateLossTwoWayDb(
  measuredDbz: ArrayLike<number>,
  gateKm: number,
  law: AttenuationLaw,
  share: GateShare = "before-gate",
): Float64Array {
  const lossDb = new Float64Array(measuredDbz.length + 1);
  let before = 0;
  for (let gate = 0; gate < measuredDbz.length; gate++) {
    const measured = measuredDbz[gate] as number;
    let at = before;
    let own = attenuationOfZOneWayDbPerKm(measured + at, law) * gateKm;
    if (share === "to-gate-centre") {
      // A contraction as long as a gate takes little: k grows by 10^(0.1 b own).
      for (let turn = 0; turn < 50; turn++) {
        const next = before + own;
        if (Math.abs(next - at) < 1e-12) break;
        at = next;
        own = attenuationOfZOneWayDbPerKm(measured + at, law) * gateKm;
      }
    }
    lossDb[gate] = at;
    before += 2 * own;
  }
  lossDb[measuredDbz.length] = before;
  return lossDb;
}
