import {
  bandOfWavelength,
  beamDiameterM,
  beamHeightM,
  checkSurfaceAir,
  dielectricFactor,
  effectiveRadiusM,
  effectiveVolumeM3,
  gasLossTwoWayDb,
  groundHit,
  layerShare,
  lightestVisibleRainMmPerHour,
  nyquistVelocityMPerS,
  rangeResolutionM,
  rateFactorOfErrorDb,
  rayleighCaution,
  rayleighLimitMm,
  type SurfaceAir,
  saturationDensityGPerM3,
  smallestVisibleDropMm,
  type TerrainProfile,
  unambiguousRangeM,
  waterPermittivity,
} from "@rainreckon/core";
import type { NamedRelation } from "../relate/relation-table.ts";
import { frequencyGHzOf, type KnownRadar } from "./known-radar.ts";
import { rainRows } from "./rain-rows.ts";
import type { Budget, BudgetRadar } from "./schema.ts";
import { type SensitivityOf, sensitivityOf } from "./sensitivity-of.ts";

/** What all radars of a budget meet alike. */
export interface BudgetSettings {
  readonly relation: NamedRelation;
  readonly temperatureC: number;
  readonly pressureHPa: number;
  readonly relativeHumidityPercent: number;
  readonly radomeLossDb: number;
  readonly detectionDb: number;
  readonly rainKm: number;
  readonly rangesKm: readonly number[];
  readonly meltingLayer: { readonly bottomM: number; readonly topM: number } | undefined;
  readonly terrain: TerrainProfile | undefined;
}

/**
 * The radar equation for radars side by side in the same air and rain.
 *
 * What a radar's metadata do not allow is null, and said among its remarks.
 */
export function reckonBudget(radars: readonly KnownRadar[], settings: BudgetSettings): Budget {
  const { relation, temperatureC, pressureHPa, relativeHumidityPercent } = settings;
  const surface: SurfaceAir = {
    temperatureC,
    pressureHPa,
    vapourDensityGPerM3: (relativeHumidityPercent / 100) * saturationDensityGPerM3(temperatureC),
  };
  checkSurfaceAir(surface);
  return {
    format: "rainreckon-budget-1",
    relation: { name: relation.name, a: relation.a, b: relation.b },
    oneDbRateFactor: rateFactorOfErrorDb(1, relation),
    air: {
      temperatureC,
      pressureHPa,
      relativeHumidityPercent,
      vapourDensityGPerM3: surface.vapourDensityGPerM3,
    },
    radomeLossTwoWayDb: settings.radomeLossDb,
    rainKm: settings.rainKm,
    meltingLayerAslM: settings.meltingLayer ?? null,
    radars: radars.map((radar) => reckonRadar(radar, settings, surface)),
  };
}

