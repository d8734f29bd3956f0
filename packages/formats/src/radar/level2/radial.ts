/** Place of an antenna. */
export interface AntennaPlace {
  readonly lonDeg: number;
  readonly latDeg: number;
  readonly antennaHeightM: number;
}

/** One measured quantity along one ray, in stored codes: value = (code - offset) / scale. */
export interface RadialMoment {
  /** ODIM quantity. */
  readonly quantity: string;
  readonly firstGateCentreM: number;
  readonly gateLengthM: number;
  readonly gateCount: number;
  readonly scale: number;
  readonly offset: number;
  readonly wordBytes: 1 | 2;
  /** gateCount words, big-endian: 0 is below threshold, 1 is range-folded. */
  readonly codes: Buffer;
}

/** One ray of the antenna's turn. */
export interface Radial {
  readonly station?: string;
  readonly place?: AntennaPlace;
  readonly epochMs: number;
  readonly azimuthDeg: number;
  readonly elevationDeg: number;
  /** Number of the cut within the volume, from 1. */
  readonly elevationNumber: number;
  /** Number of the ray within its cut, from 1. */
  readonly azimuthNumber: number;
  readonly status: number;
  readonly nyquistVelocityMPerS?: number;
  /** Volume coverage pattern. */
  readonly pattern?: number;
  readonly moments: readonly RadialMoment[];
}

export const STARTS_ELEVATION: ReadonlySet<number> = new Set([0, 3, 5]);
export const ENDS_ELEVATION: ReadonlySet<number> = new Set([2, 4]);
