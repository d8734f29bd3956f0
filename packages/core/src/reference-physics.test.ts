import {
  ATTENUATION_CORRECTION_ENTRIES,
  type CheckValue,
  CORE_NOT_APPLICABLE,
  inputNumber,
  inputNumbers,
  runReferenceSuite,
} from "@rainreckon/test-data/published";
import {
  antennaGainDb,
  beamPatternDb,
  beamWidthOfDishDeg,
  gaussianBeamGainDb,
  TWO_WAY_WIDTH_RATIO,
} from "./antenna.ts";
import { airOf, REFERENCE_SURFACE, saturationDensityGPerM3, vapourPressureHPa } from "./atmosphere.ts";
import { effectiveRadiusM } from "./beam.ts";
import {
  dielectricFactor,
  equivalentOffsetDb,
  ICE_DIELECTRIC_FACTOR,
  WATER_DIELECTRIC_FACTOR,
  waterPermittivity,
} from "./dielectric.ts";
import {
  type DropSpectrum,
  diameterAtShareMm,
  dropSpectrum,
  marshallPalmerSpectrum,
  massWeightedDiameterMm,
  normalisedSpectrum,
  spectrumRateMmPerHour,
  spectrumZMm6PerM3,
  waterContentGPerM3,
  waterOfEqualDropsGPerM3,
  zOfEqualDropsMm6PerM3,
} from "./drop-sizes.ts";
import { ATLAS_SRIVASTAVA_SEKHON_1973, ATLAS_ULBRICH_1977 } from "./fall-speed.ts";
import { type GasAttenuation, gasAttenuationOneWay } from "./gas-attenuation.ts";
import { gasLossTwoWayDb } from "./gas-loss.ts";
import { scatteringOfDrop } from "./mie.ts";
import { OXYGEN_LINES, VAPOUR_LINES } from "./p676-lines.ts";
import { pathLossTwoWayDb } from "./path-loss.ts";
import {
  effectiveVolumeM3,
  geometricVolumeM3,
  nyquistVelocityMPerS,
  rangeResolutionM,
  unambiguousRangeM,
} from "./pulse.ts";
import {
  type RadarSystem,
  radarConstantDb,
  receivedPowerDbm,
  reflectivityOfPowerDbz,
} from "./radar-equation.ts";
import {
  type AttenuationLaw,
  attenuationOfZLaw,
  attenuationOfZOneWayDbPerKm,
  HORIZONTAL,
  rainAttenuationLaw,
  rainAttenuationOneWayDbPerKm,
  rainLossTwoWayDb,
  VERTICAL,
} from "./rain-attenuation.ts";
import { rayleighLimitMm } from "./rayleigh.ts";
import { rainRateMmPerHour } from "./relations.ts";
import { detectableAt1KmDbz, detectableDbz, noisePowerDbm } from "./sensitivity.ts";
import { dropClasses } from "./spectrum-scattering.ts";
import { decibels, wavelengthM, zMm6PerM3 } from "./units.ts";
import { zrRelation } from "./zr-relation.ts";

function wavelengthOf(entry: CheckValue): number {
  return wavelengthM(1e9 * inputNumber(entry, "frequency_GHz"));
}

function bothWays(beamWidthDeg: number) {
  return { horizontal: beamWidthDeg, vertical: beamWidthDeg };
}

function systemOf(entry: CheckValue): RadarSystem {
  return {
    peakPowerW: inputNumber(entry, "peak_power_W"),
    antennaGainDb: inputNumber(entry, "antenna_gain_dB"),
    beamWidthDeg: {
      horizontal: inputNumber(entry, "beamwidth_h_deg"),
      vertical: inputNumber(entry, "beamwidth_v_deg"),
    },
    pulseLengthS: inputNumber(entry, "pulse_length_s"),
    wavelengthM: wavelengthOf(entry),
    systemLossDb: inputNumber(entry, "two_way_system_loss_dB"),
    dielectricFactor: inputNumber(entry, "K2"),
  };
}

