import { uniformStream } from "@rainreckon/verification";
import type { EchoQuality, HeldOutResidual } from "./error-model.ts";
import { normalNumber } from "./random-field.ts";

/** A view with nothing against it. */
export const CLEAR_VIEW: EchoQuality = {
  beamHeightM: Number.NaN,
  rangeKm: Number.NaN,
  lossDb: Number.NaN,
  blockedFraction: Number.NaN,
  screenedFraction: Number.NaN,
  bridgedFraction: Number.NaN,
};

/**
 * Residuals for tests, whose true spread is known: log-normal, gauges all over 80 km by 80 km, depths from 2 to 40 mm.
 *
 * @param spread - of the logarithm, by depth
 */
export function inventedResiduals(
  count: number,
  seed: number,
  spread: (depthMm: number) => number,
  gaugeSpread = 0,
): HeldOutResidual[] {
  const uniform = uniformStream(seed);
  return Array.from({ length: count }, () => {
    const depthMm = 2 * 20 ** uniform();
    const truthMm = (depthMm + 0.2) * Math.exp(spread(depthMm) * normalNumber(uniform)) - 0.2;
    const gaugeMm = Math.max(0, truthMm + gaugeSpread * depthMm * normalNumber(uniform));
    return {
      xKm: 80 * uniform(),
      yKm: 80 * uniform(),
      gaugeMm,
      depthMm,
      gaugeDistanceKm: 8,
      gaugeVarianceMm2: (gaugeSpread * depthMm) ** 2,
      quality: CLEAR_VIEW,
    };
  });
}
