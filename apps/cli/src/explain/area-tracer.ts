import type { BlendedStep, CellFractions, RadarInStep } from "@rainreckon/accumulation";
import { type Interval, SCREENS } from "@rainreckon/core";
import type { RateLayer } from "@rainreckon/mosaic";
import { companionIndex } from "../total/companions.ts";
import type { JobRadar, JobRound, JobSweep, SpokenGrid, SpokenSweep, UnitTrace } from "../total/job.ts";
import { isoUtc } from "../ui/numbers.ts";
import { finite } from "./gate-account.ts";
import type { AreaAccount } from "./schema.ts";

/** A scan over an area, before it has its number. */
export type AreaScan = Omit<AreaAccount["scans"][number], "number"> & { readonly epochMs: number };

/** Who spoke for an area in a step: shares of the observed area and time, in the order of the sources. */
export interface AreaShares extends Interval {
  readonly shares: readonly number[];
}

const FIRST_TOLL = companionIndex(`screened_depth_${SCREENS[0].replaceAll("-", "_")}`);

/** Listens to units of work and writes down what each scan showed over one area. */
export class AreaTracer implements UnitTrace {
  readonly #area: CellFractions;
  readonly #whole: number;
  readonly #heard = new Map<JobRadar, JobSweep[]>();
  readonly #scans = new Map<string, AreaScan>();
  readonly steps: AreaShares[] = [];

  constructor(area: CellFractions) {
    this.#area = area;
    this.#whole = area.fraction.reduce((sum, share) => sum + share, 0);
  }

  /** In time order. */
  get scans(): AreaScan[] {
    return [...this.#scans.values()].sort(
      (a, b) => a.epochMs - b.epochMs || (a.source < b.source ? -1 : a.source > b.source ? 1 : 0),
    );
  }

  sweep({ radar, sweep }: SpokenSweep): void {
    const heard = this.#heard.get(radar) ?? [];
    heard.push(sweep);
    this.#heard.set(radar, heard);
  }

  layer(radar: JobRadar, round: JobRound, layer: RateLayer): void {
    const sweeps = (this.#heard.get(radar) ?? []).filter((sweep) => round.sweeps.includes(sweep));
    this.#heard.delete(radar);
    this.#add(`${radar.site.id} ${round.firstMidEpochMs}`, layer, {
      epochMs: round.firstMidEpochMs,
      source: radar.site.id,
      kind: "sweep",
      files: [...new Set(sweeps.map(({ name }) => name))],
      elevationsDeg: sweeps.map(({ elevationDeg }) => elevationDeg),
    });
  }

  grid({ source, round, layer }: SpokenGrid): void {
    this.#add(`${source.id} ${round.lastMidEpochMs} ${round.name}`, layer, {
      epochMs: round.lastMidEpochMs,
      source: source.id,
      kind: "gridded",
      files: [round.name],
      elevationsDeg: [],
    });
  }

  step(span: Interval, _step: number, sources: readonly RadarInStep[], blended: BlendedStep): void {
    const { cells, fraction } = this.#area;
    const shareMs = sources.map((_, r) => sumOver(cells, fraction, blended.shareMs[r] as Float64Array));
    const seenMs = shareMs.reduce((sum, ms) => sum + ms, 0);
    this.steps.push({
      startEpochMs: span.startEpochMs,
      endEpochMs: span.endEpochMs,
      shares: shareMs.map((ms) => (seenMs > 0 ? ms / seenMs : 0)),
    });
  }

  #add(
    key: string,
    layer: RateLayer,
    about: Pick<AreaScan, "epochMs" | "source" | "kind" | "files" | "elevationsDeg">,
  ): void {
    if (this.#scans.has(key)) return;
    const { cells, fraction } = this.#area;
    let seen = 0;
    let rain = 0;
    let heightM = 0;
    let withHeight = 0;
    let capped = 0;
    let screened = 0;
    let toll = 0;
    const sums = { blockage: 0, gas: 0, attenuation: 0, profile: 0, filled: 0 };
    const planes = {
      blockage: layer.companions?.[companionIndex("blockage_correction")],
      gas: layer.companions?.[companionIndex("gas_correction")],
      attenuation: layer.companions?.[companionIndex("attenuation_correction")],
      profile: layer.companions?.[companionIndex("profile_correction")],
      filled: layer.companions?.[companionIndex("filled_fraction")],
    };
    const tolls = SCREENS.map((_, s) => layer.companions?.[FIRST_TOLL + s]).filter(
      (plane) => plane !== undefined,
    );
    for (let k = 0; k < cells.length; k++) {
      const cell = cells[k] as number;
      const share = fraction[k] as number;
      const taken = tolls.reduce((sum, plane) => sum + (plane[cell] as number), 0);
      toll += share * taken;
      if (taken > 0) screened += share;
      const rate = layer.rateMmPerHour[cell] as number;
      if (!(rate >= 0)) continue;
      seen += share;
      rain += share * rate;
      capped += share * (layer.cappedRateMmPerHour?.[cell] ?? 0);
      const height = layer.beamHeightAslM[cell] as number;
      if (Number.isFinite(height)) {
        heightM += share * height;
        withHeight += share;
      }
      for (const [name, plane] of Object.entries(planes)) {
        sums[name as keyof typeof sums] += share * (plane?.[cell] ?? 0);
      }
    }
    const byRain = (sum: number) => (rain > 0 ? sum / rain : null);
    this.#scans.set(key, {
      ...about,
      time: isoUtc(about.epochMs),
      observedShare: Math.min(1, seen / this.#whole),
      screenedShare: Math.min(1, screened / this.#whole),
      meanRateMmPerHour: seen > 0 ? rain / seen : null,
      cappedShare: byRain(capped),
      screenedMmPerHour: toll / this.#whole,
      correctionsDb: {
        blockage: byRain(sums.blockage),
        gas: byRain(sums.gas),
        attenuation: byRain(sums.attenuation),
        profile: byRain(sums.profile),
      },
      filledShare: byRain(sums.filled),
      meanBeamHeightAslM: finite(heightM / withHeight),
    });
  }
}

function sumOver(cells: Int32Array, fraction: Float64Array, plane: Float64Array): number {
  let sum = 0;
  for (let k = 0; k < cells.length; k++)
    sum += (fraction[k] as number) * (plane[cells[k] as number] as number);
  return sum;
}

/** One listener that passes everything on to several. */
export function together(traces: readonly UnitTrace[]): UnitTrace {
  return {
    sweep: (spoken) => {
      for (const trace of traces) trace.sweep?.(spoken);
    },
    layer: (radar, round, layer) => {
      for (const trace of traces) trace.layer?.(radar, round, layer);
    },
    grid: (spoken) => {
      for (const trace of traces) trace.grid?.(spoken);
    },
    step: (span, step, sources, blended) => {
      for (const trace of traces) trace.step?.(span, step, sources, blended);
    },
  };
}