/** Forward, and back again: the equation must undo itself. */
function powerOf(entry: CheckValue): number {
  const constantDb = radarConstantDb(systemOf(entry));
  const rangeM = 1000 * inputNumber(entry, "range_km");
  const dbz = inputNumber(entry, "reflectivity_dBZ");
  const powerDbm = receivedPowerDbm(dbz, rangeM, constantDb);
  const back = reflectivityOfPowerDbz(powerDbm, rangeM, constantDb);
  return Math.abs(back - dbz) < 1e-9 ? powerDbm : Number.NaN;
}

function volumeOf(entry: CheckValue, volume: typeof geometricVolumeM3): number {
  return volume(
    1000 * inputNumber(entry, "range_km"),
    bothWays(inputNumber(entry, "beamwidth_deg")),
    rangeResolutionM(1e-6 * inputNumber(entry, "pulse_length_us")),
  );
}

function gainOf(entry: CheckValue): number {
  return antennaGainDb(bothWays(inputNumber(entry, "beamwidth_deg")), inputNumber(entry, "k2"));
}

runReferenceSuite({
  topics: ["a-radar-equation"],
  notApplicable: CORE_NOT_APPLICABLE["a-radar-equation"],
  adapters: [
    ["radar-pr-*", powerOf],
    ["radar-const-*", (entry) => radarConstantDb(systemOf(entry))],
    [
      "radar-dbz0-*",
      (entry) =>
        detectableAt1KmDbz(inputNumber(entry, "min_detectable_signal_dBm"), radarConstantDb(systemOf(entry))),
    ],
    [
      /^mindet-/,
      (entry) => {
        const rangeKm = inputNumber(entry, "range_km");
        const gas = "gas_one_way_dB_per_km" in entry.inputs ? inputNumber(entry, "gas_one_way_dB_per_km") : 0;
        return detectableDbz(1000 * rangeKm, inputNumber(entry, "dbz0_at_1km_dBZ"), 2 * gas * rangeKm);
      },
    ],
    ["noise-ktb", (entry) => noisePowerDbm(1, 0, inputNumber(entry, "temperature_K"))],
    [
      "noise-1us",
      (entry) =>
        noisePowerDbm(
          inputNumber(entry, "bandwidth_Hz"),
          inputNumber(entry, "noise_figure_dB"),
          inputNumber(entry, "temperature_K"),
        ),
    ],
    ["ksq-water", () => WATER_DIELECTRIC_FACTOR],
    ["ksq-ice-917", () => ICE_DIELECTRIC_FACTOR.solidDiameters],
    ["ksq-ice-melted", () => ICE_DIELECTRIC_FACTOR.meltedDiameters],
    [
      "dbze-ice-*",
      (entry) => equivalentOffsetDb(inputNumber(entry, "K2_ice"), inputNumber(entry, "K2_water")),
    ],
    [
      "ksq-liebe-*",
      (entry) =>
        dielectricFactor(
          waterPermittivity(inputNumber(entry, "frequency_GHz"), inputNumber(entry, "temperature_C")),
        ),
    ],
    ["gain-piksq-*", gainOf],
    ["gain-gaussian-*", (entry) => gaussianBeamGainDb(bothWays(inputNumber(entry, "beamwidth_deg")))],
    ["bw127-*", (entry) => beamWidthOfDishDeg(inputNumber(entry, "dish_diameter_m"), wavelengthOf(entry))],
    ["beam-oneway-*", (entry) => beamPatternDb(inputNumber(entry, "offset_over_beamwidth"), "one-way")],
    [/^beam-twoway-\d/, (entry) => beamPatternDb(inputNumber(entry, "offset_over_beamwidth"), "two-way")],
    ["beam-twoway-width", () => TWO_WAY_WIDTH_RATIO],
    ["pulse-*", (entry) => rangeResolutionM(1e-6 * inputNumber(entry, "pulse_length_us"))],
    ["resvol-geo-*", (entry) => volumeOf(entry, geometricVolumeM3)],
    ["resvol-eff-*", (entry) => volumeOf(entry, effectiveVolumeM3)],
    ["rmax-*", (entry) => unambiguousRangeM(inputNumber(entry, "prf_Hz")) / 1000],
    ["vmax-*", (entry) => nyquistVelocityMPerS(inputNumber(entry, "prf_Hz"), wavelengthOf(entry))],
    ["rayleigh-d16-*", (entry) => rayleighLimitMm(wavelengthOf(entry))],
    [
      "mie-rayleigh-*",
      (entry) =>
        scatteringOfDrop(
          inputNumber(entry, "drop_diameter_mm"),
          wavelengthOf(entry),
          inputNumber(entry, "temperature_C"),
        ).mieOverRayleighDb,
    ],
  ],
});

