import {
  type Air,
  airAbove,
  checkSurfaceAir,
  REFERENCE_SURFACE,
  type SurfaceAir,
  saturationDensityGPerM3,
} from "../../atmosphere.ts";
import { effectiveRadiusM } from "../../beam.ts";
import { gasLossTwoWayDb } from "../../gas-loss.ts";
import type { SweepHeader } from "../../model/radar.ts";
import { frequencyHz } from "../../units.ts";
import { addEffect, type PolarEcho } from "../polar-echo.ts";

/** Air as weather stations report it, at the height of the antenna. */
export interface StationAir {
  readonly temperatureC: number;
  /** At the station, not reduced to sea level. */
  readonly pressureHPa: number;
  readonly relativeHumidityPercent: number;
}

/**
 * Air with its vapour as a density.
 *
 * @throws RangeError where the humidity lies outside 0 to 100 %, or temperature or pressure cannot be
 */
export function surfaceAirOf({ temperatureC, pressureHPa, relativeHumidityPercent }: StationAir): SurfaceAir {
  if (!(relativeHumidityPercent >= 0 && relativeHumidityPercent <= 100)) {
    throw new RangeError(
      `the relative humidity must lie between 0 and 100 %, got ${relativeHumidityPercent}`,
    );
  }
  const vapourDensityGPerM3 = (relativeHumidityPercent / 100) * saturationDensityGPerM3(temperatureC);
  const air = { temperatureC, pressureHPa, vapourDensityGPerM3 };
  checkSurfaceAir(air);
  return air;
}

/** The reference atmosphere at a height above sea level, as values at the ground there. */
export function referenceAirAt(heightM: number): SurfaceAir {
  const air: Air = airAbove(heightM, REFERENCE_SURFACE);
  return {
    temperatureC: air.temperatureK - 273.15,
    pressureHPa: air.dryPressureHPa + air.vapourPressureHPa,
    vapourDensityGPerM3: (216.7 * air.vapourPressureHPa) / air.temperatureK,
  };
}

/** When gases are given back: by what the file says, always, or never. */
export type GasMode = "auto" | "on" | "off";

/** What the correction of gas did to a sweep. */
export interface GasReport {
  readonly corrected: boolean;
  readonly reason?: string;
  /** At the last gate. */
  readonly mostLossDb: number;
}

/**
 * Two-way loss by gases along the beams of a run, each geometry worked out once.
 *
 * Source: ITU-R P.676-13 line by line through the air of ITU-R P.835 along the refracted beam; see
 * `gasLossTwoWayDb`.
 */
export class GasLosses {
  readonly #surface: SurfaceAir | undefined;
  readonly #radiusM: number;
  readonly #tables = new Map<string, Float32Array>();

  /**
   * @param surface - air at the antennas; left out, the reference atmosphere at each antenna's height
   * @throws RangeError as `checkSurfaceAir`
   */
  constructor(surface?: SurfaceAir, radiusM = effectiveRadiusM()) {
    if (surface !== undefined) checkSurfaceAir(surface);
    this.#surface = surface;
    this.#radiusM = radiusM;
  }

  /** dB to each gate's centre, shape [gateCount]. */
  lossDb(header: SweepHeader, wavelengthM: number): Float32Array {
    const { site, elevationDeg, firstGateCentreM, gateLengthM, gateCount } = header;
    const key = [
      wavelengthM,
      site.antennaHeightM,
      elevationDeg,
      firstGateCentreM,
      gateLengthM,
      gateCount,
    ].join();
    let table = this.#tables.get(key);
    if (table === undefined) {
      const rangesM = Array.from({ length: gateCount }, (_, k) =>
        Math.max(0, firstGateCentreM + k * gateLengthM),
      );
      const surface = this.#surface ?? referenceAirAt(site.antennaHeightM);
      const frequencyGHz = frequencyHz(wavelengthM) / 1e9;
      table = Float32Array.from(gasLossTwoWayDb(rangesM, frequencyGHz, elevationDeg, this.#radiusM, surface));
      this.#tables.set(key, table);
    }
    return table;
  }
}

/**
 * Gives the loss by gases back to the echo, and starts the two-way loss with it.
 *
 * @param alreadyCorrected - as the file says (ODIM how/gasattn); undefined where it says nothing. `auto` corrects
 * only where it says that nothing was, because most senders have, and twice is wrong
 */
export function correctGas(
  echo: PolarEcho,
  losses: GasLosses,
  mode: GasMode = "auto",
  alreadyCorrected?: boolean,
): GasReport {
  const nothing = (reason: string): GasReport => ({ corrected: false, reason, mostLossDb: 0 });
  if (mode === "off") return nothing("switched off");
  if (mode === "auto" && alreadyCorrected !== false) {
    return nothing(
      alreadyCorrected
        ? "the sender has corrected it"
        : "the file does not say whether the sender has corrected it",
    );
  }
  const { wavelengthM, gateCount } = echo.header;
  if (wavelengthM === undefined) return nothing("the wavelength is not known");
  const ray = losses.lossDb(echo.header, wavelengthM);
  const effect = new Float32Array(echo.dbz.length);
  for (let from = 0; from < effect.length; from += gateCount) effect.set(ray, from);
  addEffect(echo, "gas", effect);
  echo.twoWayLossDb = effect.slice();
  return { corrected: true, mostLossDb: ray[gateCount - 1] ?? 0 };
}
