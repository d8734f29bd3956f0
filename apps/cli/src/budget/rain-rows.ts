import {
  decibels,
  diameterAtShareMm,
  dropClasses,
  marshallPalmerSpectrum,
  rainAttenuationLaw,
  rainAttenuationOneWayDbPerKm,
  rainLossTwoWayDb,
  rateFactorOfErrorDb,
  rayleighLimitMm,
  shareBelow,
  shareOfZLost,
  type ZrRelation,
} from "@rainreckon/core";
import { frequencyGHzOf, type KnownRadar } from "./known-radar.ts";
import type { BudgetRadar } from "./schema.ts";

/** Rain rates of the table, mm/h: light, moderate, heavy, torrential. */
export const RAIN_RATES_MM_PER_HOUR = [5, 20, 50, 100] as const;
const CLASS_WIDTH_MM = 0.1;
/** Larger drops break up. Common practice. */
const LARGEST_DROP_MM = 8;
const Z_ORDER = 6;
/** Volume times fall speed of Atlas and Ulbrich (1977). */
const RAIN_ORDER = 3.67;

/** What rain of several rates takes from a radar behind it, and which drops carry what. */
export function rainRows(
  radar: KnownRadar,
  rainKm: number,
  temperatureC: number,
  relation: ZrRelation,
): BudgetRadar["rain"] {
  const frequencyGHz = frequencyGHzOf(radar);
  const path = { elevationDeg: radar.elevationDeg, polarisationTiltDeg: 0 };
  const law = frequencyGHz === undefined ? undefined : rainAttenuationLaw(frequencyGHz, path);
  return RAIN_RATES_MM_PER_HOUR.map((rate) => {
    const spectrum = marshallPalmerSpectrum(rate);
    const lossDb = law === undefined ? null : rainLossTwoWayDb(rate, rainKm, law);
    const drops = {
      halfOfZAboveMm: diameterAtShareMm(spectrum, Z_ORDER, 0.5),
      halfOfRainAboveMm: diameterAtShareMm(spectrum, RAIN_ORDER, 0.5),
    };
    const common = {
      rainRateMmPerHour: rate,
      pathKm: rainKm,
      attenuationOneWayDbPerKm: law === undefined ? null : rainAttenuationOneWayDbPerKm(rate, law),
      lossTwoWayDb: lossDb,
      shareOfZLost: lossDb === null ? null : shareOfZLost(lossDb),
      rateShownMmPerHour: lossDb === null ? null : rate * rateFactorOfErrorDb(-lossDb, relation),
      ...drops,
    };
    if (radar.wavelengthM === undefined) {
      return {
        ...common,
        spectrumAttenuationOneWayDbPerKm: null,
        shareOfZBeyondRayleigh: null,
        shownOverZDb: null,
      };
    }
    const classes = dropClasses(spectrum, {
      wavelengthM: radar.wavelengthM,
      temperatureC,
      classWidthMm: CLASS_WIDTH_MM,
      maxDiameterMm: LARGEST_DROP_MM,
    });
    const sum = (of: (one: (typeof classes)[number]) => number) =>
      classes.reduce((total, one) => total + of(one), 0);
    return {
      ...common,
      spectrumAttenuationOneWayDbPerKm: sum((one) => one.attenuationOneWayDbPerKm),
      shareOfZBeyondRayleigh: 1 - shareBelow(spectrum, Z_ORDER, rayleighLimitMm(radar.wavelengthM)),
      shownOverZDb: decibels(sum((one) => one.equivalentZMm6PerM3) / sum((one) => one.zMm6PerM3)),
    };
  });
}