/** The exponential spectrum that an entry gives by its two numbers. */
function exponentialOf(entry: CheckValue): DropSpectrum {
  return dropSpectrum(inputNumber(entry, "N0_per_m3_mm"), 0, inputNumber(entry, "lambda_per_mm"));
}

function gammaOf(entry: CheckValue): DropSpectrum {
  const n0 = inputNumber(entry, "N0_per_m3_per_mm_to_1plusmu");
  return dropSpectrum(n0, inputNumber(entry, "mu"), inputNumber(entry, "lambda_per_mm"));
}

function normalisedOf(entry: CheckValue): DropSpectrum {
  return normalisedSpectrum(
    inputNumber(entry, "Nw_per_m3_mm"),
    inputNumber(entry, "mu"),
    inputNumber(entry, "Dm_mm"),
  );
}

/** A and b of the relation that exponential spectra of one N0 follow, from two of them. */
function impliedRelation(n0: number): { a: number; b: number } {
  const [narrow, wide] = [dropSpectrum(n0, 0, 4), dropSpectrum(n0, 0, 2)];
  const z = spectrumZMm6PerM3(wide);
  const rate = spectrumRateMmPerHour(wide);
  const b = Math.log(z / spectrumZMm6PerM3(narrow)) / Math.log(rate / spectrumRateMmPerHour(narrow));
  return { a: z / rate ** b, b };
}

function meanZ(entry: CheckValue): number {
  const samples = inputNumbers(entry, "samples_dBZ");
  return samples.reduce((sum, dbz) => sum + zMm6PerM3(dbz), 0) / samples.length;
}

