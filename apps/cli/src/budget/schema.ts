import { z } from "zod";

/** A number, or null with its reason among the remarks of the radar. */
const known = z.number().nullable();

/** One radar of a budget. */
const radarSchema = z.strictObject({
  name: z.string(),
  origin: z.string().describe("file, example of a band, or command line"),
  band: z.string().nullable(),
  frequencyGHz: known,
  wavelengthCm: known,
  beamWidthDeg: z.strictObject({ horizontal: z.number(), vertical: z.number() }).nullable(),
  antennaGainDb: known,
  peakPowerW: known,
  pulseLengthMicroseconds: known,
  elevationDeg: z.number(),
  antennaHeightAslM: known,
  radarConstantDb: known.describe("C in dBZ = P[dBm] + 20 log10(r[km]) + C"),
  noiseDbm: known,
  sensitivity: z.strictObject({
    basis: z.enum([
      "system parameters",
      "noise-equivalent reflectivity in the file",
      "measured in the scans",
      "not known",
    ]),
    at1KmDbz: known.describe("weakest echo seen, brought to 1 km"),
    inFileAt1KmDbz: known,
    measuredAt1KmDbz: known,
    measuredGates: z.number().int(),
  }),
  dielectricFactorWater: known.describe(
    "|K|2 of water at this frequency and temperature; radars are calibrated for 0.93",
  ),
  rayleighLimitMm: known,
  unambiguousRangeKm: known,
  nyquistVelocityMPerS: known,
  groundHitKm: known.describe("slant range at which the beam's centre meets the terrain"),
  ranges: z.array(
    z.strictObject({
      rangeKm: z.number(),
      beamCentreAboveAntennaM: z.number(),
      beamCentreAslM: known,
      beamWidthM: known.describe("between the half-power points, upwards"),
      meltingLayerShare: known.describe("share of the echo from the melting layer, 0 to 1"),
      gasLossTwoWayDb: known,
      weakestEchoDbz: known,
      lightestRainMmPerHour: known,
      smallestDropMm: known,
    }),
  ),
  rain: z.array(
    z.strictObject({
      rainRateMmPerHour: z.number(),
      pathKm: z.number(),
      attenuationOneWayDbPerKm: known.describe("ITU-R P.838-3"),
      lossTwoWayDb: known,
      shareOfZLost: known,
      rateShownMmPerHour: known.describe("what the relation makes of the same rain behind that path"),
      spectrumAttenuationOneWayDbPerKm: known.describe("Marshall-Palmer drops by the Mie series"),
      halfOfZAboveMm: z.number(),
      halfOfRainAboveMm: z.number(),
      shareOfZBeyondRayleigh: known,
      shownOverZDb: known.describe("echo of the drops by the Mie series over their sixth moment"),
    }),
  ),
  remarks: z.array(z.string()),
});

/** The result of `budget --json`. */
export const budgetSchema = z.strictObject({
  format: z.literal("rainreckon-budget-1"),
  relation: z.strictObject({ name: z.string(), a: z.number(), b: z.number() }),
  oneDbRateFactor: z.number().describe("rain rate for 1 dB too much over that for none"),
  air: z.strictObject({
    temperatureC: z.number(),
    pressureHPa: z.number(),
    relativeHumidityPercent: z.number(),
    vapourDensityGPerM3: z.number(),
  }),
  radomeLossTwoWayDb: z.number(),
  rainKm: z.number(),
  meltingLayerAslM: z.strictObject({ bottomM: z.number(), topM: z.number() }).nullable(),
  radars: z.array(radarSchema).min(1),
});

export type Budget = z.output<typeof budgetSchema>;
export type BudgetRadar = Budget["radars"][number];
