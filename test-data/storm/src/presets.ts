import type { GaugePlan } from "./gauges.ts";
import type { MeltingLayer, RadarPlan, Turbine } from "./radar.ts";
import type { Ridge } from "./terrain.ts";
import type { WeatherPattern } from "./weather.ts";

/** How large a storm is, who watches it, and how hard it rains. */
export interface StormPreset {
  readonly seed: number;
  /** Side of the square of the truth grid; gauges and catchments scale with it. */
  readonly sizeKm: number;
  readonly startEpochMs: number;
  /** Whole hours are not needed; whole minutes are. */
  readonly minutes: number;
  readonly roundMinutes: number;
  readonly radars: readonly RadarPlan[];
  readonly ridges: readonly Ridge[];
  readonly meltingLayer: MeltingLayer;
  /** Depth in the middle of the district that the storm is scaled to: mean, and wettest place. */
  readonly meanMm: number;
  readonly maximumMm: number;
  /** The world that this storm belongs to; absent for the demo's storms. */
  readonly world?: WorldTold;
  /** Weather of another kind than the demo's; then `meanMm` and `maximumMm` are not used. */
  readonly pattern?: WeatherPattern;
  /** Absent for the gauges of the demo, faults and all. */
  readonly gauges?: readonly GaugePlan[];
  readonly turbines?: readonly Turbine[];
  readonly interference?: Interference;
}

/** What truth.json says in words about a world. */
export interface WorldTold {
  readonly name: string;
  readonly says: string;
  readonly planted: readonly string[];
}

/** Another transmitter that falls into a radar's rays: some sweeps, one to three rays each. */
export interface Interference {
  readonly node: string;
  /** Share of the sweeps that are hit. */
  readonly share: number;
  readonly dbzAt1Km: number;
}

const SOUTH_RADAR: RadarPlan = {
  node: "zzsal",
  name: "Saltermoor South (invented)",
  band: "S",
  xKm: -66,
  yKm: -48,
  antennaHeightM: 62,
  wavelengthM: 0.107,
  beamWidthDeg: 1,
  gateM: 1000,
  gateCount: 150,
  nyquistMPerS: 27,
  sweeps: [
    { elevationDeg: 0.5, startSecond: 6 },
    { elevationDeg: 1.2, startSecond: 66 },
    { elevationDeg: 2.4, startSecond: 126 },
    { elevationDeg: 4, startSecond: 186 },
  ],
  sweepSeconds: 24,
  firstRay: 0,
  files: "volumes",
  rayTimes: true,
  reflectivityStorage: "uint8",
  noiseDbzAt1Km: -42,
  calibrationOffsetDb: -1,
  lossDbPerDeg: 0.015,
  differentialLossDbPerDeg: 0,
  systemPhaseDeg: 40,
  clutterSeed: 11,
};

// Losses per degree: S and C band from the published spread 0.015-0.04 and 0.05-0.13 dB/deg
// (Bringi and Chandrasekar, 2001; Carey et al., 2000, J. Appl. Meteorol. 39, 1405-1433).
const MOOR_RADAR: RadarPlan = {
  node: "zzmoo",
  name: "Saltermoor Heath (invented)",
  band: "C",
  xKm: 26,
  yKm: 30,
  antennaHeightM: 38,
  wavelengthM: 0.0535,
  beamWidthDeg: 1,
  gateM: 1000,
  gateCount: 120,
  nyquistMPerS: 16,
  sweeps: [
    { elevationDeg: 3, startSecond: 130 },
    { elevationDeg: 1.4, startSecond: 182 },
    { elevationDeg: 0.5, startSecond: 234 },
  ],
  sweepSeconds: 20,
  firstRay: 137,
  files: "sweeps",
  rayTimes: false,
  reflectivityStorage: "uint16",
  noiseDbzAt1Km: -40,
  calibrationOffsetDb: 1.5,
  lossDbPerDeg: 0.06,
  differentialLossDbPerDeg: 0.016,
  systemPhaseDeg: 65,
  clutterSeed: 23,
};

/** Stands 11 km west-south-west of the heath radar and hides the lowest sweep behind it. */
const HEATH_RIDGE: Ridge = {
  xKm: 26 - 10.3,
  yKm: 30 - 3.9,
  crestAzimuthDeg: 340,
  crestSigmaKm: 1.7,
  flankSigmaKm: 0.6,
  heightM: 240,
};

const START = Date.UTC(2031, 4, 20, 12);

/** Six hours, two radars, a district of 160 km: the storm of the demo. */
export const DEMO: StormPreset = {
  seed: 1,
  sizeKm: 160,
  startEpochMs: START,
  minutes: 360,
  roundMinutes: 5,
  radars: [SOUTH_RADAR, MOOR_RADAR],
  ridges: [HEATH_RIDGE],
  meltingLayer: { bottomKm: 1.9, topKm: 2.4 },
  meanMm: 20,
  maximumMm: 75,
};

/** Two hours and 60 km, seen by both radars at short range: a storm for tests of the whole chain. */
export const SMALL: StormPreset = {
  ...DEMO,
  sizeKm: 60,
  minutes: 120,
  radars: [
    { ...SOUTH_RADAR, xKm: -22, yKm: -16, gateCount: 70 },
    { ...MOOR_RADAR, xKm: 10, yKm: 12, gateM: 500, gateCount: 100 },
  ],
  ridges: [{ ...HEATH_RIDGE, xKm: 10 - 10.3, yKm: 12 - 3.9 }],
  meanMm: 10,
  maximumMm: 35,
};

/** Twenty minutes, one radar, four rounds: made in less than a second. */
export const TINY: StormPreset = {
  ...DEMO,
  sizeKm: 60,
  minutes: 20,
  radars: [{ ...SOUTH_RADAR, xKm: -10, yKm: -8, gateCount: 60, sweeps: SOUTH_RADAR.sweeps.slice(0, 2) }],
  ridges: [],
  meanMm: 3,
  maximumMm: 12,
};

export const PRESETS: Readonly<Record<string, StormPreset>> = { demo: DEMO, small: SMALL, tiny: TINY };