runReferenceSuite({
  topics: ["b-reflectivity-and-dsd"],
  notApplicable: CORE_NOT_APPLICABLE["b-reflectivity-and-dsd"],
  adapters: [
    ["dbz2z-*", (entry) => zMm6PerM3(inputNumber(entry, "reflectivity_dBZ"))],
    ["z2dbz-*", (entry) => decibels(inputNumber(entry, "Z_mm6_m3"))],
    ["avg-linear-*", (entry) => decibels(meanZ(entry))],
    [
      "avg-order-rain",
      (entry) => {
        const relation = zrRelation(inputNumber(entry, "A"), inputNumber(entry, "b"), entry.source);
        const rates = inputNumbers(entry, "samples_dBZ").map((dbz) => rainRateMmPerHour(dbz, relation));
        const meanRate = rates.reduce((sum, rate) => sum + rate, 0) / rates.length;
        return rainRateMmPerHour(decibels(meanZ(entry)), relation) - meanRate;
      },
    ],
    [
      "sixth-1drop",
      (entry) => zOfEqualDropsMm6PerM3(inputNumber(entry, "count_per_m3"), inputNumber(entry, "diameter_mm")),
    ],
    [
      "sixth-1drop-*-dbz",
      (entry) =>
        decibels(
          zOfEqualDropsMm6PerM3(inputNumber(entry, "count_per_m3"), inputNumber(entry, "diameter_mm")),
        ),
    ],
    [
      /^sixth-ratio-(z|2)$/,
      (entry) => zOfEqualDropsMm6PerM3(1, inputNumber(entry, "diameter_ratio")) / zOfEqualDropsMm6PerM3(1, 1),
    ],
    [
      "sixth-ratio-volume",
      (entry) => {
        const ratio = inputNumber(entry, "diameter_ratio");
        const small = zOfEqualDropsMm6PerM3(1, ratio) / zOfEqualDropsMm6PerM3(1, 1);
        return Math.round(waterOfEqualDropsGPerM3(small, 1) / waterOfEqualDropsGPerM3(1, ratio));
      },
    ],
    [
      "mp-lambda-*",
      (entry) => marshallPalmerSpectrum(inputNumber(entry, "nominal_rain_rate_mm_h")).lambdaPerMm,
    ],
    [/^mp-z-R/, (entry) => spectrumZMm6PerM3(exponentialOf(entry))],
    [
      "mp-z-trunc6-*",
      (entry) =>
        spectrumZMm6PerM3(
          marshallPalmerSpectrum(inputNumber(entry, "nominal_rain_rate_mm_h")),
          inputNumber(entry, "max_diameter_mm"),
        ),
    ],
    ["mp-lwc-*", (entry) => waterContentGPerM3(exponentialOf(entry))],
    ["mp-rain-au77-*", (entry) => spectrumRateMmPerHour(exponentialOf(entry), ATLAS_ULBRICH_1977)],
    ["mp-rain-a73-*", (entry) => spectrumRateMmPerHour(exponentialOf(entry), ATLAS_SRIVASTAVA_SEKHON_1973)],
    ["exp-dsd-zr-A", (entry) => impliedRelation(inputNumber(entry, "N0_per_m3_mm")).a],
    ["exp-dsd-zr-b", () => impliedRelation(8000).b],
    ["exp-dsd-zr-mp-A", () => spectrumZMm6PerM3(marshallPalmerSpectrum(1))],
    ["exp-d0", () => diameterAtShareMm(dropSpectrum(1, 0, 1), 3, 0.5)],
    ["exp-dm", () => massWeightedDiameterMm(dropSpectrum(1, 0, 1))],
    ["gamma-z-*", (entry) => spectrumZMm6PerM3(gammaOf(entry))],
    ["gamma-lwc-*", (entry) => waterContentGPerM3(gammaOf(entry))],
    ["gamma-rain-*", (entry) => spectrumRateMmPerHour(gammaOf(entry))],
    ["gamma-dm-*", (entry) => massWeightedDiameterMm(gammaOf(entry))],
    ["normgamma-z-*", (entry) => spectrumZMm6PerM3(normalisedOf(entry))],
    ["normgamma-lwc-*", (entry) => waterContentGPerM3(normalisedOf(entry))],
    ["normgamma-rain-*", (entry) => spectrumRateMmPerHour(normalisedOf(entry))],
  ],
});

/** Law of an entry's frequency and polarisation letter. */
function lawOf(entry: CheckValue, letter = entry.inputs.polarisation): AttenuationLaw {
  return rainAttenuationLaw(inputNumber(entry, "frequency_GHz"), letter === "V" ? VERTICAL : HORIZONTAL);
}

/** Law of an entry's elevation and tilt. */
function tiltedLawOf(entry: CheckValue): AttenuationLaw {
  return rainAttenuationLaw(inputNumber(entry, "frequency_GHz"), {
    elevationDeg: inputNumber(entry, "elevation_deg"),
    polarisationTiltDeg: inputNumber(entry, "polarisation_tilt_deg"),
  });
}

function givenLawOf(entry: CheckValue): AttenuationLaw {
  return { coefficient: inputNumber(entry, "alpha_k"), exponent: inputNumber(entry, "beta") };
}

