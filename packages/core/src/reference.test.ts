import {
  type CheckValue,
  CORE_NOT_APPLICABLE,
  GEODESIC_ENTRIES,
  inputNumber,
  runReferenceSuite,
} from "@rainreckon/test-data/published";
import { RADAR_BANDS } from "./bands.ts";
import {
  arcDistanceM,
  beamAboveArc,
  beamDiameterM,
  beamHeightM,
  effectiveRadiusFactor,
  effectiveRadiusM,
  refractivityGradientPerKm,
} from "./beam.ts";
import { blockageCorrectionDb, gaussianBlockedFraction, uniformBlockedFraction } from "./blockage.ts";
import { resolveCap } from "./cap.ts";
import { dropSpectrum, RAIN_RATE_PER_D3, spectrumZMm6PerM3 } from "./drop-sizes.ts";
import { RAD_PER_DEG } from "./echo/attenuation/specific-phase.ts";
import {
  ATLAS_SRIVASTAVA_SEKHON_1973,
  ATLAS_ULBRICH_1977,
  fallSpeedFactor,
  fallSpeedMPerS,
  measuredFallSpeedMPerS,
} from "./fall-speed.ts";
import { findRelation, rainRateMmPerHour, reflectivityDbz } from "./relations.ts";
import { DB_PER_NEPER } from "./spectrum-scattering.ts";
import { heldDepthMm, MM_PER_INCH, waterFlowM3PerS, waterVolumeM3, wavelengthM, zM3 } from "./units.ts";
import { type ZrRelation, zrRelation } from "./zr-relation.ts";

/** Our names of the relations that the check values call by names of their own. */
const CATALOGUE_NAMES: Readonly<Record<string, string>> = {
  "marshall-palmer": "marshall-1955-200/1.6",
  "convective-300-14": "fulton-1998-300/1.4",
  "rosenfeld-tropical": "rosenfeld-1993-250/1.2",
  "cool-east-stratiform": "us-east-practice-130/2.0",
  "cool-west-stratiform": "us-west-practice-75/2.0",
  "joss-waldvogel-1970": "joss-1970-300/1.5",
  "joss1970-drizzle": "joss-1970-140/1.5",
  "joss1970-widespread": "joss-1970-250/1.5",
  "joss1970-thunderstorm": "joss-1970-500/1.5",
  "blanchard-orographic": "blanchard-1953-31/1.71",
  "jones-thunderstorm": "jones-1956-486/1.37",
  "fujiwara-continuous": "fujiwara-1965-205/1.48",
  "fujiwara-showers": "fujiwara-1965-300/1.37",
  "fujiwara-thunderstorm": "fujiwara-1965-450/1.46",
  "german-256-142": "german-practice-256/1.42",
  "swiss-316-15": "joss-1998-316/1.5",
  "leinonen-2012": "leinonen-2012-223/1.53",
  "sekhon-srivastava-snow": "sekhon-1970-1780/2.21",
  "gunn-marshall-snow": "gunn-1958-2000/2.0",
};

function catalogueRelation(entry: CheckValue): ZrRelation {
  const name = CATALOGUE_NAMES[String(entry.inputs.relation)];
  return findRelation(name ?? `no name for ${String(entry.inputs.relation)}`);
}

/** Relation of an entry's A and b; of 1 and b where the answer does not depend on A. */
function relationOf(entry: CheckValue): ZrRelation {
  const a = "A" in entry.inputs ? inputNumber(entry, "A") : 1;
  return zrRelation(a, inputNumber(entry, "b"), entry.source);
}

/** Effective radius of an entry, from its own earth radius and factor. */
function radiusOf(entry: CheckValue): number {
  return effectiveRadiusM(inputNumber(entry, "ke"), earthRadiusOf(entry));
}

function earthRadiusOf(entry: CheckValue): number {
  return 1000 * inputNumber(entry, "earth_radius_km");
}

