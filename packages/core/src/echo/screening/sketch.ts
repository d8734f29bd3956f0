import type { SweepHeader } from "../../model/radar.ts";
import { type PolarEcho, SCREENS, type Screen, screenBit } from "../polar-echo.ts";

type Plane = (ray: number, gate: number) => number;

/** For tests: how an invented sweep is made. What is left out, the sweep lacks. */
export interface SweepSketch {
  readonly rayCount?: number;
  readonly gateCount?: number;
  readonly gateLengthM?: number;
  readonly elevationDeg?: number;
  readonly startEpochMs?: number;
  /** Azimuth of ray 0; the others follow in equal steps around the circle. */
  readonly firstAzimuthDeg?: number;
  readonly dbz: Plane;
  readonly unfilteredDbz?: Plane;
  readonly velocityMPerS?: Plane;
  readonly spectrumWidthMPerS?: Plane;
  readonly zdrDb?: Plane;
  readonly rhohv?: Plane;
  readonly phidpDeg?: Plane;
}

/** For tests: a sweep ready for screening, made by rule. */
export function sketchSweep(sketch: SweepSketch): PolarEcho {
  const { rayCount = 360, gateCount = 60, gateLengthM = 500, elevationDeg = 0.5, startEpochMs = 0 } = sketch;
  const plane = (of: Plane) =>
    Float32Array.from({ length: rayCount * gateCount }, (_, at) =>
      of(Math.floor(at / gateCount), at % gateCount),
    );
  const perhaps = (of: Plane | undefined) => (of === undefined ? undefined : plane(of));
  const header: SweepHeader = {
    site: { id: "invented", lonDeg: 3, latDeg: 52, antennaHeightM: 100 },
    origin: { path: "invented", dataset: "dataset1" },
    elevationDeg,
    rayCount,
    gateCount,
    firstGateCentreM: gateLengthM / 2,
    gateLengthM,
    startEpochMs,
    endEpochMs: startEpochMs + 30_000,
    quantities: [],
    remarks: [],
  };
  const measuredDbz = plane(sketch.dbz);
  return {
    header,
    azimuthDeg: Float64Array.from(
      { length: rayCount },
      (_, ray) => (sketch.firstAzimuthDeg ?? 0.5) + (ray * 360) / rayCount,
    ),
    measuredDbz,
    dbz: measuredDbz.slice(),
    unfilteredDbz: perhaps(sketch.unfilteredDbz),
    velocityMPerS: perhaps(sketch.velocityMPerS),
    spectrumWidthMPerS: perhaps(sketch.spectrumWidthMPerS),
    zdrDb: perhaps(sketch.zdrDb),
    rhohv: perhaps(sketch.rhohv),
    phidpDeg: perhaps(sketch.phidpDeg),
    kdpDegPerKm: undefined,
    rainPhaseDeg: undefined,
    screenedBy: new Uint16Array(measuredDbz.length),
    marks: new Uint16Array(measuredDbz.length),
    effectsDb: new Map(),
    twoWayLossDb: undefined,
    blockedFraction: undefined,
  };
}

/** For tests: names of the screens that hold against a gate. */
export function screensAt({ screenedBy, header }: PolarEcho, ray: number, gate: number): Screen[] {
  const by = screenedBy[ray * header.gateCount + gate] as number;
  return SCREENS.filter((screen) => (by & screenBit(screen)) !== 0);
}

/** For tests: a dry gate. */
export const DRY = Number.NEGATIVE_INFINITY;

/** For tests: even numbers from 0 to 1, the same every time. Numerical Recipes' linear congruence. */
export function evenNumbers(seed: number): () => number {
  let state = seed >>> 0;
  return () => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    return state / 2 ** 32;
  };
}

/** For tests: moments of rain over which the wind blows from the west, with the noise that a radar adds. */
export function rainMoments(seed: number): Omit<SweepSketch, "dbz"> {
  const even = evenNumbers(seed);
  const noise = () => even() + even() + even() + even() - 2;
  return {
    velocityMPerS: (ray) => 8 * Math.sin((ray * Math.PI) / 180) + noise(),
    zdrDb: () => 0.5 + 0.3 * noise(),
    rhohv: () => Math.min(1, 0.985 + 0.01 * noise()),
    phidpDeg: (_, gate) => 40 + 0.1 * gate + 3 * noise(),
  };
}
