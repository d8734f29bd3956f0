import { SCREENS, type Screen } from "@rainreckon/core";
import type { SpokenSweep, UnitTrace } from "../../src/total/job.ts";
import { isRadar, type TrueRadar } from "./worlds.ts";

/** Depth of a cell from which it may not lose much, mm. */
const DEEP_CELL_MM = 5;
/** A scan and its truth are at most this far apart. */
const SAME_SCAN_MS = 150_000;

/** What a screen took of the true rain, as shares of it: at gates that held no false echo, and at all gates. */
export interface ScreenToll {
  readonly screen: Screen | "all screens";
  readonly share: number;
  readonly shareOfAllGates: number;
  /** The most of any cell that the radar truly had above 5 mm over. */
  readonly worstCell: number;
}

/** One radar's cells: true rain, and what each screen took of it; sums of rates over the rounds. */
class RadarTolls {
  readonly rain: Float64Array;
  /** Shape [SCREENS + 1][cells]: clean gates; the last holds all screens together. */
  readonly clean = [...SCREENS, "all screens"].map(() => new Float64Array(0));
  readonly any = [...SCREENS, "all screens"].map(() => 0);
  /** Sweeps of the truth that were taken in. */
  readonly seen = new Set<number>();

  constructor(cellCount: number) {
    this.rain = new Float64Array(cellCount);
    this.clean = this.clean.map(() => new Float64Array(cellCount));
  }
}

/**
 * Holds the screens against the truth: how much of the rain that truly fell below a gate was screened with it.
 * Filling afterwards does not count in a screen's favour. Lowest sweeps only.
 */
export class ScreenTolls implements UnitTrace {
  readonly #truth: readonly TrueRadar[];
  readonly #radars: readonly RadarTolls[];
  readonly #windowHours: number;

  /** @param windowHours - length of the window */
  constructor(truth: readonly TrueRadar[], cellCount: number, windowHours: number) {
    this.#truth = truth;
    this.#radars = truth.map(() => new RadarTolls(cellCount));
    this.#windowHours = windowHours;
  }

  /** Takes in a sweep when it has spoken. */
  sweep({ radar, sweep: { elevationDeg, midEpochMs }, echo }: SpokenSweep): void {
    if (echo === undefined) return;
    const r = this.#truth.findIndex(({ node }) => isRadar(radar.site.id, node));
    const truth = this.#truth[r];
    if (truth === undefined) throw new Error(`no truth for radar ${radar.site.id}`);
    if (elevationDeg > Math.min(...truth.sweeps.map((one) => one.elevationDeg)) + 0.05) return;
    const sweep = truth.sweeps.findIndex(
      (one) =>
        Math.abs(one.elevationDeg - elevationDeg) < 0.05 &&
        Math.abs(Date.parse(one.start) - midEpochMs) < SAME_SCAN_MS,
    );
    if (sweep < 0) throw new Error(`no truth for ${radar.site.id} at ${new Date(midEpochMs).toISOString()}`);
    const tolls = this.#radars[r];
    // Scans at the border of two units are met twice.
    if (tolls.seen.has(sweep)) return;
    tolls.seen.add(sweep);
    const rate = truth.rateMmPerHour(sweep);
    const flags = truth.flags(sweep);
    const { cells, start, gates } = truth.lowest;
    const allScreens = SCREENS.length;
    for (let k = 0; k < cells.length; k++) {
      const cell = cells[k];
      const part = 1 / (start[k + 1] - start[k]);
      for (let at = start[k]; at < start[k + 1]; at++) {
        const gate = gates[at];
        const rain = part * rate[gate];
        tolls.rain[cell] += rain;
        const bits = echo.screenedBy[gate];
        if (bits === 0) continue;
        const screen = 31 - Math.clz32(bits & -bits);
        tolls.any[screen] += rain;
        tolls.any[allScreens] += rain;
        if ((flags[gate] & truth.falseEchoBits) !== 0) continue;
        tolls.clean[screen][cell] += rain;
        tolls.clean[allScreens][cell] += rain;
      }
    }
  }

  finish(): ScreenToll[] {
    const total = sumOf(this.#radars.map(({ rain }) => sumOf(rain)));
    return [...SCREENS, "all screens" as const].map((screen, s) => {
      let worstCell = 0;
      for (const { rain, clean, seen } of this.#radars) {
        for (let cell = 0; cell < rain.length; cell++) {
          const depthMm = (rain[cell] * this.#windowHours) / seen.size;
          if (depthMm > DEEP_CELL_MM) worstCell = Math.max(worstCell, clean[s][cell] / rain[cell]);
        }
      }
      return {
        screen,
        share: sumOf(this.#radars.map(({ clean }) => sumOf(clean[s]))) / total,
        shareOfAllGates: sumOf(this.#radars.map(({ any }) => any[s])) / total,
        worstCell,
      };
    });
  }
}

function sumOf(values: Iterable<number>): number {
  let sum = 0;
  for (const value of values) sum += value;
  return sum;
}
