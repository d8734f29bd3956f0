import { beamMean, beamPosition, blockedShare, type EchoProfile, profileDb } from "./beam.ts";
import { type Plane, travel } from "./earth.ts";
import { mixBits, NOISE_LENGTH } from "./random.ts";
import { type Ridge, terrainM } from "./terrain.ts";
import type { Lattice, Moment } from "./weather.ts";

const DEG = Math.PI / 180;

/** A radar of the invented district, and everything that is wrong with it. */
export interface RadarPlan {
  /** Node code, as ODIM's NOD; the user-assigned country code zz marks it as no real site. */
  readonly node: string;
  readonly name: string;
  readonly band: "S" | "C";
  readonly xKm: number;
  readonly yKm: number;
  readonly antennaHeightM: number;
  readonly wavelengthM: number;
  readonly beamWidthDeg: number;
  readonly gateM: number;
  readonly gateCount: number;
  readonly nyquistMPerS: number;
  /** Sweeps in the order they are made: elevation, and seconds after the start of the common round. */
  readonly sweeps: readonly { readonly elevationDeg: number; readonly startSecond: number }[];
  readonly sweepSeconds: number;
  /** First ray that a sweep measures; rays are stored from north. */
  readonly firstRay: number;
  /** One file a round, or one file a sweep. */
  readonly files: "volumes" | "sweeps";
  /** Whether the files tell each ray's azimuths and times, or leave them to be derived. */
  readonly rayTimes: boolean;
  readonly reflectivityStorage: "uint8" | "uint16";
  /** Weakest echo that is told from noise at 1 km. */
  readonly noiseDbzAt1Km: number;
  /** Added to every reflectivity: the calibration fault. */
  readonly calibrationOffsetDb: number;
  /** Two-way loss, and two-way difference of the loss between the polarisations, per degree of PHIDP. */
  readonly lossDbPerDeg: number;
  readonly differentialLossDbPerDeg: number;
  readonly systemPhaseDeg: number;
  readonly clutterSeed: number;
  /** No echo of the ground at all. */
  readonly clutterFree?: boolean;
}

/** A wind turbine: one gate of echo that stays in place, moves within, and passes the clutter filter. */
export interface Turbine {
  readonly xKm: number;
  readonly yKm: number;
  /** Echo in the lowest sweep, dBZ. */
  readonly dbz: number;
}

export const RAY_COUNT = 360;

/** Everything about one sweep that no weather changes. Shapes [ray, gate] and [gate]. */
export interface SweepGeometry {
  readonly elevationDeg: number;
  readonly xKm: Float32Array;
  readonly yKm: Float32Array;
  /** Share of the beam's power that terrain leaves. */
  readonly open: Float32Array;
  /** Echo of the ground before and after the clutter filter, mm6 m-3; 0 where there is none. */
  readonly clutterZ: Float32Array;
  readonly residualClutterZ: Float32Array;
  /** 1 where a turbine stands, else 0. */
  readonly turbine: Uint8Array;
  readonly heightKm: Float32Array;
  /** Mean over the beam of the two vertical profiles, as factors of Z. */
  readonly widespreadFactor: Float32Array;
  readonly showerFactor: Float32Array;
  /** Share of the beam below the melting layer, and within it. */
  readonly rainShare: Float32Array;
  readonly meltingShare: Float32Array;
  readonly noiseZ: Float32Array;
}

/** Height of the melting layer above sea level, km. */
export interface MeltingLayer {
  readonly bottomKm: number;
  readonly topKm: number;
}

/**
 * Rain with a melting layer: constant below, +6 dB at its middle, -4.5 dB/km above.
 * The numbers are common practice; see Fabry and Zawadzki (1995), J. Atmos. Sci. 52, 838-851, and Kitchen,
 * Brown and Davies (1994), Q. J. R. Meteorol. Soc. 120, 1231-1254.
 */
export function widespreadProfile(layer: MeltingLayer): EchoProfile {
  return {
    kneesKm: [layer.bottomKm, (layer.bottomKm + layer.topKm) / 2, layer.topKm],
    kneesDb: [0, 6, 0],
    slopeAboveDbPerKm: -4.5,
  };
}

