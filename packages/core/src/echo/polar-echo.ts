import type { Sweep, SweepHeader } from "../model/radar.ts";
import { momentValues } from "../moment-values.ts";

/**
 * Why the echo of a gate is not taken for rain. A gate that several screens meet is counted once, under the
 * first of this list, so that their tolls add up.
 */
export const SCREENS = [
  /** Echo in most rounds of the run at the same gate, standing out from its surroundings. */
  "static-echo",
  /** Near-zero radial velocity together with rough echo. */
  "still-echo",
  /** The clutter filter took much away: TH well above DBZH. */
  "filtered-power",
  "low-correlation",
  "noisy-phase",
  /** Rough from gate to gate. */
  "texture",
  /** Gone in the sweep above. */
  "vertical-gradient",
  /** A ray of echo from the antenna outward: another transmitter, or the sun. */
  "spike",
  /** A strong gate that keeps its place, like a wind turbine. */
  "fixed-point",
  /** Birds, insects, and clear air. */
  "clear-air",
  "speckle",
] as const;
export type Screen = (typeof SCREENS)[number];

/** What is to be known of a gate beside its echo. */
export const MARKS = [
  /** Screened, and filled from its neighbours. */
  "filled",
  /** Weak echo beside an intense core, such as side lobes make. */
  "side-lobe",
  /** The correction of attenuation met its limit here or nearer by: not observed. */
  "lost-in-attenuation",
  /** Terrain takes more of the beam than is corrected: not observed. */
  "blocked",
  "hail",
  /** Most of the beam lies in melting snow, or above it. */
  "melting",
  "snow",
  "convective",
] as const;
export type Mark = (typeof MARKS)[number];

/** What may be added to a reflectivity, in the order in which it is. */
export const EFFECTS = ["calibration", "blockage", "gas", "attenuation", "profile"] as const;
export type Effect = (typeof EFFECTS)[number];

/**
 * One sweep on its way from echo to rain: physical values by gate, and what was done to them.
 * Shapes [rayCount * gateCount], ray by ray, rays in ascending azimuth.
 */
export interface PolarEcho {
  readonly header: SweepHeader;
  /** Shape [rayCount], ascending. */
  readonly azimuthDeg: Float64Array;
  /** As the file has it: NaN not observed, -Infinity below detection. Never changed. */
  readonly measuredDbz: Float32Array;
  /** The same in work: a gate that was screened and not filled, or is lost, is NaN. */
  readonly dbz: Float32Array;
  /** Before the clutter filter. The moments are undefined where the file lacks them. */
  readonly unfilteredDbz: Float32Array | undefined;
  readonly velocityMPerS: Float32Array | undefined;
  readonly spectrumWidthMPerS: Float32Array | undefined;
  /** As the file has it, until the differential attenuation was taken off a copy. */
  zdrDb: Float32Array | undefined;
  readonly rhohv: Float32Array | undefined;
  readonly phidpDeg: Float32Array | undefined;
  /** One way. From the file, or from PHIDP once that was worked up. */
  kdpDegPerKm: Float32Array | undefined;
  /** Rain's share of PHIDP from the antenna, system phase taken off, never falling; once it was worked up. */
  rainPhaseDeg: Float32Array | undefined;
  /** Bits by {@link screenBit}. */
  readonly screenedBy: Uint16Array;
  /** Bits by {@link markBit}. */
  readonly marks: Uint16Array;
  /** dB that each effect added to `dbz`; no entry where it added nothing anywhere. */
  readonly effectsDb: Map<Effect, Float32Array>;
  /** Two-way loss to the gate, rain and gas, as estimated; undefined where it was not. */
  twoWayLossDb: Float32Array | undefined;
  /** Share of the beam that terrain takes; undefined where nothing is known. */
  blockedFraction: Float32Array | undefined;
}

export function screenBit(screen: Screen): number {
  return 1 << SCREENS.indexOf(screen);
}

export function markBit(mark: Mark): number {
  return 1 << MARKS.indexOf(mark);
}

/** ODIM names of the moments that screening and correction can use, beside the reflectivity. */
export const ECHO_MOMENTS = ["TH", "VRADH", "WRADH", "ZDR", "RHOHV", "PHIDP", "KDP"] as const;

/** What a sweep above another is asked for: its echo as it was measured. */
export type MeasuredEcho = Pick<PolarEcho, "header" | "azimuthDeg" | "measuredDbz">;

/**
 * A decoded sweep's reflectivity alone.
 *
 * @param reflectivity - the moment that rain is made from
 * @param where - file and dataset, for messages
 * @returns undefined where the sweep has no such moment
 * @throws InputError as `momentValues`
 */
export function measuredEcho(sweep: Sweep, reflectivity: string, where: string): MeasuredEcho | undefined {
  const moment = sweep.moments.get(reflectivity);
  if (moment === undefined) return undefined;
  return { header: sweep, azimuthDeg: sweep.azimuthDeg, measuredDbz: momentValues(moment, where) };
}

/**
 * Takes a decoded sweep into work. Parameters and errors as of {@link measuredEcho}.
 *
 * @param measured - its reflectivity, where it is at hand already
 * @returns undefined where the sweep has no such moment
 */
export function polarEcho(
  sweep: Sweep,
  reflectivity: string,
  where: string,
  measured: MeasuredEcho | undefined = measuredEcho(sweep, reflectivity, where),
): PolarEcho | undefined {
  if (measured === undefined) return undefined;
  const { measuredDbz } = measured;
  const values = (quantity: string, belowDetection: number): Float32Array | undefined => {
    const moment = sweep.moments.get(quantity);
    // Only a reflectivity has a meaning below detection.
    return moment === undefined ? undefined : momentValues(moment, where, belowDetection);
  };
  const gates = measuredDbz.length;
  return {
    header: sweep,
    azimuthDeg: sweep.azimuthDeg,
    measuredDbz,
    dbz: measuredDbz.slice(),
    unfilteredDbz: reflectivity === "TH" ? undefined : values("TH", Number.NEGATIVE_INFINITY),
    velocityMPerS: values("VRADH", Number.NaN),
    spectrumWidthMPerS: values("WRADH", Number.NaN),
    zdrDb: values("ZDR", Number.NaN),
    rhohv: values("RHOHV", Number.NaN),
    phidpDeg: values("PHIDP", Number.NaN),
    kdpDegPerKm: values("KDP", Number.NaN),
    rainPhaseDeg: undefined,
    screenedBy: new Uint16Array(gates),
    marks: new Uint16Array(gates),
    effectsDb: new Map(),
    twoWayLossDb: undefined,
    blockedFraction: undefined,
  };
}

/**
 * Adds decibels to the echo of a sweep and writes down what was added.
 * A gate that is not observed, or below detection, stays what it is.
 *
 * @param db - shape [rayCount * gateCount]; a gate that is to be lost is NaN here and becomes not observed
 */
export function addEffect({ dbz, effectsDb }: PolarEcho, effect: Effect, db: Float32Array): void {
  let any = false;
  for (let gate = 0; gate < dbz.length; gate++) {
    const added = db[gate] as number;
    if (added === 0) continue;
    any = true;
    dbz[gate] = (dbz[gate] as number) + added;
  }
  if (any) effectsDb.set(effect, db);
}