function heightOf(entry: CheckValue): number {
  const antennaM = "antenna_height_m" in entry.inputs ? inputNumber(entry, "antenna_height_m") : 0;
  const slantRangeM = 1000 * inputNumber(entry, "slant_range_km");
  return antennaM + beamHeightM(slantRangeM, inputNumber(entry, "elevation_deg"), radiusOf(entry));
}

function arcOf(entry: CheckValue): number {
  const slantRangeM = 1000 * inputNumber(entry, "slant_range_km");
  return arcDistanceM(slantRangeM, inputNumber(entry, "elevation_deg"), radiusOf(entry));
}

/** Partial blockage of a beam whose radius is the unit of length. */
function terrainOverBeamRadius(entry: CheckValue): number {
  return inputNumber(entry, "terrain_minus_beam_centre_over_half_beam");
}

/** Antenna, terrain and beam in metres. The entry was made for a 6371 km earth and standard refraction. */
function blockedFromHeights(entry: CheckValue): number {
  const slantRangeM = 1000 * inputNumber(entry, "slant_range_km");
  const centreM =
    inputNumber(entry, "antenna_height_m") +
    beamHeightM(slantRangeM, inputNumber(entry, "elevation_deg"), effectiveRadiusM());
  const beamRadiusM = beamDiameterM(slantRangeM, inputNumber(entry, "beamwidth_deg")) / 2;
  return uniformBlockedFraction(inputNumber(entry, "terrain_height_m") - centreM, beamRadiusM);
}

function bandOf(entry: CheckValue) {
  return RADAR_BANDS.find(({ letter }) => letter === entry.inputs.band);
}

runReferenceSuite({
  topics: ["c-zr-relations"],
  notApplicable: CORE_NOT_APPLICABLE["c-zr-relations"],
  adapters: [
    [
      "sekhon-srivastava-z-untruncated",
      (entry) =>
        spectrumZMm6PerM3(
          dropSpectrum(inputNumber(entry, "N0_per_m3_mm"), 0, inputNumber(entry, "lambda_per_mm")),
        ),
    ],
    [/^zr-.*-A$/, (entry) => catalogueRelation(entry).a],
    [/^zr-.*-b$/, (entry) => catalogueRelation(entry).b],
    // The entries give the reflectivity of melted drops; a radar shows 6.5 dB less.
    [
      /^zr-(sekhon|gunn).*dBZ$/,
      (entry) =>
        rainRateMmPerHour(inputNumber(entry, "reflectivity_dBZ") - 6.5, {
          ...relationOf(entry),
          phase: "snow",
        }),
    ],
    [/^zr-.*dBZ$/, (entry) => rainRateMmPerHour(inputNumber(entry, "reflectivity_dBZ"), relationOf(entry))],
    [
      /^cap-(\d|rounded)/,
      (entry) => resolveCap({ dbz: inputNumber(entry, "cap_dBZ") }, relationOf(entry)).mmPerHour,
    ],
    [
      /^zr-(min-01mmh|forward)-/,
      (entry) => reflectivityDbz(inputNumber(entry, "rain_rate_mm_h"), relationOf(entry)),
    ],
    [
      "zr-bias-*",
      (entry) => {
        const biasedDbz = 30 + inputNumber(entry, "calibration_error_dB");
        return rainRateMmPerHour(biasedDbz, relationOf(entry)) / rainRateMmPerHour(30, relationOf(entry));
      },
    ],
  ],
});

/** Where the exponential fall law leaves 0: by halving, on the function that is held at 0 below. */
function firstFallingDiameterMm(): number {
  let [still, falling] = [0, 1];
  while (falling - still > 1e-9) {
    const middle = (still + falling) / 2;
    if (fallSpeedMPerS(middle, ATLAS_SRIVASTAVA_SEKHON_1973) > 0) falling = middle;
    else still = middle;
  }
  return falling;
}

