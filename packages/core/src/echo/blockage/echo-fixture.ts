import type { Sweep } from "../../model/radar.ts";
import { type PolarEcho, polarEcho } from "../polar-echo.ts";

/** For tests: how an invented sweep is made. */
export interface EchoSketch {
  readonly elevationDeg: number;
  readonly rayCount?: number;
  readonly gateCount?: number;
  readonly gateLengthM?: number;
  readonly startEpochMs?: number;
  readonly siteId?: string;
  readonly wavelengthM?: number;
  /** dBZ by ray and gate; NaN not observed, -Infinity below detection. */
  dbz(ray: number, gate: number): number;
  zdrDb?(ray: number, gate: number): number;
  rhohv?(ray: number, gate: number): number;
  phidpDeg?(ray: number, gate: number): number;
}

/** For tests: a sweep with azimuths in the middle of equal sectors, and the moments of the sketch. */
export function echoOf(sketch: EchoSketch): PolarEcho {
  const {
    rayCount = 360,
    gateCount = 40,
    gateLengthM = 1000,
    startEpochMs = 0,
    siteId = "invented",
  } = sketch;
  const filled = (of: (ray: number, gate: number) => number) =>
    Float32Array.from({ length: rayCount * gateCount }, (_, at) =>
      of(Math.floor(at / gateCount), at % gateCount),
    );
  const moments = new Map(
    (
      [
        ["DBZH", sketch.dbz],
        ["ZDR", sketch.zdrDb],
        ["RHOHV", sketch.rhohv],
        ["PHIDP", sketch.phidpDeg],
      ] as const
    ).flatMap(([quantity, of]) =>
      of === undefined
        ? []
        : [
            [
              quantity,
              { quantity, stored: filled(of), gain: 1, offset: 0, undetect: Number.NEGATIVE_INFINITY },
            ] as const,
          ],
    ),
  );
  const sweep: Sweep = {
    site: { id: siteId, lonDeg: 3, latDeg: 52, antennaHeightM: 100 },
    origin: { path: "invented", dataset: "dataset1" },
    elevationDeg: sketch.elevationDeg,
    rayCount,
    gateCount,
    firstGateCentreM: gateLengthM / 2,
    gateLengthM,
    startEpochMs,
    endEpochMs: startEpochMs + 30_000,
    quantities: [...moments.keys()].sort(),
    beamWidthDeg: { horizontal: 1, vertical: 1 },
    ...(sketch.wavelengthM === undefined ? {} : { wavelengthM: sketch.wavelengthM }),
    remarks: [],
    azimuthDeg: Float64Array.from({ length: rayCount }, (_, ray) => ((ray + 0.5) * 360) / rayCount),
    rayElevationDeg: new Float64Array(rayCount).fill(sketch.elevationDeg),
    rayTimeEpochMs: new Float64Array(rayCount).fill(startEpochMs),
    rayTimesDerived: true,
    raysReordered: 0,
    moments,
  };
  return polarEcho(sweep, "DBZH", "invented") as PolarEcho;
}

/** For tests: numbers of about the normal distribution, deviation 1, the same every time (from three uniform ones). */
export function noiseOf(seed: number): () => number {
  let state = seed >>> 0;
  const uniform = () => {
    // Numerical Recipes' linear congruence.
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    return state / 2 ** 32;
  };
  return () => {
    // Three uniform numbers have a variance of a quarter.
    return 2 * (uniform() + uniform() + uniform() - 1.5);
  };
}