/** Showers stand tall and show no melting layer: constant to 1 km above it, -3 dB/km beyond (our choice). */
function showerProfile(layer: MeltingLayer): EchoProfile {
  return { kneesKm: [layer.topKm + 1], kneesDb: [0], slopeAboveDbPerKm: -3 };
}

/** Works out one sweep's geometry, blockage and clutter, once for the whole storm. */
export function sweepGeometry(
  radar: RadarPlan,
  elevationDeg: number,
  plane: Plane,
  ridges: readonly Ridge[],
  layer: MeltingLayer,
  turbines: readonly Turbine[] = [],
): SweepGeometry {
  const { gateCount } = radar;
  const gates = RAY_COUNT * gateCount;
  const geometry: SweepGeometry = {
    elevationDeg,
    xKm: new Float32Array(gates),
    yKm: new Float32Array(gates),
    open: new Float32Array(gates),
    clutterZ: new Float32Array(gates),
    residualClutterZ: new Float32Array(gates),
    turbine: new Uint8Array(gates),
    heightKm: new Float32Array(gateCount),
    widespreadFactor: new Float32Array(gateCount),
    showerFactor: new Float32Array(gateCount),
    rainShare: new Float32Array(gateCount),
    meltingShare: new Float32Array(gateCount),
    noiseZ: new Float32Array(gateCount),
  };
  const arcKm = fillRanges(radar, geometry, layer);
  for (let ray = 0; ray < RAY_COUNT; ray++) {
    placeRay(radar, geometry, arcKm, ray, plane);
    meetTerrain(radar, geometry, ray, ridges);
  }
  for (const turbine of turbines) raiseTurbine(geometry, turbine);
  return geometry;
}

/** Turning blades defeat the clutter filter: 1 dB is all that it takes. A turbine out of reach is none. */
function raiseTurbine(geometry: SweepGeometry, turbine: Turbine): void {
  let nearest = -1;
  let distance2 = 1;
  geometry.xKm.forEach((xKm, index) => {
    const here2 = (xKm - turbine.xKm) ** 2 + (geometry.yKm[index]! - turbine.yKm) ** 2;
    if (here2 >= distance2) return;
    distance2 = here2;
    nearest = index;
  });
  if (nearest === -1) return;
  geometry.turbine[nearest] = 1;
  geometry.clutterZ[nearest] = fromDb(turbine.dbz - CLUTTER_DB_PER_DEG * (geometry.elevationDeg - 0.5));
  geometry.residualClutterZ[nearest] = geometry.clutterZ[nearest]! * fromDb(-1);
}

/** How much weaker things on the ground echo for each degree that the beam is raised. */
const CLUTTER_DB_PER_DEG = 11;

function rangeKmOf(radar: RadarPlan, gate: number): number {
  return ((gate + 0.5) * radar.gateM) / 1000;
}

function fillRanges(radar: RadarPlan, geometry: SweepGeometry, layer: MeltingLayer): Float64Array {
  const arcKm = new Float64Array(radar.gateCount);
  const widespread = widespreadProfile(layer);
  const shower = showerProfile(layer);
  for (let gate = 0; gate < radar.gateCount; gate++) {
    const rangeKm = rangeKmOf(radar, gate);
    const beam = beamPosition(rangeKm, geometry.elevationDeg);
    arcKm[gate] = beam.arcKm;
    const heightKm = beam.heightKm + radar.antennaHeightM / 1000;
    const sizeKm = rangeKm * radar.beamWidthDeg * DEG;
    const over = (quantity: (heightKm: number) => number): number => beamMean(quantity, heightKm, sizeKm, 0);
    geometry.heightKm[gate] = heightKm;
    geometry.widespreadFactor[gate] = over((h) => fromDb(profileDb(widespread, h)));
    geometry.showerFactor[gate] = over((h) => fromDb(profileDb(shower, h)));
    geometry.rainShare[gate] = over((h) => (h < layer.bottomKm ? 1 : 0));
    geometry.meltingShare[gate] = over((h) => (h >= layer.bottomKm && h < layer.topKm ? 1 : 0));
    geometry.noiseZ[gate] = fromDb(radar.noiseDbzAt1Km + 20 * Math.log10(rangeKm));
  }
  return arcKm;
}

