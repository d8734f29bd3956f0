import type { SweepHeader } from "../../model/radar.ts";

/** What makes sweeps of different rounds comparable gate by gate. */
export interface SweepGeometry {
  /** Rounded to 0.1 degrees. */
  readonly elevationDeg: number;
  /** Places around the circle: the nearest multiple of 360 where the rays come close to one, else their number. */
  readonly slotCount: number;
  readonly gateCount: number;
  readonly firstGateCentreM: number;
  readonly gateLengthM: number;
}

export function geometryOf(header: SweepHeader, rayCount: number): SweepGeometry {
  const whole = 360 * Math.max(1, Math.round(rayCount / 360));
  return {
    elevationDeg: Math.round(header.elevationDeg * 10) / 10,
    slotCount: Math.abs(rayCount - whole) <= 0.03 * whole ? whole : Math.max(1, rayCount),
    gateCount: header.gateCount,
    firstGateCentreM: header.firstGateCentreM,
    gateLengthM: header.gateLengthM,
  };
}

export function isSameGeometry(a: SweepGeometry, b: SweepGeometry): boolean {
  return (
    a.elevationDeg === b.elevationDeg &&
    a.slotCount === b.slotCount &&
    a.gateCount === b.gateCount &&
    a.firstGateCentreM === b.firstGateCentreM &&
    a.gateLengthM === b.gateLengthM
  );
}

/**
 * The place of a ray around the circle. The quarter keeps rays that are centred on whole steps and on half ones
 * both clear of the border between two places, however they jitter.
 */
export function slotOf(azimuthDeg: number, slotCount: number): number {
  return Math.floor((azimuthDeg * slotCount) / 360 + 0.25) % slotCount;
}
