import type { Air } from "./atmosphere.ts";
import { type GasLine, OXYGEN_LINES, VAPOUR_LINES } from "./p676-lines.ts";

/** Specific attenuation by gases, dB/km ONE way. */
export interface GasAttenuation {
  readonly oxygenDbPerKm: number;
  readonly vapourDbPerKm: number;
  readonly totalDbPerKm: number;
}

/**
 * Specific attenuation of the air, line by line, ONE way.
 *
 * Source: Recommendation ITU-R P.676-13 (2022), Annex 1, equations 1 to 9 with Tables 1 and 2.
 *
 * @param frequencyGHz - 1 to 1000
 * @param air - the pressure is that of the DRY air; see `airOf` for what barometers show
 * @throws RangeError outside that range
 */
export function gasAttenuationOneWay(frequencyGHz: number, air: Air): GasAttenuation {
  if (!(frequencyGHz >= 1 && frequencyGHz <= 1000)) {
    throw new RangeError(`ITU-R P.676 holds from 1 to 1000 GHz, got ${frequencyGHz}`);
  }
  const theta = 300 / air.temperatureK;
  const p = air.dryPressureHPa;
  const e = air.vapourPressureHPa;
  let oxygen = dryContinuum(frequencyGHz, p, e, theta);
  for (const [f0, a1, a2, a3, a4, a5, a6] of OXYGEN_LINES) {
    const strength = a1 * 1e-7 * p * theta ** 3 * Math.exp(a2 * (1 - theta));
    const pressureWidth = a3 * 1e-4 * (p * theta ** (0.8 - a4) + 1.1 * e * theta);
    const width = Math.sqrt(pressureWidth ** 2 + 2.25e-6);
    const interference = (a5 + a6 * theta) * 1e-4 * (p + e) * theta ** 0.8;
    oxygen += strength * lineShape(frequencyGHz, f0, width, interference);
  }
  let vapour = 0;
  for (const line of e > 0 ? VAPOUR_LINES : ([] as readonly GasLine[])) {
    const [f0, b1, b2, b3, b4, b5, b6] = line;
    const strength = b1 * 0.1 * e * theta ** 3.5 * Math.exp(b2 * (1 - theta));
    const pressureWidth = b3 * 1e-4 * (p * theta ** b4 + b5 * e * theta ** b6);
    const width =
      0.535 * pressureWidth + Math.sqrt(0.217 * pressureWidth ** 2 + (2.1316e-12 * f0 * f0) / theta);
    vapour += strength * lineShape(frequencyGHz, f0, width, 0);
  }
  const oxygenDbPerKm = 0.182 * frequencyGHz * oxygen;
  const vapourDbPerKm = 0.182 * frequencyGHz * vapour;
  return { oxygenDbPerKm, vapourDbPerKm, totalDbPerKm: oxygenDbPerKm + vapourDbPerKm };
}

function lineShape(f: number, f0: number, width: number, interference: number): number {
  const below = f0 - f;
  const above = f0 + f;
  return (
    (f / f0) *
    ((width - interference * below) / (below * below + width * width) +
      (width - interference * above) / (above * above + width * width))
  );
}

/** Debye spectrum of oxygen below 10 GHz and absorption of nitrogen above 100 GHz. */
function dryContinuum(f: number, p: number, e: number, theta: number): number {
  const width = 5.6e-4 * (p + e) * theta ** 0.8;
  return (
    f *
    p *
    theta ** 2 *
    (6.14e-5 / (width * (1 + (f / width) ** 2)) + (1.4e-12 * p * theta ** 1.5) / (1 + 1.9e-5 * f ** 1.5))
  );
}