/** Geodesics every 5 km and straight lines between: they leave the true gate by less than a metre. */
function placeRay(
  radar: RadarPlan,
  geometry: SweepGeometry,
  arcKm: Float64Array,
  ray: number,
  plane: Plane,
): void {
  const site = plane.toPlace(radar.xKm, radar.yKm);
  const spacingKm = 5;
  let knot = -1;
  let from = { xKm: radar.xKm, yKm: radar.yKm };
  let to = from;
  for (let gate = 0; gate < radar.gateCount; gate++) {
    const here = Math.floor(arcKm[gate]! / spacingKm);
    if (here !== knot) {
      knot = here;
      from = plane.toPlane(travel(site, ray + 0.5, here * spacingKm * 1000));
      to = plane.toPlane(travel(site, ray + 0.5, (here + 1) * spacingKm * 1000));
    }
    const share = arcKm[gate]! / spacingKm - here;
    const index = ray * radar.gateCount + gate;
    geometry.xKm[index] = from.xKm + share * (to.xKm - from.xKm);
    geometry.yKm[index] = from.yKm + share * (to.yKm - from.yKm);
  }
}

/** What the ground along one ray takes from the beam, and what it sends back. */
function meetTerrain(radar: RadarPlan, geometry: SweepGeometry, ray: number, ridges: readonly Ridge[]): void {
  let blocked = 0;
  for (let gate = 0; gate < radar.gateCount; gate++) {
    const index = ray * radar.gateCount + gate;
    const hidden = blocked;
    const hillside = hillsideShare(radar, geometry, ridges, index, gate);
    blocked = Math.max(blocked, hillside);
    geometry.open[index] = 1 - blocked;
    const clutter = clutterAt(radar, geometry.elevationDeg, ray, gate, hillside);
    // What is behind a ridge is hidden from the radar, clutter too.
    geometry.clutterZ[index] = clutter.z * (1 - hidden);
    geometry.residualClutterZ[index] = geometry.clutterZ[index]! * clutter.left;
  }
}

/** Share of the beam that the ground within a gate cuts off: a crest may lie between the gates' middles. */
function hillsideShare(
  radar: RadarPlan,
  geometry: SweepGeometry,
  ridges: readonly Ridge[],
  index: number,
  gate: number,
): number {
  const steps = Math.ceil(radar.gateM / 200);
  const middleKm = rangeKmOf(radar, gate);
  let share = 0;
  for (let step = 0; step < steps; step++) {
    const rangeKm = middleKm + ((step + 0.5) / steps - 0.5) * (radar.gateM / 1000);
    const along = rangeKm / middleKm;
    const groundM = terrainM(
      radar.xKm + along * (geometry.xKm[index]! - radar.xKm),
      radar.yKm + along * (geometry.yKm[index]! - radar.yKm),
      ridges,
    );
    const centreM = beamPosition(rangeKm, geometry.elevationDeg).heightKm * 1000 + radar.antennaHeightM;
    share = Math.max(share, blockedShare((groundM - centreM) / (rangeKm * radar.beamWidthDeg * DEG * 500)));
  }
  return share;
}

/** Clutter in patches of 3 rays by 2 gates: a hash of the place decides, so it never changes. */
function clutterAt(
  radar: RadarPlan,
  elevationDeg: number,
  ray: number,
  gate: number,
  hillside: number,
): { z: number; left: number } {
  if (radar.clutterFree) return { z: 0, left: 0 };
  const patch = mixBits(radar.clutterSeed + Math.floor(ray / 3) * 7919 + Math.floor(gate / 2) * 104729);
  const own = mixBits(patch + ray * 31 + gate);
  const chance = Math.max(hillside > 0.02 ? 0.95 : 0, 0.4 * Math.exp(-rangeKmOf(radar, gate) / 9));
  if (patch / 2 ** 32 >= chance) return { z: 0, left: 0 };
  const steepnessDb = hillside > 0.02 ? 20 + 10 * Math.log10(hillside) : 0;
  const heightLossDb = CLUTTER_DB_PER_DEG * (elevationDeg - 0.5);
  const dbz = 30 + steepnessDb + 9 * ((own & 0xffff) / 65536 - 0.5) * 2 - heightLossDb;
  // The filter takes 18 to 34 dB away, but fails at one patch in eighteen.
  const filterDb = (own >>> 16) % 18 === 0 ? 4 : 18 + 16 * ((own >>> 16) / 65536);
  return { z: fromDb(dbz), left: fromDb(-filterDb) };
}