runReferenceSuite({
  topics: ["e-rain-attenuation"],
  except: ATTENUATION_CORRECTION_ENTRIES,
  notApplicable: CORE_NOT_APPLICABLE["e-rain-attenuation"],
  adapters: [
    [/^p838-(t5-)?kH-/, (entry) => lawOf(entry, "H").coefficient],
    [/^p838-(t5-)?kV-/, (entry) => lawOf(entry, "V").coefficient],
    [/^p838-(t5-)?alphaH-/, (entry) => lawOf(entry, "H").exponent],
    [/^p838-(t5-)?alphaV-/, (entry) => lawOf(entry, "V").exponent],
    [
      /^p838-gamma[HV]-/,
      (entry) => rainAttenuationOneWayDbPerKm(inputNumber(entry, "rain_rate_mm_h"), lawOf(entry)),
    ],
    [/^p838-(valex-row\d+|circ-94)-k$/, (entry) => tiltedLawOf(entry).coefficient],
    [/^p838-valex-row\d+-alpha$/, (entry) => tiltedLawOf(entry).exponent],
    [
      /^p838-valex-row\d+-gamma$/,
      (entry) => rainAttenuationOneWayDbPerKm(inputNumber(entry, "rain_rate_mm_h"), tiltedLawOf(entry)),
    ],
    [
      "twoway-*",
      (entry) =>
        rainLossTwoWayDb(inputNumber(entry, "rain_rate_mm_h"), inputNumber(entry, "path_km"), lawOf(entry)),
    ],
    [
      "mie-atten-mp-*",
      (entry) =>
        dropClasses(marshallPalmerSpectrum(inputNumber(entry, "nominal_rain_rate_mm_h")), {
          wavelengthM: wavelengthOf(entry),
          temperatureC: inputNumber(entry, "temperature_C"),
          classWidthMm: inputNumber(entry, "bin_width_mm"),
          maxDiameterMm: inputNumber(entry, "max_diameter_mm"),
        }).reduce((sum, { attenuationOneWayDbPerKm }) => sum + attenuationOneWayDbPerKm, 0),
    ],
    [
      "kz-*",
      (entry) => {
        const relation = zrRelation(inputNumber(entry, "A"), inputNumber(entry, "b"), entry.source);
        const law = attenuationOfZLaw(lawOf(entry, "H"), relation);
        return attenuationOfZOneWayDbPerKm(inputNumber(entry, "reflectivity_dBZ"), law);
      },
    ],
    [
      "hb-uniform-k",
      (entry) => attenuationOfZOneWayDbPerKm(inputNumber(entry, "reflectivity_dBZ"), givenLawOf(entry)),
    ],
    // What is measured behind even rain is the true value less the loss both ways.
    [
      "hb-uniform-zm20",
      (entry) => {
        const trueDbz = inputNumber(entry, "true_dBZ");
        const oneWay = attenuationOfZOneWayDbPerKm(trueDbz, givenLawOf(entry));
        return (
          trueDbz - rainLossTwoWayDb(1, inputNumber(entry, "range_km"), { coefficient: oneWay, exponent: 1 })
        );
      },
    ],
  ],
});

function gasOf(entry: CheckValue, changed: { frequencyGHz?: number } = {}): GasAttenuation {
  const temperatureK = inputNumber(entry, "temperature_K");
  const density = inputNumber(entry, "vapour_density_g_m3");
  const vapour = vapourPressureHPa(density, temperatureK);
  return gasAttenuationOneWay(changed.frequencyGHz ?? inputNumber(entry, "frequency_GHz"), {
    temperatureK,
    dryPressureHPa: inputNumber(entry, "dry_pressure_hPa"),
    vapourPressureHPa: vapour,
  });
}

/** Air of the entries that give none of their own: those of the tables, dry pressure 1013.25 hPa at 15 C. */
function gasAt(frequencyGHz: number, vapourDensityGPerM3: number): GasAttenuation {
  const temperatureK = 288.15;
  return gasAttenuationOneWay(frequencyGHz, {
    temperatureK,
    dryPressureHPa: 1013.25,
    vapourPressureHPa: vapourPressureHPa(vapourDensityGPerM3, temperatureK),
  });
}

