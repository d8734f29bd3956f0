// Invented gauges for the tests of this package: no measurements.
import type { MethodSettings } from "./methods.ts";
import type { WindowGauge } from "./window-gauges.ts";

export const HOUR = 3_600_000;

export const SETTINGS: MethodSettings = {
  factorLimits: [0.1, 10],
  thresholdMm: 0.2,
  gaugeErrorShare: 0.05,
  shape: "spherical",
  radarVariogram: undefined,
  window: { startEpochMs: 0, endEpochMs: 4 * HOUR },
  pairIntervalMs: HOUR,
  kalman: { memory: 0.9, variance: 0.09, pairVariance: 0.25 },
};

/** A gauge whose rain fell evenly over the four hours of the window. */
export function gaugeAt(
  gaugeId: string,
  [xKm, yKm]: readonly [xKm: number, yKm: number],
  gaugeMm: number,
  radarMm: number,
  changes: Partial<WindowGauge> = {},
): WindowGauge {
  return {
    network: "moor",
    gaugeId,
    xKm,
    yKm,
    rangeKm: Math.hypot(xKm, yKm),
    gaugeMm,
    radarMm,
    radarTotalMm: radarMm,
    radarPointMm: radarMm,
    radarPointTotalMm: radarMm,
    coverage: 1,
    complete: true,
    readings: [0, 1, 2, 3].map((hour) => ({
      startEpochMs: hour * HOUR,
      endEpochMs: (hour + 1) * HOUR,
      gaugeMm: gaugeMm / 4,
      radarMm: radarMm / 4,
    })),
    ...changes,
  };
}

/** A number from 0 to 1 that looks random and is the same on every run: the bits of index and stream mixed. */
export function scattered(index: number, stream: number): number {
  let bits = Math.imul(index + 1, 0x9e3779b1) ^ Math.imul(stream + 1, 0x85ebca6b);
  bits = Math.imul(bits ^ (bits >>> 15), 0x2c1b3c6d);
  bits = Math.imul(bits ^ (bits >>> 12), 0x297a2d39);
  return ((bits ^ (bits >>> 15)) >>> 0) / 2 ** 32;
}

/** A network whose gauges read what a rule makes of a smooth radar field. */
export function network(
  count: number,
  gaugeMm: (radarMm: number, xKm: number, yKm: number) => number,
): WindowGauge[] {
  return Array.from({ length: count }, (_, i) => {
    const xKm = 100 * scattered(i, 0);
    const yKm = 100 * scattered(i, 1);
    const radarMm = 10 + 5 * Math.sin(xKm / 20) + 4 * Math.cos(yKm / 25);
    return gaugeAt(`g${i}`, [xKm, yKm], gaugeMm(radarMm, xKm, yKm), radarMm);
  });
}