/** One sweep's moments in stored numbers, shape [360, gate]; see `MOMENT_CODES`. */
export interface SweepMoments {
  readonly TH: Uint8Array | Uint16Array;
  readonly DBZH: Uint8Array | Uint16Array;
  readonly VRADH: Uint8Array;
  readonly ZDR: Uint8Array;
  readonly RHOHV: Uint8Array;
  readonly PHIDP: Uint16Array;
}

/** How stored numbers become physical ones: value = stored * gain + offset. */
export interface Coding {
  readonly gain: number;
  readonly offset: number;
  readonly nodata: number;
  readonly undetect: number;
}

/** The coding of a moment in the files of a radar. */
export function codingOf(quantity: keyof SweepMoments, radar: RadarPlan): Coding {
  switch (quantity) {
    case "TH":
    case "DBZH":
      return radar.reflectivityStorage === "uint8"
        ? { gain: 0.5, offset: -32, nodata: 255, undetect: 0 }
        : { gain: 0.25, offset: -100, nodata: 65535, undetect: 0 };
    case "VRADH":
      return { gain: 0.5, offset: -64, nodata: 255, undetect: 0 };
    case "ZDR":
      return { gain: 0.2, offset: -10, nodata: 255, undetect: 0 };
    case "RHOHV":
      return { gain: 0.01, offset: -0.01, nodata: 255, undetect: 0 };
    case "PHIDP":
      return { gain: 1, offset: -1, nodata: 65535, undetect: 0 };
  }
}

/** Sweeps start this far apart in the noise table; odd, so that they visit every place of it. */
export const NOISE_STRIDE = 17389;

/** The noise of one sweep: normal numbers from a shared table, starting at a place of its own. */
export interface Noise {
  readonly table: Float32Array;
  readonly start: number;
}

/** Why a gate's echo is not simply rain: bits of `SweepTruth.flags`. */
export const GATE_FLAGS = {
  groundClutter: 1,
  turbine: 2,
  interference: 4,
  /** Terrain takes half of the power or more. */
  blocked: 8,
  /** Hail makes half of the echo or more. */
  hail: 16,
  /** Half of the beam or more lies in the melting layer. */
  melting: 32,
} as const;

/** What is true at every gate of one sweep. Shape [360, gate]. */
export interface SweepTruth {
  /** Two-way loss from the antenna to the gate's centre. */
  readonly lossDb: Float32Array;
  /** Rain at the ground under the gate as the ray passes. */
  readonly rateMmPerHour: Float32Array;
  readonly flags: Uint8Array;
}

/** An empty truth for the sweeps of a radar. */
export function emptySweepTruth(radar: RadarPlan): SweepTruth {
  const gates = RAY_COUNT * radar.gateCount;
  return {
    lossDb: new Float32Array(gates),
    rateMmPerHour: new Float32Array(gates),
    flags: new Uint8Array(gates),
  };
}

/** What one sweep meets beyond the weather, and where to put down what was true of it. */
export interface SweepExtras {
  /** Rays that another transmitter falls into. */
  readonly spikeRays?: readonly number[];
  /** Strength of the transmitter: the echo that it feigns at 1 km; it grows by 20 log r. */
  readonly spikeDbzAt1Km?: number;
  /** Filled where given. */
  readonly truth?: SweepTruth | undefined;
}

/**
 * Measures one sweep.
 *
 * @param moment - the weather at the minute that holds the middle of the sweep
 * @param startMinute - when the sweep starts, minutes after the storm's start
 */
export function measureSweep(
  radar: RadarPlan,
  geometry: SweepGeometry,
  lattice: Lattice,
  moment: Moment,
  startMinute: number,
  noise: Noise,
  extras: SweepExtras = {},
): SweepMoments {
  const gates = RAY_COUNT * radar.gateCount;
  const wide = radar.reflectivityStorage === "uint16";
  const moments: SweepMoments = {
    TH: wide ? new Uint16Array(gates) : new Uint8Array(gates),
    DBZH: wide ? new Uint16Array(gates) : new Uint8Array(gates),
    VRADH: new Uint8Array(gates),
    ZDR: new Uint8Array(gates),
    RHOHV: new Uint8Array(gates),
    PHIDP: new Uint16Array(gates),
  };
  for (let ray = 0; ray < RAY_COUNT; ray++) {
    const turn = (ray - radar.firstRay + RAY_COUNT) % RAY_COUNT;
    const rayMinute = startMinute + (radar.sweepSeconds * ((turn + 0.5) / RAY_COUNT)) / 60;
    measureRay(radar, geometry, lattice, moment, rayMinute - moment.minute, ray, noise, extras, moments);
  }
  return moments;
}

