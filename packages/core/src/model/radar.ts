/** A radar site. Heights are of the antenna, above mean sea level. */
export interface RadarSite {
  /**
   * Identity: the NOD code, else `RAD-…`, else `WMO-…` (00000 is no identity), else `AT-lat-lon`.
   * Two files with the same id belong to the same radar.
   */
  readonly id: string;
  readonly name?: string;
  readonly lonDeg: number;
  readonly latDeg: number;
  readonly antennaHeightM: number;
}

/** Stored numbers as the file has them. Floating types hold physical values with gain 1 and offset 0. */
export type StoredValues = Uint8Array | Uint16Array | Int16Array | Int32Array | Float32Array | Float64Array;

/**
 * One measured quantity of a sweep, still in stored numbers: physical = stored * gain + offset.
 *
 * nodata is "not observed" and undetect is "observed, below detection"; a code that the file does
 * not define is undefined here and matches nothing.
 */
export interface Moment {
  /** ODIM quantity name: DBZH, TH, VRADH, ZDR, RHOHV, PHIDP, KDP, … */
  readonly quantity: string;
  /** Shape [rayCount, gateCount], ray by ray. */
  readonly stored: StoredValues;
  readonly gain: number;
  readonly offset: number;
  readonly nodata?: number;
  readonly undetect?: number;
}

/** What is known of a sweep without reading its arrays. */
export interface SweepHeader {
  readonly site: RadarSite;
  /** Where it came from: the path as it was handed in, and the place inside the file. */
  readonly origin: { readonly path: string; readonly dataset: string };
  /** Nominal elevation of the sweep, degrees above the horizon. */
  readonly elevationDeg: number;
  readonly rayCount: number;
  readonly gateCount: number;
  /** Slant range of the centre of the first gate. */
  readonly firstGateCentreM: number;
  readonly gateLengthM: number;
  readonly startEpochMs: number;
  readonly endEpochMs: number;
  /** ODIM names of the moments that the file holds for this sweep, sorted. */
  readonly quantities: readonly string[];
  readonly wavelengthM?: number;
  /** Half-power beam width: horizontal and vertical where both are given, else the same number twice. */
  readonly beamWidthDeg?: { readonly horizontal: number; readonly vertical: number };
  readonly nyquistVelocityMPerS?: number;
  /** Radar constant in dB as the file gives it (ODIM radconstH), and noise-equivalent dBZ at 1 km (NEZ). */
  readonly radarConstantDb?: number;
  readonly noiseEquivalentDbz?: number;
  /** Attenuation by air that the sender has given back already (ODIM gasattn), dB/km; 0: nothing was. */
  readonly gasAttenuationDbPerKm?: number;
  /** What had to be assumed or was odd, one sentence each. */
  readonly remarks: readonly string[];
}

/** One turn of the antenna at one elevation. Rays are in ascending azimuth. */
export interface Sweep extends SweepHeader {
  /** Shape [rayCount]: centre of each ray, clockwise from true north, 0 ≤ azimuth < 360, ascending. */
  readonly azimuthDeg: Float64Array;
  /** Shape [rayCount]: elevation of each ray; the nominal one repeated where rays carry none. */
  readonly rayElevationDeg: Float64Array;
  /** Shape [rayCount]: mid-time of each ray. */
  readonly rayTimeEpochMs: Float64Array;
  /** True where ray times were derived from the sweep's start, end and first ray. */
  readonly rayTimesDerived: boolean;
  /** How many rays had to be moved to bring them into ascending azimuth. */
  readonly raysReordered: number;
  readonly moments: ReadonlyMap<string, Moment>;
}

/** The sweeps of one site in one round, in time order. */
export interface Volume {
  readonly siteId: string;
  readonly sweeps: readonly SweepHeader[];
}

/** The instant a sweep speaks for: the middle between its start and its end. */
export function midEpochMs(sweep: Pick<SweepHeader, "startEpochMs" | "endEpochMs">): number {
  return (sweep.startEpochMs + sweep.endEpochMs) / 2;
}