function reckonRadar(radar: KnownRadar, settings: BudgetSettings, surface: SurfaceAir): BudgetRadar {
  const { relation, temperatureC, terrain } = settings;
  const remarks = [...radar.remarks];
  const frequencyGHz = frequencyGHzOf(radar);
  const sensitivity = sensitivityOf(radar, settings.detectionDb);
  remarks.push(...sensitivity.remarks);
  if (radar.wavelengthM === undefined)
    remarks.push("no wavelength: no loss by gases or rain (give --frequency or --wavelength)");
  if (radar.beamWidthDeg === undefined)
    remarks.push(
      "no beam width: what the beam averages over and single drops are left out (give --beam-width)",
    );
  const caution = radar.wavelengthM === undefined ? undefined : rayleighCaution(radar.wavelengthM);
  if (caution !== undefined) remarks.push(caution);
  const antennaM = radar.antennaHeightM;
  if (antennaM === undefined && (settings.meltingLayer !== undefined || terrain !== undefined))
    remarks.push(
      "no antenna height: nothing above the sea, melting layer and terrain left out (give --antenna-height)",
    );
  const hit =
    terrain === undefined || antennaM === undefined
      ? undefined
      : groundHit(terrain, antennaM, radar.elevationDeg, effectiveRadiusM());
  const nyquist =
    radar.prfHz !== undefined && radar.wavelengthM !== undefined
      ? nyquistVelocityMPerS(radar.prfHz, radar.wavelengthM)
      : radar.nyquistVelocityMPerS;
  return {
    name: radar.name,
    origin: radar.origin,
    band: (radar.wavelengthM === undefined ? undefined : bandOfWavelength(radar.wavelengthM)?.letter) ?? null,
    frequencyGHz: frequencyGHz ?? null,
    wavelengthCm: radar.wavelengthM === undefined ? null : 100 * radar.wavelengthM,
    beamWidthDeg: radar.beamWidthDeg ?? null,
    antennaGainDb: radar.antennaGainDb ?? null,
    peakPowerW: radar.peakPowerW ?? null,
    pulseLengthMicroseconds: radar.pulseLengthS === undefined ? null : 1e6 * radar.pulseLengthS,
    elevationDeg: radar.elevationDeg,
    antennaHeightAslM: antennaM ?? null,
    radarConstantDb: sensitivity.radarConstantDb ?? null,
    noiseDbm: sensitivity.noiseDbm ?? null,
    sensitivity: sensitivity.summary,
    dielectricFactorWater:
      frequencyGHz === undefined ? null : dielectricFactor(waterPermittivity(frequencyGHz, temperatureC)),
    rayleighLimitMm: radar.wavelengthM === undefined ? null : rayleighLimitMm(radar.wavelengthM),
    unambiguousRangeKm: radar.prfHz === undefined ? null : unambiguousRangeM(radar.prfHz) / 1000,
    nyquistVelocityMPerS: nyquist ?? null,
    groundHitKm: hit === undefined ? null : hit.slantRangeM / 1000,
    ranges: rangeRows(radar, sensitivity, settings, surface),
    rain: rainRows(radar, settings.rainKm, temperatureC, relation),
    remarks,
  };
}

function rangeRows(
  radar: KnownRadar,
  sensitivity: SensitivityOf,
  settings: BudgetSettings,
  surface: SurfaceAir,
): BudgetRadar["ranges"] {
  const radiusM = effectiveRadiusM();
  const rangesM = settings.rangesKm.map((km) => 1000 * km);
  const frequencyGHz = frequencyGHzOf(radar);
  const gas =
    frequencyGHz === undefined
      ? undefined
      : gasLossTwoWayDb(rangesM, frequencyGHz, radar.elevationDeg, radiusM, surface);
  const depthM = radar.pulseLengthS === undefined ? radar.gateLengthM : rangeResolutionM(radar.pulseLengthS);
  return rangesM.map((rangeM, k) => {
    const centreM = beamHeightM(rangeM, radar.elevationDeg, radiusM);
    const aslM = radar.antennaHeightM === undefined ? null : radar.antennaHeightM + centreM;
    const beam = radar.beamWidthDeg;
    const widthM = beam === undefined ? null : beamDiameterM(rangeM, beam.vertical);
    const gasLossDb = gas?.[k];
    const weakest = sensitivity.at(rangeM, gasLossDb ?? 0, settings.radomeLossDb);
    const volume =
      beam === undefined || depthM === undefined ? undefined : effectiveVolumeM3(rangeM, beam, depthM);
    return {
      rangeKm: rangeM / 1000,
      beamCentreAboveAntennaM: centreM,
      beamCentreAslM: aslM,
      beamWidthM: widthM,
      meltingLayerShare:
        settings.meltingLayer === undefined || aslM === null || widthM === null
          ? null
          : layerShare(aslM, widthM, settings.meltingLayer),
      gasLossTwoWayDb: gasLossDb ?? null,
      weakestEchoDbz: weakest ?? null,
      lightestRainMmPerHour:
        weakest === undefined ? null : lightestVisibleRainMmPerHour(weakest, settings.relation),
      smallestDropMm:
        weakest === undefined || volume === undefined ? null : smallestVisibleDropMm(weakest, volume),
    };
  });
}