/** Along one ray: loss and phase add up gate by gate, on the way out and back. */
function measureRay(
  radar: RadarPlan,
  geometry: SweepGeometry,
  lattice: Lattice,
  moment: Moment,
  lateMinutes: number,
  ray: number,
  noise: Noise,
  extras: SweepExtras,
  moments: SweepMoments,
): void {
  const { gateCount } = radar;
  const gateKm = radar.gateM / 1000;
  const z = codingOf("DBZH", radar);
  const velocity = codingOf("VRADH", radar);
  const zdr = codingOf("ZDR", radar);
  const rho = codingOf("RHOHV", radar);
  const phase = codingOf("PHIDP", radar);
  const azimuth = (ray + 0.5) * DEG;
  const cosElevation = Math.cos(geometry.elevationDeg * DEG);
  const { xKmPerMinute, yKmPerMinute } = moment.drift;
  const towards = Math.sin(azimuth) * xKmPerMinute + Math.cos(azimuth) * yKmPerMinute;
  // The storm as a whole has moved on since the minute that the lattice shows.
  const west = lattice.westKm + xKmPerMinute * lateMinutes;
  const south = lattice.southKm + yKmPerMinute * lateMinutes;
  const nx = lattice.nx;
  const mask = NOISE_LENGTH - 1;
  let dice = noise.start + ray * 4099;
  let rainPhaseDeg = 0;
  const spikeZAt1Km = extras.spikeRays?.includes(ray) ? fromDb(extras.spikeDbzAt1Km ?? 0) : 0;

  for (let gate = 0; gate < gateCount; gate++) {
    const index = ray * gateCount + gate;
    const x = geometry.xKm[index]! - west;
    const y = geometry.yKm[index]! - south;
    const column = Math.floor(x);
    const row = Math.floor(y);
    const u = x - column;
    const v = y - row;
    const cell = row * nx + column;
    const groundZ =
      (moment.zMm6PerM3[cell]! * (1 - u) + moment.zMm6PerM3[cell + 1]! * u) * (1 - v) +
      (moment.zMm6PerM3[cell + nx]! * (1 - u) + moment.zMm6PerM3[cell + nx + 1]! * u) * v;
    const nearest = (v < 0.5 ? cell : cell + nx) + (u < 0.5 ? 0 : 1);
    const clutterZ = geometry.clutterZ[index]!;
    // Half of a gate's own phase and loss stand before its centre.
    const stepDeg =
      (2 * gateKm * geometry.rainShare[gate]! * moment.phaseTimesWavelength[nearest]!) / radar.wavelengthM;
    const phaseDeg = rainPhaseDeg + stepDeg / 2;
    rainPhaseDeg += stepDeg;
    const spikeZ = spikeZAt1Km === 0 ? 0 : spikeZAt1Km * rangeKmOf(radar, gate) ** 2;
    if (extras.truth !== undefined) {
      const flags = flagsOf(geometry, moment, index, gate, nearest, spikeZ);
      noteTruth(extras.truth, index, radar.lossDbPerDeg * phaseDeg, moment.rateMmPerHour[nearest]!, flags);
    }
    if (groundZ === 0 && clutterZ === 0 && spikeZ === 0) continue;

    const shower = moment.showerShare[nearest]!;
    const aloft = shower * geometry.showerFactor[gate]! + (1 - shower) * geometry.widespreadFactor[gate]!;
    const rainZ = groundZ * aloft * geometry.open[index]! * fromDb(-radar.lossDbPerDeg * phaseDeg);
    const noiseZ = geometry.noiseZ[gate]!;
    if (rainZ + clutterZ + spikeZ < noiseZ) continue;

    const restless = geometry.turbine[index]!;
    const flicker = fromDb((2 + 3 * restless) * noise.table[dice++ & mask]!);
    const jitterDb = 0.7 * noise.table[dice++ & mask]!;
    const totalZ = rainZ + clutterZ * flicker + spikeZ;
    const total = encode(10 * Math.log10(totalZ) + radar.calibrationOffsetDb + jitterDb, z);
    moments.TH[index] = total;
    const leftZ = geometry.residualClutterZ[index]! * flicker;
    const keptZ = rainZ + leftZ + spikeZ;
    if (keptZ < noiseZ) continue;
    moments.DBZH[index] =
      keptZ === totalZ ? total : encode(10 * Math.log10(keptZ) + radar.calibrationOffsetDb + jitterDb, z);

    const foreign = (leftZ + spikeZ) / keptZ;
    // Blades turn and another transmitter is out of step: neither stands still as the ground does.
    const wild = (restless * leftZ + spikeZ) / keptZ;
    const stirred = wild === 0 ? 0 : wild * radar.nyquistMPerS * noise.table[dice++ & mask]!;
    const heightKm = geometry.heightKm[gate]!;
    const wind = (towards * 1000 * (0.8 + 0.15 * heightKm) * cosElevation) / 60;
    moments.VRADH[index] = encode(
      foldVelocity((1 - foreign) * (wind + 0.7 * noise.table[dice++ & mask]!) + stirred, radar.nyquistMPerS),
      velocity,
    );
    const melting = geometry.meltingShare[gate]! * (1 - shower);
    // Tumbling hail looks round on the mean, and melting hail of all sizes correlates badly.
    const hail = moment.hailShare[nearest]!;
    const zdrDb =
      geometry.rainShare[gate]! * moment.zdrDb[nearest]! * (1 - hail) +
      melting -
      radar.differentialLossDbPerDeg * phaseDeg;
    moments.ZDR[index] = encode(
      (1 - foreign) * zdrDb + (0.2 + 2.5 * foreign) * noise.table[dice++ & mask]!,
      zdr,
    );
    // Weak echo correlates less, because noise does not correlate at all: signal over signal plus noise.
    const signal = keptZ / (keptZ + noiseZ * 0.1);
    const rhohv = ((0.99 - 0.08 * melting - 0.07 * hail) * (1 - foreign) + 0.6 * foreign) * signal;
    moments.RHOHV[index] = encode(
      Math.min(1, rhohv + (0.004 + 0.12 * foreign) * noise.table[dice++ & mask]!),
      rho,
    );
    const wildDeg = (1.5 + 60 * foreign) * noise.table[dice++ & mask]!;
    moments.PHIDP[index] = encode((radar.systemPhaseDeg + phaseDeg + wildDeg + 720) % 360, phase);
  }
}

