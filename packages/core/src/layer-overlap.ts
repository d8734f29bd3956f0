import { errorFunction } from "./error-function.ts";

/**
 * Share of an echo that comes from a layer of the air, the melting layer above all, for a Gaussian beam.
 *
 * Weighted by the two-way pattern over height: a normal distribution with sigma = r theta / (4 sqrt(ln2)).
 * Source: Probert-Jones (1962), Q. J. R. Meteorol. Soc. 88, 485-495, for the pattern; exact for a level layer
 * and a low elevation.
 *
 * @param beamCentreM - height of the beam's centre, same datum as the layer
 * @param beamDiameterM - between the half-power points, above 0, from `beamDiameterM`
 * @returns 0 to 1
 */
export function layerShare(
  beamCentreM: number,
  beamDiameterM: number,
  layer: { readonly bottomM: number; readonly topM: number },
): number {
  // exp(-8 ln2 (h / d)2) is exp(-t2) with t = sqrt(8 ln2) h / d.
  const scale = Math.sqrt(8 * Math.LN2) / beamDiameterM;
  const below = (heightM: number) => errorFunction(scale * (heightM - beamCentreM));
  return Math.max(0, (below(layer.topM) - below(layer.bottomM)) / 2);
}
