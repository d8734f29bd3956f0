import type { PolarEcho } from "../polar-echo.ts";
import { DEFAULT_PHASE_SETTINGS, folded, type PhaseSettings, phaseGates } from "./phase-gates.ts";

/** Good gates at the near edge of the rain whose median speaks for a ray. */
const FIRST_GATES = 5;
/** Stronger echo raises the phase within those gates already; a single sweep cannot be as choosy as a run. */
const MOST_DBZ_OF_RUN = 30;
const MOST_DBZ_OF_SWEEP = 35;
const BIN_DEG = 0.5;
/** Half the width of what is gathered about the commonest value: noise and slow changes with azimuth. */
const ABOUT_DEG = 8;

/** What is known of a system phase. */
export interface SystemPhase {
  /** 0 to the fold. */
  readonly systemPhaseDeg: number;
  /** Rays that agree on it within 8 degrees, and all that had rain. */
  readonly agreeing: number;
  readonly rays: number;
}

/** Where the phases of rays' first rain pile up: bins of half a degree on a circle. */
export class PhaseStarts {
  readonly #counts: Uint32Array;
  readonly #foldDeg: number;
  readonly #mostDbz: number;
  rays = 0;

  constructor(foldDeg: number, mostDbz = MOST_DBZ_OF_SWEEP) {
    this.#foldDeg = foldDeg;
    this.#mostDbz = mostDbz;
    this.#counts = new Uint32Array(Math.round(foldDeg / BIN_DEG));
  }

  /** Adds the rays of a sweep that have rain. */
  add(echo: PolarEcho, phidpDeg: Float32Array, good: Uint8Array): void {
    const { gateCount } = echo.header;
    const first = new Float64Array(FIRST_GATES);
    for (let from = 0; from < phidpDeg.length; from += gateCount) {
      let found = 0;
      for (let gate = from; gate < from + gateCount && found < FIRST_GATES; gate++) {
        if (good[gate] === 0) continue;
        // A heavy start tells nothing of the phase before it.
        if ((echo.measuredDbz[gate] as number) > this.#mostDbz) break;
        const value = phidpDeg[gate] as number;
        first[found] =
          found === 0 ? value : (first[0] as number) + folded(value - (first[0] as number), this.#foldDeg);
        found++;
      }
      if (found < FIRST_GATES) continue;
      const bins = this.#counts.length;
      const bin = Math.floor((first.sort()[2] as number) / BIN_DEG);
      const place = ((bin % bins) + bins) % bins;
      this.#counts[place] = (this.#counts[place] as number) + 1;
      this.rays++;
    }
  }

  /** @returns undefined with fewer rays than asked for, or where fewer than half of them agree */
  finish(leastRays: number): SystemPhase | undefined {
    const counts = this.#counts;
    const bins = counts.length;
    const half = Math.round(ABOUT_DEG / BIN_DEG);
    const at = (bin: number) => counts[((bin % bins) + bins) % bins] as number;
    let inside = 0;
    for (let bin = -half; bin <= half; bin++) inside += at(bin);
    let most = inside;
    let middle = 0;
    for (let bin = 1; bin < bins; bin++) {
      inside += at(bin + half) - at(bin - half - 1);
      if (inside > most) {
        most = inside;
        middle = bin;
      }
    }
    if (this.rays < leastRays || most * 2 < this.rays) return undefined;
    let below = 0;
    let bin = middle - half;
    while (below + at(bin) < most / 2) below += at(bin++);
    const medianDeg = (bin + (most / 2 - below) / at(bin)) * BIN_DEG;
    const systemPhaseDeg = ((medianDeg % this.#foldDeg) + this.#foldDeg) % this.#foldDeg;
    return { systemPhaseDeg, agreeing: most, rays: this.rays };
  }
}

/**
 * Learns the system phase of a radar over a run, from the first rain of every ray. What clutter, folds and heavy
 * near rain do to single rays is outvoted: the commonest value counts. Any order of sweeps gives the same.
 */
export class SystemPhaseLearner {
  readonly #settings: PhaseSettings;
  readonly #starts: PhaseStarts;

  constructor(settings: PhaseSettings = DEFAULT_PHASE_SETTINGS) {
    this.#settings = settings;
    this.#starts = new PhaseStarts(settings.foldDeg, MOST_DBZ_OF_RUN);
  }

  /** Does nothing with a sweep that has no PHIDP. */
  add(echo: PolarEcho): void {
    const { phidpDeg } = echo;
    if (phidpDeg === undefined) return;
    this.#starts.add(echo, phidpDeg, phaseGates(echo, phidpDeg, this.#settings).good);
  }

  /** @returns undefined where too few rays had rain, or no half of them agree within 8 degrees */
  finish(): SystemPhase | undefined {
    return this.#starts.finish(this.#settings.leastRays);
  }
}
