import type { PolarEcho } from "../polar-echo.ts";

/** Moments of one gate; NaN where a moment is to be missing at that gate. */
export interface TestGate {
  readonly dbz: number;
  readonly zdrDb?: number;
  readonly rhohv?: number;
  readonly kdpDegPerKm?: number;
}

/**
 * A sweep in work, made gate by gate, for tests. A moment that no gate has is missing as a whole.
 *
 * @param gateOf - of ray and gate
 */
export function testEcho(
  rayCount: number,
  gateCount: number,
  gateOf: (ray: number, gate: number) => TestGate,
  wavelengthM: number | undefined,
  gateLengthM = 1000,
): PolarEcho {
  const gates = Array.from({ length: rayCount * gateCount }, (_, at) =>
    gateOf(Math.floor(at / gateCount), at % gateCount),
  );
  const moment = (key: "zdrDb" | "rhohv" | "kdpDegPerKm") =>
    gates.some((gate) => gate[key] !== undefined)
      ? Float32Array.from(gates, (gate) => gate[key] ?? Number.NaN)
      : undefined;
  const dbz = Float32Array.from(gates, (gate) => gate.dbz);
  return {
    header: {
      site: { id: "test", lonDeg: 0, latDeg: 50, antennaHeightM: 0 },
      origin: { path: "test", dataset: "dataset1" },
      elevationDeg: 0.5,
      rayCount,
      gateCount,
      firstGateCentreM: gateLengthM / 2,
      gateLengthM,
      startEpochMs: 0,
      endEpochMs: 0,
      quantities: [],
      remarks: [],
      ...(wavelengthM === undefined ? {} : { wavelengthM }),
    },
    azimuthDeg: Float64Array.from({ length: rayCount }, (_, ray) => ((ray + 0.5) * 360) / rayCount),
    measuredDbz: dbz.slice(),
    dbz,
    unfilteredDbz: undefined,
    velocityMPerS: undefined,
    spectrumWidthMPerS: undefined,
    zdrDb: moment("zdrDb"),
    rhohv: moment("rhohv"),
    phidpDeg: undefined,
    kdpDegPerKm: moment("kdpDegPerKm"),
    rainPhaseDeg: undefined,
    screenedBy: new Uint16Array(gates.length),
    marks: new Uint16Array(gates.length),
    effectsDb: new Map(),
    twoWayLossDb: undefined,
    blockedFraction: undefined,
  };
}
