import type { PolarEcho } from "../polar-echo.ts";
import type { LearnedAttenuation } from "./learned.ts";
import { MonotoneFit, medianOfFive } from "./monotone.ts";
import {
  DEFAULT_PHASE_SETTINGS,
  folded,
  type PhaseSettings,
  phaseGates,
  phaseNoiseDeg,
} from "./phase-gates.ts";
import { DEFAULT_KDP_SETTINGS, type KdpSettings, kdpOfRay, SlopeOfPhase } from "./specific-phase.ts";
import { PhaseStarts } from "./system-phase.ts";

/** What became of a sweep's PHIDP. */
export type PhaseReport =
  | {
      readonly workedUp: true;
      readonly systemPhaseDeg: number;
      readonly systemPhaseFrom: "learned" | "sweep";
      /** Standard deviation of one gate. */
      readonly noiseDeg: number;
      /** Gates whose phase counted. */
      readonly goodGates: number;
      /** Most that rain added on any ray. */
      readonly mostRainPhaseDeg: number;
      /** Whether KDP came from this phase; else the file had it. */
      readonly kdpWorkedOut: boolean;
    }
  | { readonly workedUp: false; readonly reason: string };

/** Share of a good gate's step that the running level follows, and the most it is led by one gate. */
const LEVEL_SHARE = 0.25;
const LEVEL_STEP_DEG = 15;

/**
 * Works PHIDP up to rain's phase from the antenna (system phase off, unfolded, never falling) and to KDP where
 * the file has none, both written to the echo.
 *
 * Screened, weak and badly correlated gates are passed over and filled along the ray; the rise is the
 * least-squares one that never falls, over medians of five gates, which keeps most of a backscatter bump out.
 * KDP is taken before that, so that it may be negative. Nothing is written where PHIDP cannot be told.
 */
export function workUpPhase(
  echo: PolarEcho,
  learned: LearnedAttenuation = {},
  settings: PhaseSettings = DEFAULT_PHASE_SETTINGS,
  kdpSettings: KdpSettings = DEFAULT_KDP_SETTINGS,
): PhaseReport {
  const { phidpDeg, header } = echo;
  if (phidpDeg === undefined) return { workedUp: false, reason: "the sweep has no PHIDP" };
  const { gateCount } = header;
  const { good, count } = phaseGates(echo, phidpDeg, settings);
  if (count === 0) return { workedUp: false, reason: "no gate with echo has a PHIDP that may be rain's" };
  const noiseDeg = phaseNoiseDeg(phidpDeg, good, gateCount, settings.foldDeg);
  if (Number.isNaN(noiseDeg)) {
    return { workedUp: false, reason: "no three gates in a row have a PHIDP that may be rain's" };
  }
  if (noiseDeg > settings.mostNoiseDeg) {
    return {
      workedUp: false,
      reason: `PHIDP is noise: ${noiseDeg.toFixed(0)}° from gate to gate, more than ${settings.mostNoiseDeg}°`,
    };
  }
  const starts = new PhaseStarts(settings.foldDeg);
  if (learned.systemPhaseDeg === undefined) starts.add(echo, phidpDeg, good);
  const systemPhaseDeg = learned.systemPhaseDeg ?? starts.finish(settings.leastRays)?.systemPhaseDeg;
  if (systemPhaseDeg === undefined) {
    return {
      workedUp: false,
      reason: `no system phase: ${starts.rays} rays begin with light rain, and no half of them agree`,
    };
  }

  const kdp = echo.kdpDegPerKm === undefined ? new Float32Array(phidpDeg.length) : undefined;
  const rainPhase = new Float32Array(phidpDeg.length);
  const ray = new RayPhase(gateCount);
  const slopes = new SlopeOfPhase(gateCount);
  const gateKm = header.gateLengthM / 1000;
  // Place of the antenna, in gates before the first one's centre.
  const antenna = -header.firstGateCentreM / header.gateLengthM;
  let most = 0;
  for (let from = 0; from < phidpDeg.length; from += gateCount) {
    const found = ray.unfold(phidpDeg, good, from, systemPhaseDeg, settings.foldDeg);
    if (found === 0) {
      kdp?.fill(Number.NaN, from, from + gateCount);
      continue;
    }
    if (kdp !== undefined) {
      slopes.load(ray.unfolded);
      kdpOfRay(slopes, echo.dbz, from, kdp, gateCount, gateKm, noiseDeg, kdpSettings);
    }
    most = Math.max(most, ray.rise(rainPhase, from, antenna));
  }
  echo.rainPhaseDeg = rainPhase;
  if (kdp !== undefined) echo.kdpDegPerKm = kdp;
  return {
    workedUp: true,
    systemPhaseDeg,
    systemPhaseFrom: learned.systemPhaseDeg === undefined ? "sweep" : "learned",
    noiseDeg,
    goodGates: count,
    mostRainPhaseDeg: most,
    kdpWorkedOut: kdp !== undefined,
  };
}

/** One ray in work, with room that is used again for the next. */
class RayPhase {
  /** Shape [gateCount]: phase less the system's; NaN where the gate is passed over. */
  readonly unfolded: Float64Array;
  readonly #place: Int32Array;
  readonly #value: Float64Array;
  readonly #smooth: Float64Array;
  readonly #fit: MonotoneFit;
  #count = 0;

  constructor(gateCount: number) {
    this.unfolded = new Float64Array(gateCount);
    this.#place = new Int32Array(gateCount);
    this.#value = new Float64Array(gateCount);
    this.#smooth = new Float64Array(gateCount);
    this.#fit = new MonotoneFit(gateCount);
  }

  /** Unfolds each gate to the level of those before it: a level, not a neighbour, so that one wild gate harms none. Gives the good gates. */
  unfold(
    phidpDeg: Float32Array,
    good: Uint8Array,
    from: number,
    systemPhaseDeg: number,
    foldDeg: number,
  ): number {
    const { unfolded } = this;
    const places = this.#place;
    const values = this.#value;
    unfolded.fill(Number.NaN);
    let level = 0;
    let count = 0;
    for (let gate = 0; gate < unfolded.length; gate++) {
      if (good[from + gate] === 0) continue;
      const off = folded((phidpDeg[from + gate] as number) - systemPhaseDeg - level, foldDeg);
      const value = level + off;
      unfolded[gate] = value;
      places[count] = gate;
      values[count] = value;
      count++;
      level += Math.max(-LEVEL_STEP_DEG, Math.min(LEVEL_STEP_DEG, LEVEL_SHARE * off));
    }
    this.#count = count;
    return count;
  }

  /** Writes the rise that never falls, filled along the ray, and gives its end. */
  rise(out: Float32Array, from: number, antenna: number): number {
    const count = this.#count;
    if (count === 0) return 0;
    const smooth = this.#smooth;
    const places = this.#place;
    medianOfFive(this.#value, count, smooth);
    this.#fit.fit(smooth, count);
    let lastPlace = antenna;
    let last = 0;
    let gate = 0;
    for (let i = 0; i < count; i++) {
      const place = places[i] as number;
      const here = Math.max(0, smooth[i] as number);
      if (gate < place) {
        const slope = (here - last) / (place - lastPlace);
        for (; gate < place; gate++) out[from + gate] = last + slope * (gate - lastPlace);
      }
      out[from + gate++] = here;
      last = here;
      lastPlace = place;
    }
    out.fill(last, from + gate, from + this.unfolded.length);
    return last;
  }
}