/** Where a function is least between two ends: golden section. */
function leastBetween(low: number, high: number, of: (x: number) => number): number {
  const golden = (Math.sqrt(5) - 1) / 2;
  let [from, to] = [low, high];
  while (to - from > 1e-4) {
    const [left, right] = [to - golden * (to - from), from + golden * (to - from)];
    if (of(left) < of(right)) to = right;
    else from = left;
  }
  return (from + to) / 2;
}

/** Column of a line table by its name: f0, or a letter and a number from 1. */
function columnSum(entry: CheckValue): number {
  const name = String(entry.inputs.column);
  const column = name === "f0" ? 0 : Number(name.slice(1));
  const lines = entry.inputs.table === "o2" ? OXYGEN_LINES : VAPOUR_LINES;
  return lines.reduce((sum, line) => sum + (line[column] as number), 0);
}

runReferenceSuite({
  topics: ["f-gaseous-attenuation"],
  notApplicable: CORE_NOT_APPLICABLE["f-gaseous-attenuation"],
  adapters: [
    [/^(p676-valex-o|gas-o)-/, (entry) => gasOf(entry).oxygenDbPerKm],
    [/^(p676-valex-w|gas-w)-/, (entry) => gasOf(entry).vapourDbPerKm],
    [/^gas-(total|line)-/, (entry) => gasOf(entry).totalDbPerKm],
    ["gas-2way-*", (entry) => pathLossTwoWayDb(gasOf(entry).totalDbPerKm, inputNumber(entry, "path_km"))],
    [
      "gas-totalpressure-*",
      (entry) =>
        gasAttenuationOneWay(
          inputNumber(entry, "frequency_GHz"),
          airOf(
            inputNumber(entry, "temperature_K"),
            inputNumber(entry, "total_pressure_hPa"),
            inputNumber(entry, "vapour_density_g_m3"),
          ),
        ).totalDbPerKm,
    ],
    [
      "gas-e",
      (entry) =>
        vapourPressureHPa(inputNumber(entry, "vapour_density_g_m3"), inputNumber(entry, "temperature_K")),
    ],
    [
      "gas-60-humidity-change",
      (entry) => {
        const frequencyGHz = inputNumber(entry, "frequency_GHz");
        const before = gasAt(frequencyGHz, inputNumber(entry, "from_g_m3")).totalDbPerKm;
        return gasAt(frequencyGHz, inputNumber(entry, "to_g_m3")).totalDbPerKm / before - 1;
      },
    ],
    [
      "gas-22-humidity-ratio",
      (entry) => {
        const frequencyGHz = inputNumber(entry, "frequency_GHz");
        const before = gasAt(frequencyGHz, inputNumber(entry, "from_g_m3")).vapourDbPerKm;
        return gasAt(frequencyGHz, inputNumber(entry, "to_g_m3")).vapourDbPerKm / before;
      },
    ],
    [
      "gas-peak-22",
      (entry) => leastBetween(21, 24, (frequencyGHz) => -gasOf(entry, { frequencyGHz }).vapourDbPerKm),
    ],
    [
      "gas-window-ka",
      (entry) => leastBetween(25, 45, (frequencyGHz) => gasOf(entry, { frequencyGHz }).totalDbPerKm),
    ],
    [
      "gas-window-w",
      (entry) => leastBetween(70, 110, (frequencyGHz) => gasOf(entry, { frequencyGHz }).totalDbPerKm),
    ],
    ["p676-o2-nlines", () => OXYGEN_LINES.length],
    ["p676-h2o-nlines", () => VAPOUR_LINES.length],
    ["p676-*-sum-*", columnSum],
    ["gas-sat-15C", (entry) => saturationDensityGPerM3(inputNumber(entry, "temperature_C"))],
    [
      "gas-slant-*",
      (entry) =>
        gasLossTwoWayDb(
          [1000 * inputNumber(entry, "slant_range_km")],
          inputNumber(entry, "frequency_GHz"),
          inputNumber(entry, "elevation_deg"),
          effectiveRadiusM(),
          REFERENCE_SURFACE,
        )[0],
    ],
  ],
});
