import type { AttenuationLaw } from "../../rain-attenuation.ts";
import { attenuationOfZLaw, rainAttenuationLaw } from "../../rain-attenuation.ts";
import { frequencyHz } from "../../units.ts";
import { type ZrRelation, zrRelation } from "../../zr-relation.ts";

/** By what the loss in rain is told. `auto`: by phase where it was worked up, else by reflectivity. */
export type AttenuationMethod = "auto" | "linear" | "zphi" | "hitschfeld-bordan" | "none";

export interface AttenuationSettings {
  readonly method: AttenuationMethod;
  /** Turns the law of P.838 from rain rate to Z for Hitschfeld-Bordan. */
  readonly relation: ZrRelation;
  /** b of A = a Z^b for ZPHI. */
  readonly zphiExponent: number;
  /** Rise of PHIDP over a path from which on ZPHI shares it out; less is noise and is taken as it is. */
  readonly leastPathPhaseDeg: number;
  /** Heights above sea level between which snow melts, where known. */
  readonly meltingLayer?: { readonly bottomM: number; readonly topM: number } | undefined;
  /** Most two-way loss that is corrected by reflectivity alone, dB, and least bracket. */
  readonly hitschfeldBordanLimitDb: number;
  readonly leastBracket: number;
  /** Most two-way loss that is corrected by phase, dB. */
  readonly phaseLimitDb: number;
  /** Weakest echo seen at 1 km, dBZ, where known. */
  readonly detectableAt1KmDbz?: number | undefined;
  /** Echo that must not be missed: a dry gate behind so much loss that such echo would vanish is not known dry. */
  readonly hiddenDbz: number;
  /** The same as a loss, where the sensitivity is not known. */
  readonly lossLimitDb: number;
}

/**
 * The limit of 10 dB is common practice (5 to 10 dB); the bracket of 0.3 keeps off the runaway of Hitschfeld and
 * Bordan (1954). Phase stands 20 dB: a coefficient that is uncertain by a quarter is then out by 5 dB (house
 * rule). Hidden echo of 23 dBZ is 1 mm/h of widespread rain (Z = 200 R^1.6; house rule): lighter rain missed
 * behind a storm changes a total less than the hole would. The exponent of 0.8 is about the middle of what Testud
 * et al. (2000) and Bringi and Chandrasekar (2001) give.
 */
export const DEFAULT_ATTENUATION_SETTINGS: AttenuationSettings = {
  method: "auto",
  relation: zrRelation(200, 1.6, "Marshall, Hitschfeld and Gunn (1955), Advances in Geophysics 2, 1-56"),
  zphiExponent: 0.8,
  leastPathPhaseDeg: 10,
  hitschfeldBordanLimitDb: 10,
  leastBracket: 0.3,
  phaseLimitDb: 20,
  hiddenDbz: 23,
  lossLimitDb: 10,
};

/** The law k = a Z^b of a wavelength: ITU-R P.838-3 through a Z-R relation. */
export function attenuationLawOfWavelength(wavelengthM: number, relation: ZrRelation): AttenuationLaw {
  return attenuationOfZLaw(rainAttenuationLaw(frequencyHz(wavelengthM) / 1e9), relation);
}
