import { beamHeightM, effectiveRadiusM } from "../../beam.ts";
import type { PolarEcho } from "../polar-echo.ts";

/** Weakest echo by class of half a dB, brought to 1 km. */
const CLASS_DB = 0.5;
const LOWEST_AT_1KM_DBZ = -100;
const CLASSES = 320;
/** So many of the weakest gates are passed over: a clutter filter leaves echo below what can be seen. House rule. */
const PASSED_OVER = 0.002;
/** Every so many gates with echo of a ray are enough to tell. */
const STRIDE = 4;

/**
 * No rain radar is less sensitive than this at 1 km, so that a sweep full of rain does not pass for a deaf radar.
 * House rule; radars for rain have -50 to -30 dBZ.
 */
const HIGHEST_NOISE_AT_1KM_DBZ = -20;

/** What several screens need to know of a sweep, worked out once. */
export interface SweepView {
  readonly echo: PolarEcho;
  readonly rayCount: number;
  readonly gateCount: number;
  /** Shape [gateCount]: 20 log10 of the range in km: what constant power gains with range. */
  readonly rangeGainDb: Float32Array;
  /** Shape [gateCount]: height of the beam's centre above the antenna. */
  readonly heightM: Float32Array;
  /** Mean step from ray to ray, degrees. */
  readonly rayStepDeg: number;
  /** Reflectivity at 1 km that equals the noise, as far as the sweep or its header tells. */
  readonly noiseAt1KmDbz: number;
  /** True where the last ray and the first lie beside each other. */
  readonly closed: boolean;
  /** Indices of the gates with echo, ray by ray: those of a ray stand from echoStart[ray] to echoStart[ray + 1]. */
  readonly echoAt: Int32Array;
  /** Shape [rayCount + 1]. */
  readonly echoStart: Int32Array;
}

export function viewSweep(echo: PolarEcho): SweepView {
  const { header, azimuthDeg, measuredDbz } = echo;
  const { gateCount, firstGateCentreM, gateLengthM, elevationDeg } = header;
  const rayCount = azimuthDeg.length;
  const rangeGainDb = new Float32Array(gateCount);
  const heightM = new Float32Array(gateCount);
  const radiusM = effectiveRadiusM();
  for (let gate = 0; gate < gateCount; gate++) {
    const rangeM = Math.max(1, firstGateCentreM + gate * gateLengthM);
    rangeGainDb[gate] = 20 * Math.log10(rangeM / 1000);
    heightM[gate] = beamHeightM(rangeM, elevationDeg, radiusM);
  }
  const spanDeg = rayCount > 1 ? (azimuthDeg[rayCount - 1] as number) - (azimuthDeg[0] as number) : 0;
  const rayStepDeg = rayCount > 1 ? Math.max(0.01, spanDeg / (rayCount - 1)) : 1;
  const closed = rayCount > 2 && 360 - spanDeg < 1.5 * rayStepDeg + 0.5;
  const { echoAt, echoStart } = listEcho(measuredDbz, rayCount, gateCount);
  // A sender's figure is not believed where the sweep itself holds weaker echo.
  const noiseAt1KmDbz = Math.min(
    HIGHEST_NOISE_AT_1KM_DBZ,
    header.noiseEquivalentDbz ?? Number.POSITIVE_INFINITY,
    weakestAt1KmDbz(measuredDbz, gateCount, rangeGainDb, echoAt, echoStart),
  );
  return {
    echo,
    rayCount,
    gateCount,
    rangeGainDb,
    heightM,
    rayStepDeg,
    noiseAt1KmDbz,
    closed,
    echoAt,
    echoStart,
  };
}

function listEcho(dbz: Float32Array, rayCount: number, gateCount: number) {
  const all = new Int32Array(dbz.length);
  const echoStart = new Int32Array(rayCount + 1);
  let count = 0;
  for (let ray = 0; ray < rayCount; ray++) {
    for (let at = ray * gateCount; at < (ray + 1) * gateCount; at++) {
      // Neither not observed nor dry.
      if ((dbz[at] as number) > Number.NEGATIVE_INFINITY) all[count++] = at;
    }
    echoStart[ray + 1] = count;
  }
  return { echoAt: all.subarray(0, count), echoStart };
}

/** The weakest echo of the sweep brought to 1 km: no echo is weaker than what the radar can see. */
function weakestAt1KmDbz(
  dbz: Float32Array,
  gateCount: number,
  rangeGainDb: Float32Array,
  echoAt: Int32Array,
  echoStart: Int32Array,
): number {
  const classes = new Uint32Array(CLASSES);
  let seen = 0;
  for (let ray = 0; ray + 1 < echoStart.length; ray++) {
    for (let k = echoStart[ray] as number; k < (echoStart[ray + 1] as number); k += STRIDE) {
      const at = echoAt[k] as number;
      const at1Km = (dbz[at] as number) - (rangeGainDb[at - ray * gateCount] as number);
      const place = ((at1Km - LOWEST_AT_1KM_DBZ) / CLASS_DB) | 0;
      const held = place < 0 ? 0 : place >= CLASSES ? CLASSES - 1 : place;
      classes[held] = (classes[held] as number) + 1;
      seen++;
    }
  }
  if (seen === 0) return Number.POSITIVE_INFINITY;
  let passed = PASSED_OVER * seen;
  let place = 0;
  for (; place < CLASSES - 1; place++) {
    passed -= classes[place] as number;
    if (passed < 0) break;
  }
  return LOWEST_AT_1KM_DBZ + place * CLASS_DB;
}

/** Index of the ray that lies `offset` rays on, or -1 beyond the end of a sector. */
export function rayBeside(view: SweepView, ray: number, offset: number): number {
  const at = ray + offset;
  if (at >= 0 && at < view.rayCount) return at;
  if (!view.closed) return -1;
  return ((at % view.rayCount) + view.rayCount) % view.rayCount;
}

/**
 * The ray of another sweep that lies nearest to an azimuth, or -1 where none lies within `withinDeg`.
 *
 * @param azimuthDeg - ascending, 0 to 360
 */
export function nearestRay(azimuthDeg: Float64Array, wantedDeg: number, withinDeg: number): number {
  let low = 0;
  let high = azimuthDeg.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if ((azimuthDeg[middle] as number) < wantedDeg) low = middle + 1;
    else high = middle;
  }
  const count = azimuthDeg.length;
  if (count === 0) return -1;
  let best = -1;
  let bestDeg = withinDeg;
  for (const at of [low - 1, low]) {
    const ray = ((at % count) + count) % count;
    const apart = Math.abs((azimuthDeg[ray] as number) - wantedDeg);
    const deg = Math.min(apart, 360 - apart);
    if (deg <= bestDeg) {
      bestDeg = deg;
      best = ray;
    }
  }
  return best;
}