runReferenceSuite({
  topics: ["g-beam-geometry"],
  except: GEODESIC_ENTRIES,
  notApplicable: CORE_NOT_APPLICABLE["g-beam-geometry"],
  adapters: [
    [/^beam-h-(?!approx)/, heightOf],
    ["beam-s-*", (entry) => arcOf(entry) / 1000],
    ["gate-full-arc", arcOf],
    [
      "beam-inverse-range",
      (entry) => {
        const arcM = 1000 * inputNumber(entry, "arc_distance_km");
        return beamAboveArc(arcM, inputNumber(entry, "elevation_deg"), radiusOf(entry)).slantRangeM / 1000;
      },
    ],
    [
      "beam-diam-*",
      (entry) => beamDiameterM(1000 * inputNumber(entry, "range_km"), inputNumber(entry, "beamwidth_deg")),
    ],
    [
      "ke-gradient",
      (entry) => effectiveRadiusFactor(inputNumber(entry, "dN_dh_per_km"), earthRadiusOf(entry)),
    ],
    ["ke-43-gradient", (entry) => refractivityGradientPerKm(inputNumber(entry, "ke"), earthRadiusOf(entry))],
    ["pbb-uniform-*", (entry) => uniformBlockedFraction(terrainOverBeamRadius(entry), 1)],
    ["pbb-gauss1-*", (entry) => gaussianBlockedFraction(terrainOverBeamRadius(entry), 1, "one-way")],
    ["pbb-gauss2-*", (entry) => gaussianBlockedFraction(terrainOverBeamRadius(entry), 1, "two-way")],
    ["pbb-corr-*", (entry) => blockageCorrectionDb(inputNumber(entry, "blocked_fraction"))],
    ["pbb-worked", blockedFromHeights],
  ],
});

runReferenceSuite({
  topics: ["l-units-and-facts"],
  notApplicable: CORE_NOT_APPLICABLE["l-units-and-facts"],
  adapters: [
    ["unit-inch", (entry) => inputNumber(entry, "length_in") * MM_PER_INCH],
    ["unit-inh", (entry) => inputNumber(entry, "rain_rate_in_h") * MM_PER_INCH],
    [
      "unit-mmh-km2",
      (entry) => waterFlowM3PerS(inputNumber(entry, "rain_rate_mm_h"), inputNumber(entry, "area_km2")),
    ],
    ["unit-mm-km2", (entry) => waterVolumeM3(inputNumber(entry, "depth_mm"), inputNumber(entry, "area_km2"))],
    // 1 mm6 m-3 is 0 dBZ.
    ["unit-z-si", (entry) => inputNumber(entry, "Z_mm6_m3") * zM3(0)],
    ["unit-dbz-si", (entry) => zM3(inputNumber(entry, "reflectivity_dBZ"))],
    [
      "unit-accum",
      (entry) => heldDepthMm(inputNumber(entry, "rain_rate_mm_h"), 60_000 * inputNumber(entry, "minutes")),
    ],
    ["unit-rainconv", () => RAIN_RATE_PER_D3],
    ["unit-kdp-rad", (entry) => inputNumber(entry, "KDP_deg_per_km") * RAD_PER_DEG],
    ["unit-dbkm-nepers", (entry) => inputNumber(entry, "extinction_per_km") * DB_PER_NEPER],
    ["gk49-*", (entry) => measuredFallSpeedMPerS(inputNumber(entry, "diameter_mm"))],
    ["au77-*", (entry) => fallSpeedMPerS(inputNumber(entry, "diameter_mm"), ATLAS_ULBRICH_1977)],
    ["atlas73-zero", firstFallingDiameterMm],
    [
      "atlas73-*mm",
      (entry) => fallSpeedMPerS(inputNumber(entry, "diameter_mm"), ATLAS_SRIVASTAVA_SEKHON_1973),
    ],
    [
      "foote-dutoit",
      (entry) =>
        fallSpeedFactor(inputNumber(entry, "density_kg_m3"), inputNumber(entry, "reference_density_kg_m3")),
    ],
    ["ieee521-*-low", (entry) => bandOf(entry)?.lowGHz],
    ["ieee521-*-high", (entry) => bandOf(entry)?.highGHz],
    ["wavelength-*", (entry) => 100 * wavelengthM(1e9 * inputNumber(entry, "frequency_GHz"))],
  ],
});