function flagsOf(
  geometry: SweepGeometry,
  moment: Moment,
  index: number,
  gate: number,
  cell: number,
  spikeZ: number,
): number {
  const turbine = geometry.turbine[index] === 1;
  return (
    (geometry.clutterZ[index]! > 0 && !turbine ? GATE_FLAGS.groundClutter : 0) |
    (turbine ? GATE_FLAGS.turbine : 0) |
    (spikeZ > 0 ? GATE_FLAGS.interference : 0) |
    (geometry.open[index]! <= 0.5 ? GATE_FLAGS.blocked : 0) |
    (moment.hailShare[cell]! >= 0.5 ? GATE_FLAGS.hail : 0) |
    (geometry.meltingShare[gate]! >= 0.5 ? GATE_FLAGS.melting : 0)
  );
}

function noteTruth(truth: SweepTruth, index: number, lossDb: number, rate: number, flags: number): void {
  truth.lossDb[index] = lossDb;
  truth.rateMmPerHour[index] = rate;
  truth.flags[index] = flags;
}

/** A ratio from decibels; `exp` because the power operator is several times slower, and this runs per gate. */
function fromDb(db: number): number {
  return Math.exp((Math.LN10 / 10) * db);
}

/** The stored number nearest to a value, kept off the codes of undetect and nodata. */
export function encode(value: number, coding: Coding): number {
  const stored = Math.round((value - coding.offset) / coding.gain);
  return Math.max(coding.undetect + 1, Math.min(coding.nodata - 1, stored));
}

/** A radial velocity as a radar that repeats itself every 2 Nyquist would show it. */
export function foldVelocity(metrePerSecond: number, nyquistMPerS: number): number {
  const span = 2 * nyquistMPerS;
  return metrePerSecond - span * Math.floor((metrePerSecond + nyquistMPerS) / span);
}
